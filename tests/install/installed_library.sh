#!/bin/sh
# SPDX-License-Identifier: GPL-3.0-or-later
# Installs a build into a folder and builds a stranger's program on it: with pkg-config
# (shared, then static), with CMake, and with each header compiled as C++.
set -eu
build=$1 source=$2 stage=$3
rm -rf "$stage"
cmake --install "$build" --prefix "$stage" >/dev/null

expect() {
    answer=$("$1")
    [ "$answer" = "0.632121" ] || {
        echo "installed_library: $1 printed '$answer', 1 - exp(-1) = 0.632121 expected"
        exit 1
    }
}

libraries=$(dirname "$(find "$stage" -name routefade.pc)")/..
PKG_CONFIG_PATH=$(dirname "$(find "$stage" -name routefade.pc)")
export PKG_CONFIG_PATH
LD_LIBRARY_PATH=$libraries${LD_LIBRARY_PATH:+:$LD_LIBRARY_PATH}
export LD_LIBRARY_PATH
# shellcheck disable=SC2046  # the flags are several words
cc -std=c17 "$source/consumer.c" $(pkg-config --cflags --libs routefade) -lgsl -lgslcblas \
    -o "$stage/shared"
expect "$stage/shared"
cc -std=c17 "$source/consumer.c" $(pkg-config --cflags routefade) "$libraries/libroutefade.a" \
    -lgsl -lgslcblas -lm -o "$stage/static"
expect "$stage/static"

cmake -S "$source/consumer" -B "$stage/cmake" -G Ninja -DCMAKE_PREFIX_PATH="$stage" >/dev/null
cmake --build "$stage/cmake" >/dev/null
expect "$stage/cmake/consumer"

for header in "$stage"/include/routefade/*.h; do
    echo "#include \"$header\"" | c++ -std=c++17 -Wall -Wextra -Wpedantic -Werror \
        -I"$stage/include" -x c++ -fsyntax-only -
done
"$stage/bin/routefade" --version >/dev/null
