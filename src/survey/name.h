/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file name.h  Names of vehicles, channels, campaigns and routes, and their ids. */
#ifndef ROUTEFADE_SURVEY_NAME_H
#define ROUTEFADE_SURVEY_NAME_H

#include "survey/survey.h"

/** Bytes of a name, its NUL included. */
enum { RFADE_NAME_SIZE = 201 };

/** The tables whose rows have a unique name. */
enum rfade_named {
    RFADE_NAMED_CAMPAIGN,
    RFADE_NAMED_VEHICLE,
    RFADE_NAMED_CHANNEL,
    RFADE_NAMED_ROUTE
};

/**
 * Refuses a name that somebody typed: empty, longer than 200 bytes, control characters,
 * bytes that are not UTF-8. Names out of a log are stored as they are; only empty or
 * longer ones are refused there.
 */
enum rfade_status rfade_name_check(enum rfade_named kind, const char *name,
                                   struct rfade_error *error);

/** The id of a name; *found false if the survey doesn't have it. */
enum rfade_status rfade_name_find(struct rfade_survey *survey, enum rfade_named kind,
                                  const char *name, int64_t *id, bool *found,
                                  struct rfade_error *error);

/** As _find, but a missing name is RFADE_INPUT with the remedy to list the names. */
enum rfade_status rfade_name_require(struct rfade_survey *survey, enum rfade_named kind,
                                     const char *name, int64_t *id, struct rfade_error *error);

/** The id of a name, which is added if it is missing. Not for routes. */
enum rfade_status rfade_name_add(struct rfade_survey *survey, enum rfade_named kind,
                                 const char *name, int64_t *id, struct rfade_error *error);

/** Copies a text column of a statement as a name; NULL gives "". */
void rfade_name_copy(char name[RFADE_NAME_SIZE], sqlite3_stmt *statement, int column);

#endif
