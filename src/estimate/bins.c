/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "estimate/bins.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "estimate/classes.h"
#include "model/model.h"

/* Below this many bins a shorter form gains nothing. */
enum { SHORTEN_MIN = 120 };

/*
 * Cells a standard deviation of a reading: the shorter form's curvature, and with it an
 * interval's width, is off by about (1/12)^2/10, or 1e-3. The more bins, the dearer a step
 * over all of them, and the finer the cells that save one.
 */
static const double CELLS_MIN = 12.0;
static const double CELLS_MAX = 600.0;
static const double CELLS_GROWTH_FROM = 2000.0; /* bins */

static const double CDB_PER_DB = 100.0;

static double linear(double db)
{
    return exp(db / RFADE_DB_PER_NEPER_OF_POWER);
}

double rfade_bin_power(const struct rfade_bin *bin, double reference_db)
{
    double power = linear(rfade_bin_place(bin) - reference_db);
    return isinf(bin->low_db) ? 0.5 * power : power;
}

/* Near 0 the density of a fading signal's power is flat: so below a bound the mean of the dB
 * value is one neper of power (4.34 dB) less than the bound. */
static double db_of(const struct rfade_bin *bin)
{
    return rfade_bin_place(bin) - (isinf(bin->low_db) ? RFADE_DB_PER_NEPER_OF_POWER : 0.0);
}

static bool bin_valid(const struct rfade_bin *bin)
{
    bool ordered = bin->low_db <= bin->high_db;
    bool placed = isfinite(bin->low_db) || isfinite(bin->high_db);
    return ordered && placed && bin->weight > 0.0 && isfinite(bin->weight);
}

enum rfade_status rfade_bins_moments(const struct rfade_bin *bins, size_t bin_count,
                                     struct rfade_bin_moments *moments)
{
    double sum_db = 0.0;
    double sum[2] = {0.0, 0.0};
    *moments = (struct rfade_bin_moments){0.0, 0.0, NAN, NAN, NAN, INFINITY};
    for (size_t i = 0; i < bin_count; i++) {
        if (!bin_valid(&bins[i])) {
            return RFADE_DOMAIN;
        }
        double width = bins[i].high_db - bins[i].low_db;
        moments->readings += bins[i].weight;
        moments->uncensored += isinf(width) ? 0.0 : bins[i].weight;
        moments->step_min_db = fmin(moments->step_min_db, width);
        sum_db += bins[i].weight * db_of(&bins[i]);
    }
    /* The weights of a tally sum to a count but for rounding. */
    if (moments->uncensored < RFADE_FIT_READINGS_MIN * (1.0 - 1e-9)) {
        return RFADE_NO_DATA;
    }
    /* Powers relative to the mean of dB, so that neither overflows nor vanishes. */
    moments->mean_of_db = sum_db / moments->readings;
    for (size_t i = 0; i < bin_count; i++) {
        sum[0] += bins[i].weight * rfade_bin_power(&bins[i], moments->mean_of_db);
    }
    double mean = sum[0] / moments->readings;
    for (size_t i = 0; i < bin_count; i++) {
        double deviation = rfade_bin_power(&bins[i], moments->mean_of_db) / mean - 1.0;
        sum[1] += bins[i].weight * deviation * deviation;
    }
    moments->normalised_variance = sum[1] / moments->readings;
    moments->mean_power_db = moments->mean_of_db + RFADE_DB_PER_NEPER_OF_POWER * log(mean);
    return RFADE_OK;
}

static int compare_numbers(double a, double b)
{
    return (a > b) - (a < b);
}

static int compare_places(const void *a, const void *b)
{
    return compare_numbers(rfade_bin_place(a), rfade_bin_place(b));
}

static void sort_by_place(struct rfade_bin *bins, size_t bin_count)
{
    qsort(bins, bin_count, sizeof *bins, compare_places);
}

/* What only like bins share: the width in micro-dB, or a sign for the censored. */
static double kind_of(const struct rfade_bin *bin)
{
    if (isinf(bin->low_db)) {
        return -2.0;
    }
    return isinf(bin->high_db) ? -1.0 : nearbyint(1e6 * (bin->high_db - bin->low_db));
}

static int compare_kinds(const void *a, const void *b)
{
    int order = compare_numbers(kind_of(a), kind_of(b));
    return order != 0 ? order : compare_places(a, b);
}

/* Moves a bin's place towards another of its kind, by their weights. */
static void join(struct rfade_bin *into, const struct rfade_bin *bin)
{
    double weight = into->weight + bin->weight;
    double move = (rfade_bin_place(bin) - rfade_bin_place(into)) * bin->weight / weight;
    into->low_db += move;
    into->high_db = into->low_db == into->high_db - move ? into->low_db : into->high_db + move;
    into->weight = weight;
}

/* Joins neighbours of one kind, cell and class, in place; the bins come sorted by kind. */
static size_t join_neighbours(struct rfade_bin *bins, size_t bin_count, double cell_db,
                              const double *edges_db)
{
    size_t count = 0;
    double cell = NAN;
    double kind = NAN;
    int place_class = -1;
    for (size_t i = 0; i < bin_count; i++) {
        struct rfade_bin bin = bins[i];
        double place_db = rfade_bin_place(&bin);
        int class_here = edges_db == NULL ? -1 : rfade_class_of(edges_db, place_db);
        bool alike = floor(place_db / cell_db) == cell && kind_of(&bin) == kind &&
                     class_here == place_class;
        if (alike) {
            join(&bins[count - 1], &bin);
        } else {
            bins[count++] = bin;
            cell = floor(place_db / cell_db);
            kind = kind_of(&bin);
            place_class = class_here;
        }
    }
    return count;
}

static bool is_point(const struct rfade_bin *bin)
{
    return bin->low_db == bin->high_db;
}

/*
 * The points among the bins, gathered by counting, without a sort: a million of them come
 * unquantised. Appends to `gathered`, which has room; as they are if they lie too far apart.
 */
static enum rfade_status gather_points(const struct rfade_bin *bins, size_t bin_count,
                                       double cell_db, struct rfade_bin *gathered,
                                       size_t *gathered_count)
{
    double low_db = INFINITY;
    double high_db = -INFINITY;
    double point_count = 0.0;
    for (size_t i = 0; i < bin_count; i++) {
        if (is_point(&bins[i])) {
            low_db = fmin(low_db, bins[i].low_db);
            high_db = fmax(high_db, bins[i].low_db);
            point_count += 1.0;
        }
    }
    double cells = floor((high_db - low_db) / cell_db) + 1.0;
    bool gather = point_count > 0.0 && cells <= point_count;
    struct rfade_bin *sums = gather ? calloc((size_t)cells, sizeof *sums) : NULL;
    if (gather && sums == NULL) {
        return RFADE_NO_MEMORY;
    }
    for (size_t i = 0; i < bin_count; i++) {
        if (!is_point(&bins[i])) {
            continue;
        }
        struct rfade_bin *sum = gather ? &sums[(size_t)((bins[i].low_db - low_db) / cell_db)]
                                       : &gathered[(*gathered_count)++];
        if (gather && sum->weight > 0.0) {
            join(sum, &bins[i]);
        } else {
            *sum = bins[i];
        }
    }
    for (size_t i = 0; gather && i < (size_t)cells; i++) {
        if (sums[i].weight > 0.0) {
            gathered[(*gathered_count)++] = sums[i];
        }
    }
    free(sums);
    return RFADE_OK;
}

/* Copies what isn't a point; the number of it. */
static size_t copy_intervals(const struct rfade_bin *bins, size_t bin_count,
                             struct rfade_bin *intervals)
{
    size_t count = 0;
    for (size_t i = 0; i < bin_count; i++) {
        if (!is_point(&bins[i])) {
            intervals[count++] = bins[i];
        }
    }
    return count;
}

enum rfade_status rfade_bins_shorten(const struct rfade_bin *bins, size_t bin_count,
                                     const struct rfade_bin_moments *moments,
                                     const double *edges_db, struct rfade_bin **shorter,
                                     size_t *shorter_count)
{
    double deviation_db =
        RFADE_DB_PER_NEPER_OF_POWER * fmin(sqrt(moments->normalised_variance), 1.0);
    double cells = CELLS_MIN * sqrt(fmax(1.0, (double)bin_count / CELLS_GROWTH_FROM));
    double cell_db = deviation_db / fmin(cells, CELLS_MAX);
    enum rfade_status status = RFADE_OK;
    struct rfade_bin *made = malloc(bin_count * sizeof *made);
    *shorter = NULL;
    *shorter_count = 0;
    if (made == NULL) {
        return RFADE_NO_MEMORY;
    }
    if (bin_count < SHORTEN_MIN || !(cell_db > 0.0)) {
        memcpy(made, bins, bin_count * sizeof *made);
        *shorter_count = bin_count;
    } else {
        size_t intervals = copy_intervals(bins, bin_count, made);
        qsort(made, intervals, sizeof *made, compare_kinds);
        *shorter_count = join_neighbours(made, intervals, cell_db, edges_db);
        status = gather_points(bins, bin_count, cell_db, made, shorter_count);
    }
    if (status != RFADE_OK) {
        free(made);
        *shorter_count = 0;
        return status;
    }
    sort_by_place(made, *shorter_count);
    *shorter = made;
    return RFADE_OK;
}

static bool same_interval(const struct rfade_bin *a, const struct rfade_bin *b)
{
    return a->low_db == b->low_db && a->high_db == b->high_db;
}

static struct rfade_bin bin_of_cell(const struct rfade_tally_cell *cell)
{
    double centre_db = (double)cell->key.centre_cdb / CDB_PER_DB;
    double half_db = 0.5 * (double)cell->key.step_cdb / CDB_PER_DB;
    struct rfade_bin bin = {centre_db - half_db, centre_db + half_db, (double)cell->weight};
    if (cell->key.kind == RFADE_BELOW) {
        bin.low_db = -INFINITY;
    } else if (cell->key.kind == RFADE_ABOVE) {
        bin.high_db = INFINITY;
    }
    return bin;
}

enum rfade_status rfade_bins_from_tally(const struct rfade_tally *tally,
                                        struct rfade_bin **bins, size_t *bin_count)
{
    const struct rfade_tally_cell *cells = NULL;
    size_t cell_count = 0;
    *bins = NULL;
    *bin_count = 0;
    enum rfade_status status = rfade_tally_cells(tally, &cells, &cell_count);
    if (status != RFADE_OK) {
        return status;
    }
    double weight = (double)rfade_tally_weight(tally);
    double readings = (double)rfade_tally_readings(tally);
    if (!(weight > 0.0) || !(readings > 0.0)) {
        return RFADE_NO_DATA;
    }
    struct rfade_bin *made = malloc(cell_count * sizeof *made);
    if (made == NULL) {
        return RFADE_NO_MEMORY;
    }
    size_t count = 0;
    for (size_t i = 0; i < cell_count; i++) {
        struct rfade_bin bin = bin_of_cell(&cells[i]);
        bin.weight *= readings / weight;
        if (cells[i].weight < 0) {
            free(made);
            return RFADE_DOMAIN;
        }
        /* Classes of readings per window stand beside each other in key order. */
        if (count > 0 && same_interval(&made[count - 1], &bin)) {
            made[count - 1].weight += bin.weight;
        } else if (cells[i].weight > 0) {
            made[count++] = bin;
        }
    }
    *bins = made;
    *bin_count = count;
    return RFADE_OK;
}
