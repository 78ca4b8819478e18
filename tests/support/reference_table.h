/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file reference_table.h  Tables of reference values in tests/reference: lines that begin
 * with '#' are comments, then comes one line of column names, then rows; tab separated, '-'
 * for an empty field. Whatever is wrong with a table fails the test that reads it.
 */
#ifndef ROUTEFADE_TESTS_SUPPORT_REFERENCE_TABLE_H
#define ROUTEFADE_TESTS_SUPPORT_REFERENCE_TABLE_H

#include <stdbool.h>
#include <stddef.h>
#include <stdio.h>

enum { REFERENCE_COLUMNS_MAX = 24, REFERENCE_LINE_MAX = 2048 };

struct reference_table {
    FILE *file;
    const char *file_name;
    size_t line; /**< of the row that was read last, from 1 */
    size_t row_count;
    size_t column_count;
    char header[REFERENCE_LINE_MAX];
    char row[REFERENCE_LINE_MAX];
    char *columns[REFERENCE_COLUMNS_MAX];
    char *fields[REFERENCE_COLUMNS_MAX];
};

/** Opens tests/reference/FILE_NAME and reads its column names. */
void reference_open(struct reference_table *table, const char *file_name);

/** Reads the next row; at the end closes the table and returns false. */
bool reference_next(struct reference_table *table);

/** The row's field of that column; valid until the next row. */
const char *reference_text(const struct reference_table *table, const char *column);

/** Likewise as a number; NAN for an empty field. */
double reference_number(const struct reference_table *table, const char *column);

/** Fails with file and line unless |actual - expected| <= relative |expected|. */
void reference_assert_close(const struct reference_table *table, const char *what,
                            double actual, double expected, double relative);

/**
 * Likewise against a column; what the column has below 1e-300 in magnitude, near the end of
 * the range of doubles, must only be as small.
 */
void reference_assert_column(const struct reference_table *table, const char *column,
                             double actual, double relative);

#endif
