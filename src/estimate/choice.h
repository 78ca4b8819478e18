/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file choice.h  Which of the fitted models to believe, and how much. */
#ifndef ROUTEFADE_ESTIMATE_CHOICE_H
#define ROUTEFADE_ESTIMATE_CHOICE_H

#include "estimate/fit.h"

/**
 * Sets the Akaike weights and the preferred model.
 * @param details  of each fit, in the same order
 */
enum rfade_status rfade_choose(const struct rfade_problem *problem,
                               const struct rfade_fit_details *details,
                               struct rfade_estimate *estimate);

#endif
