/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <errno.h>
#include <geodesic.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "cli/command.h"
#include "cli/time_option.h"
#include "output/drive_log.h"
#include "routefade/simulate.h"

struct simulate_options {
    int64_t seed;
    double length_m, carrier_hz, speed_kmh, rate_hz;
    struct rfade_numbers k;
    double stretch_m, ray_angle_deg;
    double mean_level_dbm, shadowing_db, decorrelation_m;
    const char *shadowing;
    double step_db, floor_dbm, ceiling_dbm;
    struct rfade_numbers standstill_at_m;
    double standstill_s;
    double position_scatter_m, fix_interval_s;
    const char *start, *layout;
    int64_t zone_minutes;
    const char *vehicle, *channel, *second_channel;
    double second_carrier_hz, second_mean_level_dbm;
    const char *output, *truth;
};

static const struct simulate_options defaults = {
    .seed = 1,
    .length_m = 1000,
    .carrier_hz = 457e6,
    .speed_kmh = 36,
    .rate_hz = 100,
    .stretch_m = 100,
    .ray_angle_deg = 90,
    .mean_level_dbm = -85,
    .shadowing_db = 4,
    .decorrelation_m = 60,
    .shadowing = "smooth",
    .step_db = 1,
    .floor_dbm = NAN,
    .ceiling_dbm = NAN,
    .standstill_s = 30,
    .position_scatter_m = 0,
    .fix_interval_s = 1,
    .start = "2027-01-12T20:00:00Z",
    .layout = "comma",
    .zone_minutes = 60,
    .vehicle = "spreader-1",
    .channel = "main",
    .second_carrier_hz = NAN,
    .second_mean_level_dbm = NAN,
};

static const char *shadowing_name(size_t index)
{
    static const char *const names[] = {"smooth", "exponential"};
    return index < sizeof names / sizeof names[0] ? names[index] : NULL;
}

/* In the order of enum rfade_log_layout. */
static const char *layout_name(size_t index)
{
    static const char *const names[] = {"comma", "semicolon", "blanks"};
    return index < sizeof names / sizeof names[0] ? names[index] : NULL;
}

#define TARGET(member) offsetof(struct simulate_options, member)

static const struct rfade_option options[] = {
    {"length-m", "M", RFADE_OPTION_NUMBER, TARGET(length_m), 1e-3, 1e9, NULL,
     "length of the drive, default 1000"},
    {"carrier-hz", "HZ", RFADE_OPTION_NUMBER, TARGET(carrier_hz), 1e5, 3e11, NULL,
     "carrier frequency, default 457e6"},
    {"speed-kmh", "V", RFADE_OPTION_NUMBER, TARGET(speed_kmh), 0.0036, 3.6e5, NULL,
     "speed between standstills, default 36"},
    {"rate-hz", "HZ", RFADE_OPTION_NUMBER, TARGET(rate_hz), 1e-6, 1e9, NULL,
     "readings a second, default 100"},
    {"k", "LIST", RFADE_OPTION_NUMBERS, TARGET(k), 0, 1e9, NULL,
     "Rice K (linear) by stretch, repeated in turn, for instance 0,1,4,10, default 0: "
     "Rayleigh"},
    {"stretch-m", "M", RFADE_OPTION_NUMBER, TARGET(stretch_m), 1e-3, 1e9, NULL,
     "length over which one K holds, default 100"},
    {"ray-angle-deg", "DEG", RFADE_OPTION_NUMBER, TARGET(ray_angle_deg), -360, 360, NULL,
     "direct ray against the road: 90 broadside, 0 along it, default 90"},
    {"mean-level-dbm", "DBM", RFADE_OPTION_NUMBER, TARGET(mean_level_dbm), -300, 100, NULL,
     "dB-median of the local mean power, default -85"},
    {"shadowing-db", "DB", RFADE_OPTION_NUMBER, TARGET(shadowing_db), 0, 30, NULL,
     "standard deviation of the local mean, default 4"},
    {"decorrelation-m", "M", RFADE_OPTION_NUMBER, TARGET(decorrelation_m), 1e-3, 1e9, NULL,
     "distance over which the local mean's correlation falls to 1/e, default 60"},
    {"shadowing", "SHAPE", RFADE_OPTION_CHOICE, TARGET(shadowing), 0, 0, shadowing_name,
     "the local mean's correlation over distance, smooth if not told"},
    {"step-db", "DB", RFADE_OPTION_NUMBER, TARGET(step_db), 0, 20, NULL,
     "the receiver rounds to multiples of this; 0 not at all, default 1"},
    {"floor-dbm", "DBM", RFADE_OPTION_NUMBER, TARGET(floor_dbm), -300, 100, NULL,
     "lower levels are reported as this one, default: no floor"},
    {"ceiling-dbm", "DBM", RFADE_OPTION_NUMBER, TARGET(ceiling_dbm), -300, 100, NULL,
     "higher levels are reported as this one, default: no ceiling"},
    {"standstill-at-m", "LIST", RFADE_OPTION_NUMBERS, TARGET(standstill_at_m), 0, 1e9, NULL,
     "places where the vehicle stands, in rising order"},
    {"standstill-s", "S", RFADE_OPTION_NUMBER, TARGET(standstill_s), 0, 1e6, NULL,
     "how long it stands at each, default 30"},
    {"position-scatter-m", "M", RFADE_OPTION_NUMBER, TARGET(position_scatter_m), 0, 1000, NULL,
     "standard deviation of a position, north and east each, default 0"},
    {"fix-interval-s", "S", RFADE_OPTION_NUMBER, TARGET(fix_interval_s), 1e-3, 1e6, NULL,
     "a new position so often, default 1"},
    {"seed", "N", RFADE_OPTION_INTEGER, TARGET(seed), 1, 4294967295, NULL,
     "the same seed and settings give the same digits, default 1"},
    {"start", "TIME", RFADE_OPTION_TEXT, TARGET(start), 0, 0, NULL,
     "time of the first reading, default 2027-01-12T20:00:00Z"},
    {"layout", "NAME", RFADE_OPTION_CHOICE, TARGET(layout), 0, 0, layout_name,
     "how the log's columns are laid out, comma if not told"},
    {"zone-minutes", "N", RFADE_OPTION_INTEGER, TARGET(zone_minutes), -840, 840, NULL,
     "local time of the semicolon layout, minutes east of UTC, default 60"},
    {"vehicle", "NAME", RFADE_OPTION_TEXT, TARGET(vehicle), 0, 0, NULL,
     "name in the log's vehicle column, default spreader-1"},
    {"channel", "NAME", RFADE_OPTION_TEXT, TARGET(channel), 0, 0, NULL,
     "name of the channel, default main"},
    {"second-channel", "NAME", RFADE_OPTION_TEXT, TARGET(second_channel), 0, 0, NULL,
     "a second channel in each row of the blanks layout, fading by itself"},
    {"second-carrier-hz", "HZ", RFADE_OPTION_NUMBER, TARGET(second_carrier_hz), 1e5, 3e11, NULL,
     "its carrier frequency, default: that of the first"},
    {"second-mean-level-dbm", "DBM", RFADE_OPTION_NUMBER, TARGET(second_mean_level_dbm), -300,
     100, NULL, "its median level, default: that of the first"},
    {"output", "FILE", RFADE_OPTION_TEXT, TARGET(output), 0, 0, NULL,
     "a new file for the log; standard output if not told"},
    {"truth", "FILE", RFADE_OPTION_TEXT, TARGET(truth), 0, 0, NULL,
     "a new CSV file for the true power, local mean and K of the (first) channel by reading"},
};

/* The invented origin of a straight drive: open sea, so that nobody takes it for a road. */
static const double origin_latitude_deg = 60.5;
static const double origin_longitude_deg = -24.5;
static const double origin_azimuth_deg = 62;

static void locate_on_straight(const void *context, double distance_m, double *latitude_deg,
                               double *longitude_deg)
{
    (void)geod_position(context, distance_m, latitude_deg, longitude_deg, NULL);
}

/* A new file: what is there already is never overwritten. */
static enum rfade_status create_file(const char *path, FILE **file, struct rfade_error *error)
{
    *file = fopen(path, "wx");
    if (*file)
        return RFADE_OK;
    return rfade_error_system(error, path, errno, "name a file that can be made anew",
                              "can't make the file");
}

/* Closes a file that was made; one that is not whole is removed. */
static enum rfade_status close_file(const char *path, FILE *file, enum rfade_status status,
                                    struct rfade_error *error)
{
    if (!file)
        return status;
    if (fclose(file) != 0 && status == RFADE_OK)
        status = rfade_error_system(error, path, errno, "check that the disk has room",
                                    "can't write all of the file");
    if (status != RFADE_OK)
        (void)remove(path);
    return status;
}

static enum rfade_status simulate(const struct simulate_options *given,
                                  const struct rfade_drive_settings *settings,
                                  struct rfade_drive_reading **readings, size_t *count,
                                  struct rfade_error *error)
{
    enum rfade_status status = rfade_simulate_drive(settings, readings, count);
    if (status == RFADE_DOMAIN)
        return rfade_error_set(
            error, RFADE_USAGE,
            "a drive has at most 1e8 readings and 800,000 wavelengths; standstills lie on it, "
            "in "
            "rising order; the ceiling lies above the floor",
            "a drive of %g m at %g km/h with these settings can't be simulated",
            given->length_m, given->speed_kmh);
    if (status != RFADE_OK)
        return rfade_error_set(error, status, NULL, "can't simulate the drive: %s",
                               rfade_status_text(status));
    return RFADE_OK;
}

static struct rfade_drive_settings settings_of(const struct simulate_options *given)
{
    static const double rayleigh_k = 0;
    bool exponential = strcmp(given->shadowing, "exponential") == 0;
    return (struct rfade_drive_settings){
        .seed = (uint64_t)given->seed,
        .length_m = given->length_m,
        .carrier_hz = given->carrier_hz,
        .speed_m_s = given->speed_kmh / 3.6,
        .rate_hz = given->rate_hz,
        .k = given->k.count ? given->k.items : &rayleigh_k,
        .k_count = given->k.count ? given->k.count : 1,
        .stretch_m = given->stretch_m,
        .ray_angle_deg = given->ray_angle_deg,
        .mean_level_dbm = given->mean_level_dbm,
        .shadowing_db = given->shadowing_db,
        .decorrelation_m = given->decorrelation_m,
        .shadowing = exponential ? RFADE_SHADOWING_EXPONENTIAL : RFADE_SHADOWING_SMOOTH,
        .step_db = given->step_db,
        .floor_dbm = given->floor_dbm,
        .ceiling_dbm = given->ceiling_dbm,
        .standstill_at_m = given->standstill_at_m.items,
        .standstill_count = given->standstill_at_m.count,
        .standstill_s = given->standstill_s,
    };
}

/* The second channel: the same drive, another draw of the fading. */
static struct rfade_drive_settings second_settings_of(const struct simulate_options *given)
{
    struct rfade_drive_settings settings = settings_of(given);
    settings.seed = (settings.seed + 0x9E3779B9u) & 0xFFFFFFFFu;
    if (settings.seed == 0)
        settings.seed = 1;
    if (!isnan(given->second_carrier_hz))
        settings.carrier_hz = given->second_carrier_hz;
    if (!isnan(given->second_mean_level_dbm))
        settings.mean_level_dbm = given->second_mean_level_dbm;
    return settings;
}

static enum rfade_log_layout layout_of(const struct simulate_options *given)
{
    size_t index = 0;
    while (strcmp(layout_name(index), given->layout) != 0)
        index++;
    return (enum rfade_log_layout)index;
}

static enum rfade_status write_log(struct rfade_run *run, const struct rfade_drive_log *log,
                                   struct rfade_error *error)
{
    const struct simulate_options *given = run->options;
    FILE *file = NULL;
    enum rfade_status status = RFADE_OK;
    if (given->output)
        status = create_file(given->output, &file, error);
    if (status == RFADE_OK)
        status = rfade_drive_log_write(file ? file : run->output, given->output, log, error);
    return close_file(given->output, file, status, error);
}

static enum rfade_status write_truth(const struct simulate_options *given,
                                     const struct rfade_drive_log *log,
                                     struct rfade_error *error)
{
    FILE *file = NULL;
    enum rfade_status status = create_file(given->truth, &file, error);
    if (status == RFADE_OK)
        status = rfade_drive_truth_write(file, given->truth, log->readings, log->count, error);
    return close_file(given->truth, file, status, error);
}

static enum rfade_status check_options(const struct simulate_options *given,
                                       struct rfade_error *error)
{
    const struct rfade_command *command = &rfade_command_simulate;
    bool blanks = layout_of(given) == RFADE_LAYOUT_BLANKS;
    if (given->second_channel && !blanks)
        return rfade_usage(error, command, "--second-channel needs --layout blanks");
    if (!given->second_channel &&
        !(isnan(given->second_carrier_hz) && isnan(given->second_mean_level_dbm)))
        return rfade_usage(error, command,
                           "settings of a second channel need --second-channel");
    return RFADE_OK;
}

static enum rfade_status run_simulate(struct rfade_run *run, struct rfade_error *error)
{
    const struct simulate_options *given = run->options;
    struct rfade_drive_reading *readings = NULL, *second = NULL;
    size_t count = 0, second_count = 0;
    struct geod_geodesic earth;
    struct geod_geodesicline straight;
    int64_t start_us = 0;
    enum rfade_status status = check_options(given, error);
    if (status == RFADE_OK)
        status =
            rfade_time_option(&rfade_command_simulate, "start", given->start, &start_us, error);
    if (status != RFADE_OK)
        return status;
    geod_init(&earth, 6378137.0, 1 / 298.257223563);
    geod_lineinit(&straight, &earth, origin_latitude_deg, origin_longitude_deg,
                  origin_azimuth_deg, 0);
    struct rfade_drive_settings settings = settings_of(given);
    status = simulate(given, &settings, &readings, &count, error);
    if (status == RFADE_OK && given->second_channel) {
        settings = second_settings_of(given);
        status = simulate(given, &settings, &second, &second_count, error);
    }
    struct rfade_drive_log log = {
        .layout = layout_of(given),
        .vehicle = given->vehicle,
        .channel = given->channel,
        .second_channel = given->second_channel,
        .readings = readings,
        .second_readings = second,
        .count = count,
        .step_db = given->step_db,
        .start_us = start_us,
        .zone_minutes = (int)given->zone_minutes,
        .fix_interval_s = given->fix_interval_s,
        .position_scatter_m = given->position_scatter_m,
        .seed = (uint64_t)given->seed,
        .line = {locate_on_straight, &straight},
    };
    if (status == RFADE_OK && given->truth)
        status = write_truth(given, &log, error);
    if (status == RFADE_OK)
        status = write_log(run, &log, error);
    free(readings);
    free(second);
    return status;
}

const struct rfade_command rfade_command_simulate = {
    .name = "simulate",
    .summary = "Writes a synthetic drive with known truth",
    .details = "The log is what a receiver of that step, floor and ceiling would report on a\n"
               "drive through Gaussian scatter with a direct ray over a lognormal local mean.",
    .options = options,
    .option_count = sizeof options / sizeof options[0],
    .defaults = &defaults,
    .options_size = sizeof defaults,
    .run = run_simulate,
};
