/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdlib.h>

#include "analyse/rates.h"

/* A cell of a tally as Es/N0; `offset_db` makes that of its levels. A clipped one counts at its
 * bound. */
static struct rfade_snr_bin bin_of(const struct rfade_tally_cell *cell, double offset_db)
{
    double centre_db = cell->key.centre_cdb / 100.0 + offset_db;
    double half_db = cell->key.kind == RFADE_INTERVAL ? cell->key.step_cdb / 200.0 : 0.0;
    return (struct rfade_snr_bin){centre_db - half_db, centre_db + half_db,
                                  (double)cell->weight};
}

/* One row's SNR as bins, beside the cells that they come from. */
struct observed_row {
    const struct rfade_rate_table *table;
    const struct rfade_tally_cell *cells;
    struct rfade_snr_bin *bins;
    size_t count;
};

/* Mean rates of what is not of a kind; *share is of the travel that is. */
static enum rfade_status mean_without(const struct observed_row *row,
                                      enum rfade_tally_kind kind,
                                      struct rfade_error_rate *rates, double *share)
{
    double total = 0.0, left_out = 0.0;
    for (size_t i = 0; i < row->count; i++) {
        double weight = (double)row->cells[i].weight;
        bool out = row->cells[i].key.kind == (int32_t)kind;
        row->bins[i].weight = out ? 0.0 : weight;
        left_out += out ? weight : 0.0;
        total += weight;
    }
    *share = left_out / total;
    return rfade_rate_table_mean(row->table, row->bins, row->count, rates);
}

/* What readings below the floor or above the ceiling leave open: the former stand for any bit
 * error rate up to 1/2, the latter for any down to 0. */
static enum rfade_status bound_row(const struct observed_row *row,
                                   struct rfade_error_rate *scratch, size_t modulations,
                                   struct rfade_observed_rate *rates)
{
    double share = 0.0;
    enum rfade_status status = mean_without(row, RFADE_BELOW, scratch, &share);
    for (size_t i = 0; i < modulations && share > 0.0; i++)
        rates[i].bit_high = 0.5 * share + (share < 1.0 ? (1.0 - share) * scratch[i].bit : 0.0);
    if (status != RFADE_OK && share < 1.0)
        return status;
    status = mean_without(row, RFADE_ABOVE, scratch, &share);
    for (size_t i = 0; i < modulations && share > 0.0; i++)
        rates[i].bit_low = share < 1.0 ? (1.0 - share) * scratch[i].bit : 0.0;
    return share < 1.0 ? status : RFADE_OK;
}

static enum rfade_status observe_bins(const struct observed_row *row,
                                      struct rfade_error_rate *scratch, size_t modulations,
                                      struct rfade_observed_rate *rates)
{
    enum rfade_status status =
        rfade_rate_table_mean(row->table, row->bins, row->count, scratch);
    if (status != RFADE_OK)
        return status;
    bool clipped = false;
    for (size_t i = 0; i < row->count; i++)
        clipped = clipped || row->cells[i].key.kind != RFADE_INTERVAL;
    for (size_t i = 0; i < modulations; i++)
        rates[i] = (struct rfade_observed_rate){scratch[i].bit, scratch[i].bit, scratch[i].bit};
    if (clipped)
        status = bound_row(row, scratch, modulations, rates);
    for (size_t i = 0; i < modulations; i++)
        if (rates[i].bit_high > RFADE_OBSERVED_RATE_RATIO_MAX * rates[i].bit_low)
            rates[i].bit = NAN;
    return status;
}

static enum rfade_status observe_row(struct rfade_segment_result *row, double reference_dbm,
                                     const struct rfade_rate_table *table, size_t modulations,
                                     struct rfade_observed_rate *rates)
{
    struct observed_row observed = {.table = table};
    bool logged = rfade_result_has_snr(row);
    /* Logged SNR is over the noise that was logged. */
    double offset_db = (logged ? row->noise_floor_dbm : 0.0) - reference_dbm;
    enum rfade_status status =
        rfade_tally_cells(logged ? row->snr : row->level, &observed.cells, &observed.count);
    if (status != RFADE_OK || isnan(offset_db))
        return status == RFADE_OK ? RFADE_NO_DATA : status;
    struct rfade_error_rate *scratch = calloc(modulations + 1, sizeof *scratch);
    observed.bins = malloc((observed.count + 1) * sizeof *observed.bins);
    status = scratch && observed.bins ? RFADE_OK : RFADE_NO_MEMORY;
    for (size_t i = 0; i < observed.count && status == RFADE_OK; i++)
        observed.bins[i] = bin_of(&observed.cells[i], offset_db);
    if (status == RFADE_OK)
        status = observe_bins(&observed, scratch, modulations, rates);
    free(scratch);
    free(observed.bins);
    return status;
}

/* The step of most segments, as far as a table holds it: other steps are integrated one by
 * one. */
static double usual_step_db(struct rfade_segment_results *results)
{
    const struct rfade_tally_cell *cells = NULL;
    size_t count = 0;
    for (size_t i = 0; i < results->count; i++) {
        if (rfade_tally_cells(results->rows[i].level, &cells, &count) != RFADE_OK || count == 0)
            continue;
        const struct rfade_tally_cell *middle = &cells[count / 2];
        return fmin(middle->key.step_cdb / 100.0, 1.0);
    }
    return 1.0;
}

enum rfade_status
rfade_results_rates_observed(struct rfade_segment_results *results, const double *reference_dbm,
                             const struct rfade_modulation *const *modulations, size_t count,
                             struct rfade_observed_rate *rates, struct rfade_error *error)
{
    struct rfade_rate_table *table = NULL;
    enum rfade_status status =
        rfade_rate_table_create(modulations, count, usual_step_db(results), &table);
    for (size_t i = 0; i < results->count && status == RFADE_OK; i++) {
        status =
            observe_row(&results->rows[i], reference_dbm[i], table, count, &rates[i * count]);
        if (status != RFADE_NO_DATA)
            continue;
        for (size_t j = 0; j < count; j++)
            rates[i * count + j] = (struct rfade_observed_rate){NAN, NAN, NAN};
        status = RFADE_OK;
    }
    rfade_rate_table_destroy(table);
    if (status != RFADE_OK)
        return rfade_error_set(error, status, "",
                               "the observed error rate can't be computed: %s",
                               rfade_status_text(status));
    return RFADE_OK;
}
