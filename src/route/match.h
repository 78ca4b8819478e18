/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file match.h  Positions matched to a route: chainage, offset, and passes along it. Pure
 * geometry; the same input gives the same answer.
 */
#ifndef ROUTEFADE_ROUTE_MATCH_H
#define ROUTEFADE_ROUTE_MATCH_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "route/route.h"

/** Where a vehicle was at a time. */
struct rfade_position {
    int64_t time_us;
    double latitude_deg;
    double longitude_deg;
    double speed_m_s; /**< NaN: not known */
};

struct rfade_match_settings {
    double corridor_m;  /**< positions further off don't match */
    double away_s;      /**< longer outside the corridor, or without a fix: a new pass */
    double turn_m;      /**< driving back by more than this is a new pass */
    double fastest_m_s; /**< a position that asks for more is a wrong one and doesn't match */
};

/** 30 m, 60 s, 50 m, 100 m/s. */
struct rfade_match_settings rfade_match_defaults(void);

struct rfade_match {
    bool matched;
    double chainage_m; /**< NaN if not matched */
    double offset_m;   /**< distance from the line; NaN if not matched */
};

/**
 * One drive along the route in one direction. Where the vehicle turned round, the position
 * furthest along is the last of one pass and the first of the next.
 */
struct rfade_pass {
    size_t first;  /**< index of its first position, which is matched */
    size_t last;   /**< index of its last, which is matched; between may be unmatched ones */
    int direction; /**< +1 with the chainage, -1 against it */
};

struct rfade_matcher; /* opaque: a route with an index of its legs; may serve many calls */

/** The route is borrowed until _destroy. @return RFADE_OK | RFADE_DOMAIN | RFADE_NO_MEMORY */
enum rfade_status rfade_matcher_create(const struct rfade_route *route,
                                       const struct rfade_match_settings *settings,
                                       struct rfade_matcher **matcher,
                                       struct rfade_error *error);
void rfade_matcher_destroy(struct rfade_matcher *matcher); /* NULL is harmless */

/**
 * Matches positions of one vehicle in time order. Of all the ways along the line the
 * cheapest is taken: squared offsets, and squared differences between chainage and distance
 * driven from one position to the next (a hidden Markov model solved by Viterbi 1967), with
 * a slight preference for driving with the chainage, which decides on a line that goes out
 * and back on one road.
 * @param positions  [count]
 * @param matches    [count], filled
 * @param[out] passes  in time order; free() the array
 * @return RFADE_OK | RFADE_NO_MEMORY
 */
enum rfade_status rfade_match_positions(const struct rfade_matcher *matcher,
                                        const struct rfade_position *positions, size_t count,
                                        struct rfade_match *matches, struct rfade_pass **passes,
                                        size_t *pass_count, struct rfade_error *error);

#endif
