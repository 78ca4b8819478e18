/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file trace.h  The readings of one channel during one outing, along one route: located,
 * split into traces, separated, and stored as traversals.
 */
#ifndef ROUTEFADE_ANALYSE_TRACE_H
#define ROUTEFADE_ANALYSE_TRACE_H

#include "analyse/drive.h"
#include "analyse/outing.h"
#include "analyse/route_work.h"
#include "analyse/settings.h"
#include "routefade/separate.h"
#include "survey/channel.h"
#include "survey/vehicle.h"

/** All that one stream's traces are made from. Borrowed. */
struct rfade_trace_work {
    struct rfade_survey *survey;
    const struct rfade_analysis_settings *settings;
    const struct rfade_route_work *route;
    const struct rfade_outing *outing;
    const struct rfade_outing_stream *stream;
    const struct rfade_channel *channel;
    const struct rfade_calibration *calibration; /**< in force; NULL: none told */
};

/** The fingerprint of what the stream's traces are made from. */
enum rfade_status rfade_trace_fingerprint(const struct rfade_trace_work *work,
                                          struct rfade_fingerprint *fingerprint,
                                          struct rfade_error *error);

/** Makes and stores the stream's traces and traversals under that fingerprint. */
enum rfade_status rfade_trace_make(const struct rfade_trace_work *work,
                                   const struct rfade_drive *drive,
                                   const struct rfade_fingerprint *fingerprint,
                                   struct rfade_error *error);

/** A trace's readings along one pass of the drive, located. Borrowed during the call. */
struct rfade_located_pass {
    size_t pass;
    const struct rfade_track_reading *readings;
    size_t count; /**< > 0 */
    struct rfade_receiver receiver;
    struct rfade_separate_settings settings;
};

/** Is told of each of them, in order of time. */
struct rfade_trace_listener {
    enum rfade_status (*take)(void *context, const struct rfade_located_pass *located,
                              struct rfade_error *error);
    void *context;
};

/** Makes the stream's traces, stores nothing, and tells the listener of their passes. */
enum rfade_status rfade_trace_locate(const struct rfade_trace_work *work,
                                     const struct rfade_drive *drive,
                                     const struct rfade_trace_listener *listener,
                                     struct rfade_error *error);

#endif
