# Shell functions for tests/run and service/up: choose a Python, make its environment from pinned versions.
# Sourced from the top folder of the project; POSIX sh; each function says on stderr why it gave up.

# Sets $python to an interpreter that is new enough: the one PYTHON names, or the first one found.
choose_python() {
    if [ -n "${PYTHON:-}" ]; then
        python=$PYTHON
        is_new_enough && return
        seen=$("$python" --version 2>&1) || seen="nothing that runs"
        echo "PYTHON is $python, which is $seen; Python 3.11 or newer is needed: set PYTHON to one" >&2
        return 1
    fi
    for python in python3 python3.14 python3.13 python3.12 python3.11 python; do
        is_new_enough && return
    done
    echo "no Python 3.11 or newer found on the PATH: install one, or set PYTHON to its path" >&2
    return 1
}

is_new_enough() {
    "$python" -c 'import sys; sys.exit(sys.version_info < (3, 11))' >/dev/null 2>&1
}

# make_environment FOLDER REQUIREMENTS: after it, FOLDER holds exactly those pinned versions and this project.
# Its stamp is a copy of all that decides what is in it, so an environment that is up to date costs nothing.
make_environment() {
    wanted=$(pwd && "$python" -VV && cat pyproject.toml "$2") || return 1
    if [ -f "$1/stamp" ] && [ "$wanted" = "$(cat "$1/stamp")" ]; then
        return 0
    fi
    if [ -h "$1" ]; then
        echo "$1 is a link and what it leads to is not up to date: make the environment where it stands" >&2
        return 1
    fi
    echo "making the environment $1 with $("$python" --version)"
    if ! "$python" -m venv --clear "$1"; then
        echo "$python cannot make an environment: install its venv module (Debian: the package python3-venv)" >&2
        return 1
    fi
    echo "installing the pinned packages of $2 (the first time takes a minute or two)"
    if ! install_into "$1" --only-binary :all: --require-hashes --requirement "$2"; then
        echo "could not install $2: see above; a network that reaches the package index is needed" >&2
        return 1
    fi
    echo "installing discwright itself"
    if ! install_into "$1" --no-deps --no-build-isolation --editable .; then
        echo "could not install discwright from $(pwd): see above" >&2
        return 1
    fi
    printf '%s\n' "$wanted" >"$1/stamp"
}

# install_into FOLDER PIP-ARGUMENTS…: quiet but for one line per package as its turn comes.
install_into() {
    folder=$1
    shift
    { "$folder/bin/python" -m pip install --disable-pip-version-check --no-input --progress-bar off "$@" ||
        touch "$folder/failed"; } | sed -n 's/^Collecting \([^ ]*\).*/  \1/p'
    [ ! -e "$folder/failed" ]
}
