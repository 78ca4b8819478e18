/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdlib.h>

#include "analyse/results.h"

/*
 * The measured local mean carries its window's noise. Drawing the track in towards its mean
 * by this factor leaves the variance that the local mean itself has, so that the noise is
 * not counted again beside the fast fading.
 */
static double track_shrink(const struct rfade_segment_result *row)
{
    double own_db2 = row->local_sigma_db * row->local_sigma_db;
    double noise_db2 = row->window_noise_db * row->window_noise_db;
    return own_db2 + noise_db2 > 0 ? sqrt(own_db2 / (own_db2 + noise_db2)) : 1.0;
}

static enum rfade_status local_mean_track(struct rfade_segment_result *row,
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
    double shrink = track_shrink(row);
    for (size_t i = 0; i < *count; i++) {
        double about_db = cells[i].key.centre_cdb / 100.0 - row->local_mean_dbm;
        (*track)[i] = (struct rfade_local_mean){row->local_mean_dbm + shrink * about_db,
                                                (double)cells[i].weight};
    }
    return RFADE_OK;
}

static enum rfade_status predicted(struct rfade_segment_result *row,
                                   const struct rfade_stored_fit *fit, double threshold_dbm,
                                   double confidence, struct rfade_stretch_outage *outage)
{
    struct rfade_local_mean *track = NULL;
    size_t count = 0;
    enum rfade_status status = local_mean_track(row, &track, &count);
    if (status == RFADE_OK) {
        struct rfade_stretch stretch = {
            .model = fit->model,
            .parameter = fit->parameter,
            .parameter_low = fit->parameter_low,
            .parameter_high = fit->parameter_high,
            .offset_db = fit->offset_db,
            .track = track,
            .track_count = count,
            .length_wavelengths = row->travel_m / row->wavelength_m / (double)row->passes,
            .passes = (double)row->passes,
            .level_uncertainty_db = row->level_uncertainty_db,
            .confidence = confidence,
        };
        status = rfade_stretch_outage(&stretch, threshold_dbm, outage);
    }
    free(track);
    return status;
}

enum rfade_status rfade_result_outage(struct rfade_segment_result *row, double threshold_dbm,
                                      double confidence, struct rfade_stretch_outage *outage,
                                      struct rfade_observed *observed,
                                      struct rfade_error *error)
{
    *outage = (struct rfade_stretch_outage){NAN, NAN, NAN, NAN, NAN, NAN};
    const struct rfade_stored_fit *fit = rfade_result_preferred(row);
    enum rfade_status status = RFADE_OK;
    if (fit && fit->model)
        status = predicted(row, fit, threshold_dbm, confidence, outage);
    if (status == RFADE_OK)
        status = rfade_observed_below(row->level, threshold_dbm, observed);
    if (status == RFADE_NO_DATA) /* a vehicle that stood still travelled nothing */
        status = RFADE_OK;
    if (status != RFADE_OK)
        return rfade_error_set(error, status, "run `routefade fit --all`",
                               "the outage of route %s, segment %lld can't be computed: %s",
                               row->route, (long long)row->segment, rfade_status_text(status));
    return RFADE_OK;
}
