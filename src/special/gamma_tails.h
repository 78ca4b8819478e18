/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file gamma_tails.h  Incomplete gamma tails about the mean, with their slope in shape. */
#ifndef ROUTEFADE_SPECIAL_GAMMA_TAILS_H
#define ROUTEFADE_SPECIAL_GAMMA_TAILS_H

#include "routefade/special.h"

struct rfade_gamma_gradient {
    double d_log_lower; /**< d ln lower / d shape, log_ratio held */
    double d_log_upper; /**< d ln upper / d shape, log_ratio held */
};

/**
 * As rfade_gamma_tails() at x = shape exp(log_ratio), without loss near log_ratio = 0;
 * no checks; log_ratio may be infinite. `gradient` may be NULL.
 */
struct rfade_tails rfade_gamma_tails_at(double shape, double log_ratio,
                                        struct rfade_gamma_gradient *gradient);

/** ln of Gamma(shape) over Stirling's formula sqrt(2 pi / shape) (shape/e)^shape. */
double rfade_log_gamma_star(double shape);

#endif
