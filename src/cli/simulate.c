/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <errno.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "cli/simulate_options.h"
#include "cli/time_option.h"
#include "route/read_line.h"
#include "route/route.h"

/* The invented origin of a straight drive: open sea, so that nobody takes it for a road. */
static const struct rfade_place origin = {60.5, -24.5};
static const double origin_azimuth_deg = 62;
static const double straight_length_m = 1000;

static struct rfade_place locate_on_straight(const void *context, double distance_m)
{
    return rfade_geodesic_direct(context, origin_azimuth_deg, distance_m);
}

static struct rfade_place locate_on_route(const void *context, double distance_m)
{
    double azimuth_deg;
    return rfade_route_place(context, distance_m, &azimuth_deg);
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

/* The line that is driven, and how long it is. */
struct line {
    struct rfade_drive_line drive;
    struct rfade_route *route; /* owned; NULL: straight on */
    double length_m;           /* infinite: straight on */
};

static enum rfade_status find_line(const struct simulate_options *given, struct line *line,
                                   struct rfade_error *error)
{
    struct rfade_place *places = NULL;
    size_t count = 0;
    *line = (struct line){{locate_on_straight, &origin}, NULL, INFINITY};
    if (!given->route)
        return RFADE_OK;
    enum rfade_status status = rfade_read_line(given->route, &places, &count, error);
    if (status == RFADE_OK)
        status = rfade_route_create(places, count, &line->route, error);
    free(places);
    if (status != RFADE_OK)
        return status;
    line->length_m = rfade_route_length_m(line->route);
    line->drive = (struct rfade_drive_line){locate_on_route, line->route};
    if (given->length_m > line->length_m)
        return rfade_error_set(error, RFADE_USAGE, "leave --length-m out to drive all of it",
                               "the route is %.1f m long, less than --length-m %g",
                               line->length_m, given->length_m);
    return RFADE_OK;
}

static enum rfade_status draw(struct rfade_drive_settings settings, const struct line *line,
                              struct rfade_drive_reading **readings, size_t *count,
                              struct rfade_error *error)
{
    if (isnan(settings.length_m))
        settings.length_m = line->route ? line->length_m : straight_length_m;
    enum rfade_status status = rfade_simulate_drive(&settings, readings, count);
    if (status == RFADE_DOMAIN)
        return rfade_error_set(error, RFADE_USAGE,
                               "a drive has at most 1e8 readings and 800,000 wavelengths; "
                               "standstills lie on it, in rising order; the ceiling lies above "
                               "the floor",
                               "a drive of %g m at %g km/h with these settings can't be "
                               "simulated",
                               settings.length_m, settings.speed_m_s * 3.6);
    if (status != RFADE_OK)
        return rfade_error_set(error, status, NULL, "can't simulate the drive: %s",
                               rfade_status_text(status));
    return RFADE_OK;
}

/* All that was drawn, written out. */
static enum rfade_status write_drive(struct rfade_run *run, const struct line *line,
                                     int64_t start_us,
                                     const struct rfade_drive_reading *readings,
                                     const struct rfade_drive_reading *second, size_t count,
                                     struct rfade_error *error)
{
    const struct simulate_options *given = run->options;
    const struct rfade_drive_log log = {
        .layout = rfade_simulate_layout(given),
        .vehicle = given->vehicle,
        .channel = given->channel,
        .second_channel = given->second_channel,
        .readings = readings,
        .second_readings = second,
        .count = count,
        .step_db = given->step_db,
        .noise_dbm = given->noise_dbm,
        .start_us = start_us,
        .zone_minutes = (int)given->zone_minutes,
        .fix_interval_s = given->fix_interval_s,
        .position_scatter_m = given->position_scatter_m,
        .seed = (uint64_t)given->seed,
        .line = line->drive,
    };
    enum rfade_status status = RFADE_OK;
    if (given->truth)
        status = write_truth(given, &log, error);
    return status == RFADE_OK ? write_log(run, &log, error) : status;
}

static enum rfade_status run_simulate(struct rfade_run *run, struct rfade_error *error)
{
    const struct simulate_options *given = run->options;
    struct rfade_drive_reading *readings = NULL, *second = NULL;
    struct line line = {.route = NULL};
    size_t count = 0, second_count = 0;
    int64_t start_us = 0;
    enum rfade_status status = rfade_simulate_options_check(given, error);
    if (status == RFADE_OK)
        status =
            rfade_time_option(&rfade_command_simulate, "start", given->start, &start_us, error);
    if (status == RFADE_OK)
        status = find_line(given, &line, error);
    if (status == RFADE_OK)
        status = draw(rfade_simulate_settings(given), &line, &readings, &count, error);
    if (status == RFADE_OK && given->second_channel)
        status =
            draw(rfade_simulate_second_settings(given), &line, &second, &second_count, error);
    if (status == RFADE_OK)
        status = write_drive(run, &line, start_us, readings, second, count, error);
    free(readings);
    free(second);
    rfade_route_destroy(line.route);
    return status;
}

const struct rfade_command rfade_command_simulate = {
    .name = "simulate",
    .summary = "write a synthetic drive with known truth",
    .details = "The log is what a receiver of that step, floor and ceiling would report on a\n"
               "drive through Gaussian scatter with a direct ray over a lognormal local mean.",
    .options = rfade_simulate_option_table,
    .option_count = RFADE_SIMULATE_OPTIONS,
    .defaults = &rfade_simulate_defaults,
    .options_size = sizeof rfade_simulate_defaults,
    .run = run_simulate,
};
