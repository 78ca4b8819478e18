/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file survey.h  The SQLite file that holds a survey: open, transactions, statements.
 * One survey handle belongs to one thread.
 */
#ifndef ROUTEFADE_SURVEY_SURVEY_H
#define ROUTEFADE_SURVEY_SURVEY_H

#include <sqlite3.h>
#include <stdarg.h>
#include <stdbool.h>
#include <stdint.h>

#include "common/error.h"

struct rfade_survey; /* opaque */

enum rfade_survey_mode {
    RFADE_SURVEY_READ,  /**< must exist; never written, never migrated */
    RFADE_SURVEY_WRITE, /**< must exist; migrated if it is older */
    RFADE_SURVEY_CREATE /**< made if missing; migrated if it is older */
};

/**
 * Opens a survey. Refuses a file that is no survey (its application_id differs), a survey
 * of a newer version, and in READ mode one of an older version that needs migration.
 */
enum rfade_status rfade_survey_open(const char *path, enum rfade_survey_mode mode,
                                    struct rfade_survey **survey, struct rfade_error *error);
void rfade_survey_close(struct rfade_survey *survey); /* NULL is harmless */

/** Borrowed: for the layers above, which prepare their own statements. */
sqlite3 *rfade_survey_database(struct rfade_survey *survey);
const char *rfade_survey_path(const struct rfade_survey *survey);

/** BEGIN IMMEDIATE, COMMIT, ROLLBACK. A rollback of no transaction is harmless. */
enum rfade_status rfade_survey_begin(struct rfade_survey *survey, struct rfade_error *error);
enum rfade_status rfade_survey_commit(struct rfade_survey *survey, struct rfade_error *error);
void rfade_survey_rollback(struct rfade_survey *survey);

/** Runs constant SQL without parameters. */
enum rfade_status rfade_survey_execute(struct rfade_survey *survey, const char *sql,
                                       struct rfade_error *error);

/**
 * Prepares constant SQL and binds values by `format`, one letter each: i int64_t, d double
 * (NaN binds NULL), t const char * (NULL binds NULL), b const void *, size_t (a BLOB).
 * The caller owns the statement and finalises it.
 */
enum rfade_status rfade_survey_prepare(struct rfade_survey *survey, sqlite3_stmt **statement,
                                       struct rfade_error *error, const char *sql,
                                       const char *format, ...);

/** The same with the values in a list, which the caller begins and ends. */
enum rfade_status rfade_survey_prepare_list(struct rfade_survey *survey,
                                            sqlite3_stmt **statement, struct rfade_error *error,
                                            const char *sql, const char *format,
                                            va_list values);

/** Steps to the next row: *row tells whether there is one. */
enum rfade_status rfade_survey_step(struct rfade_survey *survey, sqlite3_stmt *statement,
                                    bool *row, struct rfade_error *error);

/** Prepares, binds, runs to the end and finalises; for statements that return no rows. */
enum rfade_status rfade_survey_run(struct rfade_survey *survey, struct rfade_error *error,
                                   const char *sql, const char *format, ...);

/** As _run, for one integer answer; *found tells whether there was a row. */
enum rfade_status rfade_survey_integer(struct rfade_survey *survey, int64_t *value, bool *found,
                                       struct rfade_error *error, const char *sql,
                                       const char *format, ...);

/**
 * Counts a change of what results are made from, inside the caller's transaction: `fit` then
 * knows that it has work.
 */
enum rfade_status rfade_survey_changed(struct rfade_survey *survey, struct rfade_error *error);

#endif
