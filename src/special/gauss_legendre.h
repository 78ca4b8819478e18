/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file gauss_legendre.h  Gauss-Legendre rules on [-1, 1] of even order, without allocation.
 */
#ifndef ROUTEFADE_SPECIAL_GAUSS_LEGENDRE_H
#define ROUTEFADE_SPECIAL_GAUSS_LEGENDRE_H

struct rfade_gauss_rule {
    int half_count;         /**< half the number of nodes: they come as +node[i], -node[i] */
    double variation_limit; /**< see rfade_gauss_rule_for() */
    const double *node;     /**< [half_count], ascending, > 0 */
    const double *weight;   /**< [half_count]; all 2 half_count weights sum to 2 */
};

/**
 * The shortest rule that integrates exp(g(t)) over [-1, 1] to about 1e-16 when |g'| is at
 * most `slope` and |g''| at most `curvature`, and g is smooth on that scale; NULL if the
 * longest does not.
 */
const struct rfade_gauss_rule *rfade_gauss_rule_for(double slope, double curvature);

/** The rule of 32 nodes. */
const struct rfade_gauss_rule *rfade_gauss_rule_finest(void);

#endif
