/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file outage_route.h  `outage --whole-route`. */
#ifndef ROUTEFADE_CLI_OUTAGE_ROUTE_H
#define ROUTEFADE_CLI_OUTAGE_ROUTE_H

#include "analyse/results.h"
#include "cli/command.h"
#include "cli/threshold.h"

/** A row a route, channel and campaign. */
enum rfade_status rfade_outage_whole_route(const struct rfade_run *run,
                                           struct rfade_segment_results *results,
                                           const struct rfade_threshold_asked *threshold,
                                           struct rfade_error *error);

#endif
