/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "estimate/classes.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

double rfade_bin_place(const struct rfade_bin *bin)
{
    if (isinf(bin->low_db)) {
        return bin->high_db;
    }
    return isinf(bin->high_db) ? bin->low_db : 0.5 * (bin->low_db + bin->high_db);
}

int rfade_class_of(const double *edges_db, double level_db)
{
    int low = 0;
    int high = RFADE_COARSE_BINS - 1;
    while (low < high) {
        int middle = (low + high) / 2;
        if (level_db > edges_db[middle]) {
            low = middle + 1;
        } else {
            high = middle;
        }
    }
    return low;
}

static enum rfade_status assign(const struct rfade_bin *bins, size_t bin_count,
                                struct rfade_classes *classes)
{
    classes->of_bin = malloc(bin_count * sizeof *classes->of_bin);
    if (classes->of_bin == NULL) {
        return RFADE_NO_MEMORY;
    }
    for (size_t i = 0; i < bin_count; i++) {
        classes->of_bin[i] = rfade_class_of(classes->edges_db, rfade_bin_place(&bins[i]));
    }
    return RFADE_OK;
}

enum rfade_status rfade_classes_by_edges(const struct rfade_bin *bins, size_t bin_count,
                                         const double *edges_db, struct rfade_classes *classes)
{
    memcpy(classes->edges_db, edges_db, sizeof classes->edges_db);
    return assign(bins, bin_count, classes);
}

enum rfade_status rfade_classes_of_column(const struct rfade_bin *bins, size_t bin_count,
                                          struct rfade_classes *classes)
{
    double total = 0.0;
    for (size_t i = 0; i < bin_count; i++) {
        total += bins[i].weight;
    }
    int edge = 0;
    double sum = 0.0;
    for (size_t i = 0; i + 1 < bin_count && edge < RFADE_COARSE_BINS - 1; i++) {
        sum += bins[i].weight;
        double here = rfade_bin_place(&bins[i]);
        double next = rfade_bin_place(&bins[i + 1]);
        bool reached = sum * RFADE_COARSE_BINS >= total * (edge + 1);
        while (reached && next > here && edge < RFADE_COARSE_BINS - 1) {
            classes->edges_db[edge++] = 0.5 * (here + next);
            reached = sum * RFADE_COARSE_BINS >= total * (edge + 1);
        }
    }
    while (edge < RFADE_COARSE_BINS - 1) {
        classes->edges_db[edge++] = INFINITY;
    }
    return assign(bins, bin_count, classes);
}

void rfade_classes_clear(struct rfade_classes *classes)
{
    free(classes->of_bin);
    classes->of_bin = NULL;
}
