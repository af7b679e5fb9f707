#!/bin/sh
# The whole job on the demo part: builds falsework, makes the raw stack, props it.
#   sh models/demo.sh
# Ends with the exit status of `falsework prop`: 0 when the supported stack holds.
set -eu

root=$(CDPATH='' cd -- "$(dirname -- "$0")/.." && pwd)
build=$root/.build/demo
raw=$root/out/manifold-raw
out=$root/out/manifold
log=$build/build.log

sh "$root/models/install.sh" demo

mkdir -p "$build"
if ! { cmake -S "$root" -B "$build" -G Ninja -DCMAKE_BUILD_TYPE=Release &&
    cmake --build "$build" --target falsework falsework-part; } >"$log" 2>&1; then
    tail -n 40 "$log" >&2
    echo "demo.sh: the build failed, see above, the whole log is $log" >&2
    exit 3
fi

rm -rf "$raw"
"$build/models/parts/falsework-part" manifold "$raw"

replace=
[ ! -e "$out" ] || replace=--replace
status=0
"$build/falsework" prop "$raw" --job "$root/models/jobs/manifold.yaml" --out "$out" $replace ||
    status=$?
echo "raw stack: $raw"
[ ! -d "$out" ] || echo "results:   $out"
exit "$status"
