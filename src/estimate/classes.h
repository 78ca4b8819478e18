/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file classes.h  Classes of level: what blocks of travel count readings by, and what
 * goodness is judged on. In a survey they are the coarse bins of a tally; for a plain column
 * they are taken from the readings themselves.
 */
#ifndef ROUTEFADE_ESTIMATE_CLASSES_H
#define ROUTEFADE_ESTIMATE_CLASSES_H

#include "routefade/estimate.h"

struct rfade_classes {
    double edges_db[RFADE_COARSE_BINS - 1]; /**< upper edges, never falling */
    int *of_bin;                            /**< class of each bin; owned */
};

/** Where a bin is counted: its middle, or its bound if it is censored. */
double rfade_bin_place(const struct rfade_bin *bin);

/** The class that holds a level. */
int rfade_class_of(const double *edges_db, double level_db);

/** Classes with given upper edges. */
enum rfade_status rfade_classes_by_edges(const struct rfade_bin *bins, size_t bin_count,
                                         const double *edges_db, struct rfade_classes *classes);

/**
 * Classes of about equal weight, between distinct readings.
 * @param bins  in ascending order of place
 */
enum rfade_status rfade_classes_of_column(const struct rfade_bin *bins, size_t bin_count,
                                          struct rfade_classes *classes);
void rfade_classes_clear(struct rfade_classes *classes);

#endif
