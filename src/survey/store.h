/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file store.h  Routes and their segments in the survey. Arrays are the caller's to free().
 */
#ifndef ROUTEFADE_SURVEY_STORE_H
#define ROUTEFADE_SURVEY_STORE_H

#include <stddef.h>

#include "route/route.h"
#include "survey/name.h"

struct rfade_route_row {
    int64_t route_id;
    char name[RFADE_NAME_SIZE];
    double length_m;
    double segment_m;
    double corridor_m; /**< fixes further off do not match */
    int64_t point_count;
    int64_t segment_count;
};

struct rfade_segment_row {
    int64_t segment_id;
    int64_t number; /**< along the route, from 1 */
    double from_m;
    double to_m;
};

/**
 * Adds a route cut into segments of segment_m, the last one shorter where the length is no
 * multiple; in one transaction of its own. The same content under the same name is accepted
 * silently.
 * @param segment_m   [1, 1e6]
 * @param corridor_m  [1, 1000]
 * @return RFADE_OK | RFADE_INPUT (bad name or value) | RFADE_CONFLICT (the name has another
 *         content) | RFADE_STORAGE
 */
enum rfade_status rfade_survey_route_add(struct rfade_survey *survey, const char *name,
                                         const struct rfade_route *route, double segment_m,
                                         double corridor_m, struct rfade_error *error);

/** All routes by name. */
enum rfade_status rfade_survey_routes(struct rfade_survey *survey,
                                      struct rfade_route_row **routes, size_t *count,
                                      struct rfade_error *error);

/** The geometry of a route; _destroy it. */
enum rfade_status rfade_survey_route_load(struct rfade_survey *survey, int64_t route_id,
                                          struct rfade_route **route,
                                          struct rfade_error *error);

/** The segments of a route, by number. */
enum rfade_status rfade_survey_segments(struct rfade_survey *survey, int64_t route_id,
                                        struct rfade_segment_row **segments, size_t *count,
                                        struct rfade_error *error);

#endif
