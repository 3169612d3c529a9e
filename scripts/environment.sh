# Makes .venv with the locked versions; sourced by the other scripts, from the root of the repository.

say() { printf '%s\n' "$*"; }
stop() { printf '%s\n' "$@" >&2; exit 1; }

new_enough() { "$1" -c 'import sys; sys.exit(not (3, 11) <= sys.version_info[:2] < (3, 15))' >/dev/null 2>&1; }

# Print the first Python found that will do; a name may be on the path and yet start nothing.
find_python() {
    local name
    for name in python3.13 python3.12 python3.11 python3.14 python3 python; do
        if command -v "$name" >/dev/null && new_enough "$name"; then
            command -v "$name"
            return
        fi
    done
    return 1
}

explain_missing_python() {
    local found="none"
    if command -v python3 >/dev/null; then
        found=$(python3 --version 2>&1)
    fi
    stop "groundroll needs Python 3.11 to 3.14; found: $found." \
        "Get one, for example: apt install python3.12 python3.12-venv, or brew install python@3.12; then run this again."
}

make_environment() {
    if new_enough .venv/bin/python && .venv/bin/python -c 'import pip' >/dev/null 2>&1; then
        return
    fi
    local python
    python=$(find_python) || explain_missing_python
    say "making .venv with $python"
    rm -rf .venv
    if command -v uv >/dev/null; then
        uv venv --quiet --seed --python "$python" .venv
        return
    fi
    "$python" -c 'import ensurepip' >/dev/null 2>&1 || stop \
        "$python cannot make virtual environments: its module ensurepip is missing." \
        "Get it, for example: apt install python3-venv (or python3.12-venv, by its version); then run this again."
    "$python" -m venv .venv
}

# install [EXTRA]: the package itself, editable, its dependencies at the versions of constraints.txt.
install() {
    local what=. extra=${1:-} locked mark
    [ -z "$extra" ] || what=".[$extra]"
    # What these very files have already installed need not be asked for again.
    locked=$(cat pyproject.toml scripts/constraints.txt | cksum | tr -d ' ')
    mark=.venv/installed.$locked.${extra:-plain}
    if [ -e "$mark" ]; then
        return
    fi
    say "installing $what at the versions of scripts/constraints.txt"
    if command -v uv >/dev/null; then
        uv pip install --quiet --python .venv/bin/python --constraint scripts/constraints.txt --editable "$what"
    else
        .venv/bin/python -m pip install --quiet --disable-pip-version-check --constraint scripts/constraints.txt --editable "$what"
    fi
    find .venv -maxdepth 1 -name 'installed.*' ! -name "installed.$locked.*" -delete
    : > "$mark"
}
