/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file predict.h  Outage: the probability that the level is below a threshold.
 * Reentrant; no input or output.
 */
#ifndef ROUTEFADE_PREDICT_H
#define ROUTEFADE_PREDICT_H

#include "routefade/model.h"
#include "routefade/status.h"

#ifdef __cplusplus
extern "C" {
#endif

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

/** Mean power over the dB-median of a lognormal power, dB: ln(10)/20 sigma^2. */
RFADE_API double rfade_lognormal_mean_over_median_db(double sigma_db);

#ifdef __cplusplus
}
#endif
#endif
