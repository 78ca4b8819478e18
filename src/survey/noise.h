/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file noise.h  Noise that was measured along a route, by stretch and channel. */
#ifndef ROUTEFADE_SURVEY_NOISE_H
#define ROUTEFADE_SURVEY_NOISE_H

#include <stddef.h>

#include "survey/name.h"

/** Noise power in the channel's bandwidth over one stretch of a route. */
struct rfade_noise {
    char route[RFADE_NAME_SIZE];
    char channel[RFADE_NAME_SIZE];
    double from_m;    /**< chainage, >= 0 */
    double to_m;      /**< > from_m */
    double noise_dbm; /**< [-250, 100] */
};

/**
 * Lists stretches; those listed before for the same routes and channels are forgotten. All of
 * them, or none.
 * @param[out] refused  index of the one that the error is about; count if it is about none
 * @return RFADE_OK | RFADE_INPUT (an unknown route or channel, a value out of range, stretches
 *         of one route and channel that overlap) | RFADE_STORAGE
 */
enum rfade_status rfade_survey_noise_list(struct rfade_survey *survey,
                                          const struct rfade_noise *stretches, size_t count,
                                          size_t *refused, struct rfade_error *error);

/** All stretches by route, channel and place. free() the array. */
enum rfade_status rfade_survey_noise(struct rfade_survey *survey,
                                     struct rfade_noise **stretches, size_t *count,
                                     struct rfade_error *error);

#endif
