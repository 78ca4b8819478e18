/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file correlation.h  What correlation along the travel does to the variance of scores.
 *
 * Block products of class weights give the long-run covariance of the classes' weights, and
 * through it that of any score. Lags of one and two blocks count by Bartlett's weights 2/3
 * and 1/3, which keep every variance positive [Newey and West 1987, eq. 5].
 */
#ifndef ROUTEFADE_ESTIMATE_CORRELATION_H
#define ROUTEFADE_ESTIMATE_CORRELATION_H

#include "estimate/classes.h"
#include "estimate/maximise.h"

/** Covariance of the classes' weights, in units of readings. */
struct rfade_class_covariance {
    double readings;
    double observed[RFADE_COARSE_BINS]; /**< readings by class, of the bins */
    double total[RFADE_COARSE_BINS];    /**< likewise, of the blocks: they are rounded apart */
    double value[RFADE_COARSE_BINS][RFADE_COARSE_BINS];
    double degrees_of_freedom; /**< of the covariance; INFINITY for independent readings */
    bool measured;             /**< false: too few blocks; see rfade_design_effect */
    double blocks;
};

/** Mean score of the readings of each class, about theta. */
struct rfade_class_scores {
    double mean[RFADE_COARSE_BINS][2];
};

/**
 * From blocks, or of independent readings (multinomial) where blocks is NULL.
 * @param observed  readings by class, of the bins
 */
void rfade_class_covariance(const struct rfade_blocks *blocks,
                            const double observed[RFADE_COARSE_BINS],
                            struct rfade_class_covariance *covariance);

/**
 * Variance of the sum over readings of sum_c weight_c over that for independent readings.
 * Where it can't be measured, every block counts as one reading.
 */
double rfade_design_effect(const struct rfade_class_covariance *covariance,
                           const double influence[RFADE_COARSE_BINS]);

/** Mean scores by class at the maximum. */
enum rfade_status rfade_class_scores(const struct rfade_sample *sample, const double *edges_db,
                                     const struct rfade_maximum *maximum,
                                     struct rfade_class_scores *scores);

/** Variances of theta, correlation counted. */
struct rfade_spread_of_estimates {
    double design_effect[2];
    double covariance[2][2]; /**< of theta */
    double trace;            /**< of J H^-1: the penalty of AIC; the number of parameters for
                                  independent readings */
};

void rfade_estimates_spread(const struct rfade_class_covariance *covariance,
                            const struct rfade_class_scores *scores,
                            const struct rfade_maximum *maximum, int dimensions,
                            struct rfade_spread_of_estimates *result);

#endif
