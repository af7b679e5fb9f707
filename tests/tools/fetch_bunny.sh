#!/bin/sh
# The test mesh: fetches the npm package `bunny` 1.0.1 into FOLDER and prints the path of its data.
#   sh tests/tools/fetch_bunny.sh FOLDER
set -eu
[ $# -eq 1 ] || {
    echo 'usage: sh tests/tools/fetch_bunny.sh FOLDER' >&2
    exit 2
}
data=$1/node_modules/bunny/index.js
if [ ! -e "$data" ]; then
    mkdir -p "$1"
    npm install bunny@1.0.1 --prefix "$1" --no-audit --no-fund --ignore-scripts >"$1/npm.log" 2>&1 || {
        tail -n 10 "$1/npm.log" >&2
        echo "fetch_bunny.sh: npm could not install bunny@1.0.1 into $1, see above" >&2
        exit 3
    }
fi
echo "$data"
