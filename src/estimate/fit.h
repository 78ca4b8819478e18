/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file fit.h  One model fitted to one set of bins. */
#ifndef ROUTEFADE_ESTIMATE_FIT_H
#define ROUTEFADE_ESTIMATE_FIT_H

#include "estimate/correlation.h"

/** Everything that a fit is made from. Borrowed throughout. */
struct rfade_problem {
    const struct rfade_bin *bins;
    size_t bin_count;
    const struct rfade_bin *quick; /**< the same readings in fewer bins, or the bins */
    size_t quick_count;
    const double *edges_db; /**< of the classes */
    const struct rfade_class_covariance *covariance;
    const struct rfade_class_covariance *counted; /**< for goodness */
    const struct rfade_estimate_settings *settings;
    double start_db;       /**< mean power by moments */
    double start_variance; /**< normalised variance of power by moments */
    double step_min_db;    /**< narrowest interval; 0 if there is a reading without */
};

/** What the comparison of models needs beside the fit itself. */
struct rfade_fit_details {
    struct rfade_sample sample;   /**< of the quick bins */
    struct rfade_maximum maximum; /**< of the quick bins: profiles start from it */
    struct rfade_maximum exact;   /**< of all bins; the same where they are the same */
    struct rfade_spread_of_estimates spread;
    struct rfade_class_scores scores;
};

/** Everything NaN. */
void rfade_fit_blank(const struct rfade_model *model, struct rfade_fit *fit);

enum rfade_status rfade_fit_problem(const struct rfade_model *model,
                                    const struct rfade_problem *problem, struct rfade_fit *fit,
                                    struct rfade_fit_details *details);

/** Quantile of Student's t, of the normal distribution for infinite degrees of freedom. */
double rfade_deviate(double probability, double degrees_of_freedom);

#endif
