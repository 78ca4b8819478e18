/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file read.h  Readings and fixes back out of the survey, over all logger files, in an order
 * that doesn't depend on the order of import. Arrays are the caller's to free().
 */
#ifndef ROUTEFADE_SURVEY_READ_H
#define ROUTEFADE_SURVEY_READ_H

#include <stddef.h>

#include "route/match.h"
#include "survey/survey.h"

struct rfade_survey_reading {
    int64_t time_us;
    int32_t level_cdb; /**< as logged, without calibration; RFADE_NO_VALUE_CDB: none */
    int32_t snr_cdb;
    int32_t lost_before; /**< numbers missing since the reading before; RFADE_LOST_UNKNOWN */
};

/** The log has no sequence numbers, or they began anew. */
enum { RFADE_LOST_UNKNOWN = -1 };

/**
 * The readings of one vehicle, channel and campaign with from_us <= time <= to_us, merged on
 * (time, the file's SHA-256, place in the file). A reading (time, level, SNR) that several
 * files hold counts once: as often as the file that has it most often has it.
 * @param[out] repeated  readings left out because another file has them too
 */
enum rfade_status rfade_survey_trace_readings(struct rfade_survey *survey, int64_t vehicle_id,
                                              int64_t channel_id, int64_t campaign_id,
                                              int64_t from_us, int64_t to_us,
                                              struct rfade_survey_reading **readings,
                                              size_t *count, size_t *repeated,
                                              struct rfade_error *error);

/**
 * The fixes of a vehicle with from_us <= time <= to_us, by time, one a time: of several files
 * the one with the smallest SHA-256.
 */
enum rfade_status rfade_survey_fixes(struct rfade_survey *survey, int64_t vehicle_id,
                                     int64_t from_us, int64_t to_us,
                                     struct rfade_position **fixes, size_t *count,
                                     struct rfade_error *error);

/**
 * What the two above would return, as fingerprints that are cheap to get: SHA-256 over the
 * sorted (file's SHA-256, ordinal) of the extents that overlap the time range, and over the
 * sorted (file's SHA-256, number of fixes, first and last time) of the files with fixes in
 * it. Both depend on content alone, not on ids.
 */
enum rfade_status rfade_survey_readings_fingerprint(struct rfade_survey *survey,
                                                    int64_t vehicle_id, int64_t channel_id,
                                                    int64_t campaign_id, int64_t from_us,
                                                    int64_t to_us, unsigned char sha256[32],
                                                    struct rfade_error *error);
enum rfade_status rfade_survey_fixes_fingerprint(struct rfade_survey *survey,
                                                 int64_t vehicle_id, int64_t from_us,
                                                 int64_t to_us, unsigned char sha256[32],
                                                 struct rfade_error *error);

#endif
