/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/predict.h"

#include <math.h>
#include <string.h>

#include "output/json.h"

static const struct rfade_predict_options defaults = {
    .rice_k = NAN,
    .rice_k_db = NAN,
    .nakagami_m = NAN,
    .mean_snr_db = NAN,
    .median_snr_db = NAN,
    .shadowing_db = NAN,
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
    {"median-snr-db", "DB", RFADE_OPTION_NUMBER, TARGET(median_snr_db), -300, 300, NULL,
     "with --shadowing-db: median over the shadowing of the local mean SNR"},
    {"shadowing-db", "DB", RFADE_OPTION_NUMBER, TARGET(shadowing_db), 0, 30, NULL,
     "standard deviation of a lognormal local mean, default 0: none"},
    {"threshold-db", "DB", RFADE_OPTION_NUMBERS, TARGET(threshold_db), -300, 300, NULL,
     "Es/N0, dB, below which the link is out; may be given several times. The same option of "
     "`outage` is SNR in the channel's bandwidth: its --threshold-esn0-db is this one"},
    {"probability", "P", RFADE_OPTION_NUMBERS, TARGET(probability), 1e-30, 0.999999, NULL,
     "the SNR (Es/N0) that is exceeded in all but P of places; may be given several times"},
};

/* In the order of the output, one a line. */
/* clang-format off */
static const struct rfade_prediction *const predictions[] = {
    &rfade_prediction_outage,
    &rfade_prediction_quantiles,
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
                                    const struct rfade_link *link,
                                    const struct rfade_predict_options *given, size_t index,
                                    json_t **object, struct rfade_error *error)
{
    struct rfade_value values[RFADE_PREDICTION_COLUMNS];
    *object = NULL;
    enum rfade_status status = prediction->entry(link, given, index, values, error);
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
                                         const struct rfade_link *link,
                                         const struct rfade_predict_options *given,
                                         json_t **entries, struct rfade_error *error)
{
    enum rfade_status status = RFADE_OK;
    *entries = json_array();
    for (size_t i = 0; status == RFADE_OK && i < prediction->count(given); i++) {
        json_t *object = NULL;
        status = entry_json(prediction, link, given, i, &object, error);
        if (status == RFADE_OK && json_array_append_new(*entries, object) != 0)
            status = rfade_error_no_memory(error);
    }
    if (status != RFADE_OK) {
        json_decref(*entries);
        *entries = NULL;
    }
    return status;
}

static enum rfade_status write_json(const struct rfade_run *run, const struct rfade_link *link,
                                    const struct rfade_predict_options *given,
                                    struct rfade_error *error)
{
    json_t *document = json_pack("{s:o, s:o}", "fading", fading_json(link), "mean_snr_db",
                                 rfade_json_number(link->mean_snr_db));
    for (size_t i = 0; i < PREDICTIONS; i++) {
        json_t *entries = NULL;
        enum rfade_status status =
            prediction_json(predictions[i], link, given, &entries, error);
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
                                    const struct rfade_link *link,
                                    const struct rfade_predict_options *given,
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
    for (size_t i = 0; status == RFADE_OK && i < prediction->count(given); i++) {
        struct rfade_value values[SHARED + RFADE_PREDICTION_COLUMNS] = {
            rfade_value_text(fading_name(link)), rfade_value_number(link->parameter),
            rfade_value_number(link->mean_snr_db), rfade_value_number(link->shadowing_db)};
        status = prediction->entry(link, given, i, values + SHARED, error);
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
                                      const struct rfade_link *link,
                                      const struct rfade_predict_options *given,
                                      struct rfade_error *error)
{
    enum rfade_status status = RFADE_OK;
    bool any = false;
    for (size_t i = 0; status == RFADE_OK && i < PREDICTIONS; i++) {
        if (predictions[i]->count(given) == 0)
            continue;
        if (any)
            (void)fputc('\n', run->output);
        any = true;
        status = write_rows(run, predictions[i], link, given, error);
    }
    return status;
}

/* Something must be asked for; and a CSV file holds one table. */
static enum rfade_status check_asked(const struct rfade_run *run, struct rfade_error *error)
{
    size_t kinds = 0;
    for (size_t i = 0; i < PREDICTIONS; i++)
        kinds += predictions[i]->count(run->options) > 0;
    if (kinds == 0)
        return rfade_usage(error, &rfade_command_predict,
                           "give a --threshold-db or a --probability");
    if (kinds > 1 && run->common->format == &rfade_rows_csv)
        return rfade_usage(error, &rfade_command_predict,
                           "--format csv holds one kind of answer at a time");
    return RFADE_OK;
}

static enum rfade_status run_predict(struct rfade_run *run, struct rfade_error *error)
{
    const struct rfade_predict_options *given = run->options;
    struct rfade_link link;
    enum rfade_status status = rfade_link_take(given, &link, error);
    if (status == RFADE_OK)
        status = check_asked(run, error);
    if (status != RFADE_OK)
        return status;
    if (run->common->format == &rfade_rows_json)
        return write_json(run, &link, given, error);
    return write_tables(run, &link, given, error);
}

const struct rfade_command rfade_command_predict = {
    .name = "predict",
    .summary = "predict outage from parameters typed in, no survey needed",
    .details = "One kind of fading, one SNR, and thresholds or probabilities. SNR is Es/N0 of "
               "one branch.",
    .options = options,
    .option_count = sizeof options / sizeof options[0],
    .defaults = &defaults,
    .options_size = sizeof defaults,
    .run = run_predict,
};
