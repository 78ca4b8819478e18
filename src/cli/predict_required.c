/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The mean SNR that meets a target: of each threshold, or of each modulation. */
#include <math.h>

#include "cli/predict.h"
#include "cli/reception.h"

/* The targets that can be given, each with what it is of. */
static const struct kind {
    enum rfade_target_kind kind;
    size_t offset; /* of the value in the options */
} kinds[] = {
    {RFADE_TARGET_OUTAGE, offsetof(struct rfade_predict_options, target_outage)},
    {RFADE_TARGET_BIT, offsetof(struct rfade_predict_options, target_ber)},
    {RFADE_TARGET_SYMBOL, offsetof(struct rfade_predict_options, target_ser)},
    {RFADE_TARGET_PACKET_INDEPENDENT, offsetof(struct rfade_predict_options, target_per)},
    {RFADE_TARGET_PACKET_BLOCK, offsetof(struct rfade_predict_options, target_per)},
};
enum { KINDS = sizeof kinds / sizeof kinds[0] };

static double value_of(const struct rfade_predicted *predicted, const struct kind *kind)
{
    return *(const double *)((const char *)predicted->given + kind->offset);
}

/* How many entries one kind gives. */
static size_t entries_of(const struct rfade_predicted *predicted, const struct kind *kind)
{
    if (isnan(value_of(predicted, kind)))
        return 0;
    return kind->kind == RFADE_TARGET_OUTAGE ? predicted->given->threshold_db.count
                                             : predicted->modulation_count;
}

static size_t count(const struct rfade_predicted *predicted)
{
    size_t entries = 0;
    for (size_t i = 0; i < KINDS; i++)
        entries += entries_of(predicted, &kinds[i]);
    return entries;
}

/* The target of one entry; `index` becomes its place within its kind. */
static const struct kind *find_kind(const struct rfade_predicted *predicted, size_t *index)
{
    const struct kind *kind = kinds;
    while (*index >= entries_of(predicted, kind))
        *index -= entries_of(predicted, kind++);
    return kind;
}

static enum rfade_status entry(const struct rfade_predicted *predicted, size_t index,
                               struct rfade_value *values, struct rfade_error *error)
{
    const struct kind *kind = find_kind(predicted, &index);
    bool outage = kind->kind == RFADE_TARGET_OUTAGE;
    const struct rfade_target target = {
        .kind = kind->kind,
        .value = value_of(predicted, kind),
        .threshold_db = outage ? predicted->given->threshold_db.items[index] : NAN,
        .modulation = outage ? NULL : predicted->modulations[index],
        .packet_bits = predicted->given->packet_bits,
    };
    double required_db = NAN, penalty_db = NAN, order = NAN;
    enum rfade_status status = rfade_required_snr(&predicted->link, &target, &required_db);
    if (status == RFADE_OK)
        status = rfade_fading_penalty(&predicted->link, &target, &penalty_db);
    if (status == RFADE_OK)
        status = rfade_diversity_order(&predicted->link, &order);
    if (status != RFADE_OK)
        return rfade_error_set(error, status, "give a target that the link can meet",
                               "no mean SNR for a target of %g: %s", target.value,
                               rfade_status_text(status));
    values[0] = rfade_value_text(rfade_target_kind_name(kind->kind));
    values[1] = rfade_value_text(outage ? NULL : rfade_modulation_name(target.modulation));
    values[2] = rfade_value_number(target.threshold_db);
    values[3] = rfade_value_number(target.value);
    values[4] = rfade_value_number(required_db);
    values[5] = rfade_value_number(penalty_db);
    values[6] = rfade_value_number(order);
    return RFADE_OK;
}

static const struct rfade_column columns[] = {
    {"target", RFADE_COLUMN_TEXT, 0, false, false},
    {"modulation", RFADE_COLUMN_TEXT, 0, false, false},
    {"threshold_db", RFADE_COLUMN_NUMBER, 2, false, false},
    {"value", RFADE_COLUMN_PROBABILITY, 4, false, false},
    {"mean_snr_db", RFADE_COLUMN_NUMBER, 2, false, false},
    {"fading_penalty_db", RFADE_COLUMN_NUMBER, 2, false, false},
    {"diversity_order", RFADE_COLUMN_NUMBER, 2, false, false},
};

const struct rfade_prediction rfade_prediction_required = {
    .name = "required",
    .count = count,
    .columns = columns,
    .column_count = sizeof columns / sizeof columns[0],
    .entry = entry,
};
