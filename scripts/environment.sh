# Sourced by the scripts: `environment FOLDER` makes a virtual environment there, or keeps the one that works;
# `browser` installs the chromium in which the tests open the report, where that can be done without asking.

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

browser() {
    if command -v chromium >/dev/null || ! command -v apt-get >/dev/null || [ "$(id -u)" != 0 ]; then
        return
    fi
    echo "installing chromium for the tests of the report" >&2
    if ! { apt-get update && DEBIAN_FRONTEND=noninteractive apt-get install -y --no-install-recommends chromium; } \
        >/dev/null 2>&1; then
        echo "note: chromium could not be installed; the tests that need it are skipped" >&2
    fi
}
