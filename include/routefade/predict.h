/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file predict.h  Fast fading over a lognormal local mean: outage, the probability that the
 * level is below a threshold; the level that a probability belongs to; the mean.
 * Reentrant; no input or output.
 */
#ifndef ROUTEFADE_PREDICT_H
#define ROUTEFADE_PREDICT_H

#include "routefade/model.h"
#include "routefade/status.h"

#ifdef __cplusplus
extern "C" {
#endif

/** Levels about the median of a lognormal local mean that the functions take. */
#define RFADE_OUTAGE_LEVEL_LIMIT_DB 1000.0

/**
 * Outage under fast fading whose local mean is lognormal.
 * @param model         rayleigh, rice or nakagami
 * @param parameter     K or m; ignored for rayleigh
 * @param shadowing_db  standard deviation of the local mean, [0, 30] dB; 0: none
 * @param x_db          threshold about the dB-median of the LOCAL MEAN POWER, dB; within
 *                      1000 dB of it or infinite (without shadowing: as the model's tails)
 * @param[out] result   both tails: lower is the outage; NaN on failure
 * @return RFADE_OK | RFADE_DOMAIN | RFADE_NO_CONVERGENCE
 * Accuracy: relative 1e-12 without shadowing, 1e-10 with it (mostly 1e-14), in either tail and
 * in the logarithms; a logarithm below -1e5 is right to 1e-3.
 */
RFADE_API enum rfade_status rfade_outage(const struct rfade_model *model, double parameter,
                                         double shadowing_db, double x_db,
                                         struct rfade_tails *result);

/**
 * ln of the density, per dB, of the level under fast fading whose local mean is lognormal.
 * Arguments as above; x_db finite and within RFADE_OUTAGE_LEVEL_LIMIT_DB.
 * @return RFADE_OK | RFADE_DOMAIN | RFADE_NO_CONVERGENCE; NaN on failure
 * Accuracy: the density to 1e-10 relative.
 */
RFADE_API enum rfade_status rfade_outage_log_density(const struct rfade_model *model,
                                                     double parameter, double shadowing_db,
                                                     double x_db, double *log_density);

/**
 * The inverse of rfade_outage: the level that is not exceeded with a given probability, which
 * is the threshold that has this outage.
 * @param lower      that probability, and
 * @param upper      its complement, so that either tail can be small; sum 1 to 1e-9. The
 *                   smaller of the two counts
 * @param[out] x_db  level about the dB-median of the LOCAL MEAN POWER, dB; infinite for a
 *                   probability of 0; NaN on failure
 * @return RFADE_OK | RFADE_DOMAIN (arguments; or the level lies beyond
 *         RFADE_OUTAGE_LEVEL_LIMIT_DB) | RFADE_NO_CONVERGENCE
 * Accuracy: rfade_outage at x_db, or next to it in the last place, gives the smaller tail to
 * 1e-10 relative: checked at every call.
 */
RFADE_API enum rfade_status rfade_outage_quantile(const struct rfade_model *model,
                                                  double parameter, double shadowing_db,
                                                  double lower, double upper, double *x_db);

/**
 * Mean power over the dB-median of a lognormal power, dB: ln(10)/20 sigma^2, from the mean of
 * exp of a normal variable. Fast fading of mean power 1, independent of the local mean, leaves
 * it as it is: so this is the mean power of shadowed fading, too, about the level that x_db
 * above is about. (The mean of its level in dB lies lower: by that, and by the fast fading's
 * own difference, 2.51 dB for Rayleigh.)
 */
RFADE_API double rfade_lognormal_mean_over_median_db(double sigma_db);

#ifdef __cplusplus
}
#endif
#endif
