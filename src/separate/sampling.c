/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The sums from which the sampling is judged, gathered over a run of readings. */
#include <math.h>
#include <stdlib.h>

#include "separate/pass.h"

/* Curvature is judged by this much of the road on either side of a segment: alone, a segment
 * of a few windows says too little. */
enum { NEIGHBOURHOOD_WINDOWS = 20 };

void rfade_pass_count_rows(const struct rfade_pass *pass, struct rfade_range run,
                           struct rfade_sampling_sums *sums)
{
    int64_t step_cdb = pass->receiver.step_cdb;

    sums->readings = (int64_t)(run.to - run.from);
    for (size_t i = run.from > 0 ? run.from : 1; i < run.to; i++) {
        const struct rfade_track_reading *row = &pass->readings[i];
        int64_t gap_mm = row->travel_mm - row[-1].travel_mm;
        int64_t jump_cdb = (int64_t)row->level_cdb - row[-1].level_cdb;

        if (gap_mm == 0) {
            sums->standing++;
            continue;
        }
        sums->travel_mm += gap_mm;
        sums->moving_intervals++;
        if (jump_cdb != 0) {
            sums->updates++;
            sums->jump_square_cdb2 += jump_cdb * jump_cdb;
            sums->step_square_cdb2 += step_cdb * step_cdb;
        }
    }
}

static void sum_windows(const struct rfade_pass *pass, struct rfade_range run,
                        struct rfade_sampling_sums *sums)
{
    struct rfade_range window = {0, 0};

    for (size_t i = run.from; i < run.to; i++) {
        int64_t weight_mm = pass->weight_mm[i];
        int64_t fading_cdb;

        if (weight_mm == 0) {
            continue;
        }
        rfade_pass_window(pass, i, &window);
        sums->window_count++;
        sums->windows_mm +=
            pass->readings[window.to - 1].travel_mm - pass->readings[window.from].travel_mm;
        sums->window_readings += pass->kept_sum[window.to] - pass->kept_sum[window.from];
        sums->wavelength_um_readings += pass->wavelength_um;
        fading_cdb = rfade_pass_fading_cdb(pass, i, pass->readings[i].level_cdb);
        sums->fading_sum += weight_mm * fading_cdb;
        sums->fading_square += weight_mm * fading_cdb * fading_cdb;
        sums->fading_mm += weight_mm;
    }
}

/* Squared differences to the first reading at least `lag_mm` further on, if it isn't more
 * than four times as far. */
static void sum_differences(const struct rfade_pass *pass, struct rfade_range run,
                            int64_t lag_mm, int64_t *square, int64_t *mm)
{
    size_t other = run.from;

    for (size_t i = run.from; i < run.to; i++) {
        int64_t place_mm = pass->readings[i].travel_mm;

        if (pass->weight_mm[i] == 0) {
            continue;
        }
        while (other < pass->count && (pass->readings[other].travel_mm < place_mm + lag_mm ||
                                       pass->weight_mm[other] == 0)) {
            other++;
        }
        if (other < pass->count && pass->readings[other].travel_mm <= place_mm + 4 * lag_mm) {
            int64_t difference_cdb =
                (int64_t)pass->readings[other].level_cdb - pass->readings[i].level_cdb;

            *square += pass->weight_mm[i] * difference_cdb * difference_cdb;
            *mm += pass->weight_mm[i];
        }
    }
}

/* Products with the first reading at least the lag further on, if it isn't much more. */
static void sum_lag(const struct rfade_pass *pass, struct rfade_range run, int lag,
                    struct rfade_sampling_sums *sums)
{
    size_t other = run.from;
    double unit_mm = RFADE_LAG_WAVELENGTHS * 1e-3 * (double)pass->wavelength_um;
    int64_t lag_mm = (int64_t)round((lag + 1) * unit_mm);
    int64_t slack_mm = pass->half_wave_mm;

    for (size_t i = run.from; i < run.to; i++) {
        int64_t weight_mm = pass->weight_mm[i];
        int64_t apart_mm;

        if (weight_mm == 0) {
            continue;
        }
        while (other < run.to &&
               (pass->readings[other].travel_mm < pass->readings[i].travel_mm + lag_mm ||
                pass->weight_mm[other] == 0)) {
            other++;
        }
        if (other == run.to) {
            return;
        }
        apart_mm = pass->readings[other].travel_mm - pass->readings[i].travel_mm;
        if (apart_mm <= lag_mm + slack_mm) {
            sums->lag_product[lag] += weight_mm * pass->fading[i] * pass->fading[other];
            sums->lag_distance[lag] += weight_mm * apart_mm;
            sums->lag_mm[lag] += weight_mm;
        }
    }
}

/* First reading at or beyond a place. */
static size_t place_index(const struct rfade_pass *pass, int64_t place_mm)
{
    size_t low = 0;
    size_t high = pass->count;

    while (low < high) {
        size_t middle = low + (high - low) / 2;

        if (pass->readings[middle].travel_mm < place_mm) {
            low = middle + 1;
        } else {
            high = middle;
        }
    }
    return low;
}

static void sum_curvature(const struct rfade_pass *pass, struct rfade_range run,
                          struct rfade_sampling_sums *sums)
{
    int64_t reach_mm = NEIGHBOURHOOD_WINDOWS * pass->window_mm;
    size_t from = place_index(pass, pass->readings[run.from].travel_mm - reach_mm);
    size_t to = place_index(pass, pass->readings[run.to - 1].travel_mm + reach_mm + 1);

    for (int scale = 0; scale < RFADE_SAMPLING_SCALES; scale++) {
        const struct rfade_curvature *curvature = &pass->curvature[scale];

        sums->curvature_square[scale] = curvature->square[to] - curvature->square[from];
        sums->curvature_mm[scale] = curvature->mm[to] - curvature->mm[from];
    }
}

void rfade_pass_sampling(const struct rfade_pass *pass, struct rfade_range run,
                         struct rfade_sampling_sums *sums)
{
    *sums = (struct rfade_sampling_sums){0};
    rfade_pass_count_rows(pass, run, sums);
    sums->held = pass->held ? sums->readings : 0;
    sum_windows(pass, run, sums);
    sum_differences(pass, run, pass->half_wave_mm, &sums->near_square, &sums->near_mm);
    sum_differences(pass, run, 4 * pass->half_wave_mm, &sums->far_square, &sums->far_mm);
    sum_curvature(pass, run, sums);
    for (int lag = 0; lag < RFADE_LAGS; lag++) {
        sum_lag(pass, run, lag, sums);
    }
}
