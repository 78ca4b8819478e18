/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * The channel is a function of place alone: a direct ray of power K/(K+1) and scatter of
 * power 1/(K+1) [Clarke 1968, Bell Syst. Tech. J. 47(6), 957-1000; Rice 1948], times the
 * local mean. So a vehicle that stands reads one and the same level again and again.
 */
#include <gsl/gsl_math.h>
#include <gsl/gsl_randist.h>
#include <gsl/gsl_rng.h>
#include <math.h>
#include <stdlib.h>

#include "routefade/simulate.h"
#include "simulate/process.h"

static const double speed_of_light_m_s = 299792458.0;
static const double most_readings = 1e8;

struct drive {
    const struct rfade_drive_settings *settings;
    gsl_rng *generator;
    double wavelength_m;
    double ray_phase; /* at distance 0 */
    struct rfade_process scatter;
    struct rfade_process smooth; /* of the local mean; unused with exponential correlation */
    double shadowing;            /* exponential correlation: state in standard deviations ... */
    double shadowing_at_m;       /* ... at this distance */
    size_t standstill;           /* the next standstill, or the one that lasts */
};

static bool within(double value, double low, double high)
{
    return value >= low && value <= high;
}

static bool valid_motion(const struct rfade_drive_settings *settings)
{
    double previous_m = 0.0;

    if (!within(settings->length_m, 1e-3, 1e9) || !within(settings->speed_m_s, 1e-3, 1e5) ||
        !within(settings->rate_hz, 1e-6, 1e9)) {
        return false;
    }
    if (settings->standstill_count == 0) {
        return true;
    }
    if (settings->standstill_at_m == NULL || !within(settings->standstill_s, 0.0, 1e9)) {
        return false;
    }
    for (size_t i = 0; i < settings->standstill_count; i++) {
        if (!within(settings->standstill_at_m[i], previous_m, settings->length_m)) {
            return false;
        }
        previous_m = settings->standstill_at_m[i];
    }
    return true;
}

static bool valid_channel(const struct rfade_drive_settings *settings)
{
    if (!within(settings->carrier_hz, 1e5, 3e11) || !within(settings->stretch_m, 1e-3, 1e9) ||
        !within(settings->ray_angle_deg, -360.0, 360.0) ||
        !within(settings->mean_level_dbm, -400.0, 400.0) ||
        !within(settings->shadowing_db, 0.0, 30.0) || settings->k == NULL ||
        settings->k_count == 0) {
        return false;
    }
    for (size_t i = 0; i < settings->k_count; i++) {
        if (!within(settings->k[i], 0.0, 1e9)) {
            return false;
        }
    }
    if (settings->shadowing_db == 0.0) {
        return true;
    }
    return within(settings->decorrelation_m, 1e-3, 1e9) &&
           (settings->shadowing == RFADE_SHADOWING_SMOOTH ||
            settings->shadowing == RFADE_SHADOWING_EXPONENTIAL);
}

static bool valid_receiver(const struct rfade_drive_settings *settings)
{
    bool floor_right = isnan(settings->floor_dbm) || within(settings->floor_dbm, -400.0, 400.0);
    bool ceiling_right =
        isnan(settings->ceiling_dbm) || within(settings->ceiling_dbm, -400.0, 400.0);

    return within(settings->step_db, 0.0, 100.0) && floor_right && ceiling_right &&
           !(settings->ceiling_dbm <= settings->floor_dbm);
}

/* GSL's generators take 32 bits of seed. */
static unsigned long folded_seed(uint64_t seed)
{
    return (unsigned long)((seed ^ (seed >> 32)) & 0xffffffffU);
}

static enum rfade_status drive_open(struct drive *drive,
                                    const struct rfade_drive_settings *settings)
{
    enum rfade_status status;

    *drive = (struct drive){.settings = settings,
                            .wavelength_m = speed_of_light_m_s / settings->carrier_hz};
    drive->generator = gsl_rng_alloc(gsl_rng_mt19937);
    if (drive->generator == NULL) {
        return RFADE_NO_MEMORY;
    }
    gsl_rng_set(drive->generator, folded_seed(settings->seed));
    drive->ray_phase = gsl_ran_flat(drive->generator, 0.0, 2.0 * M_PI);
    drive->shadowing = gsl_ran_gaussian_ziggurat(drive->generator, 1.0);
    status = rfade_process_create(&drive->scatter, drive->generator, rfade_spectrum_clarke,
                                  drive->wavelength_m, settings->length_m);
    if (status == RFADE_OK && settings->shadowing_db > 0.0 &&
        settings->shadowing == RFADE_SHADOWING_SMOOTH) {
        status = rfade_process_create(&drive->smooth, drive->generator, rfade_spectrum_gaussian,
                                      settings->decorrelation_m, settings->length_m);
    }
    return status;
}

static void drive_close(struct drive *drive)
{
    rfade_process_destroy(&drive->scatter);
    rfade_process_destroy(&drive->smooth);
    if (drive->generator != NULL) {
        gsl_rng_free(drive->generator);
    }
}

/* Where the vehicle is at a time; times are asked for in rising order. */
static void locate(struct drive *drive, struct rfade_drive_reading *reading)
{
    const struct rfade_drive_settings *settings = drive->settings;

    while (drive->standstill < settings->standstill_count) {
        double at_m = settings->standstill_at_m[drive->standstill];
        double from_s =
            at_m / settings->speed_m_s + (double)drive->standstill * settings->standstill_s;

        if (reading->time_s < from_s) {
            break;
        }
        if (reading->time_s < from_s + settings->standstill_s) {
            reading->distance_m = at_m;
            reading->speed_m_s = 0.0;
            return;
        }
        drive->standstill++;
    }
    reading->speed_m_s = settings->speed_m_s;
    reading->distance_m = settings->speed_m_s * (reading->time_s - (double)drive->standstill *
                                                                       settings->standstill_s);
}

/* Exponential correlation is a first-order autoregression, exact at any step of distance
 * [Gudmundson 1991, Electron. Lett. 27(23), 2145-2146]. */
static double shadowing_at(struct drive *drive, double distance_m)
{
    const struct rfade_drive_settings *settings = drive->settings;

    if (settings->shadowing_db == 0.0) {
        return 0.0;
    }
    if (settings->shadowing == RFADE_SHADOWING_SMOOTH) {
        double value[2];

        rfade_process_at(&drive->smooth, distance_m, value);
        return M_SQRT2 * value[0];
    }
    if (distance_m > drive->shadowing_at_m) {
        double step = (distance_m - drive->shadowing_at_m) / settings->decorrelation_m;

        drive->shadowing =
            exp(-step) * drive->shadowing +
            gsl_ran_gaussian_ziggurat(drive->generator, sqrt(-expm1(-2.0 * step)));
        drive->shadowing_at_m = distance_m;
    }
    return drive->shadowing;
}

static double k_at(const struct rfade_drive_settings *settings, double distance_m)
{
    double stretch = floor(distance_m / settings->stretch_m);

    return settings->k[(size_t)fmod(stretch, (double)settings->k_count)];
}

static double received(const struct rfade_drive_settings *settings, double power_dbm)
{
    double level_dbm = power_dbm;

    if (settings->step_db > 0.0) {
        level_dbm = settings->step_db * round(power_dbm / settings->step_db);
    }
    if (level_dbm < settings->floor_dbm) {
        level_dbm = settings->floor_dbm;
    }
    if (level_dbm > settings->ceiling_dbm) {
        level_dbm = settings->ceiling_dbm;
    }
    return level_dbm;
}

static void take_reading(struct drive *drive, struct rfade_drive_reading *reading)
{
    const struct rfade_drive_settings *settings = drive->settings;
    double scatter[2];
    double ray;
    double phase;
    double real;
    double imaginary;

    locate(drive, reading);
    reading->k = k_at(settings, reading->distance_m);
    reading->local_mean_dbm = settings->mean_level_dbm +
                              settings->shadowing_db * shadowing_at(drive, reading->distance_m);
    rfade_process_at(&drive->scatter, reading->distance_m, scatter);
    ray = sqrt(reading->k);
    phase = drive->ray_phase + 2.0 * M_PI * reading->distance_m / drive->wavelength_m *
                                   cos(settings->ray_angle_deg * M_PI / 180.0);
    real = ray * cos(phase) + scatter[0];
    imaginary = ray * sin(phase) + scatter[1];
    reading->power_dbm =
        reading->local_mean_dbm +
        10.0 * log10((real * real + imaginary * imaginary) / (1.0 + reading->k));
    reading->level_dbm = received(settings, reading->power_dbm);
}

enum rfade_status rfade_simulate_drive(const struct rfade_drive_settings *settings,
                                       struct rfade_drive_reading **readings, size_t *count)
{
    enum rfade_status status;
    struct drive drive = {.generator = NULL};
    struct rfade_drive_reading *taken = NULL;
    double number;

    *readings = NULL;
    *count = 0;
    if (!valid_motion(settings) || !valid_channel(settings) || !valid_receiver(settings)) {
        return RFADE_DOMAIN;
    }
    number = floor(settings->rate_hz *
                   (settings->length_m / settings->speed_m_s +
                    (double)settings->standstill_count * settings->standstill_s)) +
             1.0;
    if (!(number <= most_readings)) {
        return RFADE_DOMAIN;
    }
    status = drive_open(&drive, settings);
    if (status != RFADE_OK) {
        goto out;
    }
    taken = calloc((size_t)number, sizeof *taken);
    if (taken == NULL) {
        status = RFADE_NO_MEMORY;
        goto out;
    }
    for (size_t i = 0; i < (size_t)number; i++) {
        taken[i].time_s = (double)i / settings->rate_hz;
        take_reading(&drive, &taken[i]);
    }
    *readings = taken;
    *count = (size_t)number;
out:
    drive_close(&drive);
    return status;
}
