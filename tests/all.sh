#!/usr/bin/env bash
# Sets up and passes all tests: formatting, lints, documentation, the test suite, and independent readers on every CIF of
# the samples and of the structure types that the suite writes. Where the readers cannot be installed it says so and goes on; with CI=true that is a failure.
set -eu
cd "$(dirname "$0")/.."
step() { printf '\n== %s\n' "$1"; }

step "format, lints, documentation"
cargo fmt --check
cargo clippy --quiet --all-targets -- -D warnings
RUSTDOCFLAGS="-D warnings" cargo doc --quiet --no-deps

step "tests"
note() { [ -n "${!1:-}" ] || echo "$2 not checked: $1 is not set"; }
note INTERSTICE_CIF_CONFORMANCE "a conformance set of CIF syntax"
note INTERSTICE_CIF_REAL "a folder of CIFs from elsewhere"
cargo test --quiet

step "independent readers on the files written"
cargo build --quiet --release
interstice="$PWD/target/release/interstice"
rm -rf target/samples && mkdir -p target/samples
for recipe in samples/*.json; do
    name=$(basename "$recipe" .json)
    "$interstice" build "$recipe" --into "target/samples/$name" --quiet
    "$interstice" build "$recipe" --into "target/samples/$name-p1" --p1 --quiet
done
for case in "MgO ccp" "ZnS hcp" "CaF2 primitive-cubic" "CdI2 hcp" "FeS hcp" "Li2O ccp" "CsCl primitive-cubic"; do
    set -- $case
    "$interstice" build "$1" --packing "$2" --into "target/samples/$1-$2" --quiet
done
if bash tests/readers/install.sh; then
    target/readers/bin/python tests/readers/check.py "$interstice" target/samples/*/*.cif target/tmp/readers/*.cif
    target/readers/bin/python tests/readers/packing.py target/tmp/diagrams target/tmp/holes-dummies
elif [ "${CI:-}" = true ]; then
    exit 1
fi
step "all passed"
