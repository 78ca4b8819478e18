/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file profile.h  Ends of intervals from the profile likelihood. */
#ifndef ROUTEFADE_ESTIMATE_PROFILE_H
#define ROUTEFADE_ESTIMATE_PROFILE_H

#include "estimate/maximise.h"

/**
 * Where the log-likelihood, maximised over the other dimension, has fallen by deviate^2/2.
 * @param dimension  RFADE_LOCATION or RFADE_SPREAD
 * @param direction  -1 or 1
 * @param deviate    > 0, for instance 1.96 times the root of the design effect
 * @param[out] end   theta[dimension]; an end of the spread's range if it doesn't fall so far
 */
enum rfade_status rfade_profile_end(const struct rfade_sample *sample,
                                    const struct rfade_maximum *maximum, int dimension,
                                    int direction, double deviate, double *end);

/** The profile log-likelihood with theta[dimension] held at a value. */
enum rfade_status rfade_profile_value(const struct rfade_sample *sample,
                                      const struct rfade_maximum *maximum, int dimension,
                                      double held, double *value);

#endif
