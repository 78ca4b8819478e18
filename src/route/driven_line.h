/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file driven_line.h  A reference line out of a vehicle's own track. Pure geometry. */
#ifndef ROUTEFADE_ROUTE_DRIVEN_LINE_H
#define ROUTEFADE_ROUTE_DRIVEN_LINE_H

#include "route/match.h"

/**
 * The line that a vehicle drove: its longest drive without a gap of over 5 minutes, standing
 * scatter drawn together, scatter smoothed over 35 m each way, and points left out that
 * lie within the tolerance of the line without them [Douglas and Peucker 1973].
 * A sharp corner is cut by about 12 m: keep the corridor wider than that. Under white
 * scatter of 5 m the length is right to 1 %.
 * @param tolerance_m  > 0, for instance 3
 * @param[out] places  free() the array
 * @return RFADE_OK | RFADE_NO_DATA (no drive of 50 m) | RFADE_DOMAIN | RFADE_NO_MEMORY
 */
enum rfade_status rfade_driven_line(const struct rfade_position *positions, size_t count,
                                    double tolerance_m, struct rfade_place **places,
                                    size_t *place_count, struct rfade_error *error);

#endif
