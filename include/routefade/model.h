/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file model.h  The fading models as one table of functions.
 *
 * Domains: K in [0, 1e5]; m in [0.5, 1e4] by Nakagami's definition, and the functions also
 * take the gamma law it continues into down to fit_min; sigma_db in [0.001, 100].
 * A model describes the power y of a fading signal relative to its mean power. Its
 * argument is the level in dB about the mean power, x_db = 10 log10(y), except for
 * RFADE_LOGNORMAL, whose location is the mean of the dB values (its median); see there.
 * Reentrant; allocates nothing; no input or output.
 */
#ifndef ROUTEFADE_MODEL_H
#define ROUTEFADE_MODEL_H

#include "routefade/special.h"
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

/** Levels about the mean that the functions take: beyond, powers leave the range of doubles. */
#define RFADE_LEVEL_LIMIT_DB 3000.0

/** dB of a power whose natural logarithm is 1: 10 / ln 10, to double's last place. */
#define RFADE_DB_PER_NEPER_OF_POWER 4.342944819032518

/** ln of a probability or density, with its derivatives. */
struct rfade_log_gradient {
    double value;       /**< ln p */
    double d_mean_db;   /**< d ln p / d mean_power_db (the location, dB) */
    double d_parameter; /**< d ln p / d parameter; 0 for a model without one */
};

/**
 * What all levels of one parameter have in common, so that a fit pays for it once. Filled
 * by `prepare`; its constants are the model's own business. No resources: copy it freely.
 */
struct rfade_prepared {
    double parameter;
    double constants[3];
};

struct rfade_model {
    enum rfade_model_id id;
    const char *name;           /**< "rayleigh", "rice", "nakagami", "lognormal" */
    const char *parameter_name; /**< "k", "m", "sigma_db"; NULL if there is none */
    double parameter_min;       /**< inclusive domain of the parameter */
    double parameter_max;
    double fit_min; /**< least parameter that the functions take: below parameter_min for m */

    /**
     * Both tails at x_db within RFADE_LEVEL_LIMIT_DB or +-infinity. Relative accuracy 1e-12 per
     * tail. Here and below RFADE_DOMAIN leaves NaN.
     */
    enum rfade_status (*tails)(double parameter, double x_db, struct rfade_tails *result);

    /** ln of the density per dB at x_db (finite), and derivatives. Relative accuracy 1e-12. */
    enum rfade_status (*log_density)(double parameter, double x_db,
                                     struct rfade_log_gradient *result);

    /**
     * ln P(low_db < level <= high_db) and derivatives; low_db < high_db, either end may be
     * infinite. Never computed by differencing two numbers near 1: the probability is right
     * to 1e-12 relative however small or narrow (a narrow interval by Gauss-Legendre
     * quadrature of the density, a wide one by the tails on its small side).
     */
    enum rfade_status (*log_interval)(double parameter, double low_db, double high_db,
                                      struct rfade_log_gradient *result);

    /** @return RFADE_OK | RFADE_DOMAIN (parameter is NaN, and the two below refuse) */
    enum rfade_status (*prepare)(double parameter, struct rfade_prepared *prepared);

    /** As log_density, the same digits, for a parameter that has been prepared. */
    enum rfade_status (*log_density_of)(const struct rfade_prepared *prepared, double x_db,
                                        struct rfade_log_gradient *result);

    /** As log_interval, the same digits, for a parameter that has been prepared. */
    enum rfade_status (*log_interval_of)(const struct rfade_prepared *prepared, double low_db,
                                         double high_db, struct rfade_log_gradient *result);

    /**
     * The level not exceeded with probability `lower`, given with its complement `upper` so
     * that either tail can be small; checked forward.
     */
    enum rfade_status (*quantile)(double parameter, double lower, double upper, double *x_db);

    /**
     * Parameter whose power has the normalised variance var(y)/mean(y)^2 (moment estimate),
     * clamped to [fit_min, parameter_max]. NULL for a model without parameter.
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
