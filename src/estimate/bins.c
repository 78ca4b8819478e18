/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "estimate/bins.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "estimate/classes.h"

/* Below this many bins a shorter form gains nothing. */
enum { SHORTEN_MIN = 4000, CELLS_A_DEVIATION = 400 };

static const double CDB_PER_DB = 100.0;
static const double DB_PER_NEPER_OF_POWER = 4.342944819032518; /* 10 / ln 10 */

static double linear(double db)
{
    return exp(db / DB_PER_NEPER_OF_POWER);
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
    return rfade_bin_place(bin) - (isinf(bin->low_db) ? DB_PER_NEPER_OF_POWER : 0.0);
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
    if (!(moments->uncensored > 0.0)) {
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
    moments->mean_power_db = moments->mean_of_db + DB_PER_NEPER_OF_POWER * log(mean);
    return RFADE_OK;
}

static int compare_places(const void *a, const void *b)
{
    double first = rfade_bin_place(a);
    double second = rfade_bin_place(b);
    return (first > second) - (first < second);
}

/*
 * Gathers points within cells of `width_db`. The error in the log-likelihood is of the order
 * of (width/deviation)^2/24 of its curvature: 3e-7 here.
 */
static size_t gather(struct rfade_bin *bins, size_t bin_count, double width_db)
{
    size_t count = 0;
    double cell = NAN;
    for (size_t i = 0; i < bin_count; i++) {
        struct rfade_bin bin = bins[i];
        double here = bin.low_db == bin.high_db ? floor(bin.low_db / width_db) : NAN;
        if (count > 0 && here == cell) {
            struct rfade_bin *into = &bins[count - 1];
            double weight = into->weight + bin.weight;
            into->low_db += (bin.low_db - into->low_db) * bin.weight / weight;
            into->high_db = into->low_db;
            into->weight = weight;
        } else {
            bins[count++] = bin;
        }
        cell = here;
    }
    return count;
}

enum rfade_status rfade_bins_shorten(const struct rfade_bin *bins, size_t bin_count,
                                     const struct rfade_bin_moments *moments,
                                     struct rfade_bin **shorter, size_t *shorter_count)
{
    double deviation_db = DB_PER_NEPER_OF_POWER * sqrt(moments->normalised_variance);
    bool many_points = bin_count >= SHORTEN_MIN && moments->step_min_db == 0.0;
    *shorter_count = 0;
    *shorter = malloc(bin_count * sizeof **shorter);
    if (*shorter == NULL) {
        return RFADE_NO_MEMORY;
    }
    memcpy(*shorter, bins, bin_count * sizeof **shorter);
    qsort(*shorter, bin_count, sizeof **shorter, compare_places);
    *shorter_count = many_points && deviation_db > 0.0
                         ? gather(*shorter, bin_count, deviation_db / CELLS_A_DEVIATION)
                         : bin_count;
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
