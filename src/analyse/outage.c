/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdbool.h>
#include <stdlib.h>

#include "analyse/results.h"
#include "routefade/separate.h"

/* A model that is less likely than that moves no end of an interval. */
static const double WEIGHT_MIN = 1e-3;

/* Of the travel that has a level: with more than the odd reading without it, the logged SNR
 * doesn't speak for the segment. */
static const double SNR_SHARE = 0.99;

/* Mean and standard deviation of the measured local mean, dB. */
static void track_moments(const struct rfade_tally_cell *cells, size_t count, double *mean_dbm,
                          double *deviation_db)
{
    double weights = 0.0, sum = 0.0, squares = 0.0;
    for (size_t i = 0; i < count; i++) {
        weights += (double)cells[i].weight;
        sum += (double)cells[i].weight * (cells[i].key.centre_cdb / 100.0);
    }
    *mean_dbm = sum / weights;
    for (size_t i = 0; i < count; i++) {
        double about_db = cells[i].key.centre_cdb / 100.0 - *mean_dbm;
        squares += (double)cells[i].weight * about_db * about_db;
    }
    *deviation_db = sqrt(squares / weights);
}

/*
 * The measured local mean carries its window's noise, and lacks what the window smooths away.
 * Drawing the track in towards its mean, or out from it, leaves the variance that the local
 * mean itself has, so that the noise is not counted again beside the fast fading. The mean of
 * the dB of a noisy power lies below the dB of its mean by half its relative variance.
 */
enum rfade_status rfade_result_track(struct rfade_segment_result *row,
                                     struct rfade_local_mean **track, size_t *count)
{
    const struct rfade_tally_cell *cells = NULL;
    *track = NULL;
    enum rfade_status status = rfade_tally_cells(row->local_mean, &cells, count);
    if (status != RFADE_OK || *count == 0)
        return status;
    *track = malloc(*count * sizeof **track);
    if (!*track)
        return RFADE_NO_MEMORY;
    double mean_dbm = NAN, deviation_db = NAN;
    track_moments(cells, *count, &mean_dbm, &deviation_db);
    double scale = deviation_db > 0.0 ? row->local_sigma_db / deviation_db : 1.0;
    double lift_db =
        0.5 * row->window_noise_db * row->window_noise_db / RFADE_DB_PER_NEPER_OF_POWER;
    for (size_t i = 0; i < *count; i++) {
        double about_db = cells[i].key.centre_cdb / 100.0 - mean_dbm;
        (*track)[i] = (struct rfade_local_mean){mean_dbm + lift_db + scale * about_db,
                                                (double)cells[i].weight};
    }
    return RFADE_OK;
}

/* Relative variance of the pooled passes' mean power by fading; 0 where nothing is known. */
static double fading_variance(const struct rfade_segment_result *row)
{
    const struct rfade_stored_fit *rice = rfade_result_fit(row, RFADE_RICE);
    double k = rice ? rice->parameter : 0.0;
    double variance = rfade_model(RFADE_RICE)->normalised_variance(k) / row->effective_count;
    return isfinite(variance) ? variance : 0.0;
}

/* The part of the level's uncertainty that all of the track shares: that is not fading. */
static double shared_db(const struct rfade_segment_result *row)
{
    double total = row->level_uncertainty_db * row->level_uncertainty_db;
    double fading =
        RFADE_DB_PER_NEPER_OF_POWER * RFADE_DB_PER_NEPER_OF_POWER * fading_variance(row);
    return sqrt(fmax(0.0, total - fading));
}

/* What a pass's mean power varies beyond that under a ray across the road. */
static double slow_variance(const struct rfade_segment_result *row, double pass_wavelengths)
{
    const struct rfade_stored_fit *rice = rfade_result_fit(row, RFADE_RICE);
    struct rfade_ray across = rfade_ray_at(90.0);
    double least =
        rfade_stretch_mean_variance(pass_wavelengths, rice ? rice->parameter : 0.0, &across);
    double excess = (double)row->passes * fading_variance(row) - least;
    return excess > 0.0 ? excess : 0.0;
}

/* Fits beside the preferred one count by their Akaike weight. */
static enum rfade_status predicted(struct rfade_segment_result *row,
                                   const struct rfade_stored_fit *preferred,
                                   double threshold_dbm, double confidence,
                                   struct rfade_stretch_outage *outage)
{
    struct rfade_stretch stretches[RFADE_MODEL_COUNT];
    double weights[RFADE_MODEL_COUNT];
    struct rfade_local_mean *track = NULL;
    size_t track_count = 0, count = 0, place = 0;
    double passes = (double)row->passes;
    double pass_wavelengths = row->travel_m / row->wavelength_m / passes;
    enum rfade_status status = rfade_result_track(row, &track, &track_count);
    double slow = slow_variance(row, pass_wavelengths);
    double sigma_db = row->local_sigma_db;
    double spread_below = sigma_db > 0.0 ? 1.0 - row->local_sigma_low_db / sigma_db : 0.0;
    double spread_above = sigma_db > 0.0 ? row->local_sigma_high_db / sigma_db - 1.0 : 0.0;
    for (size_t i = 0; i < row->fit_count && count < RFADE_MODEL_COUNT; i++) {
        const struct rfade_stored_fit *fit = &row->fits[i];
        if (fit != preferred && !(fit->model && fit->weight > WEIGHT_MIN))
            continue;
        place = fit == preferred ? count : place;
        weights[count] = isfinite(fit->weight) ? fit->weight : 1.0;
        stretches[count++] = (struct rfade_stretch){
            .model = fit->model,
            .parameter = fit->parameter,
            .parameter_low = fit->parameter_low,
            .parameter_high = fit->parameter_high,
            .offset_db = fit->offset_db,
            .track = track,
            .track_count = track_count,
            .length_wavelengths = pass_wavelengths,
            .passes = passes,
            .level_uncertainty_db = row->level_uncertainty_db,
            .calibration_db = shared_db(row),
            .spread_below = spread_below,
            .spread_above = spread_above,
            .pass_deviation_db = row->pass_deviation_db > 0.0 ? row->pass_deviation_db : 0.0,
            .slow_variance = slow,
            .readings = (double)rfade_tally_readings(row->level) / passes,
            .confidence = confidence,
        };
    }
    if (status == RFADE_OK)
        status =
            rfade_stretch_outage_mixed(stretches, weights, count, place, threshold_dbm, outage);
    free(track);
    return status;
}

/* Of a law fitted to the levels as a whole: how sure it is, is not known. */
static enum rfade_status outage_of_levels(const struct rfade_stored_fit *fit,
                                          double threshold_dbm,
                                          struct rfade_stretch_outage *outage)
{
    struct rfade_tails tails;
    enum rfade_status status =
        fit->model->tails(fit->parameter, threshold_dbm - fit->offset_db, &tails);
    outage->outage = tails.lower;
    return status;
}

/* Weight in mm of all cells of a tally. */
static double travel_mm(struct rfade_tally *tally)
{
    const struct rfade_tally_cell *cells = NULL;
    size_t count = 0;
    double sum = 0.0;
    if (rfade_tally_cells(tally, &cells, &count) != RFADE_OK)
        return 0.0;
    for (size_t i = 0; i < count; i++)
        sum += (double)cells[i].weight;
    return sum;
}

/* Readings without SNR, and lost packets, are known by their level alone. */
bool rfade_result_has_snr(struct rfade_segment_result *row)
{
    return row->noise_source == RFADE_NOISE_LOGGED &&
           travel_mm(row->snr) >= SNR_SHARE * travel_mm(row->level);
}

static enum rfade_status observe(struct rfade_segment_result *row,
                                 const struct rfade_threshold *threshold,
                                 struct rfade_observed *observed)
{
    if (!isnan(threshold->snr_db) && rfade_result_has_snr(row))
        return rfade_observed_below(row->snr, threshold->snr_db, observed);
    return rfade_observed_below(row->level, threshold->level_dbm, observed);
}

enum rfade_status rfade_result_outage(struct rfade_segment_result *row,
                                      const struct rfade_threshold *threshold,
                                      double confidence, struct rfade_stretch_outage *outage,
                                      struct rfade_observed *observed,
                                      struct rfade_error *error)
{
    *outage = (struct rfade_stretch_outage){NAN, NAN, NAN, NAN, NAN, NAN};
    *observed = (struct rfade_observed){NAN, NAN, NAN};
    const struct rfade_stored_fit *fit = rfade_result_preferred(row);
    enum rfade_status status = RFADE_OK;
    if (fit && fit->model && fit->model->id == RFADE_LOGNORMAL)
        status = outage_of_levels(fit, threshold->level_dbm, outage);
    else if (fit && fit->model)
        status = predicted(row, fit, threshold->level_dbm, confidence, outage);
    if (status == RFADE_OK)
        status = observe(row, threshold, observed);
    if (status == RFADE_NO_DATA) /* a vehicle that stood still travelled nothing */
        status = RFADE_OK;
    if (status != RFADE_OK)
        return rfade_error_set(error, status, "run `routefade fit --all`",
                               "the outage of route %s, segment %lld can't be computed: %s",
                               row->route, (long long)row->segment, rfade_status_text(status));
    return RFADE_OK;
}
