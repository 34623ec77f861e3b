# Sourced by the scripts: `environment FOLDER` makes a virtual environment there, or keeps the one that works.

environment() {
    local folder=$1 python
    # an environment that was moved, or half made, does not run: it is made anew
    if "$folder/bin/python" -m pip --version >/dev/null 2>&1; then
        return
    fi
    for python in ${PYTHON:-python3 python3.14 python3.13 python3.12 python3.11}; do
        if "$python" -c 'import sys; sys.exit(sys.version_info < (3, 11))' 2>/dev/null; then
            "$python" -m venv --clear "$folder"
            return
        fi
    done
    echo "error: there is no Python 3.11 or later (${PYTHON:-on the path})" >&2
    echo "hint: install one, or name it: PYTHON=/path/to/python $0" >&2
    exit 2
}
