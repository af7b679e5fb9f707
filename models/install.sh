#!/bin/sh
# The one list of Debian packages: installs what is missing for the demo or for the tests.
#   sh models/install.sh demo|tests
set -eu

# A line: a Debian package, then optionally a command that will do as well when it is already there.
demo='
gcc
libc6-dev
cmake
make
ninja-build
pkg-config pkg-config
libpng-dev
libyaml-dev
libjansson-dev
libssl-dev
'
tests='
git git
clang clang
clang-format clang-format
llvm
libclang-rt-dev
libomp-dev
libcmocka-dev
python3
python3-numpy
python3-scipy
python3-png
python3-jsonschema
python3-opencv
ca-certificates
npm npm
debootstrap debootstrap
'

usage() {
    echo 'usage: sh models/install.sh demo|tests' >&2
    exit 2
}

[ $# -eq 1 ] || usage
case $1 in
demo) list=$demo ;;
tests) list=$demo$tests ;;
*) usage ;;
esac

if ! command -v dpkg-query >/dev/null; then
    echo "install.sh: no dpkg here, this list is for Debian 12, install its equivalents by hand:$(echo "$list" | tr '\n' ' ')" >&2
    exit 3
fi

is_there() {
    if [ -n "$2" ] && command -v "$2" >/dev/null; then
        return 0
    fi
    dpkg-query -W -f '${db:Status-Status}' "$1" 2>/dev/null | grep -qx installed
}

missing=$(printf '%s\n' "$list" | while read -r package command; do
    [ -z "$package" ] || is_there "$package" "$command" || printf '%s ' "$package"
done)
[ -n "$missing" ] || exit 0

as_root=
if [ "$(id -u)" -ne 0 ]; then
    if ! command -v sudo >/dev/null; then
        echo "install.sh: packages are missing, run as root: apt-get install $missing" >&2
        exit 3
    fi
    as_root=sudo
fi

echo "install.sh: installing $missing" >&2
log=$(mktemp)
trap 'rm -f "$log"' EXIT
apt() {
    $as_root env DEBIAN_FRONTEND=noninteractive apt-get -q "$@" >>"$log" 2>&1 </dev/null
}
# shellcheck disable=SC2086 # a list of words
if ! { apt update && apt install -y --no-install-recommends $missing; }; then
    tail -n 20 "$log" >&2
    echo "install.sh: apt-get failed, see above, check the network and the package sources" >&2
    exit 3
fi
