#!/bin/sh
# Mutation test of src/rules: tests/mutants/run.sh takes what cargo mutants takes, as --shard 0/8.
# The crate is put together under $CARGO_TARGET_DIR/mutants and mutated there, where the report is left
# as well. src/rules/compare is left out: its tests go through `actions`.
set -e
cd "$(dirname "$0")"
: "${CARGO_TARGET_DIR:=$PWD/../../target}"
home=$CARGO_TARGET_DIR/mutants
unset CARGO_TARGET_DIR
rm -rf "$home/src" "$home/tests" "$home/referral_rules"
mkdir -p "$home/src" "$home/tests/it"
cp Cargo.toml Cargo.lock "$home"
cp -r ../../src/domain ../../src/domain.rs ../../src/rules ../../src/rules.rs "$home/src"
cp -r ../../referral_rules "$home"
cp -r ../data "$home/tests"
cp -r ../it/rules ../it/rules.rs "$home/tests/it"
printf '#![allow(missing_docs, dead_code)]\npub mod domain;\npub mod rules;\n' > "$home/src/lib.rs"
printf 'mod rules;\n' > "$home/tests/it/main.rs"
# Few random cases and one seed: a mutant is caught by the tables, and a run can be repeated.
export PROPTEST_CASES=24 PROPTEST_RNG_SEED=20261014 INSTA_UPDATE=no
cd "$home"
exec nice -n 19 cargo mutants --in-place --no-shuffle -f 'src/rules/**' -e 'src/rules/compare*' -e 'src/rules/compare/**' -o "$home" "$@"
