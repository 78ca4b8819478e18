/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file classes.h  Classes of level: what blocks of travel count readings by, and what
 * goodness is judged on. In a survey they are the coarse bins of a tally; for a plain column
 * they are taken from the readings themselves.
 */
#ifndef ROUTEFADE_ESTIMATE_CLASSES_H
#define ROUTEFADE_ESTIMATE_CLASSES_H

#include "routefade/estimate.h"

enum { RFADE_CLASS_EDGES = RFADE_COARSE_BINS - 1 };

/** Where a bin is counted: its middle, or its bound if it is censored. */
double rfade_bin_place(const struct rfade_bin *bin);

/** The class that holds a level. */
int rfade_class_of(const double *edges_db, double level_db);

/**
 * The class that a bin is counted in. Censored readings are counted in the outermost classes,
 * wherever their bounds lie: beyond any bound the fading's scores are nearly the same, while
 * those of readings beside the bound are others.
 */
int rfade_class_of_bin(const double *edges_db, const struct rfade_bin *bin);

/**
 * Upper edges of classes of about equal weight, between distinct readings; never falling,
 * INFINITY where there are fewer.
 * @param bins  in ascending order of place
 */
void rfade_class_edges(const struct rfade_bin *bins, size_t bin_count,
                       double edges_db[RFADE_CLASS_EDGES]);

#endif
