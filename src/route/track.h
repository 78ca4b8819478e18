/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file track.h  Where on the route a vehicle was at any time of a pass: chainage and travel as
 * functions of time that never go back.
 *
 * Positions scatter: 5 m once a second looks like a speed of 9 m/s at rest. The chainage is
 * smoothed over the whole pass (a Kalman filter and its backward smoother over chainage and
 * speed, which also uses the speed column if there is one), standstills are found and held
 * exactly still, and what still goes backwards is made level.
 */
#ifndef ROUTEFADE_ROUTE_TRACK_H
#define ROUTEFADE_ROUTE_TRACK_H

#include "route/match.h"

struct rfade_track_settings {
    double gap_s;         /**< without a fix for longer: no place in between */
    double off_route_s;   /**< the same where the fixes in between don't match */
    double extrapolate_s; /**< before the first fix and after the last */
    double standing_m_s;  /**< a speed below is standing still */
};

/** 30 s, 5 s, 2 s, 0.5 m/s. */
struct rfade_track_settings rfade_track_defaults(void);

struct rfade_track; /* opaque */

/**
 * Makes the track of one pass.
 * @param positions, matches  [count], as given to and got from rfade_match_positions
 * @param pass                one of its passes
 * Without speeds, standing for less than some 10 s is not told from slow driving; drives
 * slower than about a quarter of the scatter a second may be taken for standing.
 * @return RFADE_OK | RFADE_NO_MEMORY
 */
enum rfade_status rfade_track_create(const struct rfade_position *positions,
                                     const struct rfade_match *matches, size_t count,
                                     const struct rfade_pass *pass,
                                     const struct rfade_track_settings *settings,
                                     struct rfade_track **track, struct rfade_error *error);
void rfade_track_destroy(struct rfade_track *track); /* NULL is harmless */

/** The times between which _at can answer. */
int64_t rfade_track_start_us(const struct rfade_track *track);
int64_t rfade_track_end_us(const struct rfade_track *track);

/**
 * Chainage and travel since the track's start, mm. Later times never have less travel;
 * during a standstill both are exactly constant; chainage moves in the pass's direction.
 * @return false if the time lies in a gap or outside the pass; then both are 0
 */
bool rfade_track_at(const struct rfade_track *track, int64_t time_us, int64_t *chainage_mm,
                    int64_t *travel_mm);

#endif
