# SPDX-License-Identifier: GPL-3.0-or-later
# Sourced by examples/run and tests/run: what must be installed, how it gets installed, how we build.
# Functions only; the caller has set -eu and stands in the top folder of the repository.

build_packages="gcc make cmake ninja-build pkg-config libgsl-dev libcsv-dev libjansson-dev nettle-dev"
run_packages="gnuplot-nox"
test_packages="libcmocka-dev bats python3 python3-scipy r-base-core mandoc valgrind clang clang-format
  clang-tidy libclang-rt-14-dev locales jq git"

say() { printf '%s\n' "$*"; }
die() { printf '%s\n' "$*" >&2; exit 1; }

is_debian_like() {
    [ -r /etc/os-release ] || return 1
    # shellcheck disable=SC1091
    ( . /etc/os-release; case " ${ID:-} ${ID_LIKE:-} " in *" debian "*|*" ubuntu "*) exit 0 ;; esac; exit 1 )
}

# The packages of the list that dpkg does not have.
missing_of() {
    for package in "$@"; do
        case $(dpkg-query -W -f='${db:Status-Abbrev}' "$package" 2>/dev/null || true) in
        ii*) ;;
        *) printf '%s ' "$package" ;;
        esac
    done
}

# On other systems: name what a build needs and is not there.
missing_elsewhere() {
    for tool in cc make cmake pkg-config "$@"; do
        command -v "$tool" >/dev/null 2>&1 || printf '%s ' "$tool"
    done
    if command -v pkg-config >/dev/null 2>&1; then
        for module in gsl jansson nettle; do
            pkg-config --exists "$module" || printf '%s ' "$module (with headers)"
        done
    fi
    if command -v cc >/dev/null 2>&1; then
        printf '#include <csv.h>\n' | cc -E - >/dev/null 2>&1 || printf 'libcsv (with csv.h) '
    fi
}

as_root() {
    if [ "$(id -u)" = 0 ]; then "$@"; elif command -v sudo >/dev/null 2>&1; then sudo "$@"; else return 127; fi
}

# set_up "PACKAGE..." TOOL...: have the packages, or on other systems the tools, or say what is missing and stop.
set_up() {
    packages=$1
    shift
    if ! is_debian_like; then
        lacking=$(missing_elsewhere "$@")
        [ -z "$lacking" ] || die "This is neither Debian nor Ubuntu: please install what is missing and call this again.
Missing: $lacking
(On Debian the packages are: $(echo $packages))"
        return 0
    fi
    # shellcheck disable=SC2086
    lacking=$(missing_of $packages)
    [ -n "$lacking" ] || return 0
    say "installing: $lacking"
    # shellcheck disable=SC2086
    { as_root apt-get update -qq && as_root env DEBIAN_FRONTEND=noninteractive apt-get install -y -qq \
        --no-install-recommends $lacking; } >/dev/null || die "Could not install the packages. As root:
  apt-get install --no-install-recommends $lacking"
}

# build PRESET [TARGET]: configure once, build, stay quiet unless it fails.
build() {
    generator=Ninja
    command -v ninja >/dev/null 2>&1 || generator="Unix Makefiles"
    log=build/$1.log
    mkdir -p build
    if ! { [ -f "build/$1/CMakeCache.txt" ] || cmake --preset "$1" -G "$generator"; } >"$log" 2>&1 ||
        ! cmake --build "build/$1" ${2:+--target "$2"} -j "$(getconf _NPROCESSORS_ONLN)" >>"$log" 2>&1; then
        tail -n 40 "$log" >&2
        die "The build failed; the whole log is in $log"
    fi
}
