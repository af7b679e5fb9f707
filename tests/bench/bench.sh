#!/bin/sh
# Measures falsework against libpng on the same files in the same run, and prints the ratios.
#   sh tests/bench/bench.sh BUILD [WIDTH HEIGHT LAYERS [CLASS...]]
# BUILD is a build folder with tests (cmake -DFALSEWORK_TESTS=ON). Default: 3840 2400 300, prismatic and
# organic. Floors: decode every layer and throw it away; decode and encode. Median of three for what is
# short (floors, survey), once for prop and recheck. Nothing here passes or fails.
set -eu

build=$1
width=${2:-3840}
height=${3:-2400}
layers=${4:-300}
shift $(($# < 4 ? $# : 4))
[ $# -gt 0 ] || set -- prismatic organic
threads=$(nproc)
folder=$(mktemp -d)
trap 'rm -rf "$folder"' EXIT INT TERM

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

# run NAME COMMAND...: "wall cpu peak status" into $folder/NAME, appended
run() {
    name=$1
    shift
    "$build/tests/bench_measure" "$@" 3>>"$folder/$name" >"$folder/out" 2>"$folder/err" || true
}

# median NAME COLUMN
median() {
    sort -n -k1 "$folder/$1" | awk -v c="$2" '{v[NR]=$c} END {print v[int((NR+1)/2)]}'
}

echo "machine: $threads threads; libpng $(pkg-config --modversion libpng), zlib $(pkg-config --modversion zlib 2>/dev/null || echo '?')"
for class; do
    stack=$folder/stack
    rm -rf "$stack" "$folder/propped"
    mkdir "$stack"
    "$build/tests/bench_make_stack" "$stack" "$width" "$height" "$layers" "$class"
    rm -f "$folder"/decode "$folder"/recode "$folder"/survey "$folder"/prop "$folder"/recheck
    for turn in 1 2 3; do
        run decode "$build/tests/bench_floor" "$threads" decode "$stack"/*.png
        run survey "$build/falsework" survey "$stack" --job "$folder/job.yaml" --threads "$threads" --verbose
        grep '^time' "$folder/err" >"$folder/survey-times" || true
    done
    run recode "$build/tests/bench_floor" "$threads" recode "$stack"/*.png
    run prop "$build/falsework" prop "$stack" --job "$folder/job.yaml" --out "$folder/propped" --threads "$threads" --verbose
    grep -E '^time|^decoded' "$folder/err" >"$folder/prop-times" || true
    grep -E '^verdict|^posts' "$folder/out" >"$folder/prop-says" || true
    if [ -d "$folder/propped/layers" ]; then
        run recheck "$build/falsework" recheck "$folder/propped/layers" --job "$folder/job.yaml" --posts "$folder/propped/posts.json" --threads "$threads"
    fi
    echo
    echo "== $class, ${width}x$height, $layers layers"
    awk -v n="$layers" -v d="$(median decode 1)" -v r="$(median recode 1)" -v s="$(median survey 1)" \
        -v p="$(median prop 1)" -v sm="$(median survey 3)" -v pm="$(median prop 3)" -v ps="$(median prop 4)" 'BEGIN {
        printf "decode only      %8.1f ms/layer\n", d / n * 1000
        printf "decode + encode  %8.1f ms/layer\n", r / n * 1000
        printf "survey           %8.1f ms/layer   %.2f x decode          peak %d MiB\n", s / n * 1000, s / d, sm
        printf "prop             %8.1f ms/layer   %.2f x decode+encode   peak %d MiB   status %d\n", p / n * 1000, p / r, pm, ps
    }'
    [ ! -e "$folder/recheck" ] || awk -v d="$(median decode 1)" -v n="$layers" '{
        printf "recheck          %8.1f ms/layer   %.2f x decode          peak %d MiB   status %d\n", $1 / n * 1000, $1 / d, $3, $4 }' "$folder/recheck"
    cat "$folder/prop-says"
    for pass in survey prop; do
        awk -v pass="$pass" '/^time/ { printf "%s%s %s s", (n++ ? ", " : "where " pass "'"'"'s time goes: "), $2, $3 } END { print "" }' "$folder/$pass-times"
    done
done
