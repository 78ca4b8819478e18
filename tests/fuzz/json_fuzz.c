/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A JSON log read by the built-in map and by three others; see delimited_fuzz.c. */

#include "ingest/json.h"

#include "checked_log.h"
#include "fuzz.h"

static void read_with(const struct rfade_column_map *map, const char *text, size_t size)
{
    size_t columns = 0;
    (void)rfade_json_fit(map, text, size, &columns, NULL);
    struct checked_log log;
    checked_log_begin(&log, text, size);
    enum rfade_status status =
        rfade_json_read(log.lines, map, &log.names, &log.sink, &log.summary, NULL);
    FUZZ_REQUIRE(status == RFADE_OK || status == RFADE_INPUT);
    FUZZ_REQUIRE(log.summary.readings == log.counts.readings);
    FUZZ_REQUIRE(status != RFADE_OK || log.summary.refused == log.counts.refused);
    checked_log_end(&log);
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    static const char *const texts[] = {
        "[file]\nformat = json\n[time]\ncolumn = rx.time\n[level]\ncolumn = rx.rssi\n",
        "[file]\nformat = json\nrecords = $.runs[*].packets[*]\n[time]\ncolumn = t\n"
        "[level]\ncolumn = l\n",
        "[file]\nformat = json\nrecords = $[2]\n[time]\ncolumn = $[0]\n[level]\n"
        "column = $[#-1]\n"};
    enum { MAPS = sizeof texts / sizeof texts[0] };
    static struct rfade_column_map *maps[MAPS];
    const char *text = (const char *)data;
    for (size_t i = 0; i < MAPS; i++) {
        if (!maps[i])
            maps[i] = map_of(texts[i]);
        read_with(maps[i], text, size);
    }
    struct rfade_column_map *built_in = NULL;
    if (rfade_json_built_in(text, size, &built_in, NULL) == RFADE_OK)
        read_with(built_in, text, size);
    rfade_column_map_destroy(built_in);
    return 0;
}
