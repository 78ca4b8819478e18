/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Rates and lengths of fades. Over a lognormal local mean the rate N(u) at a level u about the
 * mean is averaged over u = x - s, s normal with standard deviation sigma. N is the density of
 * the level f(u) times exp(-b u), b = ln(10)/20, and a constant, so that completing the square
 *     mean of N = constant exp(-b x + b^2 sigma^2 / 2) f_sigma(x - b sigma^2),
 * f_sigma being the density of the level over that local mean.
 */
#include "routefade/fade_timing.h"

#include <gsl/gsl_errno.h>
#include <gsl/gsl_math.h>
#include <gsl/gsl_sf_bessel.h>
#include <math.h>

#include "model/model.h"
#include "predict/crossing.h"
#include "routefade/predict.h"

static const double light_m_s = 299792458.0; /* SI, exact */
static const double level_max_db = 800.0; /* what completing the square adds stays in range */
static const double step_max_db = 20.0;

/* Below, quotients are taken through logarithms. */
static const double smallest_direct = 1e-300;

static const struct rfade_fade_timing nothing = {NAN, NAN, NAN, NAN};

static double quotient(double value, double log_value, const struct rfade_fade_timing *timing)
{
    if (value > smallest_direct && timing->crossings_per_wavelength > smallest_direct) {
        return value / timing->crossings_per_wavelength;
    }
    return exp(log_value - timing->log_crossings);
}

static enum rfade_status log_crossings(const struct rfade_model *model, double parameter,
                                       double shadowing_db, double x_db, double *result)
{
    const double amplitude_slope = 0.5 * RFADE_LN_PER_DB;
    const double tilt_db = amplitude_slope * shadowing_db * shadowing_db;
    double log_density = NAN;
    enum rfade_status status;
    if (shadowing_db == 0.0) {
        return rfade_log_crossings(model, parameter, x_db, result);
    }
    status =
        rfade_outage_log_density(model, parameter, shadowing_db, x_db - tilt_db, &log_density);
    *result = log_density + rfade_log_crossings_over_density(model, parameter) -
              amplitude_slope * (x_db - 0.5 * tilt_db);
    return status;
}

enum rfade_status rfade_fade_timing(const struct rfade_model *model, double parameter,
                                    double shadowing_db, double x_db,
                                    struct rfade_fade_timing *result)
{
    struct rfade_tails tails;
    struct rfade_fade_timing timing = nothing;
    enum rfade_status status;
    *result = nothing;
    if (!(fabs(x_db) <= level_max_db)) {
        return RFADE_DOMAIN;
    }
    status = rfade_outage(model, parameter, shadowing_db, x_db, &tails);
    if (status == RFADE_OK) {
        status = log_crossings(model, parameter, shadowing_db, x_db, &timing.log_crossings);
    }
    if (status != RFADE_OK) {
        return status;
    }
    timing.crossings_per_wavelength = exp(timing.log_crossings);
    timing.mean_fade_wavelengths = quotient(tails.lower, tails.log_lower, &timing);
    timing.mean_gap_wavelengths = quotient(tails.upper, tails.log_upper, &timing);
    *result = timing;
    return RFADE_OK;
}

double rfade_doppler_hz(double speed_m_s, double carrier_hz)
{
    if (!(speed_m_s >= 0.0 && carrier_hz > 0.0)) {
        return NAN;
    }
    return speed_m_s * carrier_hz / light_m_s;
}

double rfade_fades_seen_share(double spacing, double mean_fade, double mean_gap)
{
    gsl_sf_result i0, i1;
    if (!(spacing > 0.0 && mean_fade > 0.0 && mean_gap > 0.0) || isinf(spacing)) {
        return NAN;
    }
    const double u = spacing / mean_fade;
    const double v = spacing / mean_gap;
    const double s = fmin(2.0 / (M_PI * u * u), 1e15); /* the share is 1 from there on */
    const double gaps_seen = v > 0.0 ? fmin(1.0, erf(0.5 * sqrt(M_PI) * v) / v) : 1.0;
    if (gsl_sf_bessel_I0_scaled_e(s, &i0) != GSL_SUCCESS ||
        gsl_sf_bessel_I1_scaled_e(s, &i1) != GSL_SUCCESS) {
        return NAN;
    }
    /* u from s, so that the two stay true to each other where s was held back. */
    return fmin(1.0, (i0.val + i1.val) * sqrt(0.5 * M_PI * s)) * gaps_seen;
}

enum rfade_status rfade_step_crossing_factor(const struct rfade_model *model, double parameter,
                                             double x_db, double step_db, double *factor)
{
    enum { PARTS = 32 };
    double at_level = NAN;
    double sum = 0.0;
    *factor = NAN;
    if (!(step_db >= 0.0 && step_db <= step_max_db)) {
        return RFADE_DOMAIN;
    }
    enum rfade_status status = rfade_log_crossings(model, parameter, x_db, &at_level);
    for (int i = 0; i < PARTS && status == RFADE_OK; i++) {
        const double aside_db = step_db * ((i + 0.5) / PARTS - 0.5);
        double aside = NAN;
        status = rfade_log_crossings(model, parameter, x_db + aside_db, &aside);
        sum += exp(aside - at_level);
    }
    if (status == RFADE_OK) {
        *factor = sum / PARTS;
    }
    return status;
}
