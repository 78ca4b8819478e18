/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file geodesy.h  Distances on the WGS 84 ellipsoid. Reentrant; no input or output. */
#ifndef ROUTEFADE_ROUTE_GEODESY_H
#define ROUTEFADE_ROUTE_GEODESY_H

#include <stdbool.h>

struct rfade_place {
    double latitude_deg;  /**< [-90, 90] */
    double longitude_deg; /**< [-180, 180] */
};

/** Finite and in range. */
bool rfade_place_is_valid(const struct rfade_place *place);

/**
 * The geodesic between two places: its length and the azimuth at `from`, clockwise from
 * north in [-180, 180]. By PROJ's geodesic.h [Karney 2013]: 15 nm.
 */
double rfade_geodesic(const struct rfade_place *from, const struct rfade_place *to,
                      double *azimuth_deg);

/** The place at a distance and azimuth from another. */
struct rfade_place rfade_geodesic_direct(const struct rfade_place *from, double azimuth_deg,
                                         double distance_m);

/**
 * Metres east and north of an origin in the plane that touches the ellipsoid at its latitude
 * (radii of curvature of the meridian and the prime vertical): for distances up to some
 * kilometres, relative error below distance / 6000 km.
 */
struct rfade_plane {
    double latitude_deg;
    double longitude_deg;
    double north_m_per_deg;
    double east_m_per_deg;
};

struct rfade_offset {
    double east_m;
    double north_m;
};

struct rfade_plane rfade_plane_at(const struct rfade_place *origin);
struct rfade_offset rfade_plane_offset(const struct rfade_plane *plane,
                                       const struct rfade_place *place);

#endif
