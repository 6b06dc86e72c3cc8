#!/bin/sh
# Installs those of the named Debian packages that are missing:   sh examples/install_packages.sh PACKAGE...
#
# Nothing missing: does nothing. Otherwise it runs apt-get, as root or through sudo where that asks for no password;
# without the right to, it names the packages and stops with exit 1.
set -eu

if [ $# -eq 0 ]; then
    echo "usage: sh install_packages.sh PACKAGE..." >&2
    exit 1
fi
if ! command -v dpkg-query >/dev/null; then
    echo "not a Debian machine: this needs what Debian calls $*" >&2
    exit 0
fi

missing=
for package in "$@"; do
    dpkg-query -W -f '${Status}\n' "$package" 2>/dev/null | grep -q ' ok installed$' || missing="$missing $package"
done
[ -n "$missing" ] || exit 0

if [ "$(id -u)" -eq 0 ]; then
    as_root=
elif command -v sudo >/dev/null && sudo -n true 2>/dev/null; then
    as_root="sudo -n"
else
    echo "missing packages:$missing" >&2
    echo "no right to install them here; as root: apt-get install$missing" >&2
    exit 1
fi

echo "installing:$missing" >&2
log=$(mktemp)
trap 'rm -f "$log"' EXIT
# A list of packages that cannot be renewed may still do. The words of $missing and $as_root are meant to be split.
# shellcheck disable=SC2086
if ! { $as_root apt-get update || true
       $as_root env DEBIAN_FRONTEND=noninteractive apt-get install -y --no-install-recommends $missing; } >"$log" 2>&1
then
    cat "$log" >&2
    echo "could not install:$missing" >&2
    exit 1
fi
