/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file vehicle.h  Calibration of the vehicles' receiving chains, by date. */
#ifndef ROUTEFADE_SURVEY_VEHICLE_H
#define ROUTEFADE_SURVEY_VEHICLE_H

#include <stddef.h>

#include "survey/name.h"

/** A calibration in force since ever. */
#define RFADE_SINCE_EVER_US INT64_MIN

/** Holds from its time on until the vehicle's next one. Without any: 0 dB, unknown by 0 dB. */
struct rfade_calibration {
    int64_t vehicle_id;
    char vehicle[RFADE_NAME_SIZE];
    int64_t from_us;
    double offset_db;             /**< added to the level as logged, [-200, 200] */
    double offset_uncertainty_db; /**< standard uncertainty, [0, 50] */
};

struct rfade_vehicle {
    int64_t vehicle_id;
    char name[RFADE_NAME_SIZE];
};

/**
 * Sets the calibration of a vehicle from a time on (replacing one from the same time) and
 * adds the vehicle if it is missing; in one transaction of its own.
 * @return RFADE_OK | RFADE_INPUT (a value outside its range, a bad name) | RFADE_STORAGE
 */
enum rfade_status rfade_survey_calibrate(struct rfade_survey *survey, const char *vehicle,
                                         int64_t from_us, double offset_db,
                                         double offset_uncertainty_db,
                                         struct rfade_error *error);

/** All vehicles by name. free() the array. */
enum rfade_status rfade_survey_vehicles(struct rfade_survey *survey,
                                        struct rfade_vehicle **vehicles, size_t *count,
                                        struct rfade_error *error);

/** All calibrations, by vehicle's name and time. free() the array. */
enum rfade_status rfade_survey_calibrations(struct rfade_survey *survey,
                                            struct rfade_calibration **calibrations,
                                            size_t *count, struct rfade_error *error);

/** The latest calibration of a vehicle at or before a time; NULL if there is none. */
const struct rfade_calibration *
rfade_calibration_at(const struct rfade_calibration *calibrations, size_t count,
                     int64_t vehicle_id, int64_t time_us);

#endif
