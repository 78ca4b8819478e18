/* SPDX-License-Identifier: GPL-3.0-or-later */
/* C. F. F. Karney, Algorithms for geodesics, J. Geodesy 87 (2013) 43-55, through PROJ. Radii of
 * curvature: any textbook of geodesy, e.g. W. Torge, Geodesy, 3rd ed. 2001, section 4.1. */
#include "route/geodesy.h"

#include <geodesic.h>
#include <math.h>

static const double equatorial_radius_m = 6378137; /* WGS 84 */
static const double flattening = 1 / 298.257223563;

bool rfade_place_is_valid(const struct rfade_place *place)
{
    return fabs(place->latitude_deg) <= 90 && fabs(place->longitude_deg) <= 180;
}

double rfade_geodesic(const struct rfade_place *from, const struct rfade_place *to,
                      double *azimuth_deg)
{
    struct geod_geodesic ellipsoid;
    geod_init(&ellipsoid, equatorial_radius_m, flattening);
    double distance_m = NAN;
    double ignored = NAN;
    geod_inverse(&ellipsoid, from->latitude_deg, from->longitude_deg, to->latitude_deg,
                 to->longitude_deg, &distance_m, azimuth_deg, &ignored);
    return distance_m;
}

struct rfade_place rfade_geodesic_direct(const struct rfade_place *from, double azimuth_deg,
                                         double distance_m)
{
    struct geod_geodesic ellipsoid;
    geod_init(&ellipsoid, equatorial_radius_m, flattening);
    struct rfade_place to = {NAN, NAN};
    double ignored = NAN;
    geod_direct(&ellipsoid, from->latitude_deg, from->longitude_deg, azimuth_deg, distance_m,
                &to.latitude_deg, &to.longitude_deg, &ignored);
    return to;
}

struct rfade_plane rfade_plane_at(const struct rfade_place *origin)
{
    const double radians = 0.017453292519943295769; /* pi/180 */
    const double eccentricity2 = flattening * (2 - flattening);
    double sine = sin(origin->latitude_deg * radians);
    double root = sqrt(1 - eccentricity2 * sine * sine);
    double prime_vertical_m = equatorial_radius_m / root;
    double meridian_m = equatorial_radius_m * (1 - eccentricity2) / (root * root * root);
    return (struct rfade_plane){
        .latitude_deg = origin->latitude_deg,
        .longitude_deg = origin->longitude_deg,
        .north_m_per_deg = meridian_m * radians,
        .east_m_per_deg = prime_vertical_m * cos(origin->latitude_deg * radians) * radians,
    };
}

struct rfade_offset rfade_plane_offset(const struct rfade_plane *plane,
                                       const struct rfade_place *place)
{
    double east_deg = remainder(place->longitude_deg - plane->longitude_deg, 360);
    return (struct rfade_offset){
        .east_m = east_deg * plane->east_m_per_deg,
        .north_m = (place->latitude_deg - plane->latitude_deg) * plane->north_m_per_deg,
    };
}
