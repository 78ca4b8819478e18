/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <unistd.h>

#include "cli/command.h"
#include "ingest/open.h"
#include "survey/withdraw.h"

static const struct rfade_column columns[] = {
    {"file", RFADE_COLUMN_TEXT, 0, false, false},
    {"readings", RFADE_COLUMN_INTEGER, 0, false, false},
    {"fixes", RFADE_COLUMN_INTEGER, 0, false, false},
    {"refused", RFADE_COLUMN_INTEGER, 0, false, false},
    {"traces", RFADE_COLUMN_INTEGER, 0, false, false},
};
enum { COLUMNS = sizeof columns / sizeof columns[0] };

/* A file that lies there is known by its bytes, wherever it lay when it came in. */
static enum rfade_status find_by_bytes(struct rfade_survey *survey, const char *path,
                                       int64_t *logger_file_id, struct rfade_error *error)
{
    struct rfade_log_source *source = NULL;
    enum rfade_status status = rfade_log_source_open(path, &source, error);
    if (status == RFADE_OK)
        status = rfade_logger_file_by_sha256(survey, rfade_log_source_sha256(source),
                                             logger_file_id, error);
    if (status != RFADE_OK)
        rfade_error_at(error, path, 0);
    rfade_log_source_close(source);
    return status;
}

static enum rfade_status tell(const struct rfade_run *run,
                              const struct rfade_withdrawn *withdrawn,
                              struct rfade_error *error)
{
    const struct rfade_value values[COLUMNS] = {
        rfade_value_text(withdrawn->name), rfade_value_integer(withdrawn->readings),
        rfade_value_integer(withdrawn->fixes), rfade_value_integer(withdrawn->refused_lines),
        rfade_value_integer(withdrawn->traces)};
    return rfade_rows_single(run->common->format, run->output, columns, COLUMNS, values, error);
}

static enum rfade_status run_withdraw(struct rfade_run *run, struct rfade_error *error)
{
    const char *name = run->arguments.items[0];
    struct rfade_survey *survey = NULL;
    struct rfade_withdrawn withdrawn;
    int64_t logger_file_id = 0;
    enum rfade_status status =
        rfade_survey_open(run->common->survey, RFADE_SURVEY_WRITE, &survey, error);
    if (status == RFADE_OK)
        status = access(name, F_OK) == 0
                     ? find_by_bytes(survey, name, &logger_file_id, error)
                     : rfade_logger_file_by_name(survey, name, &logger_file_id, error);
    if (status == RFADE_OK)
        status = rfade_survey_withdraw(survey, logger_file_id, &withdrawn, error);
    if (status == RFADE_OK)
        status = tell(run, &withdrawn, error);
    rfade_survey_close(survey);
    return status;
}

const struct rfade_command rfade_command_withdraw = {
    .name = "withdraw",
    .arguments = "FILE",
    .summary = "take one logger file out again, with all that came from it",
    .details = "FILE is the logger file itself, the name that it was imported under, or the "
               "first digits (at least 8) of its SHA-256. Its readings, positions and refused "
               "lines go, and the results made from them: `routefade fit` makes anew what "
               "other files still support. Imported again, it is a new file.",
    .arguments_min = 1,
    .arguments_max = 1,
    .run = run_withdraw,
};
