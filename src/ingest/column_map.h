/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file column_map.h  What the columns of a log hold: a column map.
 *
 * THE MAP LANGUAGE
 *
 * A column map is an INI file: sections in brackets, `key = value` lines, lines that start
 * with `#` or `;` are comments, lines hold at most 197 characters. All that it doesn't know is
 * refused, with the line and what would be right. Only [time] and a level or a position are
 * needed; everything else has a default.
 *
 * A COLUMN is named as the header names it (case, blanks and units in brackets do not matter
 * unless two names differ by nothing else), or counted from the left, the first being 1. A
 * name of digits alone stands in double quotes: column = "868".
 *
 *     [file]
 *     format = delimited       delimited | json | nmea | gpx; the map is for files of that
 *                              kind alone, which is told by their content
 *     name = *                 the map is for files with such names alone, folders left out:
 *                              * is anything, ? one character, and {vehicle}, {channel},
 *                              {campaign}, {date} (2026-01-15 or 20260115), {latitude} and
 *                              {longitude}, or {x} and {y}, are what the name says, as in
 *                              log-{vehicle}-{date}.csv*
 *     separator = comma        comma | semicolon | tab | pipe | blanks | one character;
 *                              `blanks`: any run of blanks and tabs, those at the ends of a
 *                              line do not count
 *     decimal = point          point | comma
 *     header = yes             yes: the first line after those skipped; no: columns are given
 *                              by number; or the header's line number, from 1
 *     skip = 0                 lines at the top that are no data (a `sep=,` line is passed
 *                              over by itself)
 *     comment = #              lines that start so are no data; none: there are no comments
 *     quote = double           double | single | none; a quoted value ends on its own line
 *     rows = even              even: a row with another number of values than most rows have
 *                              is refused, since its columns may be shifted; ragged: rows may
 *                              be longer or shorter as long as the columns needed are there
 *
 *     [time]
 *     column = time
 *     date_column = date       when the date stands in a column of its own: what is read is
 *                              the date, one blank, the time
 *     date = 2026-01-15        when only the time of day is logged: the day of the first row;
 *                              a time of day that falls by more than 12 hours is the next day
 *     format = auto            auto: iso8601, or an epoch whose unit follows from its digits;
 *                              iso8601: 2026-01-15T20:15:00.25+01:00 (T or a blank, fraction
 *                              and zone may be absent);
 *                              epoch_s | epoch_ms | epoch_us | epoch_ns: since 1970, with or
 *                              without a fraction;
 *                              pattern P: P made of %Y %y %m %b %d %e %j %H %I %M %S %f %p
 *                              %z %T %F %%, a blank for any blanks, and text that stands for
 *                              itself. %S takes a fraction along, %f is digits of a fraction,
 *                              %b an English month's three letters, %y 80..99 is 19xx
 *     zone = UTC               for times that carry none: UTC, +01:00, or a name of the IANA
 *                              time zone database such as Europe/Berlin. Of the two times
 *                              that an autumn change makes of one, the earlier is taken,
 *                              unless time would then run against the order of the file. A
 *                              time that a spring change leaves out is refused
 *     origin = 2026-01-15T20:00:00Z    for an epoch format that counts from there
 *     subsecond_column = nanoseconds   whole units to be added to the time
 *     subsecond_unit = ns      ms | us | ns
 *     offset_s = 0             seconds added to every time: GNSS time less the logger's
 *     gnss_column = utc        where the receiver's time stands beside the logger's (ISO 8601
 *                              in UTC, or an epoch): the file is read twice, and the median
 *                              of their difference, taken where the former changes, is added
 *                              to every time. A file whose clock was set meanwhile is refused
 *     spread = no              yes: of n rows in a row with the same whole second the k-th,
 *                              from 0, is put k / n of a second later
 *     backward = sort          sort: rows may come in any order; refuse: a row up to an hour
 *                              earlier than one before it of its vehicle is refused, since
 *                              the clock was put back and its times were there before
 *
 *     [position]               at most one of four forms:
 *     latitude_column = lat    degrees, WGS 84, north and east positive
 *     longitude_column = lon
 *
 *     x_column = easting       a grid by its EPSG code: x the easting, y the northing
 *     y_column = northing
 *     epsg = 32631
 *
 *     x_column = x             metres east (x) and north (y) of an origin
 *     y_column = y
 *     origin_latitude = 56.02
 *     origin_longitude = 3.05
 *
 *     latitude = 56.02         a receiver that stands
 *     longitude = 3.05
 *
 *     no_fix = -999, 9999      values of either coordinate that mean: no position. An empty
 *                              value and latitude 0 with longitude 0 always do
 *     held_s = 2               rows may repeat a position for so long until the next one
 *                              comes; a position repeated for longer is a standstill
 *     max_speed = 150          m/s; a position that could only be reached faster is refused
 *
 *     [speed]
 *     column = speed
 *     unit = km/h              km/h | m/s | mph | knots
 *
 *     [sequence]               numbers that go up by one from packet to packet of a vehicle on
 *     column = packet          a channel: each that is missing becomes a reading below the
 *     modulus = 65536          receiver's floor, at the place where it was lost. Give it only
 *                              where a packet gets lost for a weak signal, not for collisions
 *                              or a busy logger. `modulus`: how many numbers there are before
 *                              they begin again at 0 (at least 16); without it they never do.
 *                              A number further on than 1001, or than half the modulus, or
 *                              one that falls, is a restart. A row's number counts even if
 *                              its level is empty or refused
 *
 *     [vehicle]                each of these three by `name` or by `column`; vehicle and
 *     name = spreader-07       campaign may also be given on the command line. Names stay
 *     [campaign]               text: 0007 keeps its zeros
 *     name = winter-2026
 *     [channel]
 *     column = frequency
 *
 *     [level 457-main]         one section a level column; each is a channel named like the
 *     column = rssi_a          section. With a [channel] section there is one level only, and
 *                              the section is called [level]
 *     unit = dbm               dbm | dbw | dbuv (across 50 ohm) | w | mw | uw
 *     scale = 0.1              level = value * scale + offset, in the unit
 *     offset = -157
 *     no_reading = 0, 127      values, as logged, that mean: no reading. Empty, nan, na, n/a,
 *                              null, none, - and -- always do
 *     valid = -140 .. -20      levels outside are refused; dBm, ends included. Without it
 *                              -200 .. 20
 *     snr_column = snr_a       dB
 *     snr_scale = 1            as for the level
 *     snr_offset = 0
 *     snr_no_reading = -99
 *     noise_column = noise_a   in place of snr_column: noise in the bandwidth, dBm; SNR is the
 *                              level less it. snr_scale, _offset and _no_reading are its
 *
 * JSON
 *
 * With `format = json` a row is a record, and a column a path in it, as SQLite writes paths:
 * time, rx.rssi, $.rx."signal to noise", $[2], $.list[#-1] (`$.` may be left out before a
 * first name). Numbers may stand as texts. What is not there, and null, is empty; a record
 * that has none of the columns says that nothing was received. A record holds at most 65534
 * bytes, and what stands outside of it can't be a column. The keys of [file] that say
 * how lines are taken apart have no meaning, but for
 *
 *     [file]
 *     format = json
 *     records = $.packets[*]   where the records stand: $ is each value of the file (one a
 *                              line, or one after another), $[*] each element of an array,
 *                              $.runs[*].packets[*] those further inside; by default the
 *                              elements, where the file is an array, else its values
 *
 * NMEA 0183 AND GPX
 *
 * Such files give positions and need no map: their vehicle is the command line's. A map with
 * `format = nmea` or `format = gpx` may say [file] name, [vehicle] name, and of [position]
 * held_s and max_speed; for NMEA files without RMC also [time] date, that of the first line.
 *
 * WHAT BECOMES OF A ROW
 *
 * A row whose time can't be read, or of whose levels one can't be read and none is good, is
 * refused whole. A position or speed that can't be right is refused, and the row's reading is
 * kept. A row without a reading still gives its position. Whatever is refused is kept with
 * its line and a reason.
 */
#ifndef ROUTEFADE_INGEST_COLUMN_MAP_H
#define ROUTEFADE_INGEST_COLUMN_MAP_H

#include "common/error.h"

struct rfade_column_map; /* opaque here; its parts in column_map_parts.h */

/**
 * Reads a column map file. Refuses every unknown section, key and value (RFADE_INPUT, with
 * line and remedy), also what doesn't fit together. *map is NULL on failure.
 */
enum rfade_status rfade_column_map_read(const char *path, struct rfade_column_map **map,
                                        struct rfade_error *error);

/** As _read, from a text in memory; `name` stands in errors. */
enum rfade_status rfade_column_map_parse(const char *text, size_t text_size, const char *name,
                                         struct rfade_column_map **map,
                                         struct rfade_error *error);
void rfade_column_map_destroy(struct rfade_column_map *map); /* NULL is harmless */

#endif
