/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Where the other predictions stop being true: what speed and delay spread do to a symbol. */
#include <math.h>

#include "cli/predict.h"
#include "routefade/fade_timing.h"
#include "routefade/validity.h"

enum limit { DBPSK_FLOOR, DELAY_SPREAD, LIMITS };

/* The error floor is of differential detection over fading; steady signals have none. */
static bool applies(const struct rfade_predicted *predicted, enum limit limit)
{
    const struct rfade_predict_options *given = predicted->given;
    if (isnan(given->symbol_rate_hz))
        return false;
    if (limit == DELAY_SPREAD)
        return !isnan(given->delay_spread_us);
    bool dbpsk = false;
    for (size_t i = 0; i < predicted->modulation_count; i++)
        dbpsk |= predicted->modulations[i] == rfade_modulation(RFADE_DBPSK);
    return dbpsk && !isnan(given->speed_kmh) && predicted->link.model &&
           predicted->link.model->id != RFADE_NAKAGAMI;
}

static size_t count(const struct rfade_predicted *predicted)
{
    size_t entries = 0;
    for (int limit = 0; limit < LIMITS; limit++)
        entries += applies(predicted, (enum limit)limit);
    return entries;
}

static void dbpsk_floor(const struct rfade_predicted *predicted, struct rfade_value *values)
{
    const struct rfade_predict_options *given = predicted->given;
    double k = predicted->link.model->id == RFADE_RICE ? predicted->link.parameter : 0.0;
    double doppler_hz = rfade_doppler_hz(given->speed_kmh / 3.6, given->carrier_hz);
    double symbol_s = 1.0 / given->symbol_rate_hz;
    values[0] = rfade_value_text("dbpsk bit error floor by Doppler");
    values[1] = rfade_value_number(rfade_dbpsk_error_floor(k, 0.0, doppler_hz, symbol_s));
    values[2] = rfade_value_text(predicted->link.branches > 1 ? "of one branch" : NULL);
}

static void delay_spread(const struct rfade_predicted *predicted, struct rfade_value *values)
{
    const struct rfade_predict_options *given = predicted->given;
    double delay_s = 1e-6 * given->delay_spread_us, symbol_s = 1.0 / given->symbol_rate_hz;
    values[0] = rfade_value_text("rms delay spread over symbol");
    values[1] = rfade_value_number(delay_s / symbol_s);
    values[2] =
        rfade_value_text(rfade_delay_validity_name(rfade_delay_validity(delay_s, symbol_s)));
}

static enum rfade_status entry(const struct rfade_predicted *predicted, size_t index,
                               struct rfade_value *values, struct rfade_error *error)
{
    (void)error;
    bool floor_first = applies(predicted, DBPSK_FLOOR) && index == 0;
    if (floor_first)
        dbpsk_floor(predicted, values);
    else
        delay_spread(predicted, values);
    return RFADE_OK;
}

static const struct rfade_column columns[] = {
    {"limit", RFADE_COLUMN_TEXT, 0, false, false},
    {"value", RFADE_COLUMN_PROBABILITY, 4, false, false},
    {"verdict", RFADE_COLUMN_TEXT, 0, false, false},
};

const struct rfade_prediction rfade_prediction_limits = {
    .name = "limits",
    .count = count,
    .columns = columns,
    .column_count = sizeof columns / sizeof columns[0],
    .entry = entry,
};
