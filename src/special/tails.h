/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file tails.h  Putting both tails together from the one that was computed. */
#ifndef ROUTEFADE_SPECIAL_TAILS_H
#define ROUTEFADE_SPECIAL_TAILS_H

#include <stdbool.h>

#include "routefade/special.h"

/** All four fields from the small tail, its logarithm, and which one it is. */
struct rfade_tails rfade_tails_from(double tail, double log_tail, bool is_upper);

/**
 * A tail as exp(exponent) * factor, so that ratios of tails and densities of one exponent
 * keep their accuracy however small both are.
 */
struct rfade_scaled_tail {
    bool is_upper;
    double exponent;
    double factor; /**< > 0, unless it underflows */
    double log_factor;
};

/** All four fields from a scaled tail and exp(exponent). */
struct rfade_tails rfade_tails_from_scaled(const struct rfade_scaled_tail *tail,
                                           double exp_exponent);

/** All fields NaN: what a failure leaves behind. */
struct rfade_tails rfade_tails_nan(void);

/** exp(-x^2/2), the rounding of x^2 made good. */
double rfade_exp_half_square(double x);

/** exp(x) - 1 - x without cancellation. */
double rfade_exp_excess(double x);

#endif
