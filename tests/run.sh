#!/bin/sh
# All tests, one script.
#   sh tests/run.sh quick    formatting, and the tests that are not labelled slow: under 3 minutes
#   sh tests/run.sh [full]   formatting, every test, then the tests that are not slow again with the
#                            address and undefined-behaviour sanitizers and with the thread sanitizer
#   sh tests/run.sh bare     the demo and the tests in a bare Debian 12 made for it (needs root)
# Closes with "N passed, N failed, N skipped". Exit status 1 when anything failed.
set -eu

root=$(CDPATH='' cd -- "$(dirname -- "$0")/.." && pwd)
mode=${1:-full}
passed=0
failed=0
skipped=0

count() {
    passed=$((passed + $1))
    failed=$((failed + $2))
}

check_format() {
    echo '== formatting'
    if (
        cd "$root"
        git ls-files -z --cached --others --exclude-standard '*.c' '*.h' >.build/sources
        [ -s .build/sources ] && xargs -0 -a .build/sources clang-format --dry-run -Werror
    ); then
        count 1 0
    else
        count 0 1
    fi
}

# build FOLDER CMAKE-OPTION...
build() {
    folder=$root/.build/$1
    shift
    mkdir -p "$folder"
    if { cmake -S "$root" -B "$folder" -G Ninja -DFALSEWORK_TESTS=ON "$@" &&
        cmake --build "$folder"; } >"$folder/build.log" 2>&1; then
        return 0
    fi
    tail -n 60 "$folder/build.log"
    echo "run.sh: the build in $folder failed, see above"
    count 0 1
    return 1
}

# run_ctest FOLDER CTEST-OPTION...: adds the counts that ctest closes with. A test that was skipped
# is said by ctest and is no pass of ours.
run_ctest() {
    folder=$root/.build/$1
    shift
    log=$folder/ctest.log
    ctest --test-dir "$folder" --no-tests=error --output-on-failure "$@" >"$log" 2>&1 || true
    cat "$log"
    counts=$(sed -n 's/.*tests passed, \([0-9]*\) tests failed out of \([0-9]*\).*/\1 \2/p' "$log")
    unrun=$(grep -c '\*\*\*Skipped' "$log" || true)
    skipped=$((skipped + unrun))
    if [ -z "$counts" ]; then
        count 0 1
    else
        count $((${counts#* } - ${counts% *} - unrun)) "${counts% *}"
    fi
}

# suite FOLDER CTEST-OPTIONS CMAKE-OPTION...
suite() {
    name=$1
    select=$2
    shift 2
    echo "== $name"
    # shellcheck disable=SC2086 # options are words
    if build "$name" "$@"; then
        run_ctest "$name" $select
    fi
}

# The archer tool tells the thread sanitizer what OpenMP's barriers and tasks order; without it every
# parallel loop looks like a race. gcc's runtime has no such tool, so this build is clang's.
thread_suite() {
    archer=$(dirname "$(readlink -f "$(command -v clang)")")/../lib/libarcher.so
    if [ ! -e "$archer" ]; then
        echo "run.sh: no libarcher.so beside clang, install libomp-dev"
        count 0 1
        return
    fi
    OMP_TOOL_LIBRARIES=$archer
    TSAN_OPTIONS='ignore_noninstrumented_modules=1 halt_on_error=1'
    OMP_NUM_THREADS=4
    export OMP_TOOL_LIBRARIES TSAN_OPTIONS OMP_NUM_THREADS
    suite thread '-LE slow' -DCMAKE_C_COMPILER=clang -DCMAKE_BUILD_TYPE=RelWithDebInfo \
        -DFALSEWORK_SANITIZE=thread
    unset OMP_TOOL_LIBRARIES TSAN_OPTIONS OMP_NUM_THREADS
}

case $mode in
quick | full) ;;
bare) exec sh "$root/tests/tools/bare_debian.sh" ;;
*)
    echo 'usage: sh tests/run.sh [quick|full|bare]' >&2
    exit 2
    ;;
esac

sh "$root/models/install.sh" tests
mkdir -p "$root/.build"
check_format
case $mode in
quick) suite tests '-LE slow' -DCMAKE_BUILD_TYPE=Release ;;
full)
    suite tests '' -DCMAKE_BUILD_TYPE=Release
    suite address '-LE slow' -DCMAKE_BUILD_TYPE=RelWithDebInfo \
        -DFALSEWORK_SANITIZE=address,undefined
    thread_suite
    ;;
esac

echo "$passed passed, $failed failed, $skipped skipped"
[ "$failed" -eq 0 ]
