/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>

#include "cli/predict.h"
#include "routefade/predict.h"

static size_t count(const struct rfade_predicted *predicted)
{
    return isnan(predicted->link.mean_snr_db) ? 0 : predicted->given->threshold_db.count;
}

/* Probability that the SNR is below the threshold. */
static enum rfade_status outage_of(const struct rfade_predicted *predicted, double threshold_db,
                                   double *outage, struct rfade_error *error)
{
    const struct rfade_link *link = &predicted->link;
    double x_db = threshold_db - predicted->median_snr_db;
    struct rfade_tails tails;
    enum rfade_status status = RFADE_OK;
    *outage = NAN;
    if (link->branches > 1)
        status = rfade_link_outage(link, threshold_db, &tails);
    else if (link->model)
        status = rfade_outage(link->model, link->parameter, link->shadowing_db, x_db, &tails);
    else if (link->shadowing_db > 0)
        status = rfade_model(RFADE_LOGNORMAL)->tails(link->shadowing_db, x_db, &tails);
    else
        tails.lower = x_db > 0; /* a steady SNR at the threshold is not below it */
    if (status != RFADE_OK)
        return rfade_error_set(error, status, "check the threshold against the SNR",
                               "no outage for a threshold of %g dB: %s", threshold_db,
                               rfade_status_text(status));
    *outage = tails.lower;
    return RFADE_OK;
}

static enum rfade_status entry(const struct rfade_predicted *predicted, size_t index,
                               struct rfade_value *values, struct rfade_error *error)
{
    double threshold_db = predicted->given->threshold_db.items[index];
    double outage;
    enum rfade_status status = outage_of(predicted, threshold_db, &outage, error);
    values[0] = rfade_value_number(threshold_db);
    values[1] = rfade_value_number(outage);
    return status;
}

static const struct rfade_column columns[] = {
    {"threshold_db", RFADE_COLUMN_NUMBER, 2, false, false},
    {"outage", RFADE_COLUMN_PROBABILITY, 4, false, false},
};

const struct rfade_prediction rfade_prediction_outage = {
    .name = "outage",
    .count = count,
    .columns = columns,
    .column_count = sizeof columns / sizeof columns[0],
    .entry = entry,
};
