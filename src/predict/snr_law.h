/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file snr_law.h  Nodes of the law of the combined SNR, to average any rate over. */
#ifndef ROUTEFADE_PREDICT_SNR_LAW_H
#define ROUTEFADE_PREDICT_SNR_LAW_H

#include "routefade/error_rate.h"

struct rfade_snr_node {
    double mass; /**< density times step */
    double log_mass;
};

/**
 * Equally spaced in the logarithm of the SNR over the local mean of one branch, downward from
 * the law's upper end.
 */
struct rfade_snr_law {
    struct rfade_link link;
    double step;  /**< nepers */
    long first;   /**< place of the first node, in steps */
    size_t count; /**< nodes so far: more are made as an average reaches for them */
    size_t capacity;
    struct rfade_snr_node *nodes; /**< [count], owned */
};

/** The greatest step, in nepers, that leaves 1e-13 of a mean over the link's law. */
double rfade_snr_law_step(const struct rfade_link *link);

/**
 * @param link       checked, with a model
 * @param step_max   what the rate needs, nepers
 * @param log_depth  how far below its peak the density is at the upper end, nepers
 */
void rfade_snr_law_init(struct rfade_snr_law *law, const struct rfade_link *link,
                        double step_max, double log_depth);

void rfade_snr_law_clear(struct rfade_snr_law *law);

/** Where a node lies, nepers. */
double rfade_snr_law_place(const struct rfade_snr_law *law, size_t index);

enum rfade_status rfade_snr_law_node(struct rfade_snr_law *law, size_t index,
                                     struct rfade_snr_node *node);

#endif
