#!/bin/sh
# Shows that the demo and the tests need nothing but a shell and apt: makes a minimal Debian 12 in a
# temporary folder, clones the last commit into it, and runs both there, with this machine's own
# package sources, proxies and certificates. Needs root. Nothing stays behind.
set -eu

root=$(CDPATH='' cd -- "$(dirname -- "$0")/../.." && pwd)
if [ "$(id -u)" -ne 0 ]; then
    echo 'bare_debian.sh: needs root for debootstrap and chroot, run it as root' >&2
    exit 3
fi
sh "$root/models/install.sh" tests

work=$(mktemp -d)
trap 'rm -rf --one-file-system "$work"' EXIT
trap 'exit 130' INT
trap 'exit 143' TERM
bare=$work/debian

# shellcheck disable=SC2016 # apt's own placeholders
mirror=$(apt-get indextargets --format '$(REPO_URI)' 'Created-By: Packages' 'Codename: bookworm' |
    head -n 1)
echo "== debootstrap"
# Without a known mirror debootstrap takes its own default.
if ! debootstrap --variant=minbase bookworm "$bare" ${mirror:+"$mirror"} \
    >"$work/log" 2>&1; then
    tail -n 20 "$work/log" >&2
    echo 'bare_debian.sh: debootstrap failed, see above, check the network and the mirror' >&2
    exit 3
fi

# copy PATH: into the same place of the bare system, when it is there
copy() {
    [ ! -e "$1" ] || { mkdir -p "$bare$(dirname "$1")" && cp -rL "$1" "$bare$(dirname "$1")/"; }
}
# Only Debian's own sources: those that name one of its companion suites.
grep -lsE 'bookworm-(updates|security)' /etc/apt/sources.list /etc/apt/sources.list.d/* |
    while read -r source; do
        rm -f "$bare/etc/apt/sources.list"
        copy "$source"
    done
copy /etc/apt/apt.conf
copy /etc/apt/apt.conf.d
copy /etc/hosts
copy /etc/npmrc
copy "$HOME/.npmrc"
certificates=/etc/ssl/certs/ca-certificates.crt
kept=/etc/ssl/caller.crt # installing ca-certificates writes the usual file anew
if [ -e "$certificates" ]; then
    mkdir -p "$bare/etc/ssl" && cp -L "$certificates" "$bare$kept"
    echo "Acquire::https::CAInfo \"$kept\";" >"$bare/etc/apt/apt.conf.d/90caller"
fi

git clone -q --no-hardlinks "$root" "$bare/srv/falsework"

# inside NAME COMMAND...: runs in the bare system, prints the end of its output and its status
inside() {
    name=$1
    shift
    status=0
    # shellcheck disable=SC2016 # for the inner shell
    env -i HOME="$HOME" PATH=/usr/sbin:/usr/bin:/sbin:/bin LANG=C.UTF-8 \
        ${http_proxy+http_proxy="$http_proxy"} ${https_proxy+https_proxy="$https_proxy"} \
        ${no_proxy+no_proxy="$no_proxy"} npm_config_cafile="$kept" SSL_CERT_FILE="$kept" \
        unshare --mount --pid --fork --kill-child sh -c \
        'mount -t proc proc "$0/proc" && exec chroot "$0" "$@"' "$bare" "$@" \
        >"$work/log" 2>&1 </dev/null || status=$?
    echo "== $name: exit status $status, its last lines:"
    tail -n 25 "$work/log"
    [ "$status" -eq 0 ] || worst=1
}

worst=0
inside 'sh models/demo.sh' sh /srv/falsework/models/demo.sh
inside 'sh models/demo.sh, again' sh /srv/falsework/models/demo.sh
inside 'sh tests/run.sh' sh /srv/falsework/tests/run.sh
# shellcheck disable=SC2016 # for the inner shell
inside 'git status' sh -c 'cd /srv/falsework && test -z "$(git status --porcelain)" && echo clean'
exit "$worst"
