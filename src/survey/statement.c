/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdarg.h>

#include "survey/layout.h"
#include "survey/survey.h"

enum rfade_status rfade_survey_execute(struct rfade_survey *survey, const char *sql,
                                       struct rfade_error *error)
{
    if (sqlite3_exec(rfade_survey_database(survey), sql, NULL, NULL, NULL) != SQLITE_OK)
        return rfade_survey_failed(survey, "running SQL", error);
    return RFADE_OK;
}

enum rfade_status rfade_survey_begin(struct rfade_survey *survey, struct rfade_error *error)
{
    return rfade_survey_execute(survey, "BEGIN IMMEDIATE", error);
}

enum rfade_status rfade_survey_commit(struct rfade_survey *survey, struct rfade_error *error)
{
    return rfade_survey_execute(survey, "COMMIT", error);
}

void rfade_survey_rollback(struct rfade_survey *survey)
{
    sqlite3 *database = rfade_survey_database(survey);
    if (!sqlite3_get_autocommit(database))
        (void)sqlite3_exec(database, "ROLLBACK", NULL, NULL, NULL);
}

/* Binds the values that follow, one letter of the format each. The analyser of clang 14 does
 * not see that the callers have begun the list. */
// NOLINTBEGIN(clang-analyzer-valist.Uninitialized)
static int bind_all(sqlite3_stmt *statement, const char *format, va_list values)
{
    int code = SQLITE_OK;
    for (int place = 1; code == SQLITE_OK && format[place - 1]; place++) {
        switch (format[place - 1]) {
        case 'i':
            code = sqlite3_bind_int64(statement, place, va_arg(values, int64_t));
            break;
        case 'd': /* SQLite stores a NaN as NULL */
            code = sqlite3_bind_double(statement, place, va_arg(values, double));
            break;
        case 't':
            code = sqlite3_bind_text(statement, place, va_arg(values, const char *), -1,
                                     SQLITE_TRANSIENT);
            break;
        case 'b': {
            const void *bytes = va_arg(values, const void *);
            size_t size = va_arg(values, size_t);
            /* A NULL pointer would bind NULL; an empty BLOB is meant. */
            code = sqlite3_bind_blob64(statement, place, bytes ? bytes : "", size,
                                       SQLITE_TRANSIENT);
            break;
        }
        default:
            return SQLITE_MISUSE;
        }
    }
    return code;
}
// NOLINTEND(clang-analyzer-valist.Uninitialized)

enum rfade_status rfade_survey_prepare_list(struct rfade_survey *survey,
                                            sqlite3_stmt **statement, struct rfade_error *error,
                                            const char *sql, const char *format, va_list values)
{
    *statement = NULL;
    if (sqlite3_prepare_v2(rfade_survey_database(survey), sql, -1, statement, NULL) !=
        SQLITE_OK)
        return rfade_survey_failed(survey, "preparing SQL", error);
    if (bind_all(*statement, format, values) == SQLITE_OK)
        return RFADE_OK;
    enum rfade_status status = rfade_survey_failed(survey, "binding a value", error);
    sqlite3_finalize(*statement);
    *statement = NULL;
    return status;
}

enum rfade_status rfade_survey_prepare(struct rfade_survey *survey, sqlite3_stmt **statement,
                                       struct rfade_error *error, const char *sql,
                                       const char *format, ...)
{
    va_list values;
    va_start(values, format);
    enum rfade_status status =
        rfade_survey_prepare_list(survey, statement, error, sql, format, values);
    va_end(values);
    return status;
}

enum rfade_status rfade_survey_step(struct rfade_survey *survey, sqlite3_stmt *statement,
                                    bool *row, struct rfade_error *error)
{
    int code = sqlite3_step(statement);
    *row = code == SQLITE_ROW;
    if (code == SQLITE_ROW || code == SQLITE_DONE)
        return RFADE_OK;
    return rfade_survey_failed(survey, "reading or writing", error);
}

enum rfade_status rfade_survey_run(struct rfade_survey *survey, struct rfade_error *error,
                                   const char *sql, const char *format, ...)
{
    sqlite3_stmt *statement = NULL;
    va_list values;
    va_start(values, format);
    enum rfade_status status =
        rfade_survey_prepare_list(survey, &statement, error, sql, format, values);
    va_end(values);
    bool row = true;
    while (status == RFADE_OK && row)
        status = rfade_survey_step(survey, statement, &row, error);
    sqlite3_finalize(statement);
    return status;
}

enum rfade_status rfade_survey_integer(struct rfade_survey *survey, int64_t *value, bool *found,
                                       struct rfade_error *error, const char *sql,
                                       const char *format, ...)
{
    *value = 0;
    *found = false;
    sqlite3_stmt *statement = NULL;
    va_list values;
    va_start(values, format);
    enum rfade_status status =
        rfade_survey_prepare_list(survey, &statement, error, sql, format, values);
    va_end(values);
    if (status == RFADE_OK)
        status = rfade_survey_step(survey, statement, found, error);
    if (status == RFADE_OK && *found)
        *value = sqlite3_column_int64(statement, 0);
    sqlite3_finalize(statement);
    return status;
}

enum rfade_status rfade_survey_changed(struct rfade_survey *survey, struct rfade_error *error)
{
    return rfade_survey_execute(survey, "UPDATE generation SET current = current + 1", error);
}
