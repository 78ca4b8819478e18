/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file drive.h  A vehicle's passes along one route during one outing. */
#ifndef ROUTEFADE_ANALYSE_DRIVE_H
#define ROUTEFADE_ANALYSE_DRIVE_H

#include "analyse/outing.h"
#include "analyse/route_work.h"
#include "analyse/settings.h"
#include "route/track.h"

struct rfade_drive {
    struct rfade_pass *passes;
    struct rfade_track **tracks; /**< [pass_count] */
    size_t pass_count;
};

/** Matches the vehicle's fixes of an outing to a route and smooths each pass. */
enum rfade_status rfade_drive_make(struct rfade_survey *survey,
                                   const struct rfade_analysis_settings *settings,
                                   const struct rfade_route_work *route,
                                   const struct rfade_outing *outing, struct rfade_drive *drive,
                                   struct rfade_error *error);
void rfade_drive_clear(struct rfade_drive *drive);

/** From start_us on and before end_us a reading belongs to this pass, and to no other. */
void rfade_drive_pass_times(const struct rfade_drive *drive, size_t pass, int64_t *start_us,
                            int64_t *end_us);

#endif
