/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file import.h  One logger file into the survey, as one transaction: in whole, or not at
 * all.
 *
 * Readings are gathered by (vehicle, channel, campaign) and stored as extents of up to 65,536
 * in time order (equal times as they stand in the file). Fixes are stored once a position: a
 * position that the log repeats within 2 s is the same fix written again. Of two fixes of
 * one vehicle at one time the first in the file is kept.
 */
#ifndef ROUTEFADE_SURVEY_IMPORT_H
#define ROUTEFADE_SURVEY_IMPORT_H

#include <stdbool.h>
#include <stdint.h>

#include "ingest/sink.h"
#include "survey/survey.h"

struct rfade_import; /* opaque; one at a time on a survey */

struct rfade_import_counts {
    int64_t readings;
    int64_t fixes;           /**< stored */
    int64_t repeated_fixes;  /**< the same position again: not stored */
    int64_t differing_fixes; /**< another position at a time that has one: not stored */
    int64_t refused;
    int64_t extents;
};

/**
 * Begins the file's transaction.
 * @param name         the file's name as the user knows it; stored, never interpreted
 * @param sha256       of its bytes as they lie on disk, [32]
 * @param[out] import        NULL if the bytes are already known or on failure
 * @param[out] already_known the survey has these bytes: nothing was begun
 */
enum rfade_status rfade_import_begin(struct rfade_survey *survey, const char *name,
                                     const unsigned char sha256[32], int64_t size_bytes,
                                     struct rfade_import **import, bool *already_known,
                                     struct rfade_error *error);

/**
 * The sink that stores; valid until _finish or _abort. Its functions fail with RFADE_DOMAIN
 * for a reading without level and SNR, RFADE_INPUT for an empty name or one of over 200
 * bytes (a wrong column was mapped), else as SQLite does. After a failure: _abort.
 */
struct rfade_sink rfade_import_sink(struct rfade_import *import);

/** Stores what is left and commits; frees the import, also on failure (all rolled back). */
enum rfade_status rfade_import_finish(struct rfade_import *import, int64_t line_count,
                                      struct rfade_import_counts *counts,
                                      struct rfade_error *error);

/** Takes everything back and frees the import. NULL is harmless. */
void rfade_import_abort(struct rfade_import *import);

#endif
