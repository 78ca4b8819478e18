/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file level_column.h  One column of levels out of a text file. */
#ifndef ROUTEFADE_CLI_LEVEL_COLUMN_H
#define ROUTEFADE_CLI_LEVEL_COLUMN_H

#include <stddef.h>

#include "common/error.h"

enum rfade_level_unit {
    RFADE_LEVEL_DBM,
    RFADE_LEVEL_MW,       /**< power, linear */
    RFADE_LEVEL_AMPLITUDE /**< envelope, linear; level = 20 log10 */
};

/**
 * Reads a headerless column of numbers, or a column of a file separated by commas,
 * semicolons or tabs (what the first line has), with or without a header. Blank lines and
 * lines that begin with '#' are no data. Any other line without a usable level in the column
 * is refused with its number: nothing is left out.
 * @param path    "-" is standard input
 * @param column  a name of the header or a number from 1; NULL: the file has one column
 * @param[out] levels_dbm  free() it; NULL on failure
 * @return RFADE_OK | RFADE_STORAGE | RFADE_INPUT | RFADE_NO_DATA | RFADE_NO_MEMORY
 */
enum rfade_status rfade_level_column_read(const char *path, const char *column,
                                          enum rfade_level_unit unit, double **levels_dbm,
                                          size_t *count, struct rfade_error *error);

#endif
