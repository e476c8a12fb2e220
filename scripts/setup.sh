#!/bin/sh
# Install what is missing from Debian's packages: `setup.sh build` for building, `setup.sh check` for all tests.
# Silent when nothing is missing. Tested on Debian 12.
set -eu

build_packages='gcc make pkg-config libc6-dev liblapacke-dev libopenblas-pthread-dev libjansson-dev zlib1g-dev'
check_packages='g++ libcriterion-dev libpcg-cpp-dev python3 python3-numpy python3-scipy python3-gemmi python3-biopython
    refmac-dictionary bodr theseus-examples mustang-testdata valgrind clang clang-tidy llvm libclang-rt-14-dev libomp-dev'

case "${1:-build}" in
build) wanted=$build_packages ;;
check) wanted="$build_packages $check_packages" ;;
*) echo "usage: setup.sh build|check" >&2; exit 2 ;;
esac

if ! command -v dpkg-query >/dev/null 2>&1; then
    for tool in gcc make; do
        command -v "$tool" >/dev/null 2>&1 || {
            echo "setup: no Debian package manager here; install the equivalents of: $wanted" >&2
            exit 1
        }
    done
    exit 0
fi

# Another build of OpenBLAS serves as well.
is_there() {
    for name in "$1" $([ "$1" = libopenblas-pthread-dev ] && echo libopenblas-dev libopenblas-openmp-dev libopenblas-serial-dev); do
        dpkg-query -W -f='${Status}' "$name" 2>/dev/null | grep -q '^install ok installed$' && return 0
    done
    return 1
}

missing=
for package in $wanted; do is_there "$package" || missing="$missing $package"; done
[ -n "$missing" ] || exit 0

sudo=
if [ "$(id -u)" != 0 ]; then
    command -v sudo >/dev/null 2>&1 || {
        echo "setup: these packages are missing and need an administrator: apt-get install$missing" >&2
        exit 1
    }
    sudo=sudo
fi

echo "setup: installing$missing"
log=$(mktemp)
trap 'rm -f "$log"' EXIT
# shellcheck disable=SC2086
if ! { $sudo env DEBIAN_FRONTEND=noninteractive apt-get -q update &&
       $sudo env DEBIAN_FRONTEND=noninteractive apt-get -q -y --no-install-recommends install $missing; } >"$log" 2>&1 </dev/null; then
    tail -n 15 "$log" >&2
    echo "setup: could not install:$missing" >&2
    exit 1
fi
