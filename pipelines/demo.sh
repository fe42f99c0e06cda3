#!/usr/bin/env bash
# Sets up what is missing, builds planish and runs the demo: boron nitride under two potentials, for a drumhead.
#
# Arguments are passed on to `planish run`, for example `bash pipelines/demo.sh --threads 2`.
set -euo pipefail
cd "$(dirname "${BASH_SOURCE[0]}")/.."
source pipelines/setup.sh

set_up_build
echo "demo: building planish (the first build also compiles the trajectory library, some minutes)"
cargo build --release --locked

status=0
cargo run --release --locked --quiet -- run pipelines/drumhead.toml "$@" || status=$?
if [ "$status" -eq 0 ]; then
    echo
    echo "demo: unless --out moved them, the results are in pipelines/drumhead.out: start with parameters.toml and figures/"
fi
exit "$status"
