# Sourced by the run scripts: brings system packages, virtual environment and extension up to date, from the repository's
# top folder. What is there already is kept; stamps hold the hash of what was installed.

venv=.venv
bin=$venv/bin

say() { printf '%s\n' "$*" >&2; }

as_root() {
    if [ "$(id -u)" -eq 0 ]; then
        "$@"
    elif command -v sudo >/dev/null; then
        sudo "$@"
    else
        say "Needs root or sudo for: $*"
        return 1
    fi
}

install_packages() {
    if ! command -v apt-get >/dev/null; then
        say "Please install the equivalents of these Debian packages, then run again: $*"
        return 1
    fi
    say "Installing system packages: $*"
    as_root apt-get update -qq &&
        as_root env DEBIAN_FRONTEND=noninteractive apt-get install -y -qq --no-install-recommends "$@" >/dev/null
}

# A Python of at least 3.11, whatever it can do otherwise.
is_new_enough() { "$1" -c 'import sys; sys.exit(sys.version_info < (3, 11))' >/dev/null 2>&1; }

# ... that can also make a virtual environment and compile against its headers.
is_complete() {
    is_new_enough "$1" && "$1" - >/dev/null 2>&1 <<'PYTHON'
import ensurepip, os, sysconfig, venv
assert os.path.exists(os.path.join(sysconfig.get_path("include"), "Python.h"))
PYTHON
}

find_python() {
    local name
    for name in ${TAUTWISE_PYTHON:-python3 python3.13 python3.12 python3.11 /usr/bin/python3}; do
        if "$1" "$name"; then
            command -v "$name"
            return
        fi
    done
    return 1
}

missing_packages() {
    command -v cc >/dev/null && command -v gcc >/dev/null || echo gcc libc6-dev
    command -v pkg-config >/dev/null || echo pkg-config
    pkg-config --exists 'nlopt >= 2.7.1' 2>/dev/null || echo libnlopt-dev
    [ -x $bin/python ] || find_python is_complete >/dev/null || echo python3 python3-dev python3-venv
}

need_system() {
    local packages
    packages=$(missing_packages)
    # shellcheck disable=SC2086 # a list of names
    [ -z "$packages" ] || install_packages $packages
}

need_venv() {
    [ -x $bin/python ] && $bin/python -c '' 2>/dev/null && return
    local python
    if ! python=$(find_python is_complete); then
        say "Found no Python of at least 3.11 with its venv module and headers."
        return 1
    fi
    say "Making the virtual environment with $("$python" --version)"
    rm -rf $venv build/built
    "$python" -m venv $venv
}

hash_of() { cat "$@" | sha256sum | cut -d' ' -f1; }

c_files() { find csrc/core csrc/search csrc/binding -name '*.[ch]' 2>/dev/null | LC_ALL=C sort; }

# Packages, when the metadata changed or the folder was moved; the extension comes with them.
need_packages() {
    local wanted
    wanted=$(pwd | hash_of pyproject.toml -)
    [ "$(cat $venv/installed 2>/dev/null)" != "$wanted" ] || return 0
    say "Installing the Python packages"
    $bin/python -m pip install -qq --disable-pip-version-check 'setuptools>=77' 'numpy>=2.0'
    $bin/python -m pip install -qq --disable-pip-version-check --no-build-isolation -e '.[test]'
    built_stamp >build/built
    echo "$wanted" >$venv/installed
}

built_stamp() { { echo "${TAUTWISE_WERROR:-0}"; c_files | xargs cat setup.py; } | sha256sum | cut -d' ' -f1; }

# The extension alone, when C sources changed. One built with warnings as errors serves every use.
need_extension() {
    local wanted strict
    wanted=$(built_stamp)
    strict=$(TAUTWISE_WERROR=1 built_stamp)
    case "$(cat build/built 2>/dev/null)" in
        "$wanted" | "$strict") ls python/tautwise/_core.*.so >/dev/null 2>&1 && return ;;
    esac
    say "Building the extension"
    if ! $bin/python setup.py -q build_ext --inplace --force >build/build.log 2>&1; then
        cat build/build.log >&2
        return 1
    fi
    echo "$wanted" >build/built
}

# Everything above. Two runs at once take turns.
set_up() {
    mkdir -p build
    need_system
    exec 9>build/lock
    flock 9 2>/dev/null || true
    need_venv
    need_packages
    need_extension
    exec 9>&-
}
