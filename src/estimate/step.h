/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file step.h  The quantisation step of a receiver, found from its readings. */
#ifndef ROUTEFADE_ESTIMATE_STEP_H
#define ROUTEFADE_ESTIMATE_STEP_H

#include <stddef.h>

/**
 * The largest usual step of which all readings are whole multiples, counted from one of
 * them; 0 if they lie on no grid of 0.01 dB.
 */
double rfade_find_step_db(const double *levels_dbm, size_t count);

#endif
