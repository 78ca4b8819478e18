/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file smooth.h  The steps from scattered to smooth travel. Private to track.c and tests. */
#ifndef ROUTEFADE_ROUTE_SMOOTH_H
#define ROUTEFADE_ROUTE_SMOOTH_H

#include <stdbool.h>
#include <stddef.h>

/** One fix, or the mean of several close in time. */
struct rfade_node {
    double time_s;
    double travel_m;  /**< along the pass's direction; scattered, then smooth */
    double speed_m_s; /**< NaN if not known; smooth afterwards */
    bool standing;
    bool after_gap; /**< nothing is known of the time since the node before */
};

/**
 * Standard deviation of the scatter, m: from how far each node lies off the line through its
 * neighbours (median absolute deviation), between 0.5 and 30.
 */
double rfade_scatter_m(const struct rfade_node *nodes, size_t count);

/**
 * Marks the nodes at which the vehicle stands: by speed, where the speeds agree with the
 * travel; else they are set to NaN. False if memory ran out.
 */
bool rfade_find_standing(struct rfade_node *nodes, size_t count, double scatter_m,
                         double standing_m_s);

/** Smooths travel and speed. False if memory ran out. */
bool rfade_smooth(struct rfade_node *nodes, size_t count, double scatter_m);

/** Makes travel never fall (pool adjacent violators), standstills level, speeds fit. */
bool rfade_make_monotone(struct rfade_node *nodes, size_t count);

#endif
