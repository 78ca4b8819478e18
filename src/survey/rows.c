/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "survey/rows.h"

#include <math.h>
#include <stdlib.h>

double rfade_column_real(sqlite3_stmt *statement, int column)
{
    return sqlite3_column_type(statement, column) == SQLITE_NULL
               ? NAN
               : sqlite3_column_double(statement, column);
}

enum rfade_status rfade_rows_read(struct rfade_survey *survey, sqlite3_stmt *statement,
                                  size_t row_size, void (*read_row)(sqlite3_stmt *, void *row),
                                  void **rows, size_t *count, struct rfade_error *error)
{
    char *read = NULL;
    size_t capacity = 0;
    *rows = NULL;
    *count = 0;
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
    sqlite3_finalize(statement);
    if (status != RFADE_OK) {
        free(read);
        *count = 0;
        return status;
    }
    *rows = read;
    return RFADE_OK;
}
