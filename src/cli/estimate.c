/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "routefade/estimate.h"

#include <inttypes.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "cli/level_column.h"
#include "cli/segment_rows.h"
#include "output/json.h"

struct estimate_options {
    const char *column;
    const char *unit;
    double step_db, floor_dbm, ceiling_dbm;
    bool independent;
    double confidence;
};

static const struct estimate_options defaults = {
    .unit = "dbm",
    .step_db = NAN,
    .floor_dbm = NAN,
    .ceiling_dbm = NAN,
    .confidence = 0.95,
};

/* In the order of enum rfade_level_unit. */
static const char *unit_name(size_t index)
{
    static const char *const names[] = {"dbm", "mw", "amplitude"};
    return index < sizeof names / sizeof names[0] ? names[index] : NULL;
}

#define TARGET(member) offsetof(struct estimate_options, member)

static const struct rfade_option options[] = {
    {"column", "NAME|N", RFADE_OPTION_TEXT, TARGET(column), 0, 0, NULL,
     "the column by the header's name or by number from 1, where the file has several"},
    {"unit", "UNIT", RFADE_OPTION_CHOICE, TARGET(unit), 0, 0, unit_name,
     "what the numbers are, dbm if not told; an amplitude is read as 20 log10"},
    {"step-db", "DB", RFADE_OPTION_NUMBER, TARGET(step_db), 0, 20, NULL,
     "the receiver's quantisation step; 0: none; if not told it is found in the data"},
    {"floor-dbm", "DBM", RFADE_OPTION_NUMBER, TARGET(floor_dbm), -400, 400, NULL,
     "a reading at or below it stands for every level below it plus half a step"},
    {"ceiling-dbm", "DBM", RFADE_OPTION_NUMBER, TARGET(ceiling_dbm), -400, 400, NULL,
     "a reading at or above it stands for every level from it less half a step up"},
    {"independent", NULL, RFADE_OPTION_FLAG, TARGET(independent), 0, 0, NULL,
     "the readings are independent; else their correlation is measured from their order"},
    {"confidence", "P", RFADE_OPTION_NUMBER, TARGET(confidence), 0.5, 0.9999, NULL,
     "of the intervals, default 0.95"},
};

static enum rfade_level_unit unit_of(const char *name)
{
    size_t index = 0;
    while (strcmp(unit_name(index), name) != 0)
        index++;
    return (enum rfade_level_unit)index;
}

/* A value with "_low" and "_high" beside it. */
static json_t *interval_json(const char *name, double value, double low, double high)
{
    char low_name[64], high_name[64];
    (void)snprintf(low_name, sizeof low_name, "%s_low", name);
    (void)snprintf(high_name, sizeof high_name, "%s_high", name);
    return json_pack("{s:o, s:o, s:o}", name, rfade_json_number(value), low_name,
                     rfade_json_number(low), high_name, rfade_json_number(high));
}

static json_t *fit_json(const struct rfade_fit *fit)
{
    const struct rfade_model *model = rfade_model(fit->model);
    json_t *object = json_pack("{s:s}", "model", model->name);
    object =
        rfade_json_join(object, interval_json("mean_power_dbm", fit->mean_power_db,
                                              fit->mean_power_low_db, fit->mean_power_high_db));
    if (model->parameter_name)
        object =
            rfade_json_join(object, interval_json(model->parameter_name, fit->parameter,
                                                  fit->parameter_low, fit->parameter_high));
    return rfade_json_join(object, json_pack("{s:o, s:o, s:o, s:o}", "log_likelihood",
                                             rfade_json_number(fit->log_likelihood), "aic",
                                             rfade_json_number(fit->aic), "weight",
                                             rfade_json_number(fit->weight), "goodness_p",
                                             rfade_json_number(fit->goodness_p)));
}

static json_t *estimate_json(const struct rfade_column_estimate *result, size_t count)
{
    const struct rfade_estimate *estimate = &result->estimate;
    json_t *models = json_array();
    for (size_t i = 0; models && i < estimate->fit_count; i++) {
        if (json_array_append_new(models, fit_json(&estimate->fits[i])) == 0)
            continue;
        json_decref(models);
        models = NULL;
    }
    json_t *object = json_pack(
        "{s:I, s:o, s:I, s:I, s:o, s:o, s:o}", "count", (json_int_t)count, "effective_count",
        rfade_json_number(estimate->effective_count), "below_floor",
        (json_int_t)result->below_floor, "above_ceiling", (json_int_t)result->above_ceiling,
        "step_db", rfade_json_number(result->step_db), "mean_power_dbm",
        rfade_json_number(estimate->mean_power_db), "mean_of_db_dbm",
        rfade_json_number(estimate->mean_of_db));
    const char *preferred = rfade_model(estimate->fits[estimate->preferred].model)->name;
    return rfade_json_join(object, json_pack("{s:{s:o, s:o}, s:o, s:s}", "moments", "k",
                                             rfade_json_number(estimate->moment_k), "m",
                                             rfade_json_number(estimate->moment_m), "models",
                                             models, "preferred", preferred));
}

static const struct rfade_column columns[] = {
    {"model", RFADE_COLUMN_TEXT, 0, false, false},
    {"preferred", RFADE_COLUMN_TEXT, 0, false, false},
    {"mean_power_dbm", RFADE_COLUMN_NUMBER, 2, true, false},
    {"mean_power_dbm_low", RFADE_COLUMN_NUMBER, 2, false, false},
    {"mean_power_dbm_high", RFADE_COLUMN_NUMBER, 2, false, false},
    {"parameter", RFADE_COLUMN_TEXT, 0, false, false},
    {"value", RFADE_COLUMN_NUMBER, 3, true, false},
    {"value_low", RFADE_COLUMN_NUMBER, 3, false, false},
    {"value_high", RFADE_COLUMN_NUMBER, 3, false, false},
    {"log_likelihood", RFADE_COLUMN_NUMBER, 2, false, false},
    {"aic", RFADE_COLUMN_NUMBER, 2, false, false},
    {"weight", RFADE_COLUMN_PROBABILITY, 2, false, false},
    {"goodness_p", RFADE_COLUMN_PROBABILITY, 2, false, false},
};
enum { COLUMNS = sizeof columns / sizeof columns[0] };

static enum rfade_status write_fit(struct rfade_rows *rows, const struct rfade_fit *fit,
                                   bool preferred, struct rfade_error *error)
{
    const struct rfade_model *model = rfade_model(fit->model);
    const struct rfade_value values[COLUMNS] = {
        rfade_value_text(model->name),
        rfade_value_text(preferred ? "yes" : "no"),
        rfade_value_number(fit->mean_power_db),
        rfade_value_number(fit->mean_power_low_db),
        rfade_value_number(fit->mean_power_high_db),
        rfade_value_text(model->parameter_name),
        rfade_parameter_value(model, fit->parameter),
        rfade_parameter_value(model, fit->parameter_low),
        rfade_parameter_value(model, fit->parameter_high),
        rfade_value_number(fit->log_likelihood),
        rfade_value_number(fit->aic),
        rfade_value_number(fit->weight),
        rfade_value_number(fit->goodness_p),
    };
    return rfade_rows_row(rows, values, error);
}

static enum rfade_status write_fits(const struct rfade_run *run,
                                    const struct rfade_estimate *estimate,
                                    struct rfade_error *error)
{
    struct rfade_rows *rows = NULL;
    enum rfade_status status = rfade_rows_begin(run->common->format, run->output, NULL, columns,
                                                COLUMNS, &rows, error);
    for (size_t i = 0; status == RFADE_OK && i < estimate->fit_count; i++)
        status = write_fit(rows, &estimate->fits[i], i == estimate->preferred, error);
    if (status == RFADE_OK)
        status = rfade_rows_end(rows, error);
    rfade_rows_destroy(rows);
    return status;
}

/* What a person reads above the table of models. */
static void write_summary(FILE *stream, const struct rfade_column_estimate *result,
                          size_t count, bool step_given)
{
    const struct rfade_estimate *estimate = &result->estimate;
    (void)fprintf(stream, "readings         %zu (%zu below the floor, %zu above the ceiling)\n",
                  count, result->below_floor, result->above_ceiling);
    (void)fprintf(stream, "effective count  %.0f\n", estimate->effective_count);
    (void)fprintf(stream, "step             %g dB (%s)\n", result->step_db,
                  step_given ? "as given" : "found in the data");
    (void)fprintf(stream, "mean power       %.2f dBm\n", estimate->mean_power_db);
    (void)fprintf(stream, "mean of the dB   %.2f dBm\n", estimate->mean_of_db);
    (void)fprintf(stream, "by moments       k %.3g, m %.3g\n\n", estimate->moment_k,
                  estimate->moment_m);
}

static enum rfade_status check_options(const struct estimate_options *given,
                                       struct rfade_error *error)
{
    if (given->floor_dbm >= given->ceiling_dbm)
        return rfade_usage(error, &rfade_command_estimate,
                           "--floor-dbm must lie below --ceiling-dbm");
    return RFADE_OK;
}

static enum rfade_status refuse_levels(enum rfade_status status,
                                       const struct rfade_column_estimate *result, size_t count,
                                       struct rfade_error *error)
{
    if (status == RFADE_NO_DATA)
        return rfade_error_set(
            error, status, "give more levels, or check --floor-dbm and --ceiling-dbm",
            "too few readings for a fit: %zu between floor and ceiling; at least %d",
            count - result->below_floor - result->above_ceiling, RFADE_FIT_READINGS_MIN);
    return rfade_error_set(error, status, "check --unit and --step-db",
                           "%zu levels can't be fitted: %s", count, rfade_status_text(status));
}

static enum rfade_status run_estimate(struct rfade_run *run, struct rfade_error *error)
{
    const struct estimate_options *given = run->options;
    const char *path = run->arguments.items[0];
    const struct rfade_column_settings settings = {.step_db = given->step_db,
                                                   .floor_dbm = given->floor_dbm,
                                                   .ceiling_dbm = given->ceiling_dbm,
                                                   .independent = given->independent,
                                                   .confidence = given->confidence};
    struct rfade_column_estimate result;
    double *levels_dbm = NULL;
    size_t count = 0;
    enum rfade_status status = check_options(given, error);
    if (status == RFADE_OK)
        status = rfade_level_column_read(path, given->column, unit_of(given->unit), &levels_dbm,
                                         &count, error);
    if (status != RFADE_OK)
        return status;
    status = rfade_estimate_column(levels_dbm, count, &settings, &result);
    free(levels_dbm);
    if (status != RFADE_OK) {
        (void)refuse_levels(status, &result, count, error);
        rfade_error_at(error, strcmp(path, "-") == 0 ? "standard input" : path, 0);
        return status;
    }
    if (run->common->format == &rfade_rows_json)
        return rfade_json_document(run->output, NULL, estimate_json(&result, count), error);
    if (run->common->format == &rfade_rows_table)
        write_summary(run->output, &result, count, !isnan(given->step_db));
    return write_fits(run, &result.estimate, error);
}

const struct rfade_command rfade_command_estimate = {
    .name = "estimate",
    .arguments = "FILE",
    .summary = "fit one column of levels, no survey needed",
    .details =
        "FILE is a headerless column of numbers or a file with separated columns; '-' is\n"
        "standard input. Blank lines and lines that begin with '#' are passed over; any\n"
        "other line that can't be read is refused. All models are fitted by maximum\n"
        "likelihood to the intervals that the readings stand for.",
    .arguments_min = 1,
    .arguments_max = 1,
    .options = options,
    .option_count = sizeof options / sizeof options[0],
    .defaults = &defaults,
    .options_size = sizeof defaults,
    .run = run_estimate,
};
