/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "survey/vehicle.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "cli/command.h"
#include "cli/time_option.h"
#include "output/utc.h"

struct vehicle_options {
    double offset_db, offset_uncertainty_db;
    const char *from;
};

static const struct vehicle_options defaults = {.offset_db = NAN, .offset_uncertainty_db = NAN};

#define TARGET(member) offsetof(struct vehicle_options, member)

static const struct rfade_option options[] = {
    {"offset-db", "DB", RFADE_OPTION_NUMBER, TARGET(offset_db), -200, 200, NULL,
     "added to every level that the vehicle logged: cable, antenna, receiver"},
    {"offset-uncertainty-db", "DB", RFADE_OPTION_NUMBER, TARGET(offset_uncertainty_db), 0, 50,
     NULL, "standard uncertainty of that offset, default 0"},
    {"from", "TIME", RFADE_OPTION_TEXT, TARGET(from), 0, 0, NULL,
     "holds from this time on (2027-01-12 or 2027-01-12T20:00:00Z); if not told, since ever"},
};

static const struct rfade_column columns[] = {
    {"vehicle", RFADE_COLUMN_TEXT, 0, false, false},
    {"from", RFADE_COLUMN_TEXT, 0, false, false},
    {"offset_db", RFADE_COLUMN_NUMBER, 2, false, false},
    {"offset_uncertainty_db", RFADE_COLUMN_NUMBER, 2, false, false},
};
enum { COLUMNS = sizeof columns / sizeof columns[0] };

/* A vehicle's calibrations, or a row without one. */
static enum rfade_status write_vehicle(struct rfade_rows *rows,
                                       const struct rfade_vehicle *vehicle,
                                       const struct rfade_calibration *calibrations,
                                       size_t count, struct rfade_error *error)
{
    bool any = false;
    for (size_t i = 0; i < count; i++) {
        char from[RFADE_UTC_SIZE];
        if (calibrations[i].vehicle_id != vehicle->vehicle_id)
            continue;
        any = true;
        rfade_utc_text(calibrations[i].from_us, from);
        const struct rfade_value values[COLUMNS] = {
            rfade_value_text(vehicle->name),
            rfade_value_text(calibrations[i].from_us == RFADE_SINCE_EVER_US ? NULL : from),
            rfade_value_number(calibrations[i].offset_db),
            rfade_value_number(calibrations[i].offset_uncertainty_db),
        };
        enum rfade_status status = rfade_rows_row(rows, values, error);
        if (status != RFADE_OK)
            return status;
    }
    const struct rfade_value uncalibrated[COLUMNS] = {rfade_value_text(vehicle->name)};
    return any ? RFADE_OK : rfade_rows_row(rows, uncalibrated, error);
}

/* All vehicles, or the one of that name. */
static enum rfade_status list_vehicles(const struct rfade_run *run, struct rfade_survey *survey,
                                       const char *name, struct rfade_error *error)
{
    struct rfade_vehicle *vehicles = NULL;
    struct rfade_calibration *calibrations = NULL;
    struct rfade_rows *rows = NULL;
    size_t vehicle_count = 0, calibration_count = 0;
    int64_t id = 0;
    enum rfade_status status = RFADE_OK;
    if (name)
        status = rfade_name_require(survey, RFADE_NAMED_VEHICLE, name, &id, error);
    if (status == RFADE_OK)
        status = rfade_survey_vehicles(survey, &vehicles, &vehicle_count, error);
    if (status == RFADE_OK)
        status = rfade_survey_calibrations(survey, &calibrations, &calibration_count, error);
    if (status == RFADE_OK)
        status = rfade_rows_begin(run->common->format, run->output, NULL, columns, COLUMNS,
                                  &rows, error);
    for (size_t i = 0; status == RFADE_OK && i < vehicle_count; i++)
        if (!name || vehicles[i].vehicle_id == id)
            status = write_vehicle(rows, &vehicles[i], calibrations, calibration_count, error);
    if (status == RFADE_OK)
        status = rfade_rows_end(rows, error);
    rfade_rows_destroy(rows);
    free(vehicles);
    free(calibrations);
    return status;
}

static enum rfade_status calibrate(const struct rfade_run *run, const char *name,
                                   int64_t from_us, struct rfade_error *error)
{
    const struct vehicle_options *given = run->options;
    double uncertainty_db = given->offset_uncertainty_db;
    struct rfade_survey *survey = NULL;
    enum rfade_status status =
        rfade_survey_open(run->common->survey, RFADE_SURVEY_CREATE, &survey, error);
    if (status == RFADE_OK)
        status = rfade_survey_calibrate(survey, name, from_us, given->offset_db,
                                        isnan(uncertainty_db) ? 0 : uncertainty_db, error);
    rfade_survey_close(survey);
    return status;
}

static enum rfade_status run_vehicle(struct rfade_run *run, struct rfade_error *error)
{
    const struct vehicle_options *given = run->options;
    const char *name = run->arguments.count ? run->arguments.items[0] : NULL;
    bool calibrating = !isnan(given->offset_db);
    int64_t from_us = RFADE_SINCE_EVER_US;
    if (!calibrating && (given->from || !isnan(given->offset_uncertainty_db)))
        return rfade_usage(error, &rfade_command_vehicle,
                           "a calibration needs --offset-db (0 is a value)");
    if (calibrating && !name)
        return rfade_usage(error, &rfade_command_vehicle,
                           "whose calibration is that? give NAME");
    if (calibrating) {
        enum rfade_status status = RFADE_OK;
        if (given->from)
            status =
                rfade_time_option(&rfade_command_vehicle, "from", given->from, &from_us, error);
        return status == RFADE_OK ? calibrate(run, name, from_us, error) : status;
    }
    struct rfade_survey *survey = NULL;
    enum rfade_status status =
        rfade_survey_open(run->common->survey, RFADE_SURVEY_READ, &survey, error);
    if (status == RFADE_OK)
        status = list_vehicles(run, survey, name, error);
    rfade_survey_close(survey);
    return status;
}

const struct rfade_command rfade_command_vehicle = {
    .name = "vehicle",
    .arguments = "[NAME]",
    .summary = "calibrate a vehicle's receiving chain; without options, list them",
    .arguments_max = 1,
    .options = options,
    .option_count = sizeof options / sizeof options[0],
    .defaults = &defaults,
    .options_size = sizeof defaults,
    .run = run_vehicle,
};
