/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "survey/rows.h"

#include <math.h>
#include <stdarg.h>
#include <stdlib.h>

double rfade_column_real(sqlite3_stmt *statement, int column)
{
    return sqlite3_column_type(statement, column) == SQLITE_NULL
               ? NAN
               : sqlite3_column_double(statement, column);
}

static enum rfade_status step_through(struct rfade_survey *survey, sqlite3_stmt *statement,
                                      size_t row_size,
                                      void (*read_row)(sqlite3_stmt *, void *row), void **rows,
                                      size_t *count, struct rfade_error *error)
{
    char *read = NULL;
    size_t capacity = 0;
    bool row = false;
    enum rfade_status status;
    while ((status = rfade_survey_step(survey, statement, &row, error)) == RFADE_OK && row) {
        if (*count == capacity) {
            capacity = capacity ? capacity * 2 : 16;
            char *grown = realloc(read, capacity * row_size);
            if (!grown) {
                status = rfade_error_no_memory(error);
                break;
            }
            read = grown;
        }
        read_row(statement, read + *count * row_size);
        ++*count;
    }
    if (status != RFADE_OK) {
        free(read);
        *count = 0;
        return status;
    }
    *rows = read;
    return RFADE_OK;
}

enum rfade_status rfade_rows_query(struct rfade_survey *survey, size_t row_size,
                                   void (*read_row)(sqlite3_stmt *, void *row), void **rows,
                                   size_t *count, struct rfade_error *error, const char *sql,
                                   const char *format, ...)
{
    sqlite3_stmt *statement = NULL;
    va_list values;
    *rows = NULL;
    *count = 0;
    va_start(values, format);
    enum rfade_status status =
        rfade_survey_prepare_list(survey, &statement, error, sql, format, values);
    va_end(values);
    if (status == RFADE_OK)
        status = step_through(survey, statement, row_size, read_row, rows, count, error);
    sqlite3_finalize(statement);
    return status;
}
