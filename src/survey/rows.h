/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file rows.h  The rows of a query as an array. */
#ifndef ROUTEFADE_SURVEY_ROWS_H
#define ROUTEFADE_SURVEY_ROWS_H

#include <stddef.h>

#include "survey/survey.h"

/**
 * Runs constant SQL with values bound as by rfade_survey_prepare, and lets `read_row` fill one
 * element a row. free() the array; NULL and 0 if there is no row, and on failure.
 */
enum rfade_status rfade_rows_query(struct rfade_survey *survey, size_t row_size,
                                   void (*read_row)(sqlite3_stmt *, void *row), void **rows,
                                   size_t *count, struct rfade_error *error, const char *sql,
                                   const char *format, ...);

/** A real column; NaN for NULL. */
double rfade_column_real(sqlite3_stmt *statement, int column);

#endif
