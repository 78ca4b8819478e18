/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file goodness.h  Does the fitted model describe the readings? */
#ifndef ROUTEFADE_ESTIMATE_GOODNESS_H
#define ROUTEFADE_ESTIMATE_GOODNESS_H

#include "estimate/fit.h"

/**
 * p-value of a chi-square test over classes of level. Its null distribution is that of a
 * sum of weighted chi-squares, by the covariance of the class weights, correlation and
 * estimated parameters counted; taken as an F by two moments [Rao and Scott 1981, section 4;
 * Thomas and Rao 1987]. Rayleigh fading is looked for as the window shows it.
 * @param[out] p  NaN where it can't be judged: too few blocks or classes, or intervals on
 *                too many different grids
 */
enum rfade_status rfade_goodness(const struct rfade_problem *problem,
                                 const struct rfade_fit_details *details, double *p);

#endif
