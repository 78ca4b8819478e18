/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file checked_log.h  Bytes ready to be read as a log, into a checked sink. */
#ifndef ROUTEFADE_TESTS_FUZZ_CHECKED_LOG_H
#define ROUTEFADE_TESTS_FUZZ_CHECKED_LOG_H

#include "checked_sink.h"
#include "ingest/column_map.h"
#include "ingest/lines.h"
#include "ingest/open.h"

/** What a reader of logs is given, and what came out. Stays where it is: it points to itself.
 */
struct checked_log {
    struct rfade_byte_memory bytes;
    struct rfade_byte_source source;
    struct counts counts;
    struct rfade_sink sink;
    struct rfade_ingest_names names;
    struct rfade_ingest_summary summary;
    struct rfade_line_reader *lines;
};

/** Makes it ready; the text is borrowed. */
void checked_log_begin(struct checked_log *log, const char *text, size_t size);
void checked_log_end(struct checked_log *log);

/** The column map of a text that is one. */
struct rfade_column_map *map_of(const char *text);

#endif
