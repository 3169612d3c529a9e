#!/usr/bin/env bash
# From a bare checkout to seismograms and figures: environment, one run, its figures. Safe to repeat.
# Usage: bash scripts/first_run.sh [SCENARIO]    (default: configs/pile_by_clinic.toml)
set -euo pipefail
started_in=$PWD
cd "$(dirname "${BASH_SOURCE[0]}")/.."
. scripts/environment.sh

scenario=${1:-configs/pile_by_clinic.toml}
if [ $# -gt 0 ] && [ "${scenario#/}" = "$scenario" ]; then
    scenario=$started_in/$scenario
fi
make_environment
install

folder=outputs/$(basename "$scenario" .toml)
.venv/bin/groundroll plan "$scenario"
.venv/bin/groundroll run "$scenario" --out "$folder"
.venv/bin/groundroll draw "$folder" --quiet
say ""
say "records: $PWD/$folder/records.h5"
say "figures: $PWD/$folder/figures"
