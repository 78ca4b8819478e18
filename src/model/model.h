/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file model.h  What the models share: decibels, intervals from tails, quantiles. */
#ifndef ROUTEFADE_MODEL_MODEL_H
#define ROUTEFADE_MODEL_MODEL_H

#include <math.h>
#include <stdbool.h>

#include "routefade/model.h"

extern const struct rfade_model rfade_model_rayleigh;
extern const struct rfade_model rfade_model_rice;
extern const struct rfade_model rfade_model_nakagami;
extern const struct rfade_model rfade_model_lognormal;

/** ln(10)/10, the natural logarithm that 1 dB is, in two parts: 1e-32 together. */
#define RFADE_LN_PER_DB 0.23025850929940456
#define RFADE_LN_PER_DB_REST 1.1599128504932202e-17

/** Intervals up to here are tried by quadrature in dB; wider ones outgrow the longest rule. */
#define RFADE_NARROW_DB 50.0

/** ln of the power ratio that x_db stands for, to half a unit in the last place. */
static inline double rfade_log_ratio(double x_db)
{
    return isinf(x_db) ? x_db : fma(x_db, RFADE_LN_PER_DB, x_db * RFADE_LN_PER_DB_REST);
}

/** Levels that the functions of the table take. */
static inline bool rfade_level_valid(double x_db)
{
    return fabs(x_db) <= RFADE_LEVEL_LIMIT_DB || isinf(x_db);
}

static inline bool rfade_interval_valid(double low_db, double high_db)
{
    return rfade_level_valid(low_db) && rfade_level_valid(high_db) && low_db < high_db;
}

/** All fields NaN: what a failure leaves behind. */
static inline struct rfade_log_gradient rfade_log_gradient_nan(void)
{
    return (struct rfade_log_gradient){NAN, NAN, NAN};
}

/** One end of an interval: ln of both tails with their slopes. */
struct rfade_interval_end {
    struct rfade_log_gradient lower;
    struct rfade_log_gradient upper;
};

/** An end at infinity, of the given sign. */
struct rfade_interval_end rfade_interval_end_at_infinity(bool positive);

/**
 * An end from one tail, whichever was computed, that tail's slopes, and both logarithms:
 * slopes of lower and upper are opposite, and so are in ratio of the tails to each other.
 */
struct rfade_interval_end rfade_interval_end_from(const struct rfade_tails *tails,
                                                  bool is_upper, double d_mean_db,
                                                  double d_parameter);

/**
 * ln of the probability between two ends whose tails differ clearly, on the small side.
 */
struct rfade_log_gradient rfade_interval_from_ends(const struct rfade_interval_end *low,
                                                   const struct rfade_interval_end *high);

/** The table's log_density for any model: prepare, then log_density_of. */
enum rfade_status rfade_log_density_once(const struct rfade_model *model, double parameter,
                                         double x_db, struct rfade_log_gradient *result);

/** The table's log_interval for any model: prepare, then log_interval_of. */
enum rfade_status rfade_log_interval_once(const struct rfade_model *model, double parameter,
                                          double low_db, double high_db,
                                          struct rfade_log_gradient *result);

/** The table's quantile for any model with tails and log_density; see model.h. */
enum rfade_status rfade_quantile_by_newton(const struct rfade_model *model, double parameter,
                                           double lower, double upper, double *x_db);

#endif
