#!/usr/bin/env bash
# Brings what the program needs beside its source and cannot carry: the recogniser library (libvosk)
# for this processor, and, when allowed, the system packages the build asks for. Safe to run again
# and again; says what it did and what it skipped; leaves nothing half done when interrupted.
#
#   ./models-download.sh                    system packages and libvosk
#   ./models-download.sh --no-system        libvosk only
#   ./models-download.sh --tests            also what tests compare with: spoken prompts of a Debian
#                                           package, Python's venv for published tables; what cannot
#                                           be had is told, and the tests that need it skip
#   ./models-download.sh --voice NAME --from SOURCE [--sha256 DIGEST]
#                                           also a general Vosk model (zip) from its publisher:
#                                           SOURCE is an address or a file you name. Not needed:
#                                           the program carries its own voice.
#
# Exit code: 0 all there, 1 something is missing (told above), 2 wrong arguments, 130 interrupted.
set -euo pipefail

vosk_version=0.3.45
here=$(cd "$(dirname "${BASH_SOURCE[0]}")" && pwd)
models=$here/models
missing=0

say() { printf '%s\n' "$*"; }
trouble() { printf 'models-download: %s\n' "$*" >&2; }
usage() { sed -n '2,/^set -euo/{/^#/!d;s/^# \{0,1\}//;p}' "${BASH_SOURCE[0]}"; }

system=yes tests=no voice='' from='' digest=''
while [ $# -gt 0 ]; do
    case $1 in
    --no-system) system=no ;;
    --tests) tests=yes ;;
    --voice) voice=${2:?"--voice needs a name"} && shift ;;
    --from) from=${2:?"--from needs an address or a file"} && shift ;;
    --sha256) digest=${2:?"--sha256 needs a digest"} && shift ;;
    -h | --help) usage && exit 0 ;;
    *) trouble "unknown argument $1" && usage >&2 && exit 2 ;;
    esac
    shift
done
case $voice in */* | .*) trouble "--voice takes a plain name" && exit 2 ;; esac
if [ -n "$voice" ] && [ -z "$from" ]; then
    trouble "--voice $voice needs --from: an address or a file; this script knows none"
    exit 2
fi

# Everything is made in here and moved into place whole.
work=$(mktemp -d "$here/.models-XXXXXX")
trap 'rm -rf "$work"' EXIT
trap 'exit 130' INT TERM HUP

# Digests are those of the wheels and of the library inside, as published.
case $(uname -m) in
x86_64 | amd64)
    platform=manylinux_2_12_x86_64
    wheel=25e025093c4399d7278f543568ed8cc5460ac3a4bf48c23673ace1e25d26619f
    library=85c4654de3acdeb99abab86eeb2a6e603927d37089597c0fcc33d8638dc2ccaf
    ;;
aarch64 | arm64)
    platform=manylinux2014_aarch64
    wheel=54efb47dd890e544e9e20f0316413acec7f8680d04ec095c6140ab4e70262704
    library=0e9df29f060a93cf3df3263a4d3635e1b75688a5fd84e86ade1599372e3c9597
    ;;
armv7l | armv8l)
    platform=linux_armv7l
    wheel=4221f83287eefe5abbe54fc6f1da5774e9e3ffcbbdca1705a466b341093b072e
    library=50e9e705777774ce3f33636939c10cfa2c27d2d2c6441466146f35dacd4e9be4
    ;;
*)
    trouble "there is no libvosk for this processor ($(uname -m)): the program works from the keypad"
    exit 1
    ;;
esac

have() { command -v "$1" >/dev/null 2>&1; }
has_pip() { have python3 && python3 -m pip --version >/dev/null 2>&1; }
has_venv() { have python3 && python3 -c 'import ensurepip, venv' >/dev/null 2>&1; }
is_arm() { case $platform in *aarch64 | *armv7l) return 0 ;; *) return 1 ;; esac }
has_atomic() { compgen -G '/usr/lib/*/libatomic.so.1' >/dev/null || compgen -G '/lib/*/libatomic.so.1' >/dev/null; }

# --- system packages -----------------------------------------------------------------------------
wanted() {
    have cc || have gcc || echo gcc libc6-dev
    have pkg-config || echo pkg-config
    if ! have pkg-config || ! pkg-config --exists alsa; then echo libasound2-dev; fi
    has_pip || echo python3-pip
    have unzip || echo unzip
    if is_arm && ! has_atomic; then echo libatomic1; fi
    if [ "$tests" = yes ] && ! has_venv; then echo python3-venv; fi
}

# Reads guessed names of places aloud (plan check --say). Nothing else needs it, so that it cannot be
# had is told and is no failure.
install_synthesiser() {
    local as=()
    if have espeak-ng; then
        say "espeak-ng: there, skipped"
        return 0
    fi
    if [ "$(id -u)" -ne 0 ]; then as=(sudo -n); fi
    if have apt-get && { [ "$(id -u)" -eq 0 ] || { have sudo && sudo -n true 2>/dev/null; }; } &&
        "${as[@]}" apt-get update -q &&
        "${as[@]}" env DEBIAN_FRONTEND=noninteractive \
            apt-get install -y -q --no-install-recommends espeak-ng; then
        say "espeak-ng: installed"
    else
        say "espeak-ng: not there; names of places are not read aloud, tests of that will skip"
    fi
}

install_system() {
    local list as=()
    list=$(wanted | tr '\n' ' ')
    if [ -z "$list" ]; then
        say "system packages: all there, skipped"
        return 0
    fi
    if ! have apt-get; then
        trouble "please install what your system calls: $list"
        missing=1
        return 0
    fi
    if [ "$(id -u)" -ne 0 ]; then
        # -n: never ask for a password; a prompt would hang a machine nobody watches.
        if have sudo && sudo -n true 2>/dev/null; then
            as=(sudo -n)
        else
            trouble "may not install system packages; please run: sudo apt-get install ${list% }"
            missing=1
            return 0
        fi
    fi
    say "system packages: installing ${list% }"
    # A fresh machine has no package lists yet.
    if ! "${as[@]}" apt-get update -q ||
        ! "${as[@]}" env DEBIAN_FRONTEND=noninteractive \
            apt-get install -y -q --no-install-recommends $list; then
        trouble "apt-get failed; please run: apt-get update && apt-get install ${list% }"
        missing=1
    fi
}

# --- libvosk -------------------------------------------------------------------------------------
digest_of() { sha256sum "$1" | cut -d' ' -f1; }

fetch_libvosk() {
    if [ -f "$models/libvosk.so" ] && [ "$(digest_of "$models/libvosk.so")" = "$library" ]; then
        say "libvosk $vosk_version: there and as published, skipped"
        return 0
    fi
    if ! has_pip; then
        trouble "libvosk is fetched with pip, which is not there (package python3-pip)"
        missing=1
        return 0
    fi
    say "libvosk $vosk_version: fetching the package for $platform (3 to 8 MB)"
    printf 'vosk==%s --hash=sha256:%s\n' "$vosk_version" "$wheel" >"$work/pinned.txt"
    if ! python3 -m pip --disable-pip-version-check --no-input download --no-deps \
        --only-binary=:all: --platform "$platform" --require-hashes \
        --dest "$work/wheel" --requirement "$work/pinned.txt"; then
        trouble "libvosk could not be fetched; run this again when there is a network"
        missing=1
        return 0
    fi
    mkdir -p "$work/unpacked"
    python3 -m zipfile -e "$work"/wheel/vosk-*.whl "$work/unpacked"
    if [ "$(digest_of "$work/unpacked/vosk/libvosk.so")" != "$library" ]; then
        trouble "the library in the package is not the one that was pinned; nothing was changed"
        missing=1
        return 0
    fi
    mkdir -p "$models"
    chmod 644 "$work/unpacked/vosk/libvosk.so"
    mv -f "$work/unpacked/vosk/libvosk.so" "$models/libvosk.so"
    say "libvosk $vosk_version: verified and put in models/"
}

notices() {
    [ -f "$models/libvosk.so" ] || return 0
    cat >"$work/NOTICES.txt" <<'EOF'
libvosk.so (version 0.3.45) comes from the Python package `vosk` and is licensed under the Apache
License 2.0 (its text is beside this file as LICENSE-APACHE). The package carries no licence file.
Linked into it, by their own statements: Kaldi (Apache License 2.0), OpenFst (Apache License 2.0),
OpenBLAS (BSD, three clauses) or CLAPACK (BSD-like), the run-time library of GCC (GPL 3 with the
run-time library exception).
EOF
    cp "$here/LICENSE-APACHE" "$work/LICENSE-APACHE"
    mv -f "$work/NOTICES.txt" "$work/LICENSE-APACHE" "$models/"
}

# --- a general voice, if one was asked for -------------------------------------------------------
fetch() { # SOURCE FILE
    if [ -f "$1" ]; then
        cp "$1" "$2"
    elif have curl; then
        curl --fail --location --progress-bar --output "$2" "$1"
    elif have wget; then
        wget --output-document="$2" "$1"
    else
        python3 -c 'import sys, urllib.request; urllib.request.urlretrieve(*sys.argv[1:])' "$1" "$2"
    fi
}

fetch_voice() {
    local got model
    if [ -d "$models/$voice" ]; then
        say "voice $voice: there, skipped (remove models/$voice to fetch it again)"
        return 0
    fi
    say "voice $voice: fetching from $from"
    if ! fetch "$from" "$work/voice.zip"; then
        trouble "voice $voice could not be fetched from $from"
        missing=1
        return 0
    fi
    got=$(digest_of "$work/voice.zip")
    if [ -z "$digest" ]; then
        say "voice $voice: its digest is $got; nothing to check it against (give it as --sha256 next time)"
    elif [ "$got" != "$digest" ]; then
        trouble "voice $voice has digest $got, not $digest; nothing was changed"
        missing=1
        return 0
    fi
    mkdir -p "$work/voice"
    if ! python3 -m zipfile -e "$work/voice.zip" "$work/voice"; then
        trouble "what came for voice $voice is no zip archive"
        missing=1
        return 0
    fi
    model=$(find "$work/voice" -name HCLr.fst -path '*/graph/*' -print -quit)
    if [ -z "$model" ]; then
        trouble "voice $voice has no graph/HCLr.fst: only models with a dynamic graph can be used"
        missing=1
        return 0
    fi
    mkdir -p "$models"
    mv "$(dirname "$(dirname "$model")")" "$models/$voice"
    say "voice $voice: in models/$voice; lay the grammars over it with: handsfull voice adopt models/$voice"
}

# --- what tests compare with ---------------------------------------------------------------------
# Prompts of a telephone exchange (CC BY-SA), spoken by a person: the tests hear them. They are not
# part of the project and are unpacked where tests look for them.
fetch_prompts() {
    local package=asterisk-core-sounds-en-wav into=$here/target/tmp/debian-prompts
    if [ -d "$into" ]; then
        say "spoken prompts: there, skipped"
        return 0
    fi
    if ! have apt-get || ! have dpkg-deb; then
        say "spoken prompts: no apt-get here; the test that hears them will skip"
        return 0
    fi
    mkdir -p "$work/prompts" "$here/target/tmp"
    if (cd "$work/prompts" && apt-get download -q $package) &&
        dpkg-deb -x "$work"/prompts/*.deb "$work/prompts/x"; then
        mv "$work/prompts/x" "$into"
        say "spoken prompts: in target/tmp"
    else
        say "spoken prompts: could not be fetched; the test that hears them will skip"
    fi
}

[ "$system" = yes ] && install_system
[ "$system" = yes ] && install_synthesiser
fetch_libvosk
notices
[ "$tests" = yes ] && fetch_prompts
[ -n "$voice" ] && fetch_voice
if [ "$missing" -ne 0 ]; then
    trouble "not everything is there; without libvosk the program works from the keypad"
    exit 1
fi
say "all there; the program builds its own voice when it first listens (or: cargo run --release -- voice build)"
