/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file crossing.h  Level crossings as logarithms. */
#ifndef ROUTEFADE_PREDICT_CROSSING_H
#define ROUTEFADE_PREDICT_CROSSING_H

#include "routefade/model.h"

/** ln of rfade_crossings_per_wavelength, which may underflow. NaN on failure. */
enum rfade_status rfade_log_crossings(const struct rfade_model *model, double parameter,
                                      double x_db, double *result);

/**
 * What the two differ by: ln of the crossing rate at x_db less ln of the density per dB, plus
 * ln(10)/20 x_db. NaN for a model without crossings or a parameter outside its domain.
 */
double rfade_log_crossings_over_density(const struct rfade_model *model, double parameter);

#endif
