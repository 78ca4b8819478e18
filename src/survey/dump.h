/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file dump.h  A survey as text that depends on its content alone: natural keys instead of
 * ids, sorted. Two surveys with the same dump hold the same, in whatever order they were
 * filled. Names of logger files are left out (the bytes are the file), and so are counts of
 * changes.
 */
#ifndef ROUTEFADE_SURVEY_DUMP_H
#define ROUTEFADE_SURVEY_DUMP_H

#include <stdio.h>

#include "survey/survey.h"

/**
 * Writes one line a row: the table's name, then column=value by tabs. Reals read back to the
 * same double; texts are quoted, with every byte outside printable ASCII as \xNN; BLOBs are
 * hexadecimal.
 */
enum rfade_status rfade_survey_dump(struct rfade_survey *survey, FILE *out,
                                    struct rfade_error *error);

#endif
