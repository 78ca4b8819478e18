/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
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

static int bind_one(sqlite3_stmt *statement, int place, char letter, va_list *values)
{
    switch (letter) {
    case 'i':
        return sqlite3_bind_int64(statement, place, va_arg(*values, int64_t));
    case 'd': {
        double value = va_arg(*values, double);
        return isnan(value) ? sqlite3_bind_null(statement, place)
                            : sqlite3_bind_double(statement, place, value);
    }
    case 't':
        return sqlite3_bind_text(statement, place, va_arg(*values, const char *), -1,
                                 SQLITE_TRANSIENT);
    case 'b': {
        const void *bytes = va_arg(*values, const void *);
        size_t size = va_arg(*values, size_t);
        /* A NULL pointer would bind NULL; an empty BLOB is meant. */
        return sqlite3_bind_blob64(statement, place, bytes ? bytes : "", size,
                                   SQLITE_TRANSIENT);
    }
    default:
        return SQLITE_MISUSE;
    }
}

static enum rfade_status prepare(struct rfade_survey *survey, sqlite3_stmt **statement,
                                 struct rfade_error *error, const char *sql, const char *format,
                                 va_list *values)
{
    *statement = NULL;
    if (sqlite3_prepare_v2(rfade_survey_database(survey), sql, -1, statement, NULL) !=
        SQLITE_OK)
        return rfade_survey_failed(survey, "preparing SQL", error);
    for (int i = 0; format[i]; i++) {
        if (bind_one(*statement, i + 1, format[i], values) == SQLITE_OK)
            continue;
        enum rfade_status status = rfade_survey_failed(survey, "binding a value", error);
        sqlite3_finalize(*statement);
        *statement = NULL;
        return status;
    }
    return RFADE_OK;
}

enum rfade_status rfade_survey_prepare(struct rfade_survey *survey, sqlite3_stmt **statement,
                                       struct rfade_error *error, const char *sql,
                                       const char *format, ...)
{
    va_list values;
    va_start(values, format);
    enum rfade_status status = prepare(survey, statement, error, sql, format, &values);
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
    enum rfade_status status = prepare(survey, &statement, error, sql, format, &values);
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
    enum rfade_status status = prepare(survey, &statement, error, sql, format, &values);
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
