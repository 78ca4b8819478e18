/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "routefade/predict.h"

#include <math.h>
#include <string.h>

#include "cli/command.h"
#include "output/json.h"

struct predict_options {
    bool unfaded, rayleigh;
    double rice_k, rice_k_db, nakagami_m;
    double mean_snr_db, median_snr_db;
    double shadowing_db;
    struct rfade_numbers threshold_db;
};

static const struct predict_options defaults = {
    .rice_k = NAN,
    .rice_k_db = NAN,
    .nakagami_m = NAN,
    .mean_snr_db = NAN,
    .median_snr_db = NAN,
    .shadowing_db = NAN,
};

#define TARGET(member) offsetof(struct predict_options, member)

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
};

/* What was typed, made into numbers. */
struct link {
    const struct rfade_model *model; /* of the fast fading; NULL: unfaded */
    double parameter;                /* K or m; NaN if there is none */
    double shadowing_db;
    double mean_snr_db;   /* over everything */
    double median_snr_db; /* over the shadowing, of the local mean */
};

static enum rfade_status take_fading(const struct predict_options *given, struct link *link,
                                     struct rfade_error *error)
{
    int chosen = given->unfaded + given->rayleigh + !isnan(given->rice_k) +
                 !isnan(given->rice_k_db) + !isnan(given->nakagami_m);
    if (chosen != 1)
        return rfade_usage(error, &rfade_command_predict,
                           "give one of --unfaded, --rayleigh, --rice-k, --rice-k-db, "
                           "--nakagami-m");
    if (given->rayleigh)
        link->model = rfade_model(RFADE_RAYLEIGH);
    if (!isnan(given->rice_k) || !isnan(given->rice_k_db)) {
        link->model = rfade_model(RFADE_RICE);
        link->parameter = isnan(given->rice_k) ? pow(10, given->rice_k_db / 10) : given->rice_k;
    }
    if (!isnan(given->nakagami_m)) {
        link->model = rfade_model(RFADE_NAKAGAMI);
        link->parameter = given->nakagami_m;
    }
    return RFADE_OK;
}

static enum rfade_status take_snr(const struct predict_options *given, struct link *link,
                                  struct rfade_error *error)
{
    const struct rfade_command *command = &rfade_command_predict;
    if (isnan(given->mean_snr_db) == isnan(given->median_snr_db))
        return rfade_usage(error, command, "give one of --mean-snr-db, --median-snr-db");
    if (!isnan(given->median_snr_db) && isnan(given->shadowing_db))
        return rfade_usage(error, command, "--median-snr-db needs --shadowing-db");
    link->shadowing_db = isnan(given->shadowing_db) ? 0 : given->shadowing_db;
    double above_median_db = rfade_lognormal_mean_over_median_db(link->shadowing_db);
    if (isnan(given->median_snr_db)) {
        link->mean_snr_db = given->mean_snr_db;
        link->median_snr_db = given->mean_snr_db - above_median_db;
    } else {
        link->mean_snr_db = given->median_snr_db + above_median_db;
        link->median_snr_db = given->median_snr_db;
    }
    return RFADE_OK;
}

/* Probability that the SNR is below the threshold. */
static enum rfade_status outage_of(const struct link *link, double threshold_db, double *outage,
                                   struct rfade_error *error)
{
    double x_db = threshold_db - link->median_snr_db;
    struct rfade_tails tails;
    enum rfade_status status = RFADE_OK;
    *outage = NAN;
    if (link->model)
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

static const char *fading_name(const struct link *link)
{
    return link->model ? link->model->name : "unfaded";
}

static json_t *fading_json(const struct link *link)
{
    json_t *fading = json_pack("{s:s}", "model", fading_name(link));
    if (!link->model || !link->model->parameter_name)
        return fading;
    return rfade_json_join(fading, json_pack("{s:o}", link->model->parameter_name,
                                             rfade_json_number(link->parameter)));
}

static enum rfade_status write_json(const struct rfade_run *run, const struct link *link,
                                    const struct rfade_numbers *thresholds,
                                    struct rfade_error *error)
{
    json_t *outages = json_array();
    for (size_t i = 0; i < thresholds->count; i++) {
        double outage;
        enum rfade_status status = outage_of(link, thresholds->items[i], &outage, error);
        if (status != RFADE_OK) {
            json_decref(outages);
            return status;
        }
        json_t *entry =
            json_pack("{s:o, s:o}", "threshold_db", rfade_json_number(thresholds->items[i]),
                      "outage", rfade_json_number(outage));
        if (json_array_append_new(outages, entry) != 0) {
            json_decref(outages);
            return rfade_error_no_memory(error);
        }
    }
    json_t *document = json_pack("{s:o, s:o, s:o}", "fading", fading_json(link), "mean_snr_db",
                                 rfade_json_number(link->mean_snr_db), "outage", outages);
    return rfade_json_document(run->output, NULL, document, error);
}

static enum rfade_status write_rows(const struct rfade_run *run, const struct link *link,
                                    const struct rfade_numbers *thresholds,
                                    struct rfade_error *error)
{
    static const struct rfade_column columns[] = {
        {"fading", RFADE_COLUMN_TEXT, 0, false, false},
        {"parameter", RFADE_COLUMN_NUMBER, 3, false, false},
        {"mean_snr_db", RFADE_COLUMN_NUMBER, 2, false, false},
        {"shadowing_db", RFADE_COLUMN_NUMBER, 2, false, false},
        {"threshold_db", RFADE_COLUMN_NUMBER, 2, false, false},
        {"outage", RFADE_COLUMN_PROBABILITY, 4, false, false},
    };
    enum { COLUMNS = sizeof columns / sizeof columns[0] };
    struct rfade_rows *rows = NULL;
    enum rfade_status status = rfade_rows_begin(run->common->format, run->output, NULL, columns,
                                                COLUMNS, &rows, error);
    for (size_t i = 0; status == RFADE_OK && i < thresholds->count; i++) {
        double outage;
        status = outage_of(link, thresholds->items[i], &outage, error);
        if (status != RFADE_OK)
            break;
        const struct rfade_value values[COLUMNS] = {
            rfade_value_text(fading_name(link)),      rfade_value_number(link->parameter),
            rfade_value_number(link->mean_snr_db),    rfade_value_number(link->shadowing_db),
            rfade_value_number(thresholds->items[i]), rfade_value_number(outage)};
        status = rfade_rows_row(rows, values, error);
    }
    if (status == RFADE_OK)
        status = rfade_rows_end(rows, error);
    rfade_rows_destroy(rows);
    return status;
}

static enum rfade_status run_predict(struct rfade_run *run, struct rfade_error *error)
{
    const struct predict_options *given = run->options;
    struct link link = {.parameter = NAN, .mean_snr_db = NAN, .median_snr_db = NAN};
    enum rfade_status status = take_fading(given, &link, error);
    if (status == RFADE_OK)
        status = take_snr(given, &link, error);
    if (status == RFADE_OK && given->threshold_db.count == 0)
        status = rfade_usage(error, &rfade_command_predict, "give a --threshold-db");
    if (status != RFADE_OK)
        return status;
    if (run->common->format == &rfade_rows_json)
        return write_json(run, &link, &given->threshold_db, error);
    return write_rows(run, &link, &given->threshold_db, error);
}

const struct rfade_command rfade_command_predict = {
    .name = "predict",
    .summary = "predict outage from parameters typed in, no survey needed",
    .details = "One kind of fading, one SNR, and the thresholds. SNR is Es/N0 of one branch.",
    .options = options,
    .option_count = sizeof options / sizeof options[0],
    .defaults = &defaults,
    .options_size = sizeof defaults,
    .run = run_predict,
};
