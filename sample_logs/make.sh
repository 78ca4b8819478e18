#!/bin/sh
# SPDX-License-Identifier: GPL-3.0-or-later
# Makes the sample logs again with `routefade simulate`: sh sample_logs/make.sh PROGRAM
# Everything in them is invented.
set -eu
program=$1
here=$(cd "$(dirname "$0")" && pwd)
scratch=$(mktemp -d)
trap 'rm -rf "$scratch"' EXIT

drive() { # layout, seed, start, output, then further options
    layout=$1 seed=$2 start=$3 output=$4
    shift 4
    rm -f "$output"
    "$program" simulate --route "$here/marrowfen_valley_road.geojson" --layout "$layout" \
        --seed "$seed" --start "$start" --output "$output" --carrier-hz 457e6 \
        --k 0,0,1,4,2,0,10,3 --stretch-m 450 --mean-level-dbm -96 --shadowing-db 4 \
        --decorrelation-m 150 --step-db 1 --floor-dbm -120 --position-scatter-m 3 \
        --channel telemetry "$@"
}

drive comma 11 2027-01-12T20:00:00Z "$scratch/night-1-spreader.csv" --rate-hz 100 \
    --speed-kmh 36 --standstill-at-m 1500 --standstill-s 30 --vehicle spreader-1
gzip -9nc "$scratch/night-1-spreader.csv" >"$here/night-1-spreader.csv.gz"

drive semicolon 12 2027-01-13T19:30:00Z "$here/night-2-plough.csv" --rate-hz 25 --speed-kmh 30

drive blanks 13 2027-01-14T20:10:00Z "$here/night-3-spreader.txt" --rate-hz 25 --speed-kmh 36 \
    --second-channel standby --second-mean-level-dbm -101

# Dirt of the kinds that come back from the road, at fixed lines.
drive comma 14 2027-01-14T22:40:00Z "$scratch/night-3-plough.csv" --rate-hz 25 --speed-kmh 30 \
    --vehicle plough-2 --length-m 1800
awk -F, -v OFS=, '
    NR == 1 { printf "\357\273\277%s\r\n", $0; next }             # byte-order mark, CR LF
    NR == 200 { print "# logger restarted"; }                     # a comment in the data
    NR == 400 { print substr($0, 1, 14); next }                   # cut off
    NR == 401 { sub(/,/, ""); print; next }                       # a lost comma: shifted
    NR == 700 { $7 = "-8\0077"; print; next }                     # a control byte in a level
    NR == 900 { $2 = "0"; $3 = "0"; print; next }                 # no fix
    NR == 1100 { $7 = "n/a"; print; next }                        # no reading
    NR == 1300 { $7 = "48"; print; next }                         # a level that can not be
    NR == 1500 { print "time,latitude,longitude,speed_kmh,vehicle,channel,rssi_dbm"; }
    NR == 1700 { $1 = "2027-13-14T22:41:00Z"; print; next }       # no such month
    NR == 1900 { $2 = "65.0272"; $3 = "3.0812"; print; next }     # a digit swapped: far off
    { print }
    END { printf "2027-01-14T22:5" }                              # the last line cut off
' "$scratch/night-3-plough.csv" >"$here/night-3-plough.csv"
