/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file fields.h  The values of a line of delimited text, taken apart with libcsv. */
#ifndef ROUTEFADE_INGEST_FIELDS_H
#define ROUTEFADE_INGEST_FIELDS_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "ingest/column_map_parts.h"
#include "ingest/lines.h"

enum { RFADE_NO_SLOT = UINT16_MAX, RFADE_MOST_SLOTS = 16 + 2 * RFADE_MOST_LEVELS };

/** A value that is wanted: its bytes, blanks around them and quotes taken off. */
struct rfade_field {
    size_t size;
    bool cut; /**< it was longer than `text` holds */
    char text[RFADE_NAME_SIZE];
};

struct rfade_splitter; /* opaque */

/** NULL: no memory. */
struct rfade_splitter *rfade_splitter_create(const struct rfade_file_map *file);
void rfade_splitter_destroy(struct rfade_splitter *splitter);

/**
 * Asks for the values of a column, from 1. Returns its slot; the same for the same column.
 * At most RFADE_MOST_SLOTS different columns up to RFADE_MOST_COLUMNS.
 */
uint16_t rfade_splitter_want(struct rfade_splitter *splitter, size_t column);

/**
 * Takes a line apart. A quoted value ends on its line: one stray quotation mark must not
 * swallow the rest of the file.
 * @return NULL, or a reason why the line can't be taken apart (static storage)
 */
const char *rfade_split(struct rfade_splitter *splitter, const struct rfade_line *line);

/** Of the line taken apart last: number of values, and bytes of the last one. */
size_t rfade_split_count(const struct rfade_splitter *splitter);
size_t rfade_split_last_size(const struct rfade_splitter *splitter);

/** Of the line taken apart last; empty if it has no such column. */
const struct rfade_field *rfade_split_field(const struct rfade_splitter *splitter,
                                            uint16_t slot);

/** A header's names, in order. */
struct rfade_header {
    size_t count;
    char names[RFADE_MOST_COLUMNS][RFADE_NAME_SIZE]; /**< long ones are cut */
};

/** As rfade_split, all names instead of the values wanted. */
const char *rfade_split_header(struct rfade_splitter *splitter, const struct rfade_line *line,
                               struct rfade_header *header);

#endif
