/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "separate/pass.h"

#include <math.h>
#include <stdlib.h>

static const int64_t most_travel_mm = 10000000000; /* with these two the power sums */
static const int32_t most_range_cdb = 24000;       /* stay below 2^128 */
static const int32_t most_level_cdb = 1000000;
static const int32_t most_snr_cdb = 1000000;
static const double most_fading = 30.0;
static const double power_unit = 16384.0; /* fixed point: resolution of the weakest level */

static bool within(double value, double low, double high)
{
    return value >= low && value <= high;
}

static bool valid_settings(const struct rfade_receiver *receiver,
                           const struct rfade_separate_settings *settings)
{
    return within(settings->wavelength_m, 1e-3, 1e4) &&
           within(settings->window_wavelengths, 4.0, 2000.0) &&
           within(settings->block_wavelengths, 1.0, 1e5) &&
           within(receiver->step_cdb, 1, 10000) &&
           receiver->floor_cdb < receiver->ceiling_cdb &&
           within(receiver->snr_step_cdb, 0, 10000);
}

static bool valid_snr(const struct rfade_receiver *receiver, int32_t snr_cdb)
{
    return receiver->snr_step_cdb == 0 || snr_cdb == RFADE_NO_SNR_CDB ||
           within(snr_cdb, -most_snr_cdb, most_snr_cdb);
}

static bool valid_readings(const struct rfade_receiver *receiver,
                           const struct rfade_track_reading *readings, size_t count,
                           int32_t *lowest_cdb)
{
    int32_t highest_cdb = -most_level_cdb;

    *lowest_cdb = most_level_cdb;
    for (size_t i = 0; i < count; i++) {
        int32_t level_cdb = readings[i].level_cdb;

        if (!within(level_cdb, -most_level_cdb, most_level_cdb) ||
            !valid_snr(receiver, readings[i].snr_cdb) ||
            readings[i].travel_mm < readings[i > 0 ? i - 1 : 0].travel_mm ||
            readings[i].travel_mm < 0 || readings[i].travel_mm > most_travel_mm) {
            return false;
        }
        *lowest_cdb = level_cdb < *lowest_cdb ? level_cdb : *lowest_cdb;
        highest_cdb = level_cdb > highest_cdb ? level_cdb : highest_cdb;
    }
    return highest_cdb - *lowest_cdb <= most_range_cdb;
}

static enum rfade_status allocate(struct rfade_pass *pass)
{
    bool got;

    pass->weight_mm = calloc(pass->count, sizeof *pass->weight_mm);
    pass->weight_sum = calloc(pass->count + 1, sizeof *pass->weight_sum);
    pass->kept_sum = calloc(pass->count + 1, sizeof *pass->kept_sum);
    pass->power = calloc(pass->count + 1, sizeof *pass->power);
    pass->local_mean_cdb = calloc(pass->count, sizeof *pass->local_mean_cdb);
    pass->fading = calloc(pass->count, sizeof *pass->fading);
    got = pass->weight_mm != NULL && pass->weight_sum != NULL && pass->kept_sum != NULL &&
          pass->power != NULL && pass->local_mean_cdb != NULL && pass->fading != NULL;
    return got ? RFADE_OK : RFADE_NO_MEMORY;
}

/* Gaps are shared out between the readings at their ends without losing a millimetre: the
 * later one gets the odd one. */
static void weigh(struct rfade_pass *pass)
{
    size_t previous = pass->count;

    for (size_t i = 0; i < pass->count; i++) {
        int64_t gap_mm;
        int64_t before_mm;
        int64_t after_mm;

        if (pass->held && i > 0 &&
            pass->readings[i].level_cdb == pass->readings[i - 1].level_cdb) {
            continue;
        }
        if (previous < i) {
            gap_mm = pass->readings[i].travel_mm - pass->readings[previous].travel_mm;
            before_mm = gap_mm / 2;
            after_mm = gap_mm - before_mm;
            pass->weight_mm[previous] +=
                before_mm < pass->half_wave_mm ? before_mm : pass->half_wave_mm;
            pass->weight_mm[i] += after_mm < pass->half_wave_mm ? after_mm : pass->half_wave_mm;
        }
        previous = i;
    }
}

static void sum_powers(struct rfade_pass *pass)
{
    for (size_t i = 0; i < pass->count; i++) {
        double over_cdb = (double)(pass->readings[i].level_cdb - pass->reference_cdb);
        double power = round(power_unit * pow(10.0, over_cdb / 1000.0));
        int64_t weight_mm = pass->weight_mm[i];

        pass->power[i + 1] =
            pass->power[i] + (rfade_power_sum)power * (rfade_power_sum)weight_mm;
        pass->weight_sum[i + 1] = pass->weight_sum[i] + weight_mm;
        pass->kept_sum[i + 1] = pass->kept_sum[i] + (weight_mm > 0 ? 1 : 0);
    }
}

double rfade_pass_mean_cdb(const struct rfade_pass *pass, struct rfade_range range)
{
    int64_t weight_mm = pass->weight_sum[range.to] - pass->weight_sum[range.from];
    double power = (double)(pass->power[range.to] - pass->power[range.from]);

    if (weight_mm <= 0) {
        return NAN;
    }
    return (double)pass->reference_cdb +
           1000.0 * log10(power / ((double)weight_mm * power_unit));
}

void rfade_pass_window(const struct rfade_pass *pass, size_t i, struct rfade_range *window)
{
    int64_t here_mm = pass->readings[i].travel_mm;
    int64_t half_mm = pass->window_mm / 2;

    while (pass->readings[window->from].travel_mm < here_mm - half_mm) {
        window->from++;
    }
    while (window->to < pass->count &&
           pass->readings[window->to].travel_mm <= here_mm + half_mm) {
        window->to++;
    }
}

int32_t rfade_pass_fading_cdb(const struct rfade_pass *pass, size_t i, double level_cdb)
{
    return (int32_t)(10.0 * round((level_cdb - pass->local_mean_cdb[i]) / 10.0));
}

static void find_local_means(struct rfade_pass *pass)
{
    struct rfade_range window = {0, 0};

    for (size_t i = 0; i < pass->count; i++) {
        rfade_pass_window(pass, i, &window);
        pass->local_mean_cdb[i] =
            pass->weight_mm[i] > 0 ? rfade_pass_mean_cdb(pass, window) : NAN;
        if (pass->weight_mm[i] > 0) {
            double over_cdb = pass->readings[i].level_cdb - pass->local_mean_cdb[i];

            pass->fading[i] =
                (int64_t)round(1000.0 * fmin(pow(10.0, over_cdb / 1000.0) - 1.0, most_fading));
        }
    }
}

enum rfade_status rfade_pass_create(struct rfade_pass *pass,
                                    const struct rfade_track_reading *readings, size_t count,
                                    const struct rfade_receiver *receiver,
                                    const struct rfade_separate_settings *settings)
{
    double wavelength_mm = 1000.0 * settings->wavelength_m;
    struct rfade_sampling_sums rows = {0};
    enum rfade_status status;

    *pass = (struct rfade_pass){.readings = readings, .count = count, .receiver = *receiver};
    if (!valid_settings(receiver, settings) ||
        !valid_readings(receiver, readings, count, &pass->reference_cdb)) {
        return RFADE_DOMAIN;
    }
    pass->wavelength_um = (int64_t)round(1000.0 * wavelength_mm);
    pass->half_wave_mm = (int64_t)ceil(0.5 * wavelength_mm);
    pass->window_mm = (int64_t)round(settings->window_wavelengths * wavelength_mm);
    pass->block_mm = (int64_t)ceil(settings->block_wavelengths * wavelength_mm);
    rfade_pass_count_rows(pass, (struct rfade_range){0, count}, &rows);
    pass->held = rfade_sampling_is_held(&rows, pass->half_wave_mm);
    status = allocate(pass);
    if (status == RFADE_OK) {
        weigh(pass);
        sum_powers(pass);
        find_local_means(pass);
        status = rfade_pass_curvature(pass);
    }
    if (status != RFADE_OK) {
        rfade_pass_destroy(pass);
    }
    return status;
}

void rfade_pass_destroy(struct rfade_pass *pass)
{
    free(pass->weight_mm);
    free(pass->weight_sum);
    free(pass->kept_sum);
    free(pass->power);
    free(pass->local_mean_cdb);
    free(pass->fading);
    for (int scale = 0; scale < RFADE_SAMPLING_SCALES; scale++) {
        free(pass->curvature[scale].square);
        free(pass->curvature[scale].mm);
    }
    *pass = (struct rfade_pass){.count = 0};
}
