/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file acceptance.h  What `acceptance` prints, once everything is judged. */
#ifndef ROUTEFADE_CLI_ACCEPTANCE_H
#define ROUTEFADE_CLI_ACCEPTANCE_H

#include "analyse/acceptance.h"
#include "cli/segment_rows.h"
#include "cli/threshold.h"

/** All that was judged. */
struct rfade_acceptance_page {
    const struct rfade_threshold_asked *threshold;
    struct rfade_acceptance_target target;
    const struct rfade_segment_results *results;
    const struct rfade_route_groups *groups;
    struct rfade_segment_acceptance *segments; /**< in the order of groups->rows */
    struct rfade_acceptance_lengths *lengths;  /**< [groups->count] */
};

/** Group number `index`'s first segment. */
const struct rfade_segment_acceptance *
rfade_acceptance_segments(const struct rfade_acceptance_page *page, size_t index);

/** A row a route, channel and campaign. */
enum rfade_status rfade_acceptance_routes(const struct rfade_run *run,
                                          const struct rfade_acceptance_page *page,
                                          struct rfade_error *error);

/** A row a segment. */
enum rfade_status rfade_acceptance_rows(const struct rfade_run *run,
                                        const struct rfade_acceptance_page *page,
                                        const struct rfade_segment_options *options,
                                        struct rfade_error *error);

/** The same in sentences, and what would settle each undecided segment. */
void rfade_acceptance_words(FILE *stream, const struct rfade_acceptance_page *page);

#endif
