#!/usr/bin/env bash
# The tests in the locked environment. Usage: bash scripts/run_tests.sh [arguments of pytest]
set -euo pipefail
cd "$(dirname "${BASH_SOURCE[0]}")/.."
. scripts/environment.sh

make_environment
install test
exec .venv/bin/python -m pytest "$@"
