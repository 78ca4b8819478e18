/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>

#include "cli/predict.h"
#include "routefade/predict.h"

static size_t count(const struct rfade_predicted *predicted)
{
    return isnan(predicted->link.mean_snr_db) ? 0 : predicted->given->probability.count;
}

/* The SNR that is exceeded in all but a probability of places. */
static enum rfade_status quantile_of(const struct rfade_predicted *predicted,
                                     double probability, double *snr_db,
                                     struct rfade_error *error)
{
    const struct rfade_link *link = &predicted->link;
    double above_median_db = 0; /* a steady SNR is the same everywhere */
    double rest = 1 - probability;
    enum rfade_status status = RFADE_OK;
    *snr_db = NAN;
    if (link->model)
        status = rfade_outage_quantile(link->model, link->parameter, link->shadowing_db,
                                       probability, rest, &above_median_db);
    else if (link->shadowing_db > 0)
        status = rfade_model(RFADE_LOGNORMAL)
                     ->quantile(link->shadowing_db, probability, rest, &above_median_db);
    if (status != RFADE_OK)
        return rfade_error_set(error, status, "ask for a probability that is less extreme",
                               "no SNR for a probability of %g: %s", probability,
                               rfade_status_text(status));
    *snr_db = predicted->median_snr_db + above_median_db;
    return RFADE_OK;
}

static enum rfade_status entry(const struct rfade_predicted *predicted, size_t index,
                               struct rfade_value *values, struct rfade_error *error)
{
    double probability = predicted->given->probability.items[index];
    double snr_db;
    enum rfade_status status = quantile_of(predicted, probability, &snr_db, error);
    values[0] = rfade_value_number(probability);
    values[1] = rfade_value_number(snr_db);
    return status;
}

static const struct rfade_column columns[] = {
    {"probability", RFADE_COLUMN_PROBABILITY, 4, false, false},
    {"snr_db", RFADE_COLUMN_NUMBER, 2, false, false},
};

const struct rfade_prediction rfade_prediction_quantiles = {
    .name = "quantiles",
    .count = count,
    .columns = columns,
    .column_count = sizeof columns / sizeof columns[0],
    .entry = entry,
};
