/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file tail_search.h  The level at which the small tail of a distribution has a value. */
#ifndef ROUTEFADE_MODEL_TAIL_SEARCH_H
#define ROUTEFADE_MODEL_TAIL_SEARCH_H

#include <stdbool.h>

#include "routefade/status.h"

/** Quantiles are asked for by both tails; they must sum to 1 to this. */
#define RFADE_TAIL_SUM_TOLERANCE 1e-9

/** A tail's logarithm at one level, and its slope by the level, per dB. */
struct rfade_tail_place {
    double log_tail;
    double slope;
};

struct rfade_tail_search {
    enum rfade_status (*look_at)(const struct rfade_tail_search *search, double x_db,
                                 struct rfade_tail_place *place);
    /** Newton's step on whatever is nearly straight in the level. */
    double (*step)(const struct rfade_tail_search *search,
                   const struct rfade_tail_place *place);
    const void *context; /**< the distribution, for look_at */
    double log_tail;     /**< ln of the tail that is wanted; finite */
    bool is_upper;
    double limit_db;          /**< the level lies within this of 0 */
    double good_enough;       /**< of ln tail: closer is not tried for */
    double forward_tolerance; /**< of ln tail, at the level that was found */
};

/**
 * Newton's method kept inside a bracket; checked forward.
 * @param[out] x_db  set on RFADE_OK alone
 * @return RFADE_OK | RFADE_NO_CONVERGENCE | as look_at
 */
enum rfade_status rfade_tail_search(const struct rfade_tail_search *search, double *x_db);

#endif
