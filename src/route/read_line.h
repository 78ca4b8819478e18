/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file read_line.h  A reference line out of a file: GeoJSON, GPX or delimited text. */
#ifndef ROUTEFADE_ROUTE_READ_LINE_H
#define ROUTEFADE_ROUTE_READ_LINE_H

#include <stddef.h>

#include "common/error.h"
#include "route/geodesy.h"

/**
 * Reads the places of a line, in order.
 *
 * GeoJSON (RFC 7946): a LineString, a Feature of one, or a FeatureCollection of one such
 * Feature; elevations are left out. Anything else is refused by its type.
 *
 * GPX 1.1: the points of its one track, its segments joined; of a file without a track those
 * of its one route. Several are refused.
 *
 * Text: latitude and longitude in decimal degrees, one place a line, separated by comma,
 * semicolon or tab (with semicolon or tab the decimal sign may be a comma). A header with the
 * names lat or latitude and lon, lng or longitude tells which columns; without one they
 * are the first two. Empty lines and lines that start with # are skipped.
 *
 * @param[out] places  free() the array
 * @return RFADE_OK | RFADE_INPUT (with file, line where there is one, and remedy) |
 *         RFADE_STORAGE (the file can't be read) | RFADE_NO_MEMORY
 */
enum rfade_status rfade_read_line(const char *path, struct rfade_place **places, size_t *count,
                                  struct rfade_error *error);

#endif
