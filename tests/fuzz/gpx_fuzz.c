/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A GPX file as a log of positions, and as a reference line. */
#include <string.h>

#include "ingest/column_map_parts.h"
#include "ingest/gpx_track.h"
#include "route/read_line_text.h"

#include "checked_log.h"
#include "fuzz.h"

static void read_log(const struct rfade_column_map *map, const char *text, size_t size)
{
    struct checked_log log;
    checked_log_begin(&log, text, size);
    enum rfade_status status =
        rfade_gpx_track_read(log.lines, map, &log.names, &log.sink, &log.summary, NULL);
    FUZZ_REQUIRE(status == RFADE_OK || status == RFADE_INPUT);
    FUZZ_REQUIRE(status != RFADE_OK || log.summary.fixes == log.counts.fixes);
    checked_log_end(&log);
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    static struct rfade_column_map *map;
    if (!map)
        map = rfade_column_map_create("fuzz");
    char *text = malloc(size + 1);
    if (!map || !text)
        abort();
    memcpy(text, data, size);
    text[size] = '\0';
    read_log(map, text, size);
    struct rfade_place *places = NULL;
    size_t count = 0;
    struct rfade_error error = {0};
    enum rfade_status status =
        rfade_line_from_gpx("fuzz.gpx", text, strlen(text), &places, &count, &error);
    for (size_t i = 0; status == RFADE_OK && i < count; i++)
        FUZZ_REQUIRE(rfade_place_is_valid(&places[i]));
    FUZZ_REQUIRE(status == RFADE_OK || error.what[0] != '\0');
    free(places);
    free(text);
    return 0;
}
