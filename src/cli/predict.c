/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/predict.h"

#include <math.h>
#include <string.h>

#include "cli/reception.h"
#include "output/json.h"

static const struct rfade_predict_options defaults = {
    .rice_k = NAN,
    .rice_k_db = NAN,
    .nakagami_m = NAN,
    .mean_snr_db = NAN,
    .mean_ebn0_db = NAN,
    .median_snr_db = NAN,
    .shadowing_db = NAN,
    .branches = 1,
    .combining = "mrc",
    .target_outage = NAN,
    .target_ber = NAN,
    .target_ser = NAN,
    .target_per = NAN,
    .packet_bits = NAN,
    .carrier_hz = NAN,
    .speed_kmh = NAN,
    .symbol_rate_hz = NAN,
    .delay_spread_us = NAN,
};

#define TARGET(member) offsetof(struct rfade_predict_options, member)

static const struct rfade_option options[] = {
    {"unfaded", NULL, RFADE_OPTION_FLAG, TARGET(unfaded), 0, 0, NULL, "no fast fading"},
    {"rayleigh", NULL, RFADE_OPTION_FLAG, TARGET(rayleigh), 0, 0, NULL, "Rayleigh fading"},
    {"rice-k", "K", RFADE_OPTION_NUMBER, TARGET(rice_k), 0, 1e5, NULL,
     "Rice fading, K (steady over scattered power) as a ratio"},
    {"rice-k-db", "DB", RFADE_OPTION_NUMBER, TARGET(rice_k_db), -200, 50, NULL,
     "Rice fading, K in dB"},
    {"nakagami-m", "M", RFADE_OPTION_NUMBER, TARGET(nakagami_m), 0.5, 1e4, NULL,
     "Nakagami fading, m"},
    {"mean-snr-db", "DB", RFADE_OPTION_NUMBER, TARGET(mean_snr_db), -300, 300, NULL,
     "mean SNR (Es/N0), dB of the mean power over everything, shadowing included"},
    {"mean-ebn0-db", "DB", RFADE_OPTION_NUMBER, TARGET(mean_ebn0_db), -300, 300, NULL,
     "the same as Eb/N0: with --modulation, which tells the bits a symbol"},
    {"median-snr-db", "DB", RFADE_OPTION_NUMBER, TARGET(median_snr_db), -300, 300, NULL,
     "with --shadowing-db: median over the shadowing of the local mean SNR"},
    {"shadowing-db", "DB", RFADE_OPTION_NUMBER, TARGET(shadowing_db), 0, 30, NULL,
     "standard deviation of a lognormal local mean, default 0: none"},
    {"threshold-db", "DB", RFADE_OPTION_NUMBERS, TARGET(threshold_db), -300, 300, NULL,
     "Es/N0, dB, below which the link is out; may be given several times. The same option of "
     "`outage` is SNR in the channel's bandwidth: its --threshold-esn0-db is this one"},
    {"probability", "P", RFADE_OPTION_NUMBERS, TARGET(probability), 1e-30, 0.999999, NULL,
     "the SNR (Es/N0) that is exceeded in all but P of places; may be given several times"},
    {"modulation", "M", RFADE_OPTION_TEXTS, TARGET(modulation), 0, 0, NULL,
     "bpsk, qpsk, 8psk, 16qam, 64qam, 256qam, dbpsk or ncfsk2; may be given several times"},
    {"branches", "L", RFADE_OPTION_INTEGER, TARGET(branches), 1, RFADE_BRANCHES_MAX, NULL,
     "diversity branches of equal mean, fading independently of each other, default 1"},
    {"combining", "HOW", RFADE_OPTION_CHOICE, TARGET(combining), 0, 0, rfade_combining_name,
     "mrc (maximal ratio, coherent, before detection) or selection, mrc if not told"},
    {"target-outage", "P", RFADE_OPTION_NUMBER, TARGET(target_outage), 1e-30, 0.999999, NULL,
     "the mean SNR that meets this outage of each --threshold-db"},
    {"target-ber", "P", RFADE_OPTION_NUMBER, TARGET(target_ber), 1e-30, 0.5, NULL,
     "the mean SNR that meets this bit error rate of each --modulation"},
    {"target-ser", "P", RFADE_OPTION_NUMBER, TARGET(target_ser), 1e-30, 1, NULL,
     "the mean SNR that meets this symbol error rate of each --modulation"},
    {"target-per", "P", RFADE_OPTION_NUMBER, TARGET(target_per), 1e-30, 0.999999, NULL,
     "the mean SNR that meets this error rate of packets of --packet-bits, bits interleaved "
     "and fading standing still over a packet"},
    {"packet-bits", "N", RFADE_OPTION_NUMBER, TARGET(packet_bits), 1, RFADE_PACKET_BITS_MAX,
     NULL, "error rates of packets of so many uncoded bits, too"},
    {"carrier-hz", "HZ", RFADE_OPTION_NUMBER, TARGET(carrier_hz), 1e5, 3e11, NULL,
     "with --speed-kmh: how often the SNR falls below each threshold, and for how long"},
    {"speed-kmh", "V", RFADE_OPTION_NUMBER, TARGET(speed_kmh), 1e-3, 1e5, NULL,
     "speed of the vehicle, with --carrier-hz"},
    {"symbol-rate-hz", "HZ", RFADE_OPTION_NUMBER, TARGET(symbol_rate_hz), 1e-3, 1e11, NULL,
     "symbols a second, for the limits that speed and delay spread set"},
    {"delay-spread-us", "US", RFADE_OPTION_NUMBER, TARGET(delay_spread_us), 0, 1e6, NULL,
     "rms delay spread, microseconds, with --symbol-rate-hz"},
};

/* In the order of the output, one a line. */
/* clang-format off */
static const struct rfade_prediction *const predictions[] = {
    &rfade_prediction_outage,
    &rfade_prediction_quantiles,
    &rfade_prediction_error_rates,
    &rfade_prediction_required,
    &rfade_prediction_fade_timing,
    &rfade_prediction_limits,
};
/* clang-format on */
enum { PREDICTIONS = sizeof predictions / sizeof predictions[0] };

static const char *fading_name(const struct rfade_link *link)
{
    return link->model ? link->model->name : "unfaded";
}

static json_t *fading_json(const struct rfade_link *link)
{
    json_t *fading = json_pack("{s:s}", "model", fading_name(link));
    if (!link->model || !link->model->parameter_name)
        return fading;
    return rfade_json_join(fading, json_pack("{s:o}", link->model->parameter_name,
                                             rfade_json_number(link->parameter)));
}

/* One entry as an object whose members are the columns. */
static enum rfade_status entry_json(const struct rfade_prediction *prediction,
                                    const struct rfade_predicted *predicted, size_t index,
                                    json_t **object, struct rfade_error *error)
{
    struct rfade_value values[RFADE_PREDICTION_COLUMNS];
    *object = NULL;
    enum rfade_status status = prediction->entry(predicted, index, values, error);
    if (status != RFADE_OK)
        return status;
    *object = json_object();
    for (size_t c = 0; *object && c < prediction->column_count; c++)
        *object = rfade_json_join(*object, json_pack("{s:o}", prediction->columns[c].name,
                                                     rfade_json_value(&values[c])));
    return *object ? RFADE_OK : rfade_error_no_memory(error);
}

/* The entries of one kind as an array; NULL on failure. */
static enum rfade_status prediction_json(const struct rfade_prediction *prediction,
                                         const struct rfade_predicted *predicted,
                                         json_t **entries, struct rfade_error *error)
{
    enum rfade_status status = RFADE_OK;
    *entries = json_array();
    for (size_t i = 0; status == RFADE_OK && i < prediction->count(predicted); i++) {
        json_t *object = NULL;
        status = entry_json(prediction, predicted, i, &object, error);
        if (status == RFADE_OK && json_array_append_new(*entries, object) != 0)
            status = rfade_error_no_memory(error);
    }
    if (status != RFADE_OK) {
        json_decref(*entries);
        *entries = NULL;
    }
    return status;
}

static enum rfade_status write_json(const struct rfade_run *run,
                                    const struct rfade_predicted *predicted,
                                    struct rfade_error *error)
{
    json_t *document = json_pack("{s:o, s:o}", "fading", fading_json(&predicted->link),
                                 "mean_snr_db", rfade_json_number(predicted->link.mean_snr_db));
    for (size_t i = 0; i < PREDICTIONS; i++) {
        json_t *entries = NULL;
        enum rfade_status status = prediction_json(predictions[i], predicted, &entries, error);
        if (status != RFADE_OK) {
            json_decref(document);
            return status;
        }
        document = rfade_json_join(document, json_pack("{s:o}", predictions[i]->name, entries));
    }
    return rfade_json_document(run->output, NULL, document, error);
}

static enum rfade_status write_rows(const struct rfade_run *run,
                                    const struct rfade_prediction *prediction,
                                    const struct rfade_predicted *predicted,
                                    struct rfade_error *error)
{
    static const struct rfade_column shared[] = {
        {"fading", RFADE_COLUMN_TEXT, 0, false, false},
        {"parameter", RFADE_COLUMN_NUMBER, 3, false, false},
        {"mean_snr_db", RFADE_COLUMN_NUMBER, 2, false, false},
        {"shadowing_db", RFADE_COLUMN_NUMBER, 2, false, false},
    };
    enum { SHARED = sizeof shared / sizeof shared[0] };
    struct rfade_column columns[SHARED + RFADE_PREDICTION_COLUMNS];
    memcpy(columns, shared, sizeof shared);
    memcpy(columns + SHARED, prediction->columns,
           prediction->column_count * sizeof *prediction->columns);
    struct rfade_rows *rows = NULL;
    enum rfade_status status =
        rfade_rows_begin(run->common->format, run->output, NULL, columns,
                         SHARED + prediction->column_count, &rows, error);
    const struct rfade_link *link = &predicted->link;
    for (size_t i = 0; status == RFADE_OK && i < prediction->count(predicted); i++) {
        struct rfade_value values[SHARED + RFADE_PREDICTION_COLUMNS] = {
            rfade_value_text(fading_name(link)), rfade_value_number(link->parameter),
            rfade_value_number(link->mean_snr_db), rfade_value_number(link->shadowing_db)};
        status = prediction->entry(predicted, i, values + SHARED, error);
        if (status == RFADE_OK)
            status = rfade_rows_row(rows, values, error);
    }
    if (status == RFADE_OK)
        status = rfade_rows_end(rows, error);
    rfade_rows_destroy(rows);
    return status;
}

/* A table a kind, an empty line between. */
static enum rfade_status write_tables(const struct rfade_run *run,
                                      const struct rfade_predicted *predicted,
                                      struct rfade_error *error)
{
    enum rfade_status status = RFADE_OK;
    bool any = false;
    for (size_t i = 0; status == RFADE_OK && i < PREDICTIONS; i++) {
        if (predictions[i]->count(predicted) == 0)
            continue;
        if (any)
            (void)fputc('\n', run->output);
        any = true;
        status = write_rows(run, predictions[i], predicted, error);
    }
    return status;
}

/* Something must be asked for; and a CSV file holds one table. */
static enum rfade_status check_asked(const struct rfade_run *run,
                                     const struct rfade_predicted *predicted,
                                     struct rfade_error *error)
{
    size_t kinds = 0;
    for (size_t i = 0; i < PREDICTIONS; i++)
        kinds += predictions[i]->count(predicted) > 0;
    if (kinds == 0)
        return rfade_usage(error, &rfade_command_predict,
                           "give a --threshold-db, --probability or --modulation");
    if (kinds > 1 && run->common->format == &rfade_rows_csv)
        return rfade_usage(error, &rfade_command_predict,
                           "--format csv holds one kind of answer at a time");
    return RFADE_OK;
}

static enum rfade_status run_predict(struct rfade_run *run, struct rfade_error *error)
{
    struct rfade_predicted predicted;
    enum rfade_status status = rfade_predicted_take(run->options, &predicted, error);
    if (status == RFADE_OK)
        status = check_asked(run, &predicted, error);
    if (status != RFADE_OK)
        return status;
    if (run->common->format == &rfade_rows_json)
        return write_json(run, &predicted, error);
    return write_tables(run, &predicted, error);
}

const struct rfade_command rfade_command_predict = {
    .name = "predict",
    .summary = "predict outage, errors, margin and fade timing from parameters, without survey",
    .details =
        "One kind of fading, one SNR, and what is asked of them: thresholds, probabilities, "
        "modulations, targets. SNR is Es/N0 of one branch; with targets alone none is needed. "
        "Bit error rates are Gray mapped, uncoded and exact. packet_independent is for bits "
        "that fade independently (interleaved), packet_block for fading that stands still over "
        "a packet. fading_penalty_db is what the fading costs over a steady signal at the same "
        "target; diversity_order the decades of errors a decade of SNR brings far out. Fade "
        "timing is for isotropic scatter and a ray across the road; branches are not in it. "
        "An ideal receiver, raw errors: no prediction is a safety case.",
    .options = options,
    .option_count = sizeof options / sizeof options[0],
    .defaults = &defaults,
    .options_size = sizeof defaults,
    .run = run_predict,
};
