/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file candidate.h  The places on a route that a position may stand for. */
#ifndef ROUTEFADE_ROUTE_CANDIDATE_H
#define ROUTEFADE_ROUTE_CANDIDATE_H

#include <stddef.h>

#include "route/route.h"

/** More candidates than this at one position are left out, the furthest off first. */
enum { RFADE_CANDIDATES_MAX = 16 };

struct rfade_candidate {
    double chainage_m;
    double offset_m;
};

struct rfade_leg_index; /* opaque: legs by the squares of a grid that they come near */

/** The route is borrowed until _destroy. NULL if memory runs out. */
struct rfade_leg_index *rfade_leg_index_create(const struct rfade_route *route,
                                               double corridor_m);
void rfade_leg_index_destroy(struct rfade_leg_index *index);

/**
 * The nearest point of each stretch of the line that passes within the corridor, by
 * chainage. @return how many
 */
size_t rfade_candidates(const struct rfade_leg_index *index, const struct rfade_place *place,
                        struct rfade_candidate candidates[RFADE_CANDIDATES_MAX]);

#endif
