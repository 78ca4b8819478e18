/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "checked_log.h"

#include <stdlib.h>
#include <string.h>

void checked_log_begin(struct checked_log *log, const char *text, size_t size)
{
    *log = (struct checked_log){.bytes = {text, size}, .names = {.vehicle = "fuzz"}};
    log->source = (struct rfade_byte_source){&log->bytes, rfade_byte_memory_read};
    log->sink = checked_sink(&log->counts);
    log->lines = rfade_line_reader_create(&log->source);
    if (!log->lines)
        abort();
}

void checked_log_end(struct checked_log *log)
{
    rfade_line_reader_destroy(log->lines);
}

struct rfade_column_map *map_of(const char *text)
{
    struct rfade_column_map *map = NULL;
    if (rfade_column_map_parse(text, strlen(text), "fuzz.ini", &map, NULL) != RFADE_OK)
        abort();
    return map;
}
