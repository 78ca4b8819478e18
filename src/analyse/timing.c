/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analyse/timing.h"

#include <gsl/gsl_math.h>
#include <math.h>

#include "routefade/fade_timing.h"

/* An observed rate that is off by no more than this is called visible. */
static const double BIAS_MAX = 0.05;

/* A fit of Rice that is less likely than that does not speak for how the signal moves. */
static const double RICE_WEIGHT_MIN = 0.05;

static enum rfade_status add_traversal(sqlite3_stmt *statement,
                                       struct rfade_segment_crossings *seen)
{
    struct rfade_crossings crossings;
    struct rfade_sampling_sums sampling;
    enum rfade_status status =
        rfade_crossings_decode(sqlite3_column_blob(statement, 0),
                               (size_t)sqlite3_column_bytes(statement, 0), &crossings);
    if (status == RFADE_OK)
        status = rfade_crossings_merge(&seen->crossings, &crossings);
    if (status == RFADE_OK)
        status = rfade_sampling_decode(sqlite3_column_blob(statement, 1),
                                       (size_t)sqlite3_column_bytes(statement, 1), &sampling);
    if (status == RFADE_OK)
        status = rfade_sampling_merge(&seen->sampling, &sampling, 1);
    seen->step_db = fmax(seen->step_db, sqlite3_column_double(statement, 2));
    return status;
}

enum rfade_status rfade_result_crossings(struct rfade_survey *survey,
                                         const struct rfade_segment_result *row,
                                         struct rfade_segment_crossings *seen,
                                         struct rfade_error *error)
{
    *seen = (struct rfade_segment_crossings){.step_db = 0.0};
    sqlite3_stmt *statement = NULL;
    enum rfade_status status = rfade_survey_prepare(
        survey, &statement, error,
        "SELECT traversal.crossings, traversal.sampling, trace.step_db"
        " FROM fading JOIN traversal USING (segment_id) JOIN trace USING (trace_id)"
        " WHERE fading_id = ?1 AND trace.channel_id = fading.channel_id"
        " AND trace.campaign_id = fading.campaign_id",
        "i", row->fading_id);
    while (status == RFADE_OK) {
        bool more = false;
        status = rfade_survey_step(survey, statement, &more, error);
        if (status != RFADE_OK || !more)
            break;
        status = add_traversal(statement, seen);
        if (status != RFADE_OK)
            (void)rfade_error_set(error, status, "run `routefade fit --all`",
                                  "stored crossings of route %s, segment %lld can't be added "
                                  "up: %s",
                                  row->route, (long long)row->segment,
                                  rfade_status_text(status));
    }
    sqlite3_finalize(statement);
    return status;
}

const char *rfade_visibility_reason(enum rfade_visibility visibility)
{
    switch (visibility) {
    case RFADE_HIDDEN_BY_SAMPLING:
        return "sampling";
    case RFADE_HIDDEN_BY_CENSORING:
        return "censored";
    case RFADE_HIDDEN_BY_STEP:
        return "step";
    case RFADE_HIDDEN_BY_SPACING:
        return "spacing";
    default:
        return NULL;
    }
}

double rfade_crossings_speed_m_s(const struct rfade_segment_crossings *seen)
{
    if (seen->crossings.moving_us <= 0)
        return NAN;
    return 1e3 * (double)seen->crossings.travel_mm / (double)seen->crossings.moving_us;
}

const struct rfade_stored_fit *rfade_timing_fit(const struct rfade_segment_result *row)
{
    const struct rfade_stored_fit *preferred = rfade_result_preferred(row);
    const struct rfade_stored_fit *rice = rfade_result_fit(row, RFADE_RICE);
    if (!preferred || !preferred->model)
        return NULL;
    if (preferred->model->id == RFADE_NAKAGAMI && rice && !(rice->weight < RICE_WEIGHT_MIN))
        return rice;
    return preferred;
}

/* Mean of the factor over the directions that the ray may have come from. Only a steady ray
 * turns: in Rayleigh fading there is none. */
static enum rfade_status ray_factor(const struct rfade_stored_fit *fit,
                                    const struct rfade_sampling_sums *sampling, double x_db,
                                    double *factor)
{
    *factor = 1.0;
    if (fit->model->id != RFADE_RICE || !(fit->parameter > 0.0))
        return RFADE_OK;
    struct rfade_ray ray = rfade_ray_from_lags(sampling, fit->parameter);
    double sum = 0.0;
    for (int i = 0; i < RFADE_RAY_DIRECTIONS; i++) {
        double one = NAN;
        if (ray.weight[i] <= 0.0)
            continue;
        enum rfade_status status = rfade_ray_crossing_factor(
            fit->parameter, cos(0.5 * M_PI * i / (RFADE_RAY_DIRECTIONS - 1)), x_db, &one);
        if (status != RFADE_OK)
            return status;
        sum += ray.weight[i] * one;
    }
    *factor = sum;
    return RFADE_OK;
}

static void observe(const struct rfade_level_crossings *level,
                    struct rfade_level_timing *timing)
{
    timing->crossings = level->crossings;
    timing->longest_fade_m = 1e-3 * (double)level->longest_mm;
    timing->longest_fade_s = 1e-6 * (double)level->longest_us;
    if (level->exposed_mm > 0)
        timing->observed_per_m = 1e3 * (double)level->crossings / (double)level->exposed_mm;
    if (level->crossings > 0)
        timing->observed_fade_m = 1e-3 * (double)level->below_mm / (double)level->crossings;
}

/* Readings a fade or a gap apart miss it: their distance is weighted by travel. */
static enum rfade_visibility judge(const struct rfade_segment_result *row,
                                   const struct rfade_segment_crossings *seen, int level,
                                   double step_factor,
                                   const struct rfade_fade_timing *predicted,
                                   double crossing_factor)
{
    const struct rfade_crossings *all = &seen->crossings;
    const struct rfade_level_crossings *one = &all->level[level];
    if (!rfade_result_resolved(row) || all->travel_mm <= 0)
        return RFADE_HIDDEN_BY_SAMPLING;
    double spacing = 1e-3 * (double)all->square_mm2 / (double)all->travel_mm /
                     row->wavelength_m * crossing_factor;
    if ((double)one->hidden_mm > BIAS_MAX * (double)one->below_mm)
        return RFADE_HIDDEN_BY_CENSORING;
    if (!(fabs(step_factor - 1.0) <= BIAS_MAX))
        return RFADE_HIDDEN_BY_STEP;
    if (!(rfade_fades_seen_share(spacing, predicted->mean_fade_wavelengths,
                                 predicted->mean_gap_wavelengths) >= 1.0 - BIAS_MAX))
        return RFADE_HIDDEN_BY_SPACING;
    return RFADE_VISIBLE;
}

/* The level about the mean of the fast fading, which the window puts off the local mean. */
static enum rfade_status predict(const struct rfade_segment_result *row,
                                 const struct rfade_segment_crossings *seen, int level,
                                 struct rfade_level_timing *timing)
{
    const struct rfade_stored_fit *fit = rfade_timing_fit(row);
    if (!fit)
        return RFADE_OK;
    double x_db = rfade_crossing_levels_cdb[level] / 100.0 - fit->offset_db;
    struct rfade_fade_timing predicted;
    double step_factor = NAN;
    enum rfade_status status =
        rfade_fade_timing(fit->model, fit->parameter, 0.0, x_db, &predicted);
    if (status == RFADE_OK)
        status = rfade_step_crossing_factor(fit->model, fit->parameter, x_db,
                                            fmin(seen->step_db, 20.0), &step_factor);
    if (status == RFADE_OK)
        status = ray_factor(fit, &seen->sampling, x_db, &timing->ray_factor);
    if (status != RFADE_OK)
        return status;
    timing->model = fit->model;
    timing->predicted_per_m = predicted.crossings_per_wavelength / row->wavelength_m;
    timing->predicted_fade_m = predicted.mean_fade_wavelengths * row->wavelength_m;
    timing->visibility = judge(row, seen, level, step_factor, &predicted, timing->ray_factor);
    return RFADE_OK;
}

enum rfade_status rfade_result_timing(const struct rfade_segment_result *row,
                                      const struct rfade_segment_crossings *seen, int level,
                                      struct rfade_level_timing *timing,
                                      struct rfade_error *error)
{
    *timing = (struct rfade_level_timing){.predicted_per_m = NAN,
                                          .predicted_fade_m = NAN,
                                          .ray_factor = NAN,
                                          .observed_per_m = NAN,
                                          .observed_fade_m = NAN,
                                          .visibility = RFADE_HIDDEN_BY_SAMPLING};
    observe(&seen->crossings.level[level], timing);
    enum rfade_status status = predict(row, seen, level, timing);
    if (status != RFADE_OK)
        return rfade_error_set(error, status, "run `routefade fit --all`",
                               "fades of route %s, segment %lld can't be predicted: %s",
                               row->route, (long long)row->segment, rfade_status_text(status));
    return RFADE_OK;
}
