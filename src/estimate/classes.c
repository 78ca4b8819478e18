/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "estimate/classes.h"

#include <math.h>

double rfade_bin_place(const struct rfade_bin *bin)
{
    if (isinf(bin->low_db)) {
        return bin->high_db;
    }
    return isinf(bin->high_db) ? bin->low_db : 0.5 * (bin->low_db + bin->high_db);
}

/* A middle of an interval may miss an edge that it lies on by its rounding. */
static const double ROUNDING_DB = 1e-9;

int rfade_class_of(const double *edges_db, double level_db)
{
    int low = 0;
    int high = RFADE_COARSE_BINS - 1;
    while (low < high) {
        int middle = (low + high) / 2;
        if (level_db > edges_db[middle] + ROUNDING_DB) {
            low = middle + 1;
        } else {
            high = middle;
        }
    }
    return low;
}

int rfade_class_of_bin(const double *edges_db, const struct rfade_bin *bin)
{
    if (isinf(bin->low_db)) {
        return 0;
    }
    return isinf(bin->high_db) ? RFADE_COARSE_BINS - 1
                               : rfade_class_of(edges_db, rfade_bin_place(bin));
}

void rfade_class_edges(const struct rfade_bin *bins, size_t bin_count,
                       double edges_db[RFADE_CLASS_EDGES])
{
    double total = 0.0;
    double sum = 0.0;
    int edge = 0;
    for (size_t i = 0; i < bin_count; i++) {
        total += bins[i].weight;
    }
    for (size_t i = 0; i + 1 < bin_count && edge < RFADE_CLASS_EDGES; i++) {
        double here = rfade_bin_place(&bins[i]);
        double next = rfade_bin_place(&bins[i + 1]);
        sum += bins[i].weight;
        while (next > here && edge < RFADE_CLASS_EDGES &&
               sum * RFADE_COARSE_BINS >= total * (edge + 1)) {
            edges_db[edge++] = 0.5 * (here + next);
        }
    }
    while (edge < RFADE_CLASS_EDGES) {
        edges_db[edge++] = INFINITY;
    }
}
