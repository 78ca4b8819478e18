/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "survey/vehicle.h"

#include "survey/rows.h"

static enum rfade_status check(const char *vehicle, double offset_db, double uncertainty_db,
                               struct rfade_error *error)
{
    if (!(offset_db >= -200 && offset_db <= 200))
        return rfade_error_set(error, RFADE_INPUT, "give it in dB, from -200 to 200",
                               "vehicle %s: an offset of %g dB is impossible", vehicle,
                               offset_db);
    if (!(uncertainty_db >= 0 && uncertainty_db <= 50))
        return rfade_error_set(error, RFADE_INPUT, "give it in dB, from 0 to 50",
                               "vehicle %s: an uncertainty of %g dB is impossible", vehicle,
                               uncertainty_db);
    return RFADE_OK;
}

static enum rfade_status calibrate_inside(struct rfade_survey *survey, const char *vehicle,
                                          int64_t from_us, double offset_db,
                                          double uncertainty_db, struct rfade_error *error)
{
    int64_t id = 0;
    bool found = false;
    enum rfade_status status =
        rfade_name_find(survey, RFADE_NAMED_VEHICLE, vehicle, &id, &found, error);
    if (status == RFADE_OK && !found)
        status = rfade_name_check(RFADE_NAMED_VEHICLE, vehicle, error);
    if (status == RFADE_OK && !found)
        status = rfade_name_add(survey, RFADE_NAMED_VEHICLE, vehicle, &id, error);
    if (status == RFADE_OK)
        status = rfade_survey_run(survey, error,
                                  "INSERT INTO calibration VALUES (?1, ?2, ?3, ?4) "
                                  "ON CONFLICT (vehicle_id, from_us) DO UPDATE SET offset_db = "
                                  "?3, offset_uncertainty_db = ?4 "
                                  "WHERE offset_db <> ?3 OR offset_uncertainty_db <> ?4",
                                  "iidd", id, from_us, offset_db, uncertainty_db);
    if (status == RFADE_OK && sqlite3_changes(rfade_survey_database(survey)) > 0)
        status = rfade_survey_changed(survey, error);
    return status;
}

enum rfade_status rfade_survey_calibrate(struct rfade_survey *survey, const char *vehicle,
                                         int64_t from_us, double offset_db,
                                         double offset_uncertainty_db,
                                         struct rfade_error *error)
{
    enum rfade_status status = check(vehicle, offset_db, offset_uncertainty_db, error);
    if (status != RFADE_OK)
        return status;
    status = rfade_survey_begin(survey, error);
    if (status == RFADE_OK)
        status =
            calibrate_inside(survey, vehicle, from_us, offset_db, offset_uncertainty_db, error);
    if (status == RFADE_OK)
        status = rfade_survey_commit(survey, error);
    rfade_survey_rollback(survey);
    return status;
}

static void read_vehicle(sqlite3_stmt *statement, void *row)
{
    struct rfade_vehicle *vehicle = row;
    vehicle->vehicle_id = sqlite3_column_int64(statement, 0);
    rfade_name_copy(vehicle->name, statement, 1);
}

enum rfade_status rfade_survey_vehicles(struct rfade_survey *survey,
                                        struct rfade_vehicle **vehicles, size_t *count,
                                        struct rfade_error *error)
{
    void *rows = NULL;
    enum rfade_status status =
        rfade_rows_query(survey, sizeof **vehicles, read_vehicle, &rows, count, error,
                         "SELECT vehicle_id, name FROM vehicle ORDER BY name", "");
    *vehicles = rows;
    return status;
}

static void read_calibration(sqlite3_stmt *statement, void *row)
{
    struct rfade_calibration *calibration = row;
    calibration->vehicle_id = sqlite3_column_int64(statement, 0);
    rfade_name_copy(calibration->vehicle, statement, 1);
    calibration->from_us = sqlite3_column_int64(statement, 2);
    calibration->offset_db = sqlite3_column_double(statement, 3);
    calibration->offset_uncertainty_db = sqlite3_column_double(statement, 4);
}

enum rfade_status rfade_survey_calibrations(struct rfade_survey *survey,
                                            struct rfade_calibration **calibrations,
                                            size_t *count, struct rfade_error *error)
{
    void *rows = NULL;
    enum rfade_status status = rfade_rows_query(
        survey, sizeof **calibrations, read_calibration, &rows, count, error,
        "SELECT vehicle_id, name, from_us, offset_db, offset_uncertainty_db FROM calibration "
        "JOIN vehicle USING (vehicle_id) ORDER BY name, from_us",
        "");
    *calibrations = rows;
    return status;
}

const struct rfade_calibration *
rfade_calibration_at(const struct rfade_calibration *calibrations, size_t count,
                     int64_t vehicle_id, int64_t time_us)
{
    const struct rfade_calibration *in_force = NULL; /* they stand in the order of time */
    for (size_t i = 0; i < count; i++)
        if (calibrations[i].vehicle_id == vehicle_id && calibrations[i].from_us <= time_us)
            in_force = &calibrations[i];
    return in_force;
}
