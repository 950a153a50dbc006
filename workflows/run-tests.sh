#!/usr/bin/env bash
# Installs what the tests need into .venv beside this folder and runs them; arguments go to pytest.
# Safe to run again, from any folder.
set -euo pipefail
cd "$(dirname "${BASH_SOURCE[0]}")/.."
source workflows/environment.sh

make_environment '.[dev]'
if [ "$#" -gt 0 ]; then
    exec .venv/bin/python -m pytest "$@"
fi
.venv/bin/ruff check .
.venv/bin/ruff format --check .
.venv/bin/mypy
.venv/bin/lint-imports
.venv/bin/python -m pytest -n auto -m 'not long and not benchmark'
