/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "model/model.h"

struct rfade_interval_end rfade_interval_end_at_infinity(bool positive)
{
    if (positive) {
        return (struct rfade_interval_end){{1.0, 0.0, 0.0, -INFINITY}, -INFINITY, 0.0, 0.0};
    }
    return (struct rfade_interval_end){{0.0, 1.0, -INFINITY, 0.0}, -INFINITY, 0.0, 0.0};
}

/* ln(big - small) of two tails on one side, given by their logarithms and slopes. */
static struct rfade_log_gradient tail_difference(double log_big, double slope_big,
                                                 double log_small, double slope_small)
{
    const double share = exp(log_small - log_big);
    const double rest = -expm1(log_small - log_big);
    const double shift = share > 0.0 ? share * slope_small : 0.0;
    return (struct rfade_log_gradient){log_big + log(rest), 0.0, (slope_big - shift) / rest};
}

/* ln(1 - what lies outside), for an interval that holds the median. */
static struct rfade_log_gradient tail_complement(const struct rfade_interval_end *low,
                                                 const struct rfade_interval_end *high)
{
    const double outside = low->tails.lower + high->tails.upper;
    const double slope =
        low->tails.lower * low->d_log_lower + high->tails.upper * high->d_log_upper;
    return (struct rfade_log_gradient){log1p(-outside), 0.0, -slope / (1.0 - outside)};
}

struct rfade_log_gradient rfade_interval_from_ends(const struct rfade_interval_end *low,
                                                   const struct rfade_interval_end *high)
{
    struct rfade_log_gradient result;
    if (high->tails.lower <= 0.5) {
        result = tail_difference(high->tails.log_lower, high->d_log_lower, low->tails.log_lower,
                                 low->d_log_lower);
    } else if (low->tails.upper <= 0.5) {
        result = tail_difference(low->tails.log_upper, low->d_log_upper, high->tails.log_upper,
                                 high->d_log_upper);
    } else {
        result = tail_complement(low, high);
    }
    result.d_mean_db =
        exp(low->log_density - result.value) - exp(high->log_density - result.value);
    return result;
}
