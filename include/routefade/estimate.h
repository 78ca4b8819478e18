/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file estimate.h  From a tally to models with parameters, intervals, goodness and choice.
 * Reentrant; no input or output; the same input gives the same digits.
 */
#ifndef ROUTEFADE_ESTIMATE_H
#define ROUTEFADE_ESTIMATE_H

#include <stdbool.h>
#include <stddef.h>

#include "routefade/model.h"
#include "routefade/status.h"
#include "routefade/tally.h"

#ifdef __cplusplus
extern "C" {
#endif

/**
 * What `weight` readings say: their level lies in (low_db, high_db]. Either end may be
 * infinite (censored). low_db == high_db is a reading without quantisation: its likelihood
 * is the density of the level per dB.
 */
struct rfade_bin {
    double low_db;
    double high_db;
    double weight; /**< > 0 */
};

/**
 * Uncensored readings that a fit needs. The bias of m from n of them, about 3 m / n [Choi and
 * Wette 1969], is then three quarters of its standard error m sqrt(2 / n); at half as many it
 * exceeds it, and no interval, weight or goodness would mean what it says.
 */
enum { RFADE_FIT_READINGS_MIN = 8 };

/**
 * One fitted model. Intervals come from the profile likelihood, its fall scaled by the
 * design effect of the parameter's own score [Rotnitzky and Jewell 1990] and held against
 * Student's t with the degrees of freedom of the blocks. An interval is one-sided, at the
 * whole confidence, where the estimate lies at an end of its range.
 */
struct rfade_fit {
    enum rfade_model_id model;
    double mean_power_db; /**< mean power; for lognormal the mean of the dB values */
    double mean_power_low_db;
    double mean_power_high_db;
    double parameter; /**< k, m or sigma_db, corrected for the narrowing; NaN for a model
                           without parameter */
    double parameter_low;
    double parameter_high;    /**< the domain's end where larger ones can't be told apart */
    double log_likelihood;    /**< at weights as given in the bins */
    double aic;               /**< -2 ln L + 2 tr(J H^-1); independent: -2 ln L + 2 p */
    double weight;            /**< Akaike weight among the models fitted, AIC differences
                                   divided by their common design effect */
    double goodness_p;        /**< NaN where it can't be judged */
    double information[2][2]; /**< observed information about (mean_power_db, parameter),
                                   before the narrowing's correction */
    double covariance[2][2];  /**< of the estimates, correlation counted, likewise; NaN where
                                   the readings hold no information */
    double parameter_design_effect; /**< variance over that of independent readings */
    bool at_lower_boundary;         /**< K at 0 (for any model: its widest spread) */
    bool at_upper_boundary;         /**< no fading that the step can resolve: `parameter` is
                                         as large as could still be told from none */
};

struct rfade_estimate_settings {
    double confidence; /**< of the two-sided intervals, for instance 0.95; in (0, 1) */
    const struct rfade_blocks *blocks; /**< of the same readings, bins about the same local
                                            mean; NULL: readings are independent. With fewer
                                            than 6 blocks each counts as one reading. */
    /** The blocks as they were counted, where `blocks` holds theory, too: goodness, which needs
     * every class by itself, is judged by them alone. NULL: by `blocks`. */
    const struct rfade_blocks *counted_blocks;
    double narrowing;    /**< share of the power variance that dividing by the local mean took
                              away, [0, 1); the parameters are corrected for it; 0: none */
    bool with_lognormal; /**< lognormal as a candidate */
};

struct rfade_estimate {
    double count;           /**< sum of weights */
    double effective_count; /**< of the mean, for orientation */
    double moment_k;        /**< Greenstein, Michelson and Erceg 1999; NaN if there is none */
    double moment_m;        /**< Nakagami 1960 */
    double mean_power_db;   /**< of the readings (bin centres), dB of the mean power */
    double mean_of_db;      /**< mean of the dB values */
    struct rfade_fit fits[RFADE_MODEL_COUNT];
    size_t fit_count;
    size_t preferred; /**< index into fits */
};

/**
 * Fits every model to the bins and compares them.
 *
 * Grouped, censored maximum likelihood: the sum of weight times ln P(low < level <= high).
 * The preferred model has the lowest AIC, but one that contains Rayleigh must be better
 * than it at 5 % (choice.c). Goodness is a chi-square test with the covariance of the class
 * weights [Rao and Scott 1981] (goodness.c).
 * @param bins  in any order
 * @return RFADE_OK | RFADE_DOMAIN (a bin or setting out of range) | RFADE_NO_DATA (fewer
 *         than RFADE_FIT_READINGS_MIN uncensored: no fits, every figure NaN) |
 *         RFADE_NO_CONVERGENCE | RFADE_NO_MEMORY; on failure fit_count counts the fits that
 *         were finished
 * Accuracy: the maximum to about 1e-8 of the parameter, the log-likelihood to 1e-11
 * relative; ends of intervals to 1e-3 of their distance, from more than 120 bins to 5e-3.
 */
RFADE_API enum rfade_status rfade_estimate_bins(const struct rfade_bin *bins, size_t bin_count,
                                                const struct rfade_estimate_settings *settings,
                                                struct rfade_estimate *result);

/**
 * Maximum likelihood fit of one model, with intervals; goodness and weight stay NaN. Returns
 * as rfade_estimate_bins; on RFADE_NO_DATA every figure is NaN.
 */
RFADE_API enum rfade_status rfade_fit_bins(const struct rfade_model *model,
                                           const struct rfade_bin *bins, size_t bin_count,
                                           const struct rfade_estimate_settings *settings,
                                           struct rfade_fit *fit);

/**
 * The bins of a tally, in key order; weights scaled so that they sum to the number of
 * readings; window classes put together. free() the array.
 * @return RFADE_OK | RFADE_NO_DATA (no weight) | RFADE_DOMAIN (a negative weight) |
 *         RFADE_NO_MEMORY; *bins is NULL on failure
 */
RFADE_API enum rfade_status rfade_bins_from_tally(const struct rfade_tally *tally,
                                                  struct rfade_bin **bins, size_t *bin_count);

/** How a plain column of levels was quantised and clipped. */
struct rfade_column_settings {
    double step_db;     /**< NaN: find it in the data; 0: none */
    double floor_dbm;   /**< NaN: none */
    double ceiling_dbm; /**< NaN: none */
    bool independent;   /**< else blocks of consecutive readings measure the correlation */
    double confidence;
};

struct rfade_column_estimate {
    struct rfade_estimate estimate; /**< levels in dBm */
    double step_db;                 /**< given or found */
    size_t below_floor;
    size_t above_ceiling;
};

/**
 * Fits a column of levels in dBm, in the order they were read. A level at or below the floor
 * stands for all below floor + step/2, one at or above the ceiling for all above
 * ceiling - step/2, any other for level - step/2 to level + step/2 (step 0: itself).
 * @return RFADE_OK | RFADE_DOMAIN (a level that isn't finite, a floor not below the ceiling,
 *         a negative step, a confidence not in (0, 1)) | RFADE_NO_DATA (fewer than
 *         RFADE_FIT_READINGS_MIN that aren't censored; step and censored counts are set) |
 *         RFADE_NO_CONVERGENCE | RFADE_NO_MEMORY
 */
RFADE_API enum rfade_status rfade_estimate_column(const double *levels_dbm, size_t count,
                                                  const struct rfade_column_settings *settings,
                                                  struct rfade_column_estimate *result);

/**
 * Quantisation step of a receiver, found from its readings: the largest of the usual steps
 * (3, 2, 1, 0.5, 0.25, ... 0.01 dB) of which all readings are whole multiples, counted from
 * one of them; above 1 dB only where the level changes at least 30 times. Readings that are
 * all the same tell their own last decimal, up to 1 dB. 0: on no grid of 0.01 dB.
 * @param levels_dbm  [count], in the order they were read
 */
RFADE_API double rfade_find_step_db(const double *levels_dbm, size_t count);

#ifdef __cplusplus
}
#endif
#endif
