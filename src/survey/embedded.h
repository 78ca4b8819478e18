/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file embedded.h  The .sql files of sql/, as they are built into the program. */
#ifndef ROUTEFADE_SURVEY_EMBEDDED_H
#define ROUTEFADE_SURVEY_EMBEDDED_H

#include <stddef.h>

struct rfade_sql {
    int version;      /**< user_version that a migration brings a survey to; else 0 */
    const char *text; /**< NUL-terminated; NULL ends a list */
    size_t size;      /**< without the NUL */
};

extern const struct rfade_sql rfade_sql_schema;
extern const struct rfade_sql rfade_sql_derived;
extern const struct rfade_sql rfade_sql_views;
extern const struct rfade_sql rfade_sql_migrations[]; /**< by version; ends with text NULL */

#endif
