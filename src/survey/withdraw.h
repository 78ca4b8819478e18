/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file withdraw.h  Takes one logger file out of the survey again. */
#ifndef ROUTEFADE_SURVEY_WITHDRAW_H
#define ROUTEFADE_SURVEY_WITHDRAW_H

#include <stddef.h>

#include "survey/survey.h"

/** What went with the file. */
struct rfade_withdrawn {
    char name[512]; /**< of the file, as it was imported; cut if longer */
    int64_t readings;
    int64_t fixes;
    int64_t refused_lines;
    int64_t traces; /**< made from its readings or positions: `fit` makes them anew without */
};

/**
 * Finds a logger file by the SHA-256 of its bytes.
 * @return RFADE_OK | RFADE_INPUT (the survey has no such file) | RFADE_STORAGE
 */
enum rfade_status rfade_logger_file_by_sha256(struct rfade_survey *survey,
                                              const unsigned char sha256[32],
                                              int64_t *logger_file_id,
                                              struct rfade_error *error);

/**
 * Finds a logger file by the name that it was imported under, or by the first digits (at
 * least 8) of its SHA-256 in hexadecimal.
 * @return RFADE_OK | RFADE_INPUT (no such file, or several) | RFADE_STORAGE
 */
enum rfade_status rfade_logger_file_by_name(struct rfade_survey *survey, const char *name,
                                            int64_t *logger_file_id, struct rfade_error *error);

/**
 * Removes the file with its readings, positions and refused lines, the results that were made
 * from them, and vehicles, channels and campaigns that nothing else mentions. One transaction
 * of its own: in whole, or not at all.
 */
enum rfade_status rfade_survey_withdraw(struct rfade_survey *survey, int64_t logger_file_id,
                                        struct rfade_withdrawn *withdrawn,
                                        struct rfade_error *error);

#endif
