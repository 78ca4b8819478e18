/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file marcum_order.h  Marcum's Q of any small order, and the density it integrates. */
#ifndef ROUTEFADE_SPECIAL_MARCUM_ORDER_H
#define ROUTEFADE_SPECIAL_MARCUM_ORDER_H

#include "special/tails.h"

/**
 * Both tails of the generalised function of `order`: upper = Q_order(a, b), for finite a >= 0,
 * b > 0 and offset = b - a; no checks. Relative 1e-12 for orders up to 8.
 */
struct rfade_tails rfade_marcum_order_tails(int order, double a, double b, double offset);

/** ln of the density of b in nepers of its square, -dQ/d ln b^2; no checks. */
double rfade_marcum_order_log_density(int order, double a, double b, double offset);

#endif
