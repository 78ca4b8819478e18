#!/bin/sh
# SPDX-License-Identifier: GPL-3.0-or-later
# The main job on the sample logs, from any folder: sh sample_logs/demo.sh
# Builds routefade first, and installs what building needs. The survey is made in build/.
set -eu
root=$(cd "$(dirname "$0")/.." && pwd)

sh "$root/tests/setup.sh"
cmake -S "$root" -B "$root/build" -G Ninja >/dev/null
cmake --build "$root/build" --target routefade_program >/dev/null
PATH=$root/build:$PATH
ROUTEFADE_SURVEY=$root/build/demo.routefade
export PATH ROUTEFADE_SURVEY
rm -f "$ROUTEFADE_SURVEY"
cd "$root/sample_logs"

run() { # prints the command, then runs it
    printf '\n$ %s\n' "$*"
    "$@"
}

run routefade import --campaign january --columns plough_semicolon.ini \
    --columns spreader_blanks.ini night-1-spreader.csv.gz night-2-plough.csv \
    night-3-spreader.txt night-3-plough.csv
run routefade channel telemetry --carrier-hz 457e6 --bandwidth-hz 12500 --symbol-rate-hz 4800 \
    --noise-figure-db 8 --floor-dbm -120
run routefade channel standby --carrier-hz 457.1e6 --bandwidth-hz 12500 --symbol-rate-hz 4800 \
    --noise-figure-db 8 --floor-dbm -120
run routefade vehicle plough-2 --offset-db 1.5 --offset-uncertainty-db 0.5
run routefade route valley-road marrowfen_valley_road.geojson --segment-m 150
run routefade status
run routefade fit
run routefade fading --channel telemetry --worst 12
run routefade outage --channel telemetry --threshold-db 10 --worst 12
run routefade outage --channel telemetry --threshold-db 10 --whole-route
run routefade acceptance --channel telemetry --threshold-db 10 --target-outage 0.02
