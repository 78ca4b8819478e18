/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdbool.h>

#include "routefade/stretch.h"

/* Ends of the levels that a cell stands for, dB. */
static void cell_ends(const struct rfade_tally_key *key, double *low_db, double *high_db)
{
    double centre_db = key->centre_cdb / 100.0, half_db = key->step_cdb / 200.0;
    *low_db = key->kind == RFADE_BELOW ? -INFINITY : centre_db;
    *high_db = key->kind == RFADE_ABOVE ? INFINITY : centre_db;
    if (key->kind == RFADE_INTERVAL) {
        *low_db -= half_db;
        *high_db += half_db;
    }
}

enum rfade_status rfade_observed_below(struct rfade_tally *levels, double threshold_dbm,
                                       struct rfade_observed *result)
{
    *result = (struct rfade_observed){NAN, NAN, NAN};
    if (isnan(threshold_dbm))
        return RFADE_DOMAIN;
    const struct rfade_tally_cell *cells = NULL;
    size_t count = 0;
    enum rfade_status status = rfade_tally_cells(levels, &cells, &count);
    if (status != RFADE_OK)
        return status;
    double below = 0.0, straddling = 0.0, split = 0.0, total = 0.0;
    bool censored_straddles = false;
    for (size_t i = 0; i < count; i++) {
        double weight = (double)cells[i].weight, low_db = NAN, high_db = NAN;
        cell_ends(&cells[i].key, &low_db, &high_db);
        total += weight;
        if (high_db <= threshold_dbm) {
            below += weight;
        } else if (low_db < threshold_dbm) {
            straddling += weight;
            censored_straddles |= cells[i].key.kind != RFADE_INTERVAL;
            split += weight * (threshold_dbm - low_db) / (high_db - low_db);
        }
    }
    if (!(total > 0))
        return RFADE_NO_DATA;
    result->low = below / total;
    result->high = (below + straddling) / total;
    if (!censored_straddles)
        result->fraction = (below + split) / total;
    return RFADE_OK;
}
