/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * A log read by the built-in map and by three others. Whatever it holds: all that comes out
 * is in range, and every row is a reading, a position, or refused with a reason, or says
 * itself that there is nothing.
 */

#include "ingest/built_in_map.h"
#include "ingest/delimited.h"
#include "ingest/kind.h"

#include "checked_log.h"
#include "fuzz.h"

static void read_with(const struct rfade_column_map *map, const char *text, size_t size)
{
    struct rfade_layout *layout = NULL;
    if (rfade_layout_create(map, text, size, true, &layout, NULL) != RFADE_OK) {
        FUZZ_REQUIRE(!layout);
        return;
    }
    struct checked_log log;
    checked_log_begin(&log, text, size);
    (void)rfade_delimited_read(log.lines, map, layout, &log.names, &log.sink, &log.summary,
                               NULL);
    FUZZ_REQUIRE(log.summary.readings == log.counts.readings &&
                 log.summary.fixes == log.counts.fixes);
    FUZZ_REQUIRE(log.summary.refused == log.counts.refused &&
                 log.summary.rows <= log.summary.lines);
    size_t levels = map->level_count;
    FUZZ_REQUIRE(levels == 0 ||
                 log.summary.readings + log.summary.no_reading + log.summary.refused * levels >=
                     log.summary.rows);
    checked_log_end(&log);
    free(layout);
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    static const char blanks[] =
        "[file]\nseparator = blanks\nheader = no\n[time]\ncolumn = 1\n[position]\n"
        "x_column = 2\ny_column = 3\norigin_latitude = 54\norigin_longitude = -2\n"
        "[vehicle]\ncolumn = 4\n[level a]\ncolumn = 5\n[level b]\ncolumn = 6\nunit = mw\n";
    static const char semicolon[] =
        "[file]\nseparator = semicolon\ndecimal = comma\nheader = no\nrows = ragged\n"
        "[time]\ncolumn = 2\ndate_column = 1\nformat = pattern %d.%m.%Y %H:%M:%S\n"
        "zone = Europe/Berlin\n[channel]\ncolumn = 4\n[level]\ncolumn = 3\nno_reading = 0\n";
    static const char second_line[] =
        "[file]\nheader = 2\nquote = none\n[time]\ncolumn = time\n[position]\n"
        "latitude_column = lat\nlongitude_column = lon\n[level]\ncolumn = rssi\n";
    static const char *const texts[] = {blanks, semicolon, second_line};
    enum { MAPS = sizeof texts / sizeof texts[0] };
    static struct rfade_column_map *maps[MAPS];
    for (size_t i = 0; i < MAPS; i++)
        if (!maps[i])
            maps[i] = map_of(texts[i]);
    const char *text = (const char *)data;
    (void)rfade_other_kind(text, size);
    for (size_t i = 0; i < MAPS; i++)
        read_with(maps[i], text, size);
    struct rfade_column_map *built_in = NULL;
    if (rfade_built_in_map(text, size, &built_in, NULL) == RFADE_OK)
        read_with(built_in, text, size);
    rfade_column_map_destroy(built_in);
    return 0;
}
