/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>

#include "cli/predict.h"
#include "routefade/fade_timing.h"

/* Without fast fading nothing crosses a threshold. */
static size_t count(const struct rfade_predicted *predicted)
{
    bool asked = predicted->link.model && !isnan(predicted->given->speed_kmh) &&
                 !isnan(predicted->link.mean_snr_db);
    return asked ? predicted->given->threshold_db.count : 0;
}

static enum rfade_status entry(const struct rfade_predicted *predicted, size_t index,
                               struct rfade_value *values, struct rfade_error *error)
{
    const struct rfade_predict_options *given = predicted->given;
    double threshold_db = given->threshold_db.items[index];
    double doppler_hz = rfade_doppler_hz(given->speed_kmh / 3.6, given->carrier_hz);
    struct rfade_fade_timing timing;
    enum rfade_status status = rfade_fade_timing(
        predicted->link.model, predicted->link.parameter, predicted->link.shadowing_db,
        threshold_db - predicted->median_snr_db, &timing);
    if (status != RFADE_OK)
        return rfade_error_set(error, status, "check the threshold against the SNR",
                               "no fade timing for a threshold of %g dB: %s", threshold_db,
                               rfade_status_text(status));
    values[0] = rfade_value_number(threshold_db);
    values[1] = rfade_value_number(timing.crossings_per_wavelength * doppler_hz);
    values[2] = rfade_value_number(timing.mean_fade_wavelengths / doppler_hz);
    values[3] = rfade_value_number(timing.mean_gap_wavelengths / doppler_hz);
    return RFADE_OK;
}

static const struct rfade_column columns[] = {
    {"threshold_db", RFADE_COLUMN_NUMBER, 2, false, false},
    {"crossings_per_s", RFADE_COLUMN_NUMBER, 4, false, false},
    {"mean_fade_s", RFADE_COLUMN_NUMBER, 5, false, false},
    {"mean_gap_s", RFADE_COLUMN_NUMBER, 5, false, false},
};

const struct rfade_prediction rfade_prediction_fade_timing = {
    .name = "fade_timing",
    .count = count,
    .columns = columns,
    .column_count = sizeof columns / sizeof columns[0],
    .entry = entry,
};
