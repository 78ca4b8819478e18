/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file maximise.h  The maximum of a log-likelihood in one or two dimensions, with a range. */
#ifndef ROUTEFADE_ESTIMATE_MAXIMISE_H
#define ROUTEFADE_ESTIMATE_MAXIMISE_H

#include "estimate/likelihood.h"

/** A step may change V by a factor of e, the location by more than any fading's spread. */
#define RFADE_STEP_MAX_SPREAD 1.0
#define RFADE_STEP_MAX_DB 6.0

struct rfade_maximum {
    double theta[2];
    double value;
    struct rfade_matrix information; /**< minus the second derivatives of the log-likelihood */
    struct rfade_matrix inverse;     /**< of the information; one dimension for a model without
                                       parameter */
    bool at_spread_min;
    bool at_spread_max;
};

/** Inverse of a positive definite matrix; of its first element alone where `single`. */
bool rfade_invert(const struct rfade_matrix *matrix, bool single, struct rfade_matrix *inverse);

/**
 * Maximises from `start`. Quasi-Newton: the first curvature is the sum of outer products of
 * scores [Berndt, Hall, Hall and Hausman 1974], kept up by BFGS [Nocedal and Wright 2006,
 * eq. 6.19]; steps are cut to a range and halved until the likelihood rises.
 */
enum rfade_status rfade_maximise(const struct rfade_sample *sample, const double start[2],
                                 struct rfade_maximum *maximum);

/**
 * Takes a maximum found on nearly the same sample to this one's, with the curvature that it
 * has: a few evaluations.
 */
enum rfade_status rfade_polish(const struct rfade_sample *sample,
                               struct rfade_maximum *maximum);

#endif
