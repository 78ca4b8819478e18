/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file route_work.h  One route out of the survey, ready for matching. */
#ifndef ROUTEFADE_ANALYSE_ROUTE_WORK_H
#define ROUTEFADE_ANALYSE_ROUTE_WORK_H

#include "analyse/fingerprint.h"
#include "route/match.h"
#include "survey/store.h"

struct rfade_route_work {
    struct rfade_route_row row;
    struct rfade_route *line;
    struct rfade_matcher *matcher;
    struct rfade_segment_row *segments; /**< by number, from 1 */
    size_t segment_count;
    struct rfade_fingerprint fingerprint; /**< of line, segments and corridor */
};

enum rfade_status rfade_route_work_load(struct rfade_survey *survey,
                                        const struct rfade_route_row *row,
                                        struct rfade_route_work *work,
                                        struct rfade_error *error);
void rfade_route_work_clear(struct rfade_route_work *work);

/** Index into `segments` of the segment that holds a chainage. */
int32_t rfade_route_work_segment(const struct rfade_route_work *work, double chainage_m);

#endif
