# Sourced by the other scripts: makes or reuses the virtual environment .venv at the top of the repository.
#
#   use_environment EXTRA...   installs sitesym (editable) with these extras, again only when pyproject.toml,
#                              the version, the extras or the Python changed; then $VENV_PYTHON runs it.
#
# PYTHON=/path/to/python chooses the Python that a new environment is made from.

REPOSITORY="$(cd "$(dirname "${BASH_SOURCE[0]}")/.." && pwd)"
VENV="$REPOSITORY/.venv"
VENV_PYTHON="$VENV/bin/python"
export PIP_DISABLE_PIP_VERSION_CHECK=1 PIP_NO_INPUT=1 PIP_ROOT_USER_ACTION=ignore

is_suitable() {
    "$1" -c 'import sys; sys.exit(not (3, 11) <= sys.version_info[:2] <= (3, 13))' >/dev/null 2>&1 </dev/null
}

find_python() {
    local candidate
    for candidate in ${PYTHON:+"$PYTHON"} python3 python3.13 python3.12 python3.11 python; do
        if is_suitable "$candidate"; then
            echo "$candidate"
            return 0
        fi
    done
    echo "No Python 3.11, 3.12 or 3.13 was found on the path." >&2
    echo "Install one, or name it: PYTHON=/path/to/python3.12 $0" >&2
    return 1
}

# A Python without ensurepip (some distributions split it off) makes an empty environment that its own pip then fills.
make_environment() {
    local python
    python="$(find_python)" || return 1
    echo "Making the environment .venv with $("$python" --version) ..."
    rm -rf "$VENV"
    if "$python" -c 'import ensurepip' >/dev/null 2>&1; then
        "$python" -m venv "$VENV" || return 1
    else
        "$python" -m venv --without-pip "$VENV" || return 1
        if ! "$python" -m pip --python "$VENV_PYTHON" install -q pip; then
            echo "This Python has neither ensurepip nor a pip of version 22.3 or later." >&2
            echo "Install pip (on Debian: apt-get install python3-venv) and run this again." >&2
            return 1
        fi
    fi
}

checksum() {
    "$VENV_PYTHON" - "$REPOSITORY/pyproject.toml" "$REPOSITORY/sitesym/version.py" "$@" <<'PYTHON'
import hashlib, pathlib, sys
files, extras = sys.argv[1:3], sys.argv[3:]
seal = hashlib.sha256(sys.version.encode())
for name in files:
    seal.update(pathlib.Path(name).read_bytes())
print(seal.hexdigest(), *extras)
PYTHON
}

use_environment() {
    local extras stamp seal
    is_suitable "$VENV_PYTHON" || make_environment || return 1
    extras="$(IFS=,; echo "$*")"
    stamp="$VENV/installed-${extras:-plain}"
    seal="$(checksum "$extras")" || return 1
    if [ "$(cat "$stamp" 2>/dev/null)" != "$seal" ]; then
        echo "Installing sitesym${extras:+ with what its $extras needs} into .venv ..."
        "$VENV_PYTHON" -m pip install -q -e "$REPOSITORY${extras:+[$extras]}" </dev/null || return 1
        echo "$seal" >"$stamp"
    fi
}
