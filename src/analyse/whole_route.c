/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analyse/whole_route.h"

#include <math.h>
#include <stdbool.h>

#include "analyse/bounds.h"
#include "routefade/predict.h"

/* rfade_outage takes no wider local mean; of a road it is 3 to 12 dB. */
static const double SIGMA_MAX_DB = 30.0;

/* Sums over the predicted segments, each times its length. */
struct sums {
    double outage;
    double below_square; /* squared distances to the ends, of what is each segment's own */
    double above_square;
    double calibration_low; /* outages at the calibration's ends */
    double calibration_high;
    struct rfade_observed observed;
    double level;
    double level_square; /* of the local mean's level about `reference_dbm`, and its variance */
    double reference_dbm;
};

static double length_of(const struct rfade_segment_result *row)
{
    return row->to_m - row->from_m;
}

static void add_segment(const struct rfade_segment_result *row,
                        const struct rfade_outage_bounds *bounds, struct sums *sums)
{
    double length_m = length_of(row);
    double own_low = rfade_from_log_odds(
        bounds->log_odds - rfade_own_distance(bounds->below, bounds->calibration_below));
    double own_high = rfade_from_log_odds(
        bounds->log_odds + rfade_own_distance(bounds->above, bounds->calibration_above));
    sums->outage += length_m * bounds->outage;
    sums->below_square += pow(length_m * (bounds->outage - own_low), 2.0);
    sums->above_square += pow(length_m * (own_high - bounds->outage), 2.0);
    sums->calibration_low +=
        length_m * rfade_from_log_odds(bounds->log_odds - bounds->calibration_below);
    sums->calibration_high +=
        length_m * rfade_from_log_odds(bounds->log_odds + bounds->calibration_above);
    sums->observed.fraction += length_m * bounds->observed.fraction;
    sums->observed.low += length_m * bounds->observed.low;
    sums->observed.high += length_m * bounds->observed.high;
    double about_db = row->local_mean_dbm - sums->reference_dbm;
    sums->level += length_m * about_db;
    sums->level_square +=
        length_m * (about_db * about_db + row->local_sigma_db * row->local_sigma_db);
}

static void take_means(const struct sums *sums, struct rfade_whole_route *whole)
{
    double length_m = whole->predicted_m;
    double centre = rfade_log_odds(sums->outage / length_m);
    double own_low = rfade_log_odds((sums->outage - sqrt(sums->below_square)) / length_m);
    double own_high = rfade_log_odds((sums->outage + sqrt(sums->above_square)) / length_m);
    double common_low = rfade_log_odds(sums->calibration_low / length_m);
    double common_high = rfade_log_odds(sums->calibration_high / length_m);
    whole->outage = sums->outage / length_m;
    whole->low = whole->high = whole->outage;
    if (isfinite(centre)) {
        whole->low = rfade_from_log_odds(centre - hypot(centre - own_low, centre - common_low));
        whole->high =
            rfade_from_log_odds(centre + hypot(own_high - centre, common_high - centre));
    }
    whole->observed =
        (struct rfade_observed){sums->observed.fraction / length_m,
                                sums->observed.low / length_m, sums->observed.high / length_m};
    double about_db = sums->level / length_m;
    whole->local_mean_dbm = sums->reference_dbm + about_db;
    whole->local_sigma_db =
        sqrt(fmax(0.0, sums->level_square / length_m - about_db * about_db));
}

/* One segment's fast fading over the route's lognormal local mean. */
static double lognormal_outage(const struct rfade_segment_result *row,
                               const struct rfade_whole_route *whole, double threshold_dbm)
{
    const struct rfade_stored_fit *fit = rfade_result_preferred(row);
    double x_db = threshold_dbm - whole->local_mean_dbm;
    double sigma_db = whole->local_sigma_db;
    struct rfade_tails tails;
    enum rfade_status status =
        rfade_outage(fit->model, fit->parameter, fmin(sigma_db, SIGMA_MAX_DB), x_db, &tails);
    return status == RFADE_OK ? tails.lower : NAN;
}

/* A fit without a track predicts nothing: of a vehicle that stood still, or of the levels as a
 * whole. */
static bool was_predicted(const struct rfade_segment_result *row)
{
    const struct rfade_stored_fit *fit = rfade_result_preferred(row);
    return fit && fit->model && !isnan(row->local_mean_dbm);
}

static void count_lengths(const struct rfade_route_group *group,
                          struct rfade_whole_route *whole)
{
    double seen_m = 0.0;
    for (size_t i = 0; i < group->count; i++) {
        seen_m += length_of(group->rows[i]);
        whole->readings += group->rows[i]->readings;
    }
    whole->length_m = group->span ? group->span->length_m : seen_m;
    whole->unseen_m = fmax(0.0, whole->length_m - seen_m);
    whole->not_predicted_m = seen_m;
}

enum rfade_status rfade_whole_route(const struct rfade_route_group *group,
                                    const struct rfade_threshold *thresholds, double confidence,
                                    struct rfade_whole_route *whole, struct rfade_error *error)
{
    *whole = (struct rfade_whole_route){.outage = NAN,
                                        .low = NAN,
                                        .high = NAN,
                                        .observed = {NAN, NAN, NAN},
                                        .local_mean_dbm = NAN,
                                        .local_sigma_db = NAN,
                                        .lognormal_outage = NAN};
    count_lengths(group, whole);
    struct sums sums = {.reference_dbm = group->rows[0]->local_mean_dbm};
    for (size_t i = 0; i < group->count; i++) {
        struct rfade_segment_result *row = group->rows[i];
        struct rfade_outage_bounds bounds;
        enum rfade_status status =
            rfade_result_bounds(row, &thresholds[i], 0.5 + 0.5 * confidence, &bounds, error);
        if (status != RFADE_OK)
            return status;
        if (isnan(bounds.outage) || !was_predicted(row))
            continue;
        if (whole->predicted_m == 0.0)
            sums.reference_dbm = row->local_mean_dbm;
        whole->predicted_m += length_of(row);
        add_segment(row, &bounds, &sums);
    }
    whole->not_predicted_m -= whole->predicted_m;
    if (!(whole->predicted_m > 0.0))
        return RFADE_OK;
    take_means(&sums, whole);
    double sum = 0.0;
    for (size_t i = 0; i < group->count; i++) {
        if (was_predicted(group->rows[i]))
            sum += length_of(group->rows[i]) *
                   lognormal_outage(group->rows[i], whole, thresholds[i].level_dbm);
    }
    whole->lognormal_outage = sum / whole->predicted_m;
    return RFADE_OK;
}
