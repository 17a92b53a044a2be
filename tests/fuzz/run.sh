#!/bin/sh
# Builds the fuzz targets and runs one: tests/fuzz/run.sh rules 300 (seconds).
# Corpus and findings go to $CARGO_TARGET_DIR/corpus, which is not kept in git.
set -e
cd "$(dirname "$0")"
: "${CARGO_TARGET_DIR:=$PWD/../../target/fuzz}"
: "${CARGO:=cargo}"
export CARGO_TARGET_DIR RUSTC_BOOTSTRAP=1
export RUSTFLAGS="-Cpasses=sancov-module -Cllvm-args=-sanitizer-coverage-level=4 -Cllvm-args=-sanitizer-coverage-inline-8bit-counters -Cllvm-args=-sanitizer-coverage-pc-table -Cllvm-args=-sanitizer-coverage-trace-compares -Ccodegen-units=1"
host=$(rustc -vV | sed -n 's/^host: //p')
"$CARGO" build --release --target "$host"
target=$1
corpus=$CARGO_TARGET_DIR/corpus/$target
mkdir -p "$corpus"
case $target in
    rules) seeds=$(find ../../referral_rules -name '*.toml') ;;
    roster) seeds=../../sample_data/roster.csv ;;
    results) seeds=../../sample_data/results.csv ;;
    *) seeds= ;;
esac
for seed in $seeds; do cp "$seed" "$corpus/seed-$(basename "$seed")"; done
[ "$target" = acuity ] && printf '%s' '>=20/32' > "$corpus/seed"
[ "$target" = exams ] && printf '%s\n' \
    'code,examined_on,best_left,sphere_left,cylinder_left,axis_left,glasses_axis_left,findings,treatment' \
    '4829135694,2026-12-02,20/40,+1.00,-0.50,180,90,H53.022,glasses;patching' > "$corpus/seed"
nice -n 19 "$CARGO_TARGET_DIR/$host/release/$target" "$corpus" \
    -max_total_time="${2:-60}" -max_len=8192 -print_final_stats=1 \
    -artifact_prefix="$corpus-found-"
