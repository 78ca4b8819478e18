/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file position.h  A row's two coordinates as WGS 84 latitude and longitude. */
#ifndef ROUTEFADE_INGEST_POSITION_H
#define ROUTEFADE_INGEST_POSITION_H

#include "ingest/column_map_parts.h"

struct rfade_position_converter; /* opaque; one thread */

/**
 * @return RFADE_OK; RFADE_INPUT for an EPSG code that names no grid; RFADE_NO_MEMORY.
 *     *converter is NULL on failure. The map is borrowed.
 */
enum rfade_status rfade_position_converter_create(const struct rfade_position_map *map,
                                                  struct rfade_position_converter **converter,
                                                  struct rfade_error *error);
void rfade_position_converter_destroy(struct rfade_position_converter *converter);

/**
 * Converts by the map's form: degrees as they are; a grid's easting and northing by PROJ,
 * with the datum shift that PROJ holds to be the best without grid files; metres east and
 * north of an origin along the geodesic from there (azimuthal equidistant about the origin);
 * what stands still ignores both.
 * @param[out] latitude_deg, longitude_deg  NaN on failure
 * @return NULL, or a reason why they can't be a place (static storage)
 */
const char *rfade_position_convert(struct rfade_position_converter *converter, double first,
                                   double second, double *latitude_deg, double *longitude_deg);

#endif
