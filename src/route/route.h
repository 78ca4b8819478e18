/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file route.h  A reference line with chainage: the distance along it from its first point,
 * m. Pure geometry. Legs are geodesics; long ones are held in pieces of at most 500 m, so
 * that a piece is straight in the plane that touches it to within a centimetre or so.
 */
#ifndef ROUTEFADE_ROUTE_ROUTE_H
#define ROUTEFADE_ROUTE_ROUTE_H

#include <stddef.h>

#include "common/error.h"
#include "route/geodesy.h"

struct rfade_route; /* opaque */

struct rfade_route_point {
    struct rfade_place place;
    double chainage_m;
};

/** A straight piece between two places. */
struct rfade_leg {
    struct rfade_place from;
    struct rfade_place to;
    double from_m; /**< chainage */
    double to_m;   /**< > from_m */
};

/**
 * A line through places. A place less than 1 mm from the one before is left out.
 * @return RFADE_OK | RFADE_INPUT (fewer than two places, a place out of range) |
 *         RFADE_NO_MEMORY
 */
enum rfade_status rfade_route_create(const struct rfade_place *places, size_t count,
                                     struct rfade_route **route, struct rfade_error *error);
void rfade_route_destroy(struct rfade_route *route); /* NULL is harmless */

double rfade_route_length_m(const struct rfade_route *route);

/** Borrowed; valid until _destroy. */
const struct rfade_route_point *rfade_route_points(const struct rfade_route *route,
                                                   size_t *count);
const struct rfade_leg *rfade_route_legs(const struct rfade_route *route, size_t *count);

/** The place at a chainage (clamped to the line) and the line's azimuth there. */
struct rfade_place rfade_route_place(const struct rfade_route *route, double chainage_m,
                                     double *azimuth_deg);

/**
 * Number of segments: equal lengths of segment_m (> 0) and a shorter last one; a rest below
 * a tenth of segment_m belongs to the one before it. At least 1.
 */
size_t rfade_segment_count(double length_m, double segment_m);

/** From and to of segment `number`, 1 .. count. */
void rfade_segment_bounds(double length_m, double segment_m, size_t number, double *from_m,
                          double *to_m);

#endif
