/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file drive.h  Drives along a route with known truth and scattered positions. */
#ifndef ROUTEFADE_TESTS_ROUTE_DRIVE_H
#define ROUTEFADE_TESTS_ROUTE_DRIVE_H

#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
/* cmocka.h wants those first */
#include <cmocka.h>

#include <gsl/gsl_randist.h>
#include <gsl/gsl_rng.h>
#include <math.h>
#include <stdint.h>
#include <stdlib.h>

#include "route/match.h"
#include "route/track.h"

enum { DRIVE_MAX = 20000 };

struct drive {
    struct rfade_route *route;
    struct rfade_position positions[DRIVE_MAX];
    double truth_m[DRIVE_MAX];
    struct rfade_match matches[DRIVE_MAX];
    size_t count;
    struct rfade_pass *passes;
    size_t pass_count;
    gsl_rng *generator;
    double scatter_m;
    bool with_speed;
};

/* Metres east and north of a made-up crossroads. */
static inline struct rfade_place at_metres(double east_m, double north_m)
{
    const struct rfade_place origin = {51.2, 7.4};
    double azimuth_deg = atan2(east_m, north_m) * 57.29577951308232;
    return rfade_geodesic_direct(&origin, azimuth_deg, hypot(east_m, north_m));
}

static inline struct rfade_route *route_of(const double (*points)[2], size_t count)
{
    struct rfade_place places[64];
    struct rfade_route *route = NULL;
    struct rfade_error error = {0};
    for (size_t i = 0; i < count; i++)
        places[i] = at_metres(points[i][0], points[i][1]);
    if (rfade_route_create(places, count, &route, &error) != RFADE_OK)
        fail_msg("%s", error.what);
    return route;
}

static inline struct drive *drive_new(struct rfade_route *route, double scatter_m,
                                      bool with_speed)
{
    struct drive *drive = calloc(1, sizeof *drive);
    assert_non_null(drive);
    drive->route = route;
    drive->scatter_m = scatter_m;
    drive->with_speed = with_speed;
    drive->generator = gsl_rng_alloc(gsl_rng_mt19937);
    gsl_rng_set(drive->generator, 20231);
    return drive;
}

static inline void drive_free(struct drive *drive)
{
    gsl_rng_free(drive->generator);
    rfade_route_destroy(drive->route);
    free(drive->passes);
    free(drive);
}

/* One fix: where the vehicle is by its true chainage, scattered both ways. */
static inline void drive_fix(struct drive *drive, double time_s, double chainage_m,
                             double speed_m_s)
{
    double azimuth_deg = NAN;
    struct rfade_place place = rfade_route_place(drive->route, chainage_m, &azimuth_deg);
    double east_m = gsl_ran_gaussian_ziggurat(drive->generator, 1) * drive->scatter_m;
    double north_m = gsl_ran_gaussian_ziggurat(drive->generator, 1) * drive->scatter_m;
    place = rfade_geodesic_direct(&place, atan2(east_m, north_m) * 57.29577951308232,
                                  hypot(east_m, north_m));
    assert_true(drive->count < DRIVE_MAX);
    drive->truth_m[drive->count] = chainage_m;
    drive->positions[drive->count++] = (struct rfade_position){
        .time_us = 1700000000000000 + llround(time_s * 1e6),
        .latitude_deg = place.latitude_deg,
        .longitude_deg = place.longitude_deg,
        .speed_m_s = drive->with_speed
                         ? fmax(0, speed_m_s + gsl_ran_gaussian_ziggurat(drive->generator, 0.1))
                         : NAN};
}

static inline void drive_match(struct drive *drive)
{
    struct rfade_matcher *matcher = NULL;
    struct rfade_error error = {0};
    const struct rfade_match_settings settings = rfade_match_defaults();
    assert_int_equal(rfade_matcher_create(drive->route, &settings, &matcher, &error), RFADE_OK);
    struct rfade_pass *passes = NULL;
    assert_int_equal(rfade_match_positions(matcher, drive->positions, drive->count,
                                           drive->matches, &passes, &drive->pass_count, &error),
                     RFADE_OK);
    free(drive->passes);
    drive->passes = passes;
    rfade_matcher_destroy(matcher);
}

static inline struct rfade_track *drive_track(const struct drive *drive, size_t pass)
{
    struct rfade_track *track = NULL;
    struct rfade_error error = {0};
    const struct rfade_track_settings settings = rfade_track_defaults();
    assert_int_equal(rfade_track_create(drive->positions, drive->matches, drive->count,
                                        &drive->passes[pass], &settings, &track, &error),
                     RFADE_OK);
    return track;
}

#endif
