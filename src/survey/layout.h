/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file layout.h  The survey's tables: made, checked, migrated. Private to src/survey and its
 * tests; everything else goes through survey.h.
 *
 * PRAGMA user_version counts the tables that hold what was measured; they are migrated.
 * Results and views are known by the SHA-256 of the SQL that makes them (table
 * derived_object); they are dropped and made again when it differs.
 */
#ifndef ROUTEFADE_SURVEY_LAYOUT_H
#define ROUTEFADE_SURVEY_LAYOUT_H

#include <sqlite3.h>

#include "common/error.h"
#include "survey/embedded.h"
#include "survey/survey.h"

enum {
    RFADE_APPLICATION_ID = 0x52666465, /**< "Rfde" */
    RFADE_SCHEMA_VERSION = 2,
    RFADE_PAGE_SIZE = 16384
};

struct rfade_layout {
    int version; /**< user_version of a survey made today */
    const struct rfade_sql *schema;
    const struct rfade_sql *derived;
    const struct rfade_sql *views;
    const struct rfade_sql *migrations; /**< ascending versions; ends with text NULL */
};

/** The layout that is built in. */
struct rfade_layout rfade_layout_current(void);

/**
 * Makes the tables in an empty database, or brings an older survey to the layout, each in one
 * transaction. A survey that is current is not written.
 * @return RFADE_OK | RFADE_INPUT (no survey, newer, or older and `mode` is READ) |
 *         RFADE_STORAGE
 */
enum rfade_status rfade_layout_apply(struct rfade_survey *survey,
                                     const struct rfade_layout *layout,
                                     enum rfade_survey_mode mode, struct rfade_error *error);

/** rfade_survey_open with another layout than the built-in one. */
enum rfade_status rfade_survey_open_as(const char *path, enum rfade_survey_mode mode,
                                       const struct rfade_layout *layout,
                                       struct rfade_survey **survey, struct rfade_error *error);

/** Fills the error from the connection's last failure, with the survey's path and a remedy. */
enum rfade_status rfade_survey_failed(const struct rfade_survey *survey, const char *doing,
                                      struct rfade_error *error);

#endif
