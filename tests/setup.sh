#!/bin/sh
# SPDX-License-Identifier: GPL-3.0-or-later
# Installs the Debian packages that building and testing need, and only those that are
# missing. Harmless to run again.
set -eu

packages="cmake ninja-build gcc libc6-dev pkg-config libcsv-dev libgsl-dev libsqlite3-dev
libcmocka-dev libproj-dev proj-data libinih-dev zlib1g-dev libjansson-dev libexpat1-dev libmd-dev
tzdata"

missing=
for package in $packages "$@"; do
    state=$(dpkg-query -W -f '${db:Status-Status}' "$package" 2>/dev/null || true)
    [ "$state" = installed ] || missing="$missing $package"
done
[ -n "$missing" ] || exit 0

if ! command -v apt-get >/dev/null; then
    echo "setup: these Debian packages (or their like) are needed:$missing" >&2
    exit 1
fi
as_root=
if [ "$(id -u)" != 0 ]; then
    command -v sudo >/dev/null || {
        echo "setup: as root, run: apt-get install$missing" >&2
        exit 1
    }
    as_root=sudo
fi
echo "setup: installing$missing" >&2
# A machine that never asked for package lists has none; an old list may name files gone.
$as_root apt-get update -q >&2
$as_root env DEBIAN_FRONTEND=noninteractive apt-get install -y -q --no-install-recommends \
    $missing >&2
