#!/usr/bin/env bash
# Sets up what is missing, then runs every test and every lint. The exit status is 0 only if all of them pass.
#
# One build profile (release) serves the program, the tests and the lints, so that chemfiles is compiled once.
set -euo pipefail
cd "$(dirname "${BASH_SOURCE[0]}")/.."
source pipelines/setup.sh

set_up_build
cargo fmt --version >/dev/null 2>&1 && cargo clippy --version >/dev/null 2>&1 ||
    stop "rustfmt or clippy is missing; run this, then start again:" "    rustup component add rustfmt clippy"
build=$(build_folder)
mkdir -p "$build"
set_up_python "$build/python-oracle" tests/oracles/requirements.txt

steps=0
step() {
    echo
    echo "== $1"
    shift
    "$@"
    steps=$((steps + 1))
}

# The tests that ask numpy find it here; with this set they fail rather than skip.
export PLANISH_ORACLE_PYTHON="$build/python-oracle/bin/python"
export PYTHONDONTWRITEBYTECODE=1
test_log=$(mktemp)
trap 'rm -f "$test_log"' EXIT
tests() {
    # The colour codes of a terminal would hide the counts.
    CARGO_TERM_COLOR=never cargo test --release --locked --no-fail-fast 2>&1 | tee "$test_log"
}
scripts() {
    local script
    for script in .ci/run pipelines/*.sh tests/*.sh; do
        bash -n "$script"
    done
    PYTHONPYCACHEPREFIX="$build/python-cache" "$PLANISH_ORACLE_PYTHON" -m compileall -q tests/oracles
}
documentation() {
    RUSTDOCFLAGS="-D warnings" cargo doc --release --locked --no-deps
}

step "format" cargo fmt --all --check
step "scripts parse" scripts
step "lints" cargo clippy --release --locked --all-targets -- -D warnings
step "unit, integration and documentation tests, with numpy as an outside oracle" tests
step "documentation builds without a warning" documentation
step "benches run once" cargo bench --locked --bench '*' -- --test

passed=$(awk '/^test result:/ { sum += $4 } END { print sum + 0 }' "$test_log")
ignored=$(awk '/^test result:/ { for (i = 1; i < NF; i++) if ($(i + 1) ~ /^ignored/) sum += $i } END { print sum + 0 }' "$test_log")
skipped=$(grep -c '^skipped:' "$test_log" || true)
[ "$passed" -gt 0 ] || stop "no test ran: that cannot be right"
echo
echo "all passed: $steps steps, $passed tests, $ignored ignored, $skipped skipped"
