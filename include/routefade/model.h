/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file model.h  The fading models as one table of functions.
 *
 * A model describes the power y of a fading signal relative to its mean power. Its
 * argument is the level in dB about the mean power, x_db = 10 log10(y), except for
 * RFADE_LOGNORMAL, whose location is the mean of the dB values (its median); see there.
 * Reentrant; allocates nothing; no input or output.
 */
#ifndef ROUTEFADE_MODEL_H
#define ROUTEFADE_MODEL_H

#include "routefade/status.h"

#ifdef __cplusplus
extern "C" {
#endif

enum rfade_model_id {
    RFADE_RAYLEIGH, /**< no parameter */
    RFADE_RICE,     /**< K: steady over scattered power, linear */
    RFADE_NAKAGAMI, /**< m: inverse normalised variance of power */
    RFADE_LOGNORMAL /**< sigma_db: standard deviation of the level in dB */
};
enum { RFADE_MODEL_COUNT = 4 };

/** Both tails of a distribution, each computed on its own small side. */
struct rfade_tails {
    double lower;     /**< P(level <= x) */
    double upper;     /**< P(level > x) */
    double log_lower; /**< ln of lower, finite where lower underflows */
    double log_upper; /**< ln of upper */
};

/** ln of a probability or density, with its derivatives. */
struct rfade_log_gradient {
    double value;       /**< ln p */
    double d_mean_db;   /**< d ln p / d mean_power_db (the location, dB) */
    double d_parameter; /**< d ln p / d parameter; 0 for a model without one */
};

struct rfade_model {
    enum rfade_model_id id;
    const char *name;           /**< "rayleigh", "rice", "nakagami", "lognormal" */
    const char *parameter_name; /**< "k", "m", "sigma_db"; NULL if there is none */
    double parameter_min;       /**< inclusive domain of the parameter */
    double parameter_max;

    /** Both tails at x_db in [-400, 400] or +-infinity. Relative accuracy 1e-12 per tail. */
    enum rfade_status (*tails)(double parameter, double x_db, struct rfade_tails *result);

    /** ln of the density per dB at x_db, and derivatives. */
    enum rfade_status (*log_density)(double parameter, double x_db,
                                     struct rfade_log_gradient *result);

    /**
     * ln P(low_db < level <= high_db) and derivatives; either end may be infinite. Never
     * computed by differencing two numbers near 1: accurate however small or narrow.
     */
    enum rfade_status (*log_interval)(double parameter, double low_db, double high_db,
                                      struct rfade_log_gradient *result);

    /**
     * The level not exceeded with probability `lower`, given with its complement `upper` so
     * that either tail can be small; checked forward.
     */
    enum rfade_status (*quantile)(double parameter, double lower, double upper, double *x_db);

    /**
     * Parameter whose power has the normalised variance var(y)/mean(y)^2 (moment estimate),
     * clamped to the domain. NULL for a model without parameter.
     */
    double (*from_normalised_variance)(double normalised_variance);

    /** var(y)/mean(y)^2 for a parameter. */
    double (*normalised_variance)(double parameter);
};

/** The table's entry; NULL if the id is unknown. Static storage. */
RFADE_API const struct rfade_model *rfade_model(enum rfade_model_id id);

/** The entry of that name ("rice"); NULL if there is none. */
RFADE_API const struct rfade_model *rfade_model_by_name(const char *name);

#ifdef __cplusplus
}
#endif
#endif
