/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Zou, G. Y., and Donner, A., "Construction of confidence limits about effect measures",
 * Statistics in Medicine 27 (2008): interval ends of each source of uncertainty combine as
 * the root of the sum of their squared distances.
 */
#include "routefade/stretch.h"

#include <gsl/gsl_cdf.h>
#include <gsl/gsl_randist.h>
#include <math.h>
#include <stdbool.h>

/* Beyond this many fades on a pass the travel below the threshold is normal to better than
 * the first-order statistics it rests on. */
static const double FADES_FOR_NORMAL = 200.0;

/* Probability, and its complement, averaged over the track; and the rate of fades. */
struct average {
    double lower;
    double upper;
    double crossings;
};

static enum rfade_status average_over_track(const struct rfade_stretch *stretch,
                                            double parameter, double shift_db,
                                            double threshold_dbm, bool with_crossings,
                                            struct average *result)
{
    *result = (struct average){NAN, NAN, NAN};
    double lower = 0.0, upper = 0.0, crossings = 0.0, weights = 0.0;
    for (size_t i = 0; i < stretch->track_count; i++) {
        double weight = stretch->track[i].weight;
        double x_db =
            threshold_dbm - (stretch->track[i].level_dbm + stretch->offset_db + shift_db);
        struct rfade_tails tails;
        enum rfade_status status = stretch->model->tails(parameter, x_db, &tails);
        if (status != RFADE_OK)
            return status;
        lower += weight * tails.lower;
        upper += weight * tails.upper;
        weights += weight;
        if (!with_crossings)
            continue;
        double rate = 0.0;
        status = rfade_crossings_per_wavelength(stretch->model, parameter, x_db, &rate);
        if (status != RFADE_OK)
            return status;
        crossings += weight * rate;
    }
    *result = (struct average){lower / weights, upper / weights,
                               with_crossings ? crossings / weights : NAN};
    return RFADE_OK;
}

static double log_odds(const struct average *average)
{
    return log(average->lower) - log(average->upper);
}

static double probability_of(double odds_log)
{
    return odds_log > 0 ? 1.0 / (1.0 + exp(-odds_log)) : exp(odds_log) / (1.0 + exp(odds_log));
}

/* Squared distances, below and above, that one source of uncertainty moves the log odds. */
static enum rfade_status add_distances(const struct rfade_stretch *stretch, double centre,
                                       double parameter, double shift_db, double threshold_dbm,
                                       double *below, double *above)
{
    struct average moved;
    enum rfade_status status =
        average_over_track(stretch, parameter, shift_db, threshold_dbm, false, &moved);
    if (status != RFADE_OK)
        return status;
    double distance = log_odds(&moved) - centre;
    if (distance > 0)
        *above += distance * distance;
    else
        *below += distance * distance;
    return RFADE_OK;
}

/* Ends of the confidence interval as log odds. */
static enum rfade_status confidence_ends(const struct rfade_stretch *stretch,
                                         double threshold_dbm, double centre, double quantile,
                                         double *low, double *high)
{
    double below = 0.0, above = 0.0;
    double shift_db = quantile * stretch->level_uncertainty_db;
    const double moves[][2] = {{stretch->parameter_low, 0.0},
                               {stretch->parameter_high, 0.0},
                               {stretch->parameter, shift_db},
                               {stretch->parameter, -shift_db}};
    for (size_t i = 0; i < sizeof moves / sizeof moves[0]; i++) {
        if (isnan(moves[i][0]) && stretch->model->parameter_name)
            continue;
        enum rfade_status status = add_distances(stretch, centre, moves[i][0], moves[i][1],
                                                 threshold_dbm, &below, &above);
        if (status != RFADE_OK)
            return status;
    }
    *low = centre - sqrt(below);
    *high = centre + sqrt(above);
    return RFADE_OK;
}

/*
 * P(travel in fades <= fraction of the pass), fades a Poisson number with this mean, each of
 * exponential length: the sum over n of Poisson(n) times the gamma distribution of n lengths.
 */
static double fades_cdf(double fraction, double outage, double fades)
{
    if (fraction < 0)
        return 0.0;
    double length = outage / fades; /* of one fade, as a fraction of the pass */
    if (fades > FADES_FOR_NORMAL)
        return gsl_cdf_gaussian_P(fraction - outage, sqrt(2.0 * fades) * length);
    unsigned last = (unsigned)(fades + 10.0 * sqrt(fades) + 30.0);
    double sum = exp(-fades); /* no fade at all */
    for (unsigned n = 1; n <= last; n++)
        sum += gsl_ran_poisson_pdf(n, fades) * gsl_cdf_gamma_P(fraction / length, n, 1.0);
    return sum;
}

/*
 * The same mixed over what isn't known of the outage: log odds normal about their estimate,
 * taken at the nodes of the five-point Gauss-Hermite rule [AMS 55, table 25.10].
 */
static double next_cdf(double fraction, double centre, double spread, double rate)
{
    static const double node[] = {-2.8569700138728056, -1.3556261799742659, 0.0,
                                  1.3556261799742659, 2.8569700138728056};
    static const double weight[] = {0.011257411327720689, 0.22207592200561264,
                                    0.53333333333333333, 0.22207592200561264,
                                    0.011257411327720689};
    double sum = 0.0;
    for (size_t i = 0; i < sizeof node / sizeof node[0]; i++) {
        double outage = probability_of(centre + spread * node[i]);
        /* Far beyond one half it is the gaps between fades that are rare. */
        sum +=
            weight[i] * (outage <= 0.5 ? fades_cdf(fraction, outage, rate)
                                       : 1.0 - fades_cdf(1.0 - fraction, 1.0 - outage, rate));
    }
    return sum;
}

static double next_quantile(double probability, double centre, double spread, double rate)
{
    double low = 0.0, high = 1.0;
    if (next_cdf(0.0, centre, spread, rate) >= probability)
        return 0.0;
    for (int i = 0; i < 60 && high - low > 1e-6 * high; i++) {
        double middle = 0.5 * (low + high);
        if (next_cdf(middle, centre, spread, rate) < probability)
            low = middle;
        else
            high = middle;
    }
    return 0.5 * (low + high);
}

static bool valid(const struct rfade_stretch *stretch)
{
    return stretch->model && stretch->length_wavelengths > 0 && stretch->passes > 0 &&
           stretch->level_uncertainty_db >= 0 && stretch->confidence > 0 &&
           stretch->confidence < 1 && isfinite(stretch->offset_db);
}

enum rfade_status rfade_stretch_outage(const struct rfade_stretch *stretch,
                                       double threshold_dbm,
                                       struct rfade_stretch_outage *result)
{
    *result = (struct rfade_stretch_outage){NAN, NAN, NAN, NAN, NAN, NAN};
    if (!valid(stretch) || isnan(threshold_dbm))
        return RFADE_DOMAIN;
    if (stretch->track_count == 0)
        return RFADE_NO_DATA;
    struct average average;
    enum rfade_status status =
        average_over_track(stretch, stretch->parameter, 0.0, threshold_dbm, true, &average);
    if (status != RFADE_OK)
        return status;
    result->outage = average.lower;
    result->crossings_per_wavelength = average.crossings;

    double centre = log_odds(&average);
    double quantile = gsl_cdf_ugaussian_Pinv(0.5 + 0.5 * stretch->confidence);
    double low = NAN, high = NAN;
    if (!isfinite(centre)) { /* no doubt at this precision: 0 or 1 */
        result->low = result->high = result->outage;
        result->next_low = result->next_high = result->outage;
        return RFADE_OK;
    }
    status = confidence_ends(stretch, threshold_dbm, centre, quantile, &low, &high);
    if (status != RFADE_OK)
        return status;
    result->low = probability_of(low);
    result->high = probability_of(high);

    double spread = 0.5 * (high - low) / quantile;
    double fades = average.crossings * stretch->length_wavelengths;
    double tail = 0.5 * (1.0 - stretch->confidence);
    result->next_low = next_quantile(tail, centre, spread, fades);
    result->next_high = next_quantile(1.0 - tail, centre, spread, fades);
    return RFADE_OK;
}
