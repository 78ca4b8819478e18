/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file mgf_average.h  Error rates averaged by the moment generating function of the SNR. */
#ifndef ROUTEFADE_PREDICT_MGF_AVERAGE_H
#define ROUTEFADE_PREDICT_MGF_AVERAGE_H

#include "predict/modulation.h"

/**
 * The moment generating function of the sum of independent Rice or gamma distributed SNRs:
 * E exp(-s SNR) = D^-order exp(-steady (1 - 1/D)), D = 1 + s scale.
 */
struct rfade_mgf {
    double order;  /**< branches, or branches times m */
    double steady; /**< branches times K; 0 for rayleigh and nakagami */
    double scale;  /**< mean SNR of a branch over 1 + K, or over m */
};

/** For a branch of linear mean 1; multiply scale by the mean. No checks. */
struct rfade_mgf rfade_mgf_of(const struct rfade_model *model, double parameter, int branches);

/** Both rates averaged, or the bits' alone as both; no checks. */
struct rfade_error_rate rfade_error_rate_by_mgf(const struct rfade_modulation *modulation,
                                                const struct rfade_mgf *mgf, bool bits_only);

#endif
