/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "estimate/bins.h"
#include "estimate/classes.h"
#include "estimate/estimate.h"

/* More blocks than this tell nothing new; fewer make a variance too uncertain. */
enum { BLOCKS_MAX = 1000 };

static bool below(const struct rfade_column_settings *settings, double level_dbm)
{
    return level_dbm <= settings->floor_dbm; /* false for a floor of NaN */
}

static bool above(const struct rfade_column_settings *settings, double level_dbm)
{
    return level_dbm >= settings->ceiling_dbm;
}

static struct rfade_bin bin_of_level(const struct rfade_column_settings *settings,
                                     double step_db, double level_dbm)
{
    double half_db = 0.5 * step_db;
    if (below(settings, level_dbm)) {
        return (struct rfade_bin){-INFINITY, settings->floor_dbm + half_db, 1.0};
    }
    if (above(settings, level_dbm)) {
        return (struct rfade_bin){settings->ceiling_dbm - half_db, INFINITY, 1.0};
    }
    return (struct rfade_bin){level_dbm - half_db, level_dbm + half_db, 1.0};
}

static int compare_levels(const void *a, const void *b)
{
    double first = *(const double *)a;
    double second = *(const double *)b;
    return (first > second) - (first < second);
}

/* Equal readings are one bin; in ascending order. Room for `count` bins. */
static enum rfade_status group(const double *levels_dbm, size_t count,
                               const struct rfade_column_settings *settings, double step_db,
                               struct rfade_bin *bins, size_t *bin_count)
{
    double *sorted = malloc(count * sizeof *sorted);
    *bin_count = 0;
    if (sorted == NULL) {
        return RFADE_NO_MEMORY;
    }
    memcpy(sorted, levels_dbm, count * sizeof *sorted);
    qsort(sorted, count, sizeof *sorted, compare_levels);
    for (size_t i = 0; i < count; i++) {
        struct rfade_bin bin = bin_of_level(settings, step_db, sorted[i]);
        struct rfade_bin *last = *bin_count == 0 ? NULL : &bins[*bin_count - 1];
        if (last != NULL && last->low_db == bin.low_db && last->high_db == bin.high_db) {
            last->weight += 1.0;
        } else {
            bins[(*bin_count)++] = bin;
        }
    }
    free(sorted);
    return RFADE_OK;
}

/*
 * Blocks of consecutive readings, about as many as each has readings: the longer the column,
 * the longer a correlation it can show and the more blocks measure it.
 */
static enum rfade_status measure_blocks(const double *levels_dbm, size_t count,
                                        const struct rfade_column_settings *settings,
                                        double step_db, const double *edges_db,
                                        struct rfade_blocks *blocks)
{
    size_t wanted = (size_t)ceil(sqrt((double)count));
    size_t block_count = wanted < BLOCKS_MAX ? wanted : BLOCKS_MAX;
    int64_t(*weights)[RFADE_COARSE_BINS] = calloc(block_count, sizeof *weights);
    memset(blocks, 0, sizeof *blocks);
    if (weights == NULL) {
        return RFADE_NO_MEMORY;
    }
    for (size_t i = 0; i < count; i++) {
        struct rfade_bin bin = bin_of_level(settings, step_db, levels_dbm[i]);
        size_t block = (size_t)((double)i / (double)count * (double)block_count);
        weights[block][rfade_class_of_bin(edges_db, &bin)]++;
    }
    enum rfade_status status =
        rfade_blocks_add(blocks, (const int64_t(*)[RFADE_COARSE_BINS])weights, block_count);
    free(weights);
    return status;
}

static bool column_valid(const double *levels_dbm, size_t count,
                         const struct rfade_column_settings *settings)
{
    for (size_t i = 0; i < count; i++) {
        if (!isfinite(levels_dbm[i])) {
            return false;
        }
    }
    bool crossed = settings->floor_dbm >= settings->ceiling_dbm;
    return !crossed && !(settings->step_db < 0.0) && !isinf(settings->step_db);
}

static enum rfade_status estimate_grouped(const double *levels_dbm, size_t count,
                                          const struct rfade_column_settings *settings,
                                          double step_db, const struct rfade_bin *bins,
                                          size_t bin_count, struct rfade_estimate *estimate)
{
    struct rfade_estimate_settings estimate_settings = {.confidence = settings->confidence};
    struct rfade_blocks blocks;
    double edges_db[RFADE_CLASS_EDGES];
    rfade_class_edges(bins, bin_count, edges_db);
    if (!settings->independent) {
        enum rfade_status status =
            measure_blocks(levels_dbm, count, settings, step_db, edges_db, &blocks);
        if (status != RFADE_OK) {
            return status;
        }
        estimate_settings.blocks = &blocks;
    }
    return rfade_estimate_classes(bins, bin_count, &estimate_settings, edges_db, estimate);
}

enum rfade_status rfade_estimate_column(const double *levels_dbm, size_t count,
                                        const struct rfade_column_settings *settings,
                                        struct rfade_column_estimate *result)
{
    size_t bin_count = 0;
    memset(result, 0, sizeof *result);
    rfade_estimate_blank(&result->estimate);
    result->step_db = NAN;
    if (!column_valid(levels_dbm, count, settings)) {
        return RFADE_DOMAIN;
    }
    if (count == 0) {
        return RFADE_NO_DATA;
    }
    result->step_db =
        isnan(settings->step_db) ? rfade_find_step_db(levels_dbm, count) : settings->step_db;
    for (size_t i = 0; i < count; i++) {
        result->below_floor += below(settings, levels_dbm[i]) ? 1 : 0;
        result->above_ceiling += above(settings, levels_dbm[i]) ? 1 : 0;
    }
    struct rfade_bin *bins = malloc(count * sizeof *bins);
    if (bins == NULL) {
        return RFADE_NO_MEMORY;
    }
    enum rfade_status status =
        group(levels_dbm, count, settings, result->step_db, bins, &bin_count);
    if (status == RFADE_OK) {
        status = estimate_grouped(levels_dbm, count, settings, result->step_db, bins, bin_count,
                                  &result->estimate);
    }
    free(bins);
    return status;
}
