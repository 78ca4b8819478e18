/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file rows.h  Rows out of the program: one description of the columns, and a table of
 * formats that all commands share. A new format is one file and one line in rows.c.
 *
 *     rfade_rows_begin(...);  rfade_rows_row(...) for each row;  rfade_rows_end(...);
 *     rfade_rows_destroy(...) in every case.
 *
 * Text may come from a log: control characters and bytes that are not UTF-8 become '?'
 * before any format sees them, so that nothing is interpreted by a terminal.
 */
#ifndef ROUTEFADE_OUTPUT_ROWS_H
#define ROUTEFADE_OUTPUT_ROWS_H

#include <math.h>
#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>

#include "common/error.h"

enum rfade_column_kind {
    RFADE_COLUMN_TEXT,
    RFADE_COLUMN_INTEGER,
    RFADE_COLUMN_NUMBER,
    RFADE_COLUMN_PROBABILITY
};

/** What follows `kind` matters to tables only: CSV and JSON are exact. */
struct rfade_column {
    const char *name; /**< as COMMANDS name it, unit last */
    enum rfade_column_kind kind;
    int decimals; /**< NUMBER: digits after the point; PROBABILITY: significant digits; of a
                       value without an interval. 0 for a probability: 3 */
    bool interval_follows; /**< the next two columns are the ends of this one's interval: all
                                three are rounded to the second digit of its half-width,
                                with at least two significant digits of each end */
    bool shared_above; /**< where it is the same in every row, it stands once above the rows */
};

enum rfade_value_type {
    RFADE_VALUE_MISSING,
    RFADE_VALUE_TEXT,
    RFADE_VALUE_INTEGER,
    RFADE_VALUE_NUMBER,
    RFADE_VALUE_LIMIT /**< a number at the end of what can be told apart: tables say ">" */
};

/** One field; all zero is a missing one. A text is borrowed during the call. */
struct rfade_value {
    enum rfade_value_type type;
    const char *text;
    int64_t integer;
    double number;
};

static inline struct rfade_value rfade_value_text(const char *text)
{
    struct rfade_value value = {.type = text ? RFADE_VALUE_TEXT : RFADE_VALUE_MISSING,
                                .text = text};
    return value;
}

static inline struct rfade_value rfade_value_integer(int64_t integer)
{
    struct rfade_value value = {.type = RFADE_VALUE_INTEGER, .integer = integer};
    return value;
}

/** NaN is a missing number. */
static inline struct rfade_value rfade_value_number(double number)
{
    struct rfade_value value = {
        .type = isnan(number) ? RFADE_VALUE_MISSING : RFADE_VALUE_NUMBER, .number = number};
    return value;
}

static inline struct rfade_value rfade_value_limit(double number)
{
    struct rfade_value value = {.type = RFADE_VALUE_LIMIT, .number = number};
    return value;
}

static inline struct rfade_value rfade_value_missing(void)
{
    struct rfade_value value = {.type = RFADE_VALUE_MISSING};
    return value;
}

struct rfade_rows;        /* opaque */
struct rfade_rows_format; /* opaque */

extern const struct rfade_rows_format rfade_rows_table; /**< for people */
extern const struct rfade_rows_format rfade_rows_csv;   /**< RFC 4180, exact numbers */
extern const struct rfade_rows_format rfade_rows_json;  /**< array of objects, exact numbers */

/** The format of that name; NULL if there is none. */
const struct rfade_rows_format *rfade_rows_format(const char *name);

/** Name of the format number `index`, from 0; NULL past the last. */
const char *rfade_rows_format_name(size_t index);

/**
 * @param stream       written to, never closed
 * @param stream_name  for errors; NULL: "standard output"
 * @param columns      borrowed until rfade_rows_destroy
 */
enum rfade_status rfade_rows_begin(const struct rfade_rows_format *format, FILE *stream,
                                   const char *stream_name, const struct rfade_column *columns,
                                   size_t column_count, struct rfade_rows **rows,
                                   struct rfade_error *error);

/** One row, a value a column; its type must fit the column's kind. */
enum rfade_status rfade_rows_row(struct rfade_rows *rows, const struct rfade_value *values,
                                 struct rfade_error *error);

/** Finishes and flushes: only when this succeeds has everything been written. */
enum rfade_status rfade_rows_end(struct rfade_rows *rows, struct rfade_error *error);

void rfade_rows_destroy(struct rfade_rows *rows); /* NULL is harmless */

/**
 * A table of one row to standard output or the like: all of the above.
 * @param values  [column_count]
 */
enum rfade_status rfade_rows_single(const struct rfade_rows_format *format, FILE *stream,
                                    const struct rfade_column *columns, size_t column_count,
                                    const struct rfade_value *values,
                                    struct rfade_error *error);

/** Flushes a stream; RFADE_STORAGE if anything written to it was lost. */
enum rfade_status rfade_stream_flush(FILE *stream, const char *stream_name,
                                     struct rfade_error *error);

#endif
