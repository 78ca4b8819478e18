/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "route/route.h"

#include <math.h>
#include <stdlib.h>

static const double longest_leg_m = 500;
static const double same_place_m = 0.001;
static const double shortest_rest = 0.1; /* of a segment: too short to say anything */

struct rfade_route {
    struct rfade_route_point *points;
    size_t point_count;
    struct rfade_leg *legs;
    size_t leg_count;
};

void rfade_route_destroy(struct rfade_route *route)
{
    if (!route)
        return;
    free(route->points);
    free(route->legs);
    free(route);
}

static enum rfade_status check_places(const struct rfade_place *places, size_t count,
                                      struct rfade_error *error)
{
    for (size_t i = 0; i < count; i++)
        if (!rfade_place_is_valid(&places[i]))
            return rfade_error_set(
                error, RFADE_INPUT, "give latitude in [-90, 90] and longitude in [-180, 180]",
                "point %zu of the route is no place on earth: latitude %g, longitude %g", i + 1,
                places[i].latitude_deg, places[i].longitude_deg);
    return RFADE_OK;
}

static size_t pieces_of(double length_m)
{
    return (size_t)fmax(1, ceil(length_m / longest_leg_m));
}

/* Points with chainage; returns how many legs they make. */
static size_t place_points(struct rfade_route *route, const struct rfade_place *places,
                           size_t count)
{
    size_t legs = 0;
    double chainage_m = 0;
    for (size_t i = 0; i < count; i++) {
        if (i > 0) {
            double azimuth_deg = NAN;
            double length_m = rfade_geodesic(&route->points[route->point_count - 1].place,
                                             &places[i], &azimuth_deg);
            if (!(length_m >= same_place_m))
                continue;
            chainage_m += length_m;
            legs += pieces_of(length_m);
        }
        route->points[route->point_count++] =
            (struct rfade_route_point){.place = places[i], .chainage_m = chainage_m};
    }
    return legs;
}

static void cut_legs(struct rfade_route *route)
{
    for (size_t i = 1; i < route->point_count; i++) {
        const struct rfade_route_point *from = &route->points[i - 1];
        const struct rfade_route_point *to = &route->points[i];
        double azimuth_deg = NAN;
        double length_m = rfade_geodesic(&from->place, &to->place, &azimuth_deg);
        size_t pieces = pieces_of(length_m);
        struct rfade_leg leg = {.to = from->place, .to_m = from->chainage_m};
        for (size_t piece = 1; piece <= pieces; piece++) {
            double along_m = length_m * (double)piece / (double)pieces;
            leg.from = leg.to;
            leg.from_m = leg.to_m;
            leg.to = piece == pieces
                         ? to->place
                         : rfade_geodesic_direct(&from->place, azimuth_deg, along_m);
            leg.to_m = piece == pieces ? to->chainage_m : from->chainage_m + along_m;
            route->legs[route->leg_count++] = leg;
        }
    }
}

enum rfade_status rfade_route_create(const struct rfade_place *places, size_t count,
                                     struct rfade_route **route, struct rfade_error *error)
{
    *route = NULL;
    enum rfade_status status = check_places(places, count, error);
    if (status != RFADE_OK)
        return status;
    struct rfade_route *made = calloc(1, sizeof *made);
    if (!made || !(made->points = calloc(count + 1, sizeof *made->points)))
        goto no_memory;
    size_t legs = place_points(made, places, count);
    if (legs == 0) {
        rfade_route_destroy(made);
        return rfade_error_set(error, RFADE_INPUT, "give at least two points along the road",
                               "the route has fewer than two different points");
    }
    made->legs = calloc(legs, sizeof *made->legs);
    if (!made->legs)
        goto no_memory;
    cut_legs(made);
    *route = made;
    return RFADE_OK;

no_memory:
    rfade_route_destroy(made);
    return rfade_error_no_memory(error);
}

double rfade_route_length_m(const struct rfade_route *route)
{
    return route->points[route->point_count - 1].chainage_m;
}

const struct rfade_route_point *rfade_route_points(const struct rfade_route *route,
                                                   size_t *count)
{
    *count = route->point_count;
    return route->points;
}

const struct rfade_leg *rfade_route_legs(const struct rfade_route *route, size_t *count)
{
    *count = route->leg_count;
    return route->legs;
}

struct rfade_place rfade_route_place(const struct rfade_route *route, double chainage_m,
                                     double *azimuth_deg)
{
    size_t low = 0;
    size_t high = route->leg_count - 1;
    while (low < high) {
        size_t middle = (low + high) / 2;
        if (route->legs[middle].to_m < chainage_m)
            low = middle + 1;
        else
            high = middle;
    }
    const struct rfade_leg *leg = &route->legs[low];
    double along_m = fmin(fmax(chainage_m, leg->from_m), leg->to_m) - leg->from_m;
    (void)rfade_geodesic(&leg->from, &leg->to, azimuth_deg);
    return rfade_geodesic_direct(&leg->from, *azimuth_deg, along_m);
}

size_t rfade_segment_count(double length_m, double segment_m)
{
    double whole = floor(length_m / segment_m);
    bool rest_counts = length_m - whole * segment_m >= shortest_rest * segment_m;
    return (size_t)fmax(1, whole + (rest_counts ? 1 : 0));
}

void rfade_segment_bounds(double length_m, double segment_m, size_t number, double *from_m,
                          double *to_m)
{
    *from_m = (double)(number - 1) * segment_m;
    *to_m = number == rfade_segment_count(length_m, segment_m) ? length_m
                                                               : (double)number * segment_m;
}
