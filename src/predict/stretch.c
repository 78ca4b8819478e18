/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Zou, G. Y., and Donner, A., "Construction of confidence limits about effect measures",
 * Statistics in Medicine 27 (2008): interval ends of each source of uncertainty combine as
 * the root of the sum of their squared distances.
 */
#include "routefade/stretch.h"

#include <gsl/gsl_cdf.h>
#include <math.h>
#include <stdbool.h>

#include "model/model.h"
#include "predict/fluctuation.h"
#include "predict/next_pass.h"
#include "predict/response.h"
#include "routefade/special.h"

/* Of the ends of an interval, as log odds. */
static const double END_ACCURACY = 1e-7;

/* Probability, and its complement, averaged over the track. */
struct average {
    double lower;
    double upper;
};

/* What the track says beside: means over it. */
struct track_means {
    double crossings;       /* rate of fades */
    double fluctuation;     /* of the share in fades by itself: its variance */
    double response;        /* d outage / d level, per dB */
    double response_square; /* of its square */
    double slow_response;   /* what slow variations of the power move */
};

/* How far from what was found the truth may be: one source of uncertainty at a time. */
struct move {
    double parameter;
    double shift_db; /* of the level */
    double spread;   /* factor of the track's deviations from its mean */
};

static double track_mean_dbm(const struct rfade_stretch *stretch)
{
    double sum = 0.0, weights = 0.0;
    for (size_t i = 0; i < stretch->track_count; i++) {
        sum += stretch->track[i].weight * stretch->track[i].level_dbm;
        weights += stretch->track[i].weight;
    }
    return sum / weights;
}

/* Where the threshold lies about the mean power at one place of the track, dB. */
static double place_db(const struct rfade_stretch *stretch, size_t i, double threshold_dbm)
{
    return threshold_dbm - (stretch->track[i].level_dbm + stretch->offset_db);
}

static enum rfade_status average_over_track(const struct rfade_stretch *stretch,
                                            const struct move *move, double threshold_dbm,
                                            struct average *result)
{
    *result = (struct average){NAN, NAN};
    double lower = 0.0, upper = 0.0, weights = 0.0;
    double mean_dbm = track_mean_dbm(stretch);
    for (size_t i = 0; i < stretch->track_count; i++) {
        double weight = stretch->track[i].weight;
        double about_db = stretch->track[i].level_dbm - mean_dbm;
        double x_db = place_db(stretch, i, threshold_dbm) - move->shift_db -
                      (move->spread - 1.0) * about_db;
        struct rfade_tails tails;
        enum rfade_status status = stretch->model->tails(move->parameter, x_db, &tails);
        if (status != RFADE_OK)
            return status;
        lower += weight * tails.lower;
        upper += weight * tails.upper;
        weights += weight;
    }
    *result = (struct average){lower / weights, upper / weights};
    return RFADE_OK;
}

static enum rfade_status average_means(const struct rfade_stretch *stretch,
                                       double threshold_dbm, struct track_means *result)
{
    struct track_means sum = {0.0, 0.0, 0.0, 0.0, 0.0};
    double weights = 0.0;
    for (size_t i = 0; i < stretch->track_count; i++) {
        double weight = stretch->track[i].weight;
        double x_db = place_db(stretch, i, threshold_dbm);
        double rate = NAN, variance = NAN;
        struct rfade_response response;
        enum rfade_status status =
            rfade_crossings_per_wavelength(stretch->model, stretch->parameter, x_db, &rate);
        if (status == RFADE_OK)
            status = rfade_fluctuation(stretch->model, stretch->parameter, x_db,
                                       stretch->length_wavelengths, &variance);
        if (status == RFADE_OK)
            status = rfade_response(stretch->model, stretch->parameter, x_db, &response);
        if (status != RFADE_OK)
            return status;
        sum.crossings += weight * rate;
        sum.fluctuation += weight * variance;
        sum.response += weight * response.level;
        sum.response_square += weight * response.level * response.level;
        sum.slow_response += weight * response.slow;
        weights += weight;
    }
    *result = (struct track_means){sum.crossings / weights, sum.fluctuation / weights,
                                   sum.response / weights, sum.response_square / weights,
                                   sum.slow_response / weights};
    return RFADE_OK;
}

/*
 * Standard error of the level where it matters: the fading averages out over the share of
 * the track that responds to the level, (mean response)^2 / mean squared response of it.
 */
static double level_error_db(const struct rfade_stretch *stretch,
                             const struct track_means *means)
{
    double total = stretch->level_uncertainty_db * stretch->level_uncertainty_db;
    double shared = fmin(stretch->calibration_db * stretch->calibration_db, total);
    double square = means->response * means->response;
    double share = square > 0.0 ? square / means->response_square : 1.0;
    return sqrt(shared + (total - shared) / share);
}

static double log_odds(const struct average *average)
{
    return log(average->lower) - log(average->upper);
}

/* Squared distances, below and above, that one source of uncertainty moves the log odds. */
static enum rfade_status add_distances(const struct rfade_stretch *stretch, double centre,
                                       const struct move *move, double threshold_dbm,
                                       double *below, double *above)
{
    struct average moved;
    enum rfade_status status = average_over_track(stretch, move, threshold_dbm, &moved);
    if (status != RFADE_OK)
        return status;
    double distance = log_odds(&moved) - centre;
    if (distance > 0)
        *above += distance * distance;
    else
        *below += distance * distance;
    return RFADE_OK;
}

/*
 * When it is the scatter in step with a direct ray that made the level uncertain, the
 * parameter is off with it, and both move the outage the same way: twice the product of the
 * two distances comes on top of their squares. Slow variation moves the outage by `slow` in
 * all, by `level` through the level.
 */
static double together(const struct rfade_stretch *stretch, const struct average *average,
                       const struct track_means *means, double quantile)
{
    double reach = quantile * sqrt(stretch->slow_variance / stretch->passes) /
                   (average->lower * average->upper);
    double level = reach * RFADE_DB_PER_NEPER_OF_POWER * means->response;
    double parameter = reach * means->slow_response - level;
    return 2.0 * level * fmax(parameter, 0.0);
}

/* Ends of the confidence interval as log odds. */
static enum rfade_status confidence_ends(const struct rfade_stretch *stretch,
                                         double threshold_dbm, double centre, double shift_db,
                                         double both, double *low, double *high)
{
    double below = both, above = both;
    double parameter = stretch->parameter;
    const struct move moves[] = {{stretch->parameter_low, 0.0, 1.0},
                                 {stretch->parameter_high, 0.0, 1.0},
                                 {parameter, shift_db, 1.0},
                                 {parameter, -shift_db, 1.0},
                                 {parameter, 0.0, 1.0 - stretch->spread_below},
                                 {parameter, 0.0, 1.0 + stretch->spread_above}};
    for (size_t i = 0; i < sizeof moves / sizeof moves[0]; i++) {
        if (isnan(moves[i].parameter) && stretch->model->parameter_name)
            continue;
        enum rfade_status status =
            add_distances(stretch, centre, &moves[i], threshold_dbm, &below, &above);
        if (status != RFADE_OK)
            return status;
    }
    *low = centre - sqrt(below);
    *high = centre + sqrt(above);
    return RFADE_OK;
}

static bool valid(const struct rfade_stretch *stretch)
{
    return stretch->model && stretch->length_wavelengths > 0 && stretch->passes > 0 &&
           stretch->level_uncertainty_db >= 0 && stretch->calibration_db >= 0 &&
           stretch->slow_variance >= 0 && stretch->pass_deviation_db >= 0 &&
           stretch->spread_below >= 0 && stretch->spread_below <= 1 &&
           stretch->spread_above >= 0 && stretch->readings >= 0 && stretch->confidence > 0 &&
           stretch->confidence < 1 && isfinite(stretch->offset_db);
}

/* What one model says: log odds of the outage and its ends, and the next pass's variance. */
struct verdict {
    double outage;
    double crossings;
    double centre;
    double low;
    double high;
    double variance;
};

static enum rfade_status judge(const struct rfade_stretch *stretch, double threshold_dbm,
                               double quantile, struct verdict *verdict)
{
    struct average average;
    struct track_means means;
    const struct move none = {stretch->parameter, 0.0, 1.0};
    enum rfade_status status = average_over_track(stretch, &none, threshold_dbm, &average);
    if (status == RFADE_OK)
        status = average_means(stretch, threshold_dbm, &means);
    if (status != RFADE_OK)
        return status;
    double centre = log_odds(&average);
    *verdict = (struct verdict){.outage = average.lower,
                                .crossings = means.crossings,
                                .centre = centre,
                                .low = centre,
                                .high = centre,
                                .variance = means.fluctuation + means.slow_response *
                                                                    means.slow_response *
                                                                    stretch->slow_variance};
    if (!isfinite(centre)) /* no doubt at this precision: 0 or 1 */
        return RFADE_OK;
    return confidence_ends(
        stretch, threshold_dbm, centre, quantile * level_error_db(stretch, &means),
        together(stretch, &average, &means, quantile), &verdict->low, &verdict->high);
}

/* A model's distribution of the log odds: normal, with a width of its own on either side. */
static double verdict_cdf(const struct verdict *verdict, double quantile, double place)
{
    double end = place < verdict->centre ? verdict->centre - verdict->low
                                         : verdict->high - verdict->centre;
    if (!(end > 0.0))
        return place < verdict->centre ? 0.0 : 1.0;
    return gsl_cdf_ugaussian_P((place - verdict->centre) * quantile / end);
}

/* The place where the models' weighted mean distribution reaches a probability. */
static double mixed_end(const struct verdict *verdicts, const double *weights, size_t count,
                        double quantile, double probability)
{
    double low = INFINITY, high = -INFINITY, total = 0.0;
    for (size_t i = 0; i < count; i++) {
        low = fmin(low, 3.0 * verdicts[i].low - 2.0 * verdicts[i].centre);
        high = fmax(high, 3.0 * verdicts[i].high - 2.0 * verdicts[i].centre);
        total += weights[i];
    }
    while (high - low > END_ACCURACY) {
        double middle = 0.5 * (low + high), sum = 0.0;
        for (size_t i = 0; i < count; i++)
            sum += weights[i] / total * verdict_cdf(&verdicts[i], quantile, middle);
        if (sum < probability)
            low = middle;
        else
            high = middle;
    }
    return 0.5 * (low + high);
}

/* Puts the models together; those with an outage of 0 or 1 at this precision stand aside. */
static void mix(const struct verdict *verdicts, const double *weights, size_t count,
                double quantile, double tail, struct verdict *result)
{
    struct verdict some[RFADE_MODEL_COUNT];
    double some_weights[RFADE_MODEL_COUNT];
    size_t kept = 0;
    for (size_t i = 0; i < count; i++) {
        if (weights[i] > 0.0 && isfinite(verdicts[i].low) && isfinite(verdicts[i].high)) {
            some[kept] = verdicts[i];
            some_weights[kept++] = weights[i];
        }
    }
    if (kept < 2)
        return;
    result->low = fmin(result->centre, mixed_end(some, some_weights, kept, quantile, tail));
    result->high =
        fmax(result->centre, mixed_end(some, some_weights, kept, quantile, 1.0 - tail));
}

/* Another pass's level differs by itself: on top of what is unknown of the outage. */
static enum rfade_status differ(const struct rfade_stretch *stretch, double threshold_dbm,
                                double quantile, double centre, double *below, double *above)
{
    double squares[2] = {*below * *below, *above * *above};
    for (int sign = -1; sign <= 1; sign += 2) {
        const struct move move = {stretch->parameter,
                                  sign * quantile * stretch->pass_deviation_db, 1.0};
        enum rfade_status status =
            add_distances(stretch, centre, &move, threshold_dbm, &squares[0], &squares[1]);
        if (status != RFADE_OK)
            return status;
    }
    *below = sqrt(squares[0]);
    *above = sqrt(squares[1]);
    return RFADE_OK;
}

enum rfade_status rfade_stretch_outage_mixed(const struct rfade_stretch *stretches,
                                             const double *weights, size_t count,
                                             size_t preferred, double threshold_dbm,
                                             struct rfade_stretch_outage *result)
{
    *result = (struct rfade_stretch_outage){NAN, NAN, NAN, NAN, NAN, NAN};
    struct verdict verdicts[RFADE_MODEL_COUNT];
    if (isnan(threshold_dbm) || count > RFADE_MODEL_COUNT || preferred >= count)
        return RFADE_DOMAIN;
    double confidence = stretches[preferred].confidence;
    double tail = 0.5 * (1.0 - confidence);
    double quantile = gsl_cdf_ugaussian_Qinv(tail);
    for (size_t i = 0; i < count; i++) {
        if (!valid(&stretches[i]) || !(weights[i] >= 0.0))
            return RFADE_DOMAIN;
        if (stretches[i].track_count == 0)
            return RFADE_NO_DATA;
        enum rfade_status status = judge(&stretches[i], threshold_dbm, quantile, &verdicts[i]);
        if (status != RFADE_OK)
            return status;
    }
    struct verdict all = verdicts[preferred];
    result->outage = all.outage;
    result->crossings_per_wavelength = all.crossings;
    if (!isfinite(all.centre)) {
        result->low = result->high = result->outage;
        result->next_low = result->next_high = result->outage;
        return RFADE_OK;
    }
    mix(verdicts, weights, count, quantile, tail, &all);
    result->low = rfade_from_log_odds(all.low);
    result->high = rfade_from_log_odds(all.high);
    double below = all.centre - all.low, above = all.high - all.centre;
    enum rfade_status status =
        differ(&stretches[preferred], threshold_dbm, quantile, all.centre, &below, &above);
    if (status != RFADE_OK)
        return status;
    struct rfade_next_pass next = {.log_odds = all.centre,
                                   .deviation_below = below / quantile,
                                   .deviation_above = above / quantile,
                                   .variance = all.variance,
                                   .readings = stretches[preferred].readings};
    rfade_next_pass_interval(&next, confidence, &result->next_low, &result->next_high);
    return RFADE_OK;
}

enum rfade_status rfade_stretch_outage(const struct rfade_stretch *stretch,
                                       double threshold_dbm,
                                       struct rfade_stretch_outage *result)
{
    const double alone = 1.0;
    return rfade_stretch_outage_mixed(stretch, &alone, 1, 0, threshold_dbm, result);
}
