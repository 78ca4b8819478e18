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

static enum rfade_status observe_row(struct rfade_segment_result *row, double reference_dbm,
                                     const struct rfade_rate_table *table,
                                     struct rfade_error_rate *rates)
{
    const struct rfade_tally_cell *cells = NULL;
    size_t count = 0;
    bool logged = rfade_result_has_snr(row);
    /* Logged SNR is over the noise that was logged. */
    double offset_db = (logged ? row->noise_floor_dbm : 0.0) - reference_dbm;
    enum rfade_status status =
        rfade_tally_cells(logged ? row->snr : row->level, &cells, &count);
    if (status != RFADE_OK || isnan(offset_db))
        return status == RFADE_OK ? RFADE_NO_DATA : status;
    struct rfade_snr_bin *bins = malloc((count + 1) * sizeof *bins);
    if (!bins)
        return RFADE_NO_MEMORY;
    for (size_t i = 0; i < count; i++)
        bins[i] = bin_of(&cells[i], offset_db);
    status = rfade_rate_table_mean(table, bins, count, rates);
    free(bins);
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
                             struct rfade_error_rate *rates, struct rfade_error *error)
{
    struct rfade_rate_table *table = NULL;
    enum rfade_status status =
        rfade_rate_table_create(modulations, count, usual_step_db(results), &table);
    for (size_t i = 0; i < results->count && status == RFADE_OK; i++) {
        status = observe_row(&results->rows[i], reference_dbm[i], table, &rates[i * count]);
        if (status != RFADE_NO_DATA)
            continue;
        for (size_t j = 0; j < count; j++)
            rates[i * count + j] = (struct rfade_error_rate){NAN, NAN, NAN, NAN};
        status = RFADE_OK;
    }
    rfade_rate_table_destroy(table);
    if (status != RFADE_OK)
        return rfade_error_set(error, status, "",
                               "the observed error rate can't be computed: %s",
                               rfade_status_text(status));
    return RFADE_OK;
}
