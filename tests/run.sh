#!/bin/sh
# SPDX-License-Identifier: GPL-3.0-or-later
# Builds routefade and runs all of its tests, from any folder: sh tests/run.sh
# Further arguments go to ctest, for instance: sh tests/run.sh -L unit
set -eu
root=$(cd "$(dirname "$0")/.." && pwd)

sh "$root/tests/setup.sh" g++
cmake -S "$root" -B "$root/build" -G Ninja -DROUTEFADE_WERROR=ON >/dev/null
cmake --build "$root/build"
cd "$root/build"
exec ctest --output-on-failure "$@"
