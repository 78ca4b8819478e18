/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file json_path.h  A path in a JSON file, step by step. Pure functions. */
#ifndef ROUTEFADE_INGEST_JSON_PATH_H
#define ROUTEFADE_INGEST_JSON_PATH_H

#include <stdbool.h>
#include <stddef.h>

enum { RFADE_MOST_JSON_STEPS = 16 };

/** A name, or an element's index; RFADE_ANY_INDEX for each, RFADE_FROM_END from the end. */
struct rfade_json_step {
    const char *name; /**< NULL: an index. Borrowed from the path, without NUL */
    size_t name_size;
    size_t index;
};

#define RFADE_ANY_INDEX ((size_t)-1)
#define RFADE_FROM_END ((size_t)-2)

struct rfade_json_path {
    size_t count;
    struct rfade_json_step steps[RFADE_MOST_JSON_STEPS];
};

/**
 * Reads the path of records: $, then .name, ."name", [*] or [number] each, at most
 * RFADE_MOST_JSON_STEPS. Names are compared as the file writes them. False if the text is no
 * such path. The text is borrowed.
 */
bool rfade_json_path_read(const char *text, struct rfade_json_path *path);

/** Whether a text is a path to one value: as above, with [#-number], and without [*]. */
bool rfade_json_path_is_value(const char *text);

#endif
