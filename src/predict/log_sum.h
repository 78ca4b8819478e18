/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file log_sum.h  Sums of positive terms of any size, given and taken as logarithms. */
#ifndef ROUTEFADE_PREDICT_LOG_SUM_H
#define ROUTEFADE_PREDICT_LOG_SUM_H

#include <math.h>

struct rfade_log_sum {
    double log_scale; /**< of the greatest term */
    double value;
};

static inline struct rfade_log_sum rfade_log_sum_empty(void)
{
    return (struct rfade_log_sum){-INFINITY, 0.0};
}

static inline void rfade_log_sum_add(struct rfade_log_sum *sum, double log_term)
{
    if (log_term > sum->log_scale) {
        sum->value = sum->value * exp(sum->log_scale - log_term) + 1.0;
        sum->log_scale = log_term;
    } else if (log_term > -INFINITY) {
        sum->value += exp(log_term - sum->log_scale);
    }
}

static inline double rfade_log_sum_log(const struct rfade_log_sum *sum)
{
    return sum->log_scale + log(sum->value);
}

#endif
