#!/bin/sh
# Measures falsework against libpng on the same files in the same run, and prints the ratios.
#   sh tests/bench/bench.sh BUILD [WIDTH HEIGHT LAYERS [CLASS...]]
# BUILD is a build folder with tests (cmake -DFALSEWORK_TESTS=ON). Default: 3840 2400 300, prismatic
# and organic; lattice is the third class. Floors: decode every layer and throw it away; decode and
# encode. prop is held against the floor of the raw stack, recheck against the decode of the stack
# that it reads, which prop wrote. What takes under LONG seconds (30) is run three times, in turns,
# and the median counts. No figure passes or fails; a program that fails ends the run.
set -eu

usage() {
    echo 'usage: sh tests/bench/bench.sh BUILD [WIDTH HEIGHT LAYERS [CLASS...]]' >&2
    exit 2
}

case $# in
0 | 2 | 3) usage ;;
esac
build=$1
width=${2:-3840}
height=${3:-2400}
layers=${4:-300}
shift $(($# < 4 ? $# : 4))
[ $# -gt 0 ] || set -- prismatic organic
threads=$(nproc)
long=${LONG:-30}
folder=$(mktemp -d)
trap 'rm -rf "$folder"' EXIT
trap 'exit 130' INT TERM

# Invented values. The gap is wide, so that suction stays far from its cap.
cat >"$folder/resin.yaml" <<'END'
name: benchmark (invented values)
viscosity_mPa_s: 350
cure: {penetration_um: 110, critical_mJ_cm2: 9.0, exposure_mJ_cm2: 38}
green: {tensile_MPa: 8.0, modulus_MPa: 250, plate_adhesion_MPa: 0.5}
support: {reach_mm: 1.5, angle_deg: 40}
END
cat >"$folder/machine.yaml" <<END
name: benchmark (invented values)
separation: {mode: pull, speed_mm_s: 1.0, gap_um: 200}
plate: {size_mm: [$((width / 20 + 1)), $((height / 20 + 1))]}
END
cat >"$folder/job.yaml" <<'END'
stack: {pixel_um: [50, 50], layer_um: 50}
resin: resin.yaml
machine: machine.yaml
posts: {lift_mm: 5, tip_mm: [0.30, 0.80], neck_mm: 1.5, shaft_mm: [0.8, 3.0], foot_mm: 3.0, lean_deg: 30, clearance_mm: 0.30, bite_mm: 0.10}
gate: {margin: 2.0}
END

# run NAME MOST COMMAND...: appends "wall cpu peak status" to $folder/NAME.runs; keeps what the
# command said in NAME.out and NAME.err. Ends the benchmark where its status is over MOST.
run() {
    name=$folder/$1
    most=$2
    shift 2
    "$build/tests/bench_measure" "$@" 3>>"$name.runs" >"$name.out" 2>"$name.err"
    if [ "$(tail -n 1 "$name.runs" | cut -d ' ' -f 4)" -gt "$most" ]; then
        grep -v '^time ' "$name.err" | tail -n 5 >&2
        echo "bench.sh: this failed: $*" >&2
        exit 1
    fi
}

# short NAME: its first run took less than $long
short() {
    awk -v most="$long" 'NR == 1 { exit !($1 < most) }' "$folder/$1.runs"
}

# The run with the median wall time: "wall cpu peak status".
median() {
    sort -n "$folder/$1.runs" | awk '{ run[NR] = $0 } END { print run[int((NR + 1) / 2)] }'
}

# The written stack; a stack that the gate refuses lies elsewhere.
written() {
    if [ -d "$folder/propped/layers" ]; then
        echo "$folder/propped/layers"
    else
        echo "$folder/propped/refused"
    fi
}

floor() {
    run "$1" 0 "$build/tests/bench_floor" "$threads" "$2" "$3"/*.png
}

falsework() {
    pass=$1
    most=$2
    source=$3
    shift 3
    run "$pass" "$most" "$build/falsework" "$pass" "$source" --job "$folder/job.yaml" \
        --threads "$threads" --verbose "$@"
}

prop() {
    rm -rf "$folder/propped"
    falsework prop 1 "$stack" --out "$folder/propped"
}

# One turn of everything; from the second turn on of what is short.
turn() {
    if [ "$1" -eq 1 ] || short decode; then floor decode decode "$stack"; fi
    if [ "$1" -eq 1 ] || short recode; then floor recode recode "$stack"; fi
    if [ "$1" -eq 1 ] || short survey; then falsework survey 0 "$stack"; fi
    if [ "$1" -eq 1 ] || short prop; then prop; fi
    if [ "$1" -eq 1 ] || short decode-written; then floor decode-written decode "$(written)"; fi
    if [ "$1" -eq 1 ] || short recheck; then
        falsework recheck 1 "$(written)" --posts "$folder/propped/posts.json"
    fi
}

# row NAME LAYERS [FLOOR WHAT]
row() {
    { median "$1" && if [ $# -gt 2 ]; then median "$3"; fi; } |
        awk -v name="$1" -v layers="$2" -v what="${4:-}" '
            NR == 1 { wall = $1; cpu = $2; peak = $3; status = $4 }
            NR == 2 { ratio = sprintf("%6.2f x %s", wall / $1, what) }
            END { printf "%-15s %9.1f %9.1f %7d %7d   %s\n", name, wall / layers * 1000,
                         cpu / layers * 1000, peak, status, ratio }'
}

# Lines "time NAME SECONDS" of the last run; other is what the wall clock says beyond them.
where() {
    wall=$(tail -n 1 "$folder/$1.runs" | cut -d ' ' -f 1)
    awk -v pass="$1" -v wall="$wall" '
        /^decoded / { decoded = $2 }
        /^time / {
            seconds = $NF
            sub(/^time /, "")
            sub(/ [^ ]*$/, "")
            if (seconds > 0) text = text sprintf(" %s %.2f,", $0, seconds)
            sum += seconds
        }
        END { printf "%s: %d files decoded; seconds of %.2f:%s other %.2f\n", pass, decoded, wall,
                     text, wall - sum }' "$folder/$1.err"
}

report() {
    count=$(find "$(written)" -name '*.png' | wc -l)
    echo
    echo "== $1, ${width}x$height, $layers layers, $count with posts"
    echo "                 wall, ms   cpu, ms    peak,            ratio of"
    echo "                 a layer    a layer      MiB  status    wall time"
    row decode "$layers"
    row recode "$layers"
    row survey "$layers" decode decode
    row prop "$layers" recode recode
    row decode-written "$count"
    row recheck "$count" decode-written 'decode of what it reads'
    grep -E '^verdict|^posts' "$folder/prop.out" || true
    where survey
    where prop
    where recheck
}

version() {
    pkg-config --modversion "$1" 2>/dev/null || echo unknown
}

echo "$(nproc) cores, $threads threads; libpng $(version libpng), zlib $(version zlib)"
stack=$folder/stack
for class; do
    rm -rf "$stack" "$folder"/*.runs
    mkdir "$stack"
    "$build/tests/bench_make_stack" "$stack" "$width" "$height" "$layers" "$class"
    for number in 1 2 3; do
        turn "$number"
    done
    report "$class"
done
