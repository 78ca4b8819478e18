/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file rows.h  The rows of a statement as an array. */
#ifndef ROUTEFADE_SURVEY_ROWS_H
#define ROUTEFADE_SURVEY_ROWS_H

#include <stddef.h>

#include "survey/survey.h"

/**
 * Steps through a statement and lets `read_row` fill one element a row; finalises the
 * statement in any case (NULL is harmless). free() the array; NULL if there is no row.
 */
enum rfade_status rfade_rows_read(struct rfade_survey *survey, sqlite3_stmt *statement,
                                  size_t row_size, void (*read_row)(sqlite3_stmt *, void *row),
                                  void **rows, size_t *count, struct rfade_error *error);

/** A real column; NaN for NULL. */
double rfade_column_real(sqlite3_stmt *statement, int column);

#endif
