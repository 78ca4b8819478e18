/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analyse/pool.h"

#include <gsl/gsl_cdf.h>
#include <gsl/gsl_math.h>
#include <math.h>
#include <stdlib.h>

/* d(dB)/d(relative power) */
static const double DB_PER_NEPER_OF_POWER = 10.0 / M_LN10;

enum rfade_status rfade_pool_create(struct rfade_pool *pool)
{
    *pool = (struct rfade_pool){.wavelength_m = NAN};
    enum rfade_status status = rfade_tally_create(&pool->fading);
    if (status == RFADE_OK)
        status = rfade_tally_create(&pool->level);
    if (status == RFADE_OK)
        status = rfade_tally_create(&pool->local_mean);
    if (status != RFADE_OK)
        rfade_pool_clear(pool);
    return status;
}

void rfade_pool_clear(struct rfade_pool *pool)
{
    rfade_tally_destroy(pool->fading);
    rfade_tally_destroy(pool->level);
    rfade_tally_destroy(pool->local_mean);
    *pool = (struct rfade_pool){.wavelength_m = NAN};
}

/* Mean, variance and mean power of the local mean along the travel. */
struct track_moments {
    double mean_dbm;
    double variance_db2;
    double mean_power_dbm;
};

static enum rfade_status track_moments(struct rfade_tally *local_mean,
                                       struct track_moments *result)
{
    *result = (struct track_moments){NAN, NAN, NAN};
    const struct rfade_tally_cell *cells = NULL;
    size_t count = 0;
    enum rfade_status status = rfade_tally_cells(local_mean, &cells, &count);
    if (status != RFADE_OK || count == 0)
        return status;
    double weights = 0.0, sum = 0.0, power = 0.0, squares = 0.0;
    size_t middle = count / 2;
    double reference_db = cells[middle].key.centre_cdb / 100.0;
    for (size_t i = 0; i < count; i++) {
        double weight = (double)cells[i].weight;
        double about_db = cells[i].key.centre_cdb / 100.0 - reference_db;
        weights += weight;
        sum += weight * about_db;
        power += weight * pow(10.0, about_db / 10.0);
    }
    double mean_db = sum / weights;
    for (size_t i = 0; i < count; i++) {
        double about_db = cells[i].key.centre_cdb / 100.0 - reference_db - mean_db;
        squares += (double)cells[i].weight * about_db * about_db;
    }
    result->mean_dbm = reference_db + mean_db;
    result->variance_db2 = squares / weights;
    result->mean_power_dbm = reference_db + 10.0 * log10(power / weights);
    return RFADE_OK;
}

/*
 * Standard deviation of the local mean, its window's own noise taken off, with an interval
 * from the chi-square distribution. Degrees of freedom: the number of windows that fit side
 * by side into the travel, less one (common practice; neighbouring windows share no reading).
 */
static void local_sigma(const struct rfade_pool *pool,
                        const struct rfade_analysis_settings *settings, double variance_db2,
                        struct rfade_pool_result *result)
{
    double noise_db2 = result->window_noise_db * result->window_noise_db;
    result->local_sigma_db = sqrt(fmax(0.0, variance_db2 - noise_db2));
    double window_m = settings->window_wavelengths * pool->wavelength_m;
    double freedom = pool->travel_m / window_m - 1.0;
    if (!(freedom >= 1.0))
        return;
    double tail = 0.5 * (1.0 - settings->confidence);
    double low_db2 = variance_db2 * freedom / gsl_cdf_chisq_Qinv(tail, freedom);
    double high_db2 = variance_db2 * freedom / gsl_cdf_chisq_Pinv(tail, freedom);
    result->local_sigma_low_db = sqrt(fmax(0.0, low_db2 - noise_db2));
    result->local_sigma_high_db = sqrt(fmax(0.0, high_db2 - noise_db2));
}

/* Steadiness in terms of K: what the window's noise depends on. */
static double fitted_k(const struct rfade_pool_result *result)
{
    if (!result->fitted)
        return 0.0;
    for (size_t i = 0; i < result->estimate.fit_count; i++)
        if (result->estimate.fits[i].model == RFADE_RICE)
            return result->estimate.fits[i].parameter;
    return 0.0;
}

static void judge_local_mean(struct rfade_pool *pool,
                             const struct rfade_analysis_settings *settings,
                             const struct track_moments *track,
                             struct rfade_pool_result *result)
{
    double k = fitted_k(result);
    double window_variance = rfade_stretch_mean_variance(settings->window_wavelengths, k);
    result->window_noise_db = DB_PER_NEPER_OF_POWER * sqrt(window_variance);
    result->mean_power_dbm = track->mean_power_dbm;
    /* The mean of dB of a noisy power lies below the dB of its mean, to first order by half
     * its relative variance. */
    result->local_mean_dbm = track->mean_dbm + 0.5 * DB_PER_NEPER_OF_POWER * window_variance;
    local_sigma(pool, settings, track->variance_db2, result);

    double passes = (double)pool->passes;
    double pass_wavelengths = pool->travel_m / pool->wavelength_m / passes;
    double mean_variance = rfade_stretch_mean_variance(pass_wavelengths, k) / passes;
    double fading_db2 = DB_PER_NEPER_OF_POWER * DB_PER_NEPER_OF_POWER * mean_variance;
    if (result->fitted)
        result->effective_count =
            fmin((double)pool->readings,
                 rfade_model(RFADE_RICE)->normalised_variance(k) / mean_variance);
    result->level_uncertainty_db =
        sqrt(fading_db2 + pool->calibration_db * pool->calibration_db);
}

static enum rfade_status fit_fading(struct rfade_pool *pool,
                                    const struct rfade_analysis_settings *settings,
                                    struct rfade_pool_result *result)
{
    struct rfade_bin *bins = NULL;
    size_t bin_count = 0;
    enum rfade_status status = rfade_bins_from_tally(pool->fading, &bins, &bin_count);
    if (status != RFADE_OK)
        return status;
    struct rfade_estimate_settings how = {.confidence = settings->confidence,
                                          .blocks = &pool->blocks};
    /* How much the window narrows depends on K, weakly: K as it looks before is enough. */
    const struct rfade_estimate_settings plain = {.confidence = settings->confidence};
    struct rfade_fit narrowed;
    status = rfade_fit_bins(rfade_model(RFADE_RICE), bins, bin_count, &plain, &narrowed);
    if (status == RFADE_OK) {
        how.narrowing =
            rfade_window_narrowing(settings->window_wavelengths, narrowed.parameter);
        status = rfade_estimate_bins(bins, bin_count, &how, &result->estimate);
    }
    result->fitted = status == RFADE_OK;
    free(bins);
    return status;
}

enum rfade_status rfade_pool_evaluate(struct rfade_pool *pool,
                                      const struct rfade_analysis_settings *settings,
                                      struct rfade_pool_result *result,
                                      struct rfade_error *error)
{
    *result = (struct rfade_pool_result){.sampling = rfade_sampling_label(&pool->sampling),
                                         .mean_power_dbm = NAN,
                                         .local_mean_dbm = NAN,
                                         .local_sigma_db = NAN,
                                         .local_sigma_low_db = NAN,
                                         .local_sigma_high_db = NAN,
                                         .window_noise_db = NAN,
                                         .effective_count = NAN,
                                         .level_uncertainty_db = NAN};
    bool seen = result->sampling == RFADE_RESOLVED || result->sampling == RFADE_INSEPARABLE;
    if (seen) {
        enum rfade_status status = fit_fading(pool, settings, result);
        if (status != RFADE_OK && status != RFADE_NO_DATA)
            return rfade_error_set(error, status, "report it with the survey",
                                   "the fast fading of a segment can't be fitted: %s",
                                   rfade_status_text(status));
    }
    struct track_moments track;
    enum rfade_status status = track_moments(pool->local_mean, &track);
    if (status != RFADE_OK)
        return rfade_error_set(error, status, "", "a local-mean tally can't be read: %s",
                               rfade_status_text(status));
    if (!isnan(track.mean_dbm))
        judge_local_mean(pool, settings, &track, result);
    return RFADE_OK;
}
