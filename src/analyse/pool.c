/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analyse/pool.h"

#include <gsl/gsl_cdf.h>
#include <gsl/gsl_errno.h>
#include <gsl/gsl_sf_psi.h>
#include <math.h>
#include <stdlib.h>

#include "analyse/expected_blocks.h"
#include "analyse/levels.h"

/* A pass without travel tells no mean. */
static const double LEAST_WAVELENGTHS = 1e-3;

/* Means over lags that a pool's variances are made of. */
struct lags {
    struct rfade_lag_means window;
    struct rfade_lag_means half_window;
    struct rfade_lag_means pass;
    struct rfade_lag_means followed; /* by blocks */
};

/* Blocks are compared with themselves and the two after them. */
static const double BLOCKS_FOLLOWED = 3.0;

static enum rfade_status find_lags(const struct rfade_pool *pool,
                                   const struct rfade_analysis_settings *settings,
                                   struct lags *lags)
{
    double pass_wavelengths = pool->travel_m / pool->wavelength_m / (double)pool->passes;
    enum rfade_status status = rfade_lag_means(settings->window_wavelengths, &lags->window);
    if (status == RFADE_OK)
        status = rfade_lag_means(0.5 * settings->window_wavelengths, &lags->half_window);
    if (status == RFADE_OK)
        status = rfade_lag_means(fmax(pass_wavelengths, LEAST_WAVELENGTHS), &lags->pass);
    if (status == RFADE_OK)
        status =
            rfade_lag_means(BLOCKS_FOLLOWED * settings->block_wavelengths, &lags->followed);
    return status;
}

enum rfade_status rfade_pool_create(struct rfade_pool *pool)
{
    *pool = (struct rfade_pool){.wavelength_m = NAN};
    enum rfade_status status = rfade_tally_create(&pool->fading);
    if (status == RFADE_OK)
        status = rfade_tally_create(&pool->level);
    if (status == RFADE_OK)
        status = rfade_tally_create(&pool->local_mean);
    if (status == RFADE_OK)
        status = rfade_tally_create(&pool->snr);
    if (status == RFADE_OK)
        status = rfade_tally_create(&pool->noise);
    if (status != RFADE_OK)
        rfade_pool_clear(pool);
    return status;
}

void rfade_pool_clear(struct rfade_pool *pool)
{
    rfade_tally_destroy(pool->fading);
    rfade_tally_destroy(pool->level);
    rfade_tally_destroy(pool->local_mean);
    rfade_pass_levels_clear(&pool->pass_levels);
    rfade_tally_destroy(pool->snr);
    rfade_tally_destroy(pool->noise);
    *pool = (struct rfade_pool){.wavelength_m = NAN};
}

/* Mean of the levels of a tally in dB, their variance, and the level of their mean power. */
struct level_moments {
    double mean_dbm;
    double variance_db2;
    double mean_power_dbm;
};

static enum rfade_status level_moments(struct rfade_tally *levels, struct level_moments *result)
{
    *result = (struct level_moments){NAN, NAN, NAN};
    const struct rfade_tally_cell *cells = NULL;
    size_t count = 0;
    enum rfade_status status = rfade_tally_cells(levels, &cells, &count);
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
 * How much rounding to a step raises a mean power: a = ln(10)/20 step gives sinh(a)/a, to
 * second order.
 */
static double rounding_db(const struct rfade_sampling_sums *sums)
{
    if (sums->updates <= 0)
        return 0.0;
    double step_db2 = 1e-4 * (double)sums->step_square_cdb2 / (double)sums->updates;
    double a = 0.5 / RFADE_DB_PER_NEPER_OF_POWER;
    return RFADE_DB_PER_NEPER_OF_POWER * a * a * step_db2 / 6.0;
}

/*
 * Standard deviation of the local mean along the track that was driven. Its variance is that
 * of the measured means, less their noise, plus what the window smooths away: over a window w
 * and to second order that is w^2/12 of the mean squared slope, as much as the variance within
 * a window, which also raises the window's mean power above its middle, by ln(10)/20 of it in
 * dB, and so shows in the mean of the fast fading [delta method].
 *
 * The measured variance has an error by the noise itself, 2 noise^2 over the number n of
 * windows side by side, by its product with the track, 4 track noise over n, and by what the
 * window does at the segment's ends and beyond second order, of the size of what it smooths
 * away.
 */
static void local_sigma(const struct rfade_pool *pool,
                        const struct rfade_analysis_settings *settings, double variance_db2,
                        double offset_db, struct rfade_pool_result *result)
{
    double noise_db2 = result->window_noise_db * result->window_noise_db;
    double within_db2 =
        -2.0 * RFADE_DB_PER_NEPER_OF_POWER * (offset_db + rounding_db(&pool->sampling));
    double track_db2 = fmax(0.0, variance_db2 - noise_db2 + within_db2);
    double windows = pool->travel_m / (settings->window_wavelengths * pool->wavelength_m);
    double error_db2 = sqrt((4.0 * track_db2 + 2.0 * noise_db2) * noise_db2 / windows +
                            within_db2 * within_db2);
    double reach_db2 = gsl_cdf_ugaussian_Pinv(0.5 + 0.5 * settings->confidence) * error_db2;
    result->local_sigma_db = sqrt(track_db2);
    result->local_sigma_low_db = sqrt(fmax(0.0, track_db2 - reach_db2));
    result->local_sigma_high_db = sqrt(track_db2 + reach_db2);
}

static const struct rfade_fit *rice_fit(const struct rfade_pool_result *result)
{
    if (!result->fitted)
        return NULL;
    for (size_t i = 0; i < result->estimate.fit_count; i++)
        if (result->estimate.fits[i].model == RFADE_RICE)
            return &result->estimate.fits[i];
    return NULL;
}

static void judge_local_mean(struct rfade_pool *pool,
                             const struct rfade_analysis_settings *settings,
                             const struct lags *lags, const struct level_moments *track,
                             struct rfade_pool_result *result)
{
    const struct rfade_fit *rice = rice_fit(result);
    double k = rice ? rice->parameter : 0.0;
    struct rfade_ray ray = rfade_ray_from_lags(&pool->sampling, k);
    double pass_variance = rfade_lag_mean_variance(&lags->pass, k, &ray);
    struct rfade_pass_spread spread = rfade_find_pass_spread(
        &pool->pass_levels, RFADE_DB_PER_NEPER_OF_POWER * sqrt(pass_variance),
        settings->confidence);
    double window_variance = rfade_lag_mean_variance(&lags->window, k, &ray);
    result->window_noise_db = RFADE_DB_PER_NEPER_OF_POWER * sqrt(window_variance);
    /* The mean of dB of a noisy power lies below the dB of its mean, to first order by half
     * its relative variance. What the local mean does within its window, and beyond the
     * segment's ends, raises the window's mean power above the readings at its centre: that
     * is the mean of the fast fading. */
    result->local_mean_dbm = track->mean_dbm +
                             0.5 * RFADE_DB_PER_NEPER_OF_POWER * window_variance +
                             (rice ? rice->mean_power_db : 0.0);
    local_sigma(pool, settings, track->variance_db2, rice ? rice->mean_power_db : 0.0, result);

    double mean_variance = pass_variance / (double)pool->passes;
    if (rice)
        result->effective_count =
            fmin((double)pool->readings,
                 rfade_model(RFADE_RICE)->normalised_variance(k) / mean_variance);
    result->level_uncertainty_db = hypot(spread.mean_db, pool->calibration_db);
    result->pass_deviation_db = spread.next_db;
}

/* Measured blocks with what theory expects; the measured ones alone where it has no say. */
static struct rfade_blocks covariance_blocks(const struct rfade_pool *pool,
                                             const struct lags *lags, double k,
                                             const struct rfade_ray *ray)
{
    struct rfade_blocks blocks = pool->blocks;
    const struct rfade_sampling_sums *sums = &pool->sampling;
    double travel_wavelengths = pool->travel_m / pool->wavelength_m;
    double updates = fmax((double)sums->updates, 1.0);
    struct rfade_expected_fading fading = {
        .k = k,
        .ray = *ray,
        .pass = lags->pass,
        .followed = lags->followed,
        .travel_wavelengths = travel_wavelengths,
        .spacing_wavelengths = travel_wavelengths / (double)rfade_tally_readings(pool->fading),
        .step_db = 0.01 * sqrt((double)sums->step_square_cdb2 / updates),
        .levels = pool->fading};
    (void)rfade_expect_blocks(&fading, &blocks);
    return blocks;
}

/*
 * The estimate takes one narrowing for all models, that of the power's variance. Of
 * Nakagami's m the window narrows less: ln m - psi(m) falls short by the log narrowing, and m
 * is too large by as much over psi'(m) - 1/m.
 */
static void correct_nakagami(double narrowing, double log_narrowing, struct rfade_fit *fit)
{
    if (fit->model != RFADE_NAKAGAMI || fit->at_upper_boundary || !isfinite(log_narrowing))
        return;
    gsl_sf_result slope;
    double m = fit->parameter;
    double most = rfade_model(fit->model)->parameter_max;
    /* Beyond m of about 100 the two narrowings are the same, and psi' - 1/m cancels. */
    if (!(m > 0.0 && m < 100.0) || gsl_sf_psi_1_e(m, &slope) != GSL_SUCCESS)
        return;
    double own = log_narrowing / (m * slope.val - 1.0);
    double ratio = (1.0 - own) / (1.0 - narrowing);
    fit->parameter = fmin(ratio * m, most);
    fit->parameter_low = ratio * fit->parameter_low;
    fit->parameter_high =
        fit->parameter_high < most ? fmin(ratio * fit->parameter_high, most) : most;
}

static enum rfade_status fit_fading(struct rfade_pool *pool,
                                    const struct rfade_analysis_settings *settings,
                                    const struct lags *lags, struct rfade_pool_result *result)
{
    struct rfade_bin *bins = NULL;
    size_t bin_count = 0;
    enum rfade_status status = rfade_bins_from_tally(pool->fading, &bins, &bin_count);
    if (status != RFADE_OK)
        return status;
    struct rfade_estimate_settings how = {.confidence = settings->confidence};
    /* How much the window narrows depends on K, weakly: K as it looks before is enough. */
    const struct rfade_estimate_settings plain = {.confidence = settings->confidence};
    struct rfade_fit narrowed;
    status = rfade_fit_bins(rfade_model(RFADE_RICE), bins, bin_count, &plain, &narrowed);
    if (status == RFADE_OK) {
        struct rfade_ray ray = rfade_ray_from_lags(&pool->sampling, narrowed.parameter);
        struct rfade_narrowing narrowing =
            rfade_lag_narrowing(&lags->window, &lags->half_window, narrowed.parameter, &ray);
        how.narrowing = narrowing.power;
        struct rfade_blocks blocks = covariance_blocks(pool, lags, narrowed.parameter, &ray);
        how.blocks = &blocks;
        how.counted_blocks = &pool->blocks;
        status = rfade_estimate_bins(bins, bin_count, &how, &result->estimate);
        for (size_t i = 0; i < result->estimate.fit_count && status == RFADE_OK; i++)
            correct_nakagami(how.narrowing, narrowing.log, &result->estimate.fits[i]);
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
                                         .level_uncertainty_db = NAN,
                                         .pass_deviation_db = NAN,
                                         .noise_dbm = NAN};
    bool seen = result->sampling == RFADE_RESOLVED || result->sampling == RFADE_INSEPARABLE;
    struct lags lags;
    enum rfade_status status = find_lags(pool, settings, &lags);
    if (status != RFADE_OK)
        return rfade_error_set(error, status, "", "a segment's lags can't be averaged: %s",
                               rfade_status_text(status));
    if (seen) {
        status = fit_fading(pool, settings, &lags, result);
        if (status != RFADE_OK && status != RFADE_NO_DATA)
            return rfade_error_set(error, status, "report it with the survey",
                                   "the fast fading of a segment can't be fitted: %s",
                                   rfade_status_text(status));
    } else if (result->sampling == RFADE_UNDERSAMPLED) {
        result->fitted = rfade_fit_levels(pool->level, &result->estimate) == RFADE_OK;
    }
    struct level_moments track, readings, noise;
    status = level_moments(pool->local_mean, &track);
    if (status == RFADE_OK)
        status = level_moments(pool->level, &readings);
    if (status == RFADE_OK)
        status = level_moments(pool->noise, &noise);
    if (status != RFADE_OK)
        return rfade_error_set(error, status, "", "a local-mean tally can't be read: %s",
                               rfade_status_text(status));
    result->mean_power_dbm = readings.mean_power_dbm;
    result->noise_dbm = noise.mean_power_dbm;
    /* Where windows hold a reading or two, their mean is no local mean. */
    if (!isnan(track.mean_dbm) && result->sampling != RFADE_UNDERSAMPLED)
        judge_local_mean(pool, settings, &lags, &track, result);
    return RFADE_OK;
}
