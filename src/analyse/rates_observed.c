/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <gsl/gsl_integration.h>
#include <math.h>
#include <stdlib.h>

#include "analyse/rates.h"
#include "routefade/rate_surface.h"

/* A level lies anywhere within its step: three places of Gauss's rule stand for it. */
enum { PLACES_A_BIN = 3 };

/* Without fading an error rate of any modulation is next to 0 above, and at its limit below. */
static const double SNR_LOW_DB = -40.0;
static const double SNR_HIGH_DB = 50.0;

/* Places in a bin from -1 to 1, and their weights, which sum to 2. */
struct rule {
    double place[PLACES_A_BIN];
    double weight[PLACES_A_BIN];
};

static enum rfade_status make_rule(struct rule *rule)
{
    gsl_integration_glfixed_table *table = gsl_integration_glfixed_table_alloc(PLACES_A_BIN);
    if (!table)
        return RFADE_NO_MEMORY;
    for (size_t i = 0; i < PLACES_A_BIN; i++)
        (void)gsl_integration_glfixed_point(-1.0, 1.0, i, &rule->place[i], &rule->weight[i],
                                            table);
    gsl_integration_glfixed_table_free(table);
    return RFADE_OK;
}

/* Adds the places of one cell of a tally; `offset_db` makes Es/N0 of its levels. */
static size_t add_cell(const struct rule *rule, const struct rfade_tally_cell *cell,
                       double offset_db, struct rfade_snr_place *way)
{
    double centre_db = cell->key.centre_cdb / 100.0 + offset_db;
    double half_db = cell->key.kind == RFADE_INTERVAL ? cell->key.step_cdb / 200.0 : 0.0;
    for (size_t i = 0; i < PLACES_A_BIN; i++)
        way[i] = (struct rfade_snr_place){centre_db + half_db * rule->place[i],
                                          0.5 * rule->weight[i] * (double)cell->weight};
    return PLACES_A_BIN;
}

static enum rfade_status observe_row(struct rfade_segment_result *row, double reference_dbm,
                                     const struct rule *rule,
                                     const struct rfade_rate_curve *curve, double *means)
{
    const struct rfade_tally_cell *cells = NULL;
    size_t cell_count = 0, places = 0;
    bool logged = rfade_result_has_snr(row);
    /* Logged SNR is over the noise that was logged. */
    double offset_db = (logged ? row->noise_floor_dbm : 0.0) - reference_dbm;
    enum rfade_status status =
        rfade_tally_cells(logged ? row->snr : row->level, &cells, &cell_count);
    if (status != RFADE_OK || cell_count == 0 || isnan(offset_db))
        return status;
    struct rfade_snr_place *way = malloc(cell_count * PLACES_A_BIN * sizeof *way);
    if (!way)
        return RFADE_NO_MEMORY;
    for (size_t i = 0; i < cell_count; i++)
        places += add_cell(rule, &cells[i], offset_db, &way[places]);
    status = rfade_rate_curve_mean(curve, way, places, 0.0, means);
    free(way);
    return status == RFADE_NO_DATA ? RFADE_OK : status;
}

static enum rfade_status make_curve(const struct rfade_target *targets, size_t count,
                                    struct rfade_rate_curve **curve)
{
    const struct rfade_link steady = {.branches = 1};
    const struct rfade_rate_domain domain = {SNR_LOW_DB, SNR_HIGH_DB, NAN, NAN};
    struct rfade_rate_surface *surface = NULL;
    enum rfade_status status =
        rfade_rate_surface_create(&steady, targets, count, &domain, &surface);
    if (status == RFADE_OK)
        status = rfade_rate_surface_cut(surface, NAN, -INFINITY, INFINITY, curve);
    rfade_rate_surface_destroy(surface);
    return status;
}

enum rfade_status rfade_results_rates_observed(struct rfade_segment_results *results,
                                               const double *reference_dbm,
                                               const struct rfade_target *targets, size_t count,
                                               double *means, struct rfade_error *error)
{
    struct rfade_rate_curve *curve = NULL;
    struct rule rule;
    enum rfade_status status = make_rule(&rule);
    for (size_t i = 0; i < results->count * count; i++)
        means[i] = NAN;
    if (status == RFADE_OK)
        status = make_curve(targets, count, &curve);
    for (size_t i = 0; i < results->count && status == RFADE_OK; i++)
        status =
            observe_row(&results->rows[i], reference_dbm[i], &rule, curve, &means[i * count]);
    rfade_rate_curve_destroy(curve);
    if (status != RFADE_OK)
        return rfade_error_set(error, status, "",
                               "the observed error rate can't be computed: %s",
                               rfade_status_text(status));
    return RFADE_OK;
}
