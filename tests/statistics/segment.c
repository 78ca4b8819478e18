/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "statistics/segment.h"

#include <gsl/gsl_randist.h>
#include <gsl/gsl_rng.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "analyse/pool.h"
#include "analyse/results.h"
#include "routefade/model.h"
#include "routefade/stretch.h"

const double threshold_db[THRESHOLDS] = {-5.0, -10.0, -15.0};

const struct circumstances usual_circumstances = {.k = 0.0,
                                                  .ray_angle_deg = 90.0,
                                                  .step_db = 1.0,
                                                  .spacing_wavelengths = 0.15,
                                                  .shadowing_db = 4.0,
                                                  .decorrelation_m = 60.0,
                                                  .shadowing = RFADE_SHADOWING_SMOOTH,
                                                  .segment_m = 100.0,
                                                  .margin_windows = 2.0,
                                                  .passes = 1};

static const double carrier_hz = 457e6;
static const double speed_of_light_m_s = 299792458.0;
static const double speed_m_s = 10.0;
static const double mean_level_dbm = -85.0;
static const double confidence = 0.95;

enum { PASSES_MAX = 16 };

static double margin_m(const struct circumstances *circumstances)
{
    return circumstances->margin_windows * 40.0 * speed_of_light_m_s / carrier_hz;
}

/* One pass: readings, and which of them lie in the segment. */
struct pass {
    struct rfade_drive_reading *readings;
    size_t count;
};

static bool in_segment(const struct circumstances *circumstances, double distance_m)
{
    return distance_m >= margin_m(circumstances) &&
           distance_m < margin_m(circumstances) + circumstances->segment_m;
}

static bool drive(const struct circumstances *circumstances, uint64_t seed, bool shadowed,
                  double standstill_s, struct pass *pass)
{
    double middle_m = margin_m(circumstances) + 0.5 * circumstances->segment_m;
    double spacing_m = circumstances->spacing_wavelengths * speed_of_light_m_s / carrier_hz;
    struct rfade_drive_settings settings = {
        .seed = seed,
        .length_m = circumstances->segment_m + 2.0 * margin_m(circumstances),
        .carrier_hz = carrier_hz,
        .speed_m_s = speed_m_s,
        .rate_hz = speed_m_s / spacing_m,
        .k = &circumstances->k,
        .k_count = 1,
        .stretch_m = 1000.0,
        .ray_angle_deg = circumstances->ray_angle_deg,
        .mean_level_dbm = mean_level_dbm,
        .shadowing_db = shadowed ? circumstances->shadowing_db : 0.0,
        .decorrelation_m = circumstances->decorrelation_m,
        .shadowing = circumstances->shadowing,
        .floor_dbm = NAN,
        .ceiling_dbm = NAN,
    };
    if (standstill_s > 0.0) {
        settings.standstill_at_m = &middle_m;
        settings.standstill_count = 1;
        settings.standstill_s = standstill_s;
    }
    return rfade_simulate_drive(&settings, &pass->readings, &pass->count) == RFADE_OK;
}

/* Another scatter over the local mean of the first pass. */
static bool drive_again(const struct circumstances *circumstances, uint64_t seed,
                        const struct pass *first, struct pass *pass)
{
    if (!drive(circumstances, seed, false, 0.0, pass)) {
        return false;
    }
    for (size_t i = 0; i < pass->count && i < first->count; i++) {
        double fading_db = pass->readings[i].power_dbm - pass->readings[i].local_mean_dbm;
        pass->readings[i].local_mean_dbm = first->readings[i].local_mean_dbm;
        pass->readings[i].power_dbm = first->readings[i].local_mean_dbm + fading_db;
    }
    return pass->count <= first->count;
}

/* Another lane, wet trees: the whole pass is stronger or weaker than the local mean says. */
static void shift(struct pass *pass, double shift_db)
{
    for (size_t i = 0; i < pass->count; i++) {
        pass->readings[i].power_dbm += shift_db;
    }
}

static bool shift_passes(const struct circumstances *circumstances, uint64_t seed,
                         struct pass passes[PASSES_MAX + 1])
{
    gsl_rng *random = gsl_rng_alloc(gsl_rng_mt19937);
    if (random == NULL) {
        return false;
    }
    gsl_rng_set(random, (unsigned long)seed);
    for (int i = 0; i <= circumstances->passes; i++) {
        shift(&passes[i], gsl_ran_gaussian(random, circumstances->pass_shift_db));
    }
    gsl_rng_free(random);
    return true;
}

struct truth {
    double mean_power_dbm;
    double local_mean_dbm;
    double local_sigma_db;
};

static struct truth find_truth(const struct circumstances *circumstances,
                               const struct pass *pass)
{
    double sum = 0.0, squares = 0.0, power = 0.0, count = 0.0;
    for (size_t i = 0; i < pass->count; i++) {
        double about_db = pass->readings[i].local_mean_dbm - mean_level_dbm;
        if (!in_segment(circumstances, pass->readings[i].distance_m) ||
            pass->readings[i].speed_m_s == 0.0) {
            continue;
        }
        sum += about_db;
        squares += about_db * about_db;
        power += pow(10.0, about_db / 10.0);
        count += 1.0;
    }
    return (struct truth){
        mean_level_dbm + 10.0 * log10(power / count), mean_level_dbm + sum / count,
        hypot(circumstances->pass_shift_db,
              sqrt(fmax(squares / count - sum / count * (sum / count), 0.0)))};
}

/* The CDF at one place, averaged over how passes differ: the trapezoidal rule, whose error
 * with a normal weight and steps of one deviation is below 1e-8. */
static double true_lower(const struct circumstances *circumstances, double x_db)
{
    const struct rfade_model *rice = rfade_model(RFADE_RICE);
    struct rfade_tails tails;
    double sum = 0.0, weights = 0.0;
    if (!(circumstances->pass_shift_db > 0.0)) {
        (void)rice->tails(circumstances->k, x_db, &tails);
        return tails.lower;
    }
    for (int i = -5; i <= 5; i++) {
        (void)rice->tails(circumstances->k, x_db - i * circumstances->pass_shift_db, &tails);
        sum += exp(-0.5 * i * i) * tails.lower;
        weights += exp(-0.5 * i * i);
    }
    return sum / weights;
}

/* The CDF averaged over the true local mean, and the share of readings that were below. */
static double true_outage(const struct circumstances *circumstances, const struct pass *pass,
                          double level_dbm, double *below)
{
    double sum = 0.0, count = 0.0, under = 0.0;
    for (size_t i = 0; i < pass->count; i++) {
        const struct rfade_drive_reading *reading = &pass->readings[i];
        if (!in_segment(circumstances, reading->distance_m) || reading->speed_m_s == 0.0) {
            continue;
        }
        sum += true_lower(circumstances, level_dbm - reading->local_mean_dbm);
        under += reading->power_dbm < level_dbm ? 1.0 : 0.0;
        count += 1.0;
    }
    *below = under / count;
    return sum / count;
}

/* The floor under which the wanted share of readings is expected, on the receiver's grid. */
static double floor_dbm(const struct circumstances *circumstances, const struct pass *pass)
{
    double low = mean_level_dbm - 100.0, high = mean_level_dbm + 100.0;
    if (!(circumstances->censored > 0.0)) {
        return NAN;
    }
    while (high - low > 1e-3) {
        double middle = 0.5 * (low + high), below = NAN;
        if (true_outage(circumstances, pass, middle, &below) < circumstances->censored) {
            low = middle;
        } else {
            high = middle;
        }
    }
    return circumstances->step_db * round(low / circumstances->step_db);
}

static struct rfade_track_reading logged(const struct circumstances *circumstances,
                                         const struct rfade_drive_reading *reading,
                                         double least_dbm)
{
    double step_db = circumstances->step_db;
    double level_dbm = step_db * round(reading->power_dbm / step_db);
    double from_m = margin_m(circumstances);
    double to_m = from_m + circumstances->segment_m;
    int32_t segment = reading->distance_m < from_m ? 0 : reading->distance_m < to_m ? 1 : 2;
    if (level_dbm < least_dbm) {
        level_dbm = least_dbm;
    }
    return (struct rfade_track_reading){.time_us = (int64_t)llround(1e6 * reading->time_s),
                                        .travel_mm =
                                            (int64_t)llround(1e3 * reading->distance_m),
                                        .level_cdb = (int32_t)lround(100.0 * level_dbm),
                                        .segment = segment};
}

static bool add_traversal(const struct rfade_traversal_tally *traversal,
                          struct rfade_pool *pool)
{
    pool->readings += traversal->sampling.readings;
    pool->travel_m += (double)traversal->sampling.travel_mm / 1000.0;
    if (rfade_pass_levels_add(&pool->pass_levels, 0, pool->passes++, traversal->local_mean) !=
        RFADE_OK) {
        return false;
    }
    return rfade_tally_merge(pool->fading, traversal->fading, 1) == RFADE_OK &&
           rfade_tally_merge(pool->level, traversal->level, 1) == RFADE_OK &&
           rfade_tally_merge(pool->local_mean, traversal->local_mean, 1) == RFADE_OK &&
           rfade_blocks_merge(&pool->blocks, &traversal->blocks, 1) == RFADE_OK &&
           rfade_sampling_merge(&pool->sampling, &traversal->sampling, 1) == RFADE_OK;
}

static bool add_pass(const struct circumstances *circumstances, const struct pass *pass,
                     double least_dbm, struct rfade_pool *pool)
{
    struct rfade_track_reading *track = calloc(pass->count, sizeof *track);
    struct rfade_separation separation = {NULL, 0};
    struct rfade_receiver receiver = {
        .step_cdb = (int32_t)lround(100.0 * circumstances->step_db),
        .floor_cdb = isnan(least_dbm) ? RFADE_NO_FLOOR_CDB : (int32_t)lround(100.0 * least_dbm),
        .ceiling_cdb = RFADE_NO_CEILING_CDB};
    struct rfade_analysis_settings defaults = rfade_analysis_defaults();
    struct rfade_separate_settings settings = {pool->wavelength_m, defaults.window_wavelengths,
                                               defaults.block_wavelengths};
    bool done = track != NULL;
    for (size_t i = 0; i < pass->count && done; i++) {
        track[i] = logged(circumstances, &pass->readings[i], least_dbm);
    }
    done = done &&
           rfade_separate(track, pass->count, &receiver, &settings, &separation) == RFADE_OK;
    for (size_t i = 0; i < separation.count && done; i++) {
        if (separation.traversals[i].segment == 1) {
            done = add_traversal(&separation.traversals[i], pool);
        }
    }
    rfade_separation_clear(&separation);
    free(track);
    return done;
}

static void note_fits(const struct circumstances *circumstances, struct rfade_pool *pool,
                      const struct rfade_pool_result *result, struct outcome *outcome)
{
    for (size_t i = 0; i < result->estimate.fit_count; i++) {
        const struct rfade_fit *fit = &result->estimate.fits[i];
        struct interval interval = {NAN, fit->parameter, fit->parameter_low,
                                    fit->parameter_high};
        if (fit->model == RFADE_RICE) {
            interval.truth = circumstances->k;
            outcome->intervals[MEASURE_K] = interval;
            outcome->rice_goodness_p = fit->goodness_p;
        } else if (fit->model == RFADE_NAKAGAMI && circumstances->k == 0.0) {
            interval.truth = 1.0;
            outcome->intervals[MEASURE_M] = interval;
        }
        if (fit->model == (circumstances->k > 0.0 ? RFADE_RICE : RFADE_RAYLEIGH)) {
            outcome->goodness_p = fit->goodness_p;
        }
        if (i == result->estimate.preferred) {
            outcome->rayleigh_preferred = fit->model == RFADE_RAYLEIGH;
        }
    }
    if (circumstances->k == 0.0) {
        /* K's two-sided 90 % interval leaves 0 out where the one-sided test at 5 % refuses. */
        struct rfade_analysis_settings settings = rfade_analysis_defaults();
        struct rfade_pool_result at_90;
        struct rfade_error error;
        settings.confidence = 0.9;
        if (rfade_pool_evaluate(pool, &settings, &at_90, &error) == RFADE_OK) {
            for (size_t i = 0; i < at_90.estimate.fit_count; i++) {
                outcome->rice_significant |= at_90.estimate.fits[i].model == RFADE_RICE &&
                                             at_90.estimate.fits[i].parameter_low > 0.0;
            }
        }
    }
}

static void note_local_mean(const struct rfade_pool_result *result, const struct truth *truth,
                            struct outcome *outcome)
{
    double reach_db = 1.959963984540054 * result->level_uncertainty_db;
    outcome->intervals[MEASURE_LOCAL_MEAN] =
        (struct interval){truth->local_mean_dbm, result->local_mean_dbm,
                          result->local_mean_dbm - reach_db, result->local_mean_dbm + reach_db};
    outcome->intervals[MEASURE_LOCAL_SIGMA] =
        (struct interval){truth->local_sigma_db, result->local_sigma_db,
                          result->local_sigma_low_db, result->local_sigma_high_db};
}

/* The row as the survey would hand it back. */
static void make_row(const struct rfade_pool *pool, const struct rfade_pool_result *result,
                     struct rfade_stored_fit *fits, struct rfade_segment_result *row)
{
    static char name[] = "simulated";
    *row = (struct rfade_segment_result){
        .route = name,
        .channel = name,
        .campaign = name,
        .passes = pool->passes,
        .readings = pool->readings,
        .travel_m = pool->travel_m,
        .wavelength_m = pool->wavelength_m,
        .effective_count = result->effective_count,
        .mean_power_dbm = result->mean_power_dbm,
        .local_mean_dbm = result->local_mean_dbm,
        .local_sigma_db = result->local_sigma_db,
        .local_sigma_low_db = result->local_sigma_low_db,
        .local_sigma_high_db = result->local_sigma_high_db,
        .window_noise_db = result->window_noise_db,
        .level_uncertainty_db = result->level_uncertainty_db,
        .pass_deviation_db = result->pass_deviation_db,
        .level = pool->level,
        .local_mean = pool->local_mean,
        .fits = fits,
        .fit_count = result->estimate.fit_count,
    };
    for (size_t i = 0; i < row->fit_count; i++) {
        const struct rfade_fit *fit = &result->estimate.fits[i];
        fits[i] = (struct rfade_stored_fit){.model = rfade_model(fit->model),
                                            .preferred = i == result->estimate.preferred,
                                            .offset_db = fit->mean_power_db,
                                            .parameter = fit->parameter,
                                            .parameter_low = fit->parameter_low,
                                            .parameter_high = fit->parameter_high,
                                            .weight = fit->weight,
                                            .goodness_p = fit->goodness_p};
    }
}

static bool note_outages(const struct circumstances *circumstances,
                         const struct pass passes[PASSES_MAX + 1],
                         struct rfade_segment_result *row, const struct truth *truth,
                         struct outcome *outcome)
{
    for (int i = 0; i < THRESHOLDS; i++) {
        double level_dbm = truth->mean_power_dbm + threshold_db[i];
        double same = NAN, next = NAN;
        double outage = true_outage(circumstances, &passes[0], level_dbm, &same);
        struct rfade_stretch_outage found;
        struct rfade_observed observed;
        struct rfade_error error;
        (void)true_outage(circumstances, &passes[circumstances->passes], level_dbm, &next);
        const struct rfade_threshold threshold = {level_dbm, NAN};
        if (rfade_result_outage(row, &threshold, confidence, &found, &observed, &error) !=
            RFADE_OK) {
            return false;
        }
        outcome->intervals[MEASURE_OUTAGE + i] =
            (struct interval){outage, found.outage, found.low, found.high};
        outcome->intervals[MEASURE_SAME + i] =
            (struct interval){same, found.outage, found.next_low, found.next_high};
        outcome->intervals[MEASURE_NEXT + i] =
            (struct interval){next, found.outage, found.next_low, found.next_high};
    }
    return true;
}

static bool evaluate(const struct circumstances *circumstances,
                     const struct pass passes[PASSES_MAX + 1], struct rfade_pool *pool,
                     struct outcome *outcome)
{
    struct truth truth = find_truth(circumstances, &passes[0]);
    struct rfade_analysis_settings settings = rfade_analysis_defaults();
    struct rfade_pool_result result;
    struct rfade_segment_result row;
    struct rfade_stored_fit fits[RFADE_MODEL_COUNT];
    struct rfade_error error;
    if (rfade_pool_evaluate(pool, &settings, &result, &error) != RFADE_OK) {
        return false;
    }
    outcome->sampling = result.sampling;
    outcome->fitted = result.fitted;
    if (!result.fitted) {
        return true;
    }
    note_fits(circumstances, pool, &result, outcome);
    note_local_mean(&result, &truth, outcome);
    make_row(pool, &result, fits, &row);
    return note_outages(circumstances, passes, &row, &truth, outcome);
}

bool segment_run(const struct circumstances *circumstances, uint64_t seed,
                 struct outcome *outcome)
{
    struct pass passes[PASSES_MAX + 1] = {{NULL, 0}};
    struct rfade_pool pool;
    uint64_t scatter_seed = seed * (PASSES_MAX + 1);
    *outcome = (struct outcome){.goodness_p = NAN, .rice_goodness_p = NAN};
    for (int i = 0; i < MEASURE_COUNT; i++) {
        outcome->intervals[i] = (struct interval){NAN, NAN, NAN, NAN};
    }
    if (rfade_pool_create(&pool) != RFADE_OK) {
        return false;
    }
    pool.wavelength_m = speed_of_light_m_s / carrier_hz;
    bool done =
        circumstances->passes >= 1 && circumstances->passes <= PASSES_MAX &&
        drive(circumstances, scatter_seed, true, circumstances->standstill_s, &passes[0]);
    for (int i = 1; i <= circumstances->passes && done; i++) {
        done = drive_again(circumstances, scatter_seed + (uint64_t)i, &passes[0], &passes[i]);
    }
    if (circumstances->pass_shift_db > 0.0) {
        done = done && shift_passes(circumstances, scatter_seed, passes);
    }
    double least_dbm = done ? floor_dbm(circumstances, &passes[0]) : NAN;
    for (int i = 0; i < circumstances->passes && done; i++) {
        done = add_pass(circumstances, &passes[i], least_dbm, &pool);
    }
    done = done && evaluate(circumstances, passes, &pool, outcome);
    for (int i = 0; i <= PASSES_MAX; i++) {
        free(passes[i].readings);
    }
    rfade_pool_clear(&pool);
    return done;
}
