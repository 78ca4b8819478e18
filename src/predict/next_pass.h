/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file next_pass.h  What share of its readings one more pass finds below a threshold. */
#ifndef ROUTEFADE_PREDICT_NEXT_PASS_H
#define ROUTEFADE_PREDICT_NEXT_PASS_H

struct rfade_next_pass {
    double log_odds;        /**< of the outage */
    double deviation_below; /**< of its uncertainty, on either side */
    double deviation_above;
    double variance; /**< of the share of travel in fades, given the outage; > 0 */
    double readings; /**< of the pass; 0: as good as continuous */
};

/** Equal-tailed prediction interval of the share. */
void rfade_next_pass_interval(const struct rfade_next_pass *next, double confidence,
                              double *low, double *high);

#endif
