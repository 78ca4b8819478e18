/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file gamma_tails.h  Incomplete gamma tails about the mean, with their slope in shape. */
#ifndef ROUTEFADE_SPECIAL_GAMMA_TAILS_H
#define ROUTEFADE_SPECIAL_GAMMA_TAILS_H

#include "special/tails.h"

/** The tail that was computed, and d ln tail / d shape with log_ratio held. */
struct rfade_gamma_scaled {
    struct rfade_scaled_tail tail;
    double slope;
};

/**
 * One tail at x = shape exp(log_ratio), log_ratio finite, without loss near log_ratio = 0:
 * the small one, or the lower one where it is at most 0.98. No checks.
 */
struct rfade_gamma_scaled rfade_gamma_scaled(double shape, double log_ratio);

/** As rfade_gamma_tails(), likewise; log_ratio may be infinite. */
struct rfade_tails rfade_gamma_tails_at(double shape, double log_ratio);

/** ln of Gamma(shape) over Stirling's formula sqrt(2 pi / shape) (shape/e)^shape. */
double rfade_log_gamma_star(double shape);

#endif
