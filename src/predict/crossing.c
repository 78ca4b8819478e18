/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * The rate of level crossings is the density of the amplitude times the mean of its positive
 * slope [Rice, S. O., "Statistical properties of a sine wave plus random noise", Bell System
 * Technical Journal 27 (1948), section 5]. With isotropic scatter the slope is normal and
 * independent of the amplitude; its standard deviation over a wavelength of travel, for unit
 * mean power, is pi/sqrt(1 + K) (Rice, direct ray across the road) or pi/sqrt(m) (Nakagami:
 * Yacoub, Bautista and Guedes, IEEE Trans. Vehicular Technology 48 (1999)).
 */
#include <gsl/gsl_math.h>
#include <math.h>

#include "model/model.h"
#include "predict/crossing.h"
#include "routefade/stretch.h"

/* 1 + K or m: the steadier the signal, the slower its amplitude moves. */
static double steadiness(const struct rfade_model *model, double parameter)
{
    switch (model->id) {
    case RFADE_RAYLEIGH:
        return 1.0;
    case RFADE_RICE:
        return 1.0 + parameter;
    case RFADE_NAKAGAMI:
        return parameter;
    default:
        return NAN;
    }
}

double rfade_log_crossings_over_density(const struct rfade_model *model, double parameter)
{
    /* Density of the amplitude from that of the level: dx_db = 20/ln(10) dr/r. */
    return log(20.0 / M_LN10) + 0.5 * log(M_PI / (2.0 * steadiness(model, parameter)));
}

enum rfade_status rfade_log_crossings(const struct rfade_model *model, double parameter,
                                      double x_db, double *result)
{
    *result = NAN;
    if (isnan(steadiness(model, parameter)))
        return RFADE_DOMAIN;
    struct rfade_log_gradient density;
    enum rfade_status status = model->log_density(parameter, x_db, &density);
    if (status == RFADE_OK)
        *result = density.value + rfade_log_crossings_over_density(model, parameter) -
                  0.5 * rfade_log_ratio(x_db);
    return status;
}

enum rfade_status rfade_crossings_per_wavelength(const struct rfade_model *model,
                                                 double parameter, double x_db,
                                                 double *crossings)
{
    double log_crossings = NAN;
    enum rfade_status status = rfade_log_crossings(model, parameter, x_db, &log_crossings);
    *crossings = exp(log_crossings);
    return status;
}
