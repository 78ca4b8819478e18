/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file format.h  What an output format provides; private to src/output. */
#ifndef ROUTEFADE_OUTPUT_FORMAT_H
#define ROUTEFADE_OUTPUT_FORMAT_H

#include "output/rows.h"

/** What a format's functions are given. */
struct rfade_rows {
    const struct rfade_rows_format *format;
    FILE *stream;
    const char *stream_name;
    const struct rfade_column *columns;
    size_t column_count;
    size_t row_count;           /**< rows written before this one */
    struct rfade_value *values; /**< the row, its texts made printable */
    char **texts;               /**< owns those texts */
    void *state;                /**< the format's own; made by begin, freed by destroy */
};

/** Each writes to rows->stream; lost writes are found by rows.c, not here. */
struct rfade_rows_format {
    const char *name;
    enum rfade_status (*begin)(struct rfade_rows *rows);
    enum rfade_status (*row)(struct rfade_rows *rows);
    enum rfade_status (*end)(struct rfade_rows *rows);
    void (*destroy)(struct rfade_rows *rows); /**< NULL: nothing to free */
};

#endif
