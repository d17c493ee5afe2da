#!/usr/bin/env bash
# Runs the tests on two processes; arguments are passed on to pytest:
#   scripts/test.sh
#   scripts/test.sh tests/test_demo_structures.py -k calcite
set -u
source "$(dirname "${BASH_SOURCE[0]}")/environment.sh"
use_environment test || exit 1
cd "$REPOSITORY" || exit 1
exec "$VENV_PYTHON" -m pytest -n 2 "$@" </dev/null
