/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file efficiency.h  How near the estimates of K and m come to the Cramer-Rao bound.
 *
 * The bound is computed here from densities written out anew with GSL's functions, the
 * readings are drawn by GSL's generators: nothing but the estimate itself is the library's.
 */
#ifndef ROUTEFADE_TEST_STATISTICS_EFFICIENCY_H
#define ROUTEFADE_TEST_STATISTICS_EFFICIENCY_H

#include <stdbool.h>

#include "routefade/model.h"

struct efficiency_cell {
    enum rfade_model_id model; /**< Rice or Nakagami */
    double parameter;
    double step_db; /**< of the receiver, about a mean power of 0 dB; 0: continuous readings */
    int readings;
};

/** What theory says of the maximum likelihood estimate, the mean power unknown too. */
struct efficiency_bound {
    double deviation; /**< Cramer-Rao bound of the standard deviation; for steps that of the
                           grouped law */
    double bias;      /**< to first order in 1/readings [Cox and Snell 1968] */
};

/** A mean over the draws, and the standard error that their number leaves it. */
struct efficiency_mean {
    double value;
    double error;
};

/**
 * Errors in units of the bound. `ratio` and `bias` are freed of most of the simulation's own
 * error by a control variate: the estimate's linear part, the mean of the efficient scores,
 * has the mean 0 and the variance of the bound exactly, and is close to the error itself
 * [Hammersley and Handscomb 1964, section 5.5].
 */
struct efficiency {
    struct efficiency_bound bound;
    int failed;                    /**< draws that the estimate refused */
    struct efficiency_mean plain;  /**< root mean square error, as drawn */
    struct efficiency_mean ratio;  /**< the same, controlled */
    struct efficiency_mean bias;   /**< mean error, controlled */
    struct efficiency_mean moment; /**< root mean square error of the moment estimate */
};

/** False, and NaN, if memory ran out; likewise below. */
bool efficiency_bound(const struct efficiency_cell *cell, struct efficiency_bound *bound);

/** Draws readings `draws` times and fits them. */
bool efficiency_run(const struct efficiency_cell *cell, unsigned long seed, int draws,
                    struct efficiency *result);

#endif
