/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file noise_list.h  A list of measured noise out of a CSV file. */
#ifndef ROUTEFADE_CLI_NOISE_LIST_H
#define ROUTEFADE_CLI_NOISE_LIST_H

#include "survey/noise.h"

/** One line of the list and where it stands in the file. */
struct rfade_noise_line {
    struct rfade_noise noise;
    size_t number; /**< from 1 */
};

/**
 * Reads comma-separated text whose header names route, channel, from_m, to_m and noise_dbm, in
 * any order. Blank lines and lines that begin with # are passed over. free() the array.
 * @return RFADE_OK | RFADE_INPUT, with file and line | RFADE_NO_DATA (no line with a value) |
 *         RFADE_STORAGE (the file can't be read) | RFADE_NO_MEMORY
 */
enum rfade_status rfade_noise_list_read(const char *path, struct rfade_noise_line **lines,
                                        size_t *count, struct rfade_error *error);

#endif
