/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file snr_law.h  Nodes of the law of the combined SNR, to average any rate over. */
#ifndef ROUTEFADE_PREDICT_SNR_LAW_H
#define ROUTEFADE_PREDICT_SNR_LAW_H

#include "routefade/error_rate.h"

/** Equally spaced in the logarithm of the SNR, downward; the first is at the law's upper end.
 */
struct rfade_snr_law {
    struct rfade_link link;
    double step;  /**< nepers */
    double first; /**< SNR over the local mean of one branch, nepers */
    size_t count; /**< nodes so far: more are made as an average reaches for them */
    size_t capacity;
    double *log_mass; /**< [count], owned: ln of density times step */
};

/**
 * @param link       checked, with a model
 * @param step_max   what the rate needs, nepers
 * @param log_depth  how far below its peak the density is at the upper end, nepers
 */
void rfade_snr_law_init(struct rfade_snr_law *law, const struct rfade_link *link,
                        double step_max, double log_depth);

void rfade_snr_law_clear(struct rfade_snr_law *law);

/** @param[out] log_mass  of the node; NaN on failure */
enum rfade_status rfade_snr_law_node(struct rfade_snr_law *law, size_t index, double *log_mass);

#endif
