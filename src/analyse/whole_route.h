/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file whole_route.h  A route's segments on one channel in one campaign, taken together. */
#ifndef ROUTEFADE_ANALYSE_WHOLE_ROUTE_H
#define ROUTEFADE_ANALYSE_WHOLE_ROUTE_H

#include "analyse/results.h"

/** Rows of one route, channel and campaign, along the route. */
struct rfade_route_group {
    struct rfade_segment_result **rows; /**< [count], borrowed from the results */
    size_t count;
    const struct rfade_route_span *span;
};

struct rfade_route_groups {
    struct rfade_route_group *groups; /**< by route, channel, campaign */
    size_t count;
    struct rfade_segment_result **rows; /**< what the groups point into */
};

/** @return RFADE_OK | RFADE_NO_MEMORY */
enum rfade_status rfade_route_groups_make(struct rfade_segment_results *results,
                                          struct rfade_route_groups *groups);
void rfade_route_groups_clear(struct rfade_route_groups *groups);

/** NaN where nothing was predicted. */
struct rfade_whole_route {
    double length_m;        /**< of the route, as far as it was asked for */
    double predicted_m;     /**< of the segments that all of the following is about */
    double not_predicted_m; /**< driven, but nothing could be predicted from it */
    double unseen_m;        /**< never driven */
    int64_t readings;
    double outage; /**< mean of the segments' outages, weighted by their length */
    double low;    /**< its two-sided confidence interval */
    double high;
    struct rfade_observed observed; /**< mean of the observed fractions, weighted likewise */
    double local_mean_dbm;   /**< median of the local mean along the route, if lognormal */
    double local_sigma_db;   /**< its standard deviation, the window's noise taken off */
    double lognormal_outage; /**< of the segments' fast fading over that lognormal local mean */
};

/**
 * Outage of a whole route. Segments err independently of each other (by fading, and by how
 * their passes differ), but for the calibration, which moves all of them the same way: the
 * former's distances to the interval's ends combine as the root of the sum of squares [Zou and
 * Donner, Statistics in Medicine 27, 2008], the latter's add up; both combine on the scale of
 * ln(odds).
 *
 * lognormal_outage takes each segment's fast fading as it was fitted, and the local mean along
 * the whole route as one normal distribution of its level in dB: where it differs from
 * `outage`, the local mean is not lognormal.
 * @param thresholds  [group->count], one a row
 * @param confidence  two-sided
 */
enum rfade_status rfade_whole_route(const struct rfade_route_group *group,
                                    const struct rfade_threshold *thresholds, double confidence,
                                    struct rfade_whole_route *whole, struct rfade_error *error);

#endif
