# Set-up shared by pipelines/demo.sh and tests/all.sh. Sourced, not run: `source pipelines/setup.sh`.
#
# Needs rustup's toolchain and a C compiler; installs what else is missing through apt when it may, and otherwise prints
# the exact line to run and stops.

# Prints a message to stderr and ends the script that sourced this file.
stop() {
    printf 'set-up: %s\n' "$@" >&2
    exit 3
}

# require_packages PACKAGE...: installs Debian packages, or says how to.
require_packages() {
    [ "$#" -gt 0 ] || return 0
    local line="apt-get update && apt-get install -y --no-install-recommends $*"
    local -a as_root=()
    if ! command -v apt-get >/dev/null; then
        stop "these are missing: $*" "install them with your system's package manager (the names are Debian's), then start again"
    elif [ "$(id -u)" -ne 0 ]; then
        if command -v sudo >/dev/null && sudo -n true 2>/dev/null; then
            as_root=(sudo -n)
        else
            stop "these are missing: $*" "run this, then start again:" "    sudo sh -c '$line'"
        fi
    fi
    echo "set-up: installing $*"
    # An index that cannot be refreshed may still know the packages: the installation itself decides.
    "${as_root[@]}" apt-get update -q || true
    "${as_root[@]}" env DEBIAN_FRONTEND=noninteractive apt-get install -y -q --no-install-recommends "$@" ||
        stop "the installation failed; run this by hand, then start again:" "    $line"
}

# Rust, and what chemfiles (a C++ library built from its sources) needs to compile.
set_up_build() {
    if ! command -v cargo >/dev/null && [ -x "$HOME/.cargo/bin/cargo" ]; then
        PATH="$HOME/.cargo/bin:$PATH"
    fi
    command -v cargo >/dev/null ||
        stop "cargo is not installed; get it from https://rustup.rs, for example with:" \
            "    curl --proto '=https' --tlsv1.2 -sSf https://sh.rustup.rs | sh"
    local -a missing=()
    command -v cc >/dev/null || missing+=(gcc libc6-dev)
    command -v c++ >/dev/null || missing+=(g++)
    command -v cmake >/dev/null || missing+=(cmake)
    command -v make >/dev/null || missing+=(make)
    require_packages "${missing[@]}"
}

# Where cargo puts what it builds, as CARGO_TARGET_DIR or cargo's configuration say.
build_folder() {
    cargo metadata --format-version 1 --no-deps --locked --offline | sed -n 's/.*"target_directory":"\([^"]*\)".*/\1/p'
}

# set_up_python FOLDER REQUIREMENTS: a Python environment with exactly the packages of the requirements file.
set_up_python() {
    local folder=$1 requirements=$2
    local stamp="$folder/installed-requirements.txt"
    if [ -x "$folder/bin/python" ] && "$folder/bin/python" -c '' 2>/dev/null && cmp -s "$requirements" "$stamp"; then
        return 0
    fi
    python3 -c 'import ensurepip, venv' 2>/dev/null || require_packages python3 python3-venv
    echo "set-up: making a Python environment in $folder"
    rm -rf "$folder"
    python3 -m venv "$folder"
    "$folder/bin/python" -m pip install --quiet --disable-pip-version-check --requirement "$requirements" ||
        stop "pip could not install the packages of $requirements; see its message above"
    cp "$requirements" "$stamp"
}
