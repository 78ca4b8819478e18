/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>

#include "cli/predict.h"

static size_t count(const struct rfade_predicted *predicted)
{
    return isnan(predicted->link.mean_snr_db) ? 0 : predicted->modulation_count;
}

static enum rfade_status entry(const struct rfade_predicted *predicted, size_t index,
                               struct rfade_value *values, struct rfade_error *error)
{
    const struct rfade_link *link = &predicted->link;
    const struct rfade_modulation *modulation = predicted->modulations[index];
    struct rfade_error_rate rate = {NAN, NAN, NAN, NAN}, unfaded = {NAN, NAN, NAN, NAN};
    struct rfade_packet_error packet = {NAN, NAN};
    enum rfade_status status = rfade_error_rates(link, &modulation, 1, &rate);
    if (status == RFADE_OK)
        status = rfade_error_rate_unfaded(link, modulation, &unfaded);
    if (status == RFADE_OK && !isnan(predicted->given->packet_bits))
        status = rfade_packet_error(link, modulation, predicted->given->packet_bits, &packet);
    if (status != RFADE_OK)
        return rfade_error_set(error, status, "check the SNR and the fading",
                               "no error rate of %s: %s", rfade_modulation_name(modulation),
                               rfade_status_text(status));
    values[0] = rfade_value_text(rfade_modulation_name(modulation));
    values[1] = rfade_value_number(rate.bit);
    values[2] = rfade_value_number(rate.symbol);
    values[3] = rfade_value_number(unfaded.bit);
    values[4] = rfade_value_number(unfaded.symbol);
    values[5] = rfade_value_number(packet.independent);
    values[6] = rfade_value_number(packet.block);
    return RFADE_OK;
}

static const struct rfade_column columns[] = {
    {"modulation", RFADE_COLUMN_TEXT, 0, false, false},
    {"bit", RFADE_COLUMN_PROBABILITY, 4, false, false},
    {"symbol", RFADE_COLUMN_PROBABILITY, 4, false, false},
    {"bit_unfaded", RFADE_COLUMN_PROBABILITY, 4, false, false},
    {"symbol_unfaded", RFADE_COLUMN_PROBABILITY, 4, false, false},
    {"packet_independent", RFADE_COLUMN_PROBABILITY, 4, false, false},
    {"packet_block", RFADE_COLUMN_PROBABILITY, 4, false, false},
};

const struct rfade_prediction rfade_prediction_error_rates = {
    .name = "error_rates",
    .count = count,
    .columns = columns,
    .column_count = sizeof columns / sizeof columns[0],
    .entry = entry,
};
