/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file likelihood.h  The log-likelihood of bins under one model, as a function of where the
 * model lies and how widely it spreads.
 *
 * theta[0] is the location (mean power, dB); theta[1] is the spread
 *     eta = -ln V,   V = normalised variance of power.
 * eta is ln m for Nakagami. For Rice it grows like K^2 near K = 0, where the score about K
 * itself vanishes, and like ln K for large K: so the likelihood is regular up to the boundary
 * K = 0 and nearly quadratic elsewhere. A window that took a share n of the power's variance
 * away moves eta by -ln(1 - n), whatever the model.
 */
#ifndef ROUTEFADE_ESTIMATE_LIKELIHOOD_H
#define ROUTEFADE_ESTIMATE_LIKELIHOOD_H

#include <stdbool.h>
#include <stddef.h>

#include "routefade/estimate.h"

enum { RFADE_LOCATION = 0, RFADE_SPREAD = 1 };

struct rfade_matrix {
    double at[2][2];
};

struct rfade_likelihood {
    double value;
    double gradient[2];
    struct rfade_matrix outer; /**< sum over readings of the products of their scores */
};

/** Bins of one model; the range in which its spread is looked for. */
struct rfade_sample {
    const struct rfade_model *model;
    const struct rfade_bin *bins;
    size_t bin_count;
    double spread_min; /**< eta of the widest spread that the model has (Rice: K = 0) */
    double spread_max; /**< eta of the narrowest spread that the bins can resolve */
};

/** A step to an end of the spread's range may miss it by its own rounding. */
static inline bool rfade_at_spread_min(const struct rfade_sample *sample, double spread)
{
    return spread <= sample->spread_min + 1e-12;
}

static inline bool rfade_at_spread_max(const struct rfade_sample *sample, double spread)
{
    return spread >= sample->spread_max - 1e-12;
}

static inline double rfade_spread_within(const struct rfade_sample *sample, double spread)
{
    spread = spread < sample->spread_min ? sample->spread_min : spread;
    return spread > sample->spread_max ? sample->spread_max : spread;
}

/** Has the model a parameter, and so a spread of its own? */
static inline bool rfade_has_spread(const struct rfade_model *model)
{
    return model->from_normalised_variance != NULL;
}

/** The parameter whose eta this is, within the model's domain. */
double rfade_parameter_of_spread(const struct rfade_model *model, double spread);

/** eta of a parameter. */
double rfade_spread_of_parameter(const struct rfade_model *model, double parameter);

/** d eta / d parameter, by central difference: about 1e-9 relative. */
double rfade_spread_slope(const struct rfade_model *model, double parameter);

/** ln of the probability (or density per dB) of one bin. */
enum rfade_status rfade_bin_log_probability(const struct rfade_model *model,
                                            const struct rfade_bin *bin, double location_db,
                                            double parameter, double *log_probability);

/** The same, with its scores about theta; not for the very end of the domain (K = 0). */
enum rfade_status rfade_bin_score(const struct rfade_model *model, const struct rfade_bin *bin,
                                  double location_db, double parameter, double *log_probability,
                                  double score[2]);

/** @return RFADE_OK, or what the model returned; RFADE_NO_CONVERGENCE if it isn't finite. */
enum rfade_status rfade_likelihood_at(const struct rfade_sample *sample, const double theta[2],
                                      struct rfade_likelihood *result);

#endif
