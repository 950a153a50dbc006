# Sourced by the scripts beside it: finds a Python and installs the project into .venv of the current folder.

find_python() {
    local candidate
    for candidate in "${PYTHON:-}" python3 python3.14 python3.13 python3.12 python3.11 python; do
        if [ -n "$candidate" ] && command -v "$candidate" >/dev/null 2>&1 &&
            "$candidate" -c 'import sys; raise SystemExit(sys.version_info < (3, 11))' 2>/dev/null; then
            printf '%s\n' "$candidate"
            return
        fi
    done
    echo "Rateloom needs Python 3.11 or newer. Install one, or name it: PYTHON=/path/to/python bash $0" >&2
    return 1
}

# make_environment WHAT: installs WHAT (the project with its extras) unless it is installed from this pyproject.toml.
make_environment() {
    local what=$1 python stamp
    python=$(find_python)
    if ! .venv/bin/python -c 'import sys' 2>/dev/null; then
        "$python" -m venv --clear .venv || {
            echo "Cannot make a virtual environment; Debian and Ubuntu need the package python3-venv." >&2
            return 1
        }
    fi
    stamp=".venv/installed-$(printf '%s' "$what" | tr -c 'a-z' '_')"
    if ! cmp -s pyproject.toml "$stamp"; then
        .venv/bin/python -m pip install --quiet --disable-pip-version-check -e "$what"
        cp pyproject.toml "$stamp"
    fi
}
