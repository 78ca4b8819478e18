/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "survey/import.h"

#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "cli/command.h"
#include "ingest/open.h"
#include "ingest/walk.h"
#include "survey/name.h"

struct import_options {
    struct rfade_texts columns;
    const char *vehicle, *campaign, *channel;
};

static const struct import_options defaults = {.vehicle = NULL};

#define TARGET(member) offsetof(struct import_options, member)

static const struct rfade_option options[] = {
    {"columns", "FILE.ini", RFADE_OPTION_TEXTS, TARGET(columns), 0, 0, NULL,
     "a column map; may be given several times, each file takes the one that fits it"},
    {"vehicle", "NAME", RFADE_OPTION_TEXT, TARGET(vehicle), 0, 0, NULL,
     "the vehicle of all these files, whatever they say"},
    {"campaign", "NAME", RFADE_OPTION_TEXT, TARGET(campaign), 0, 0, NULL,
     "the campaign of all these files; if nothing says one, default"},
    {"channel", "NAME", RFADE_OPTION_TEXT, TARGET(channel), 0, 0, NULL,
     "the channel of all these files; if nothing says one, 1"},
};

static const struct rfade_column columns[] = {
    {"file", RFADE_COLUMN_TEXT, 0, false, false},
    {"readings", RFADE_COLUMN_INTEGER, 0, false, false},
    {"fixes", RFADE_COLUMN_INTEGER, 0, false, false},
    {"refused", RFADE_COLUMN_INTEGER, 0, false, false},
    {"state", RFADE_COLUMN_TEXT, 0, false, false},
    {"why", RFADE_COLUMN_TEXT, 0, false, false},
};
enum { COLUMNS = sizeof columns / sizeof columns[0] };

/* What all files share. */
struct job {
    struct rfade_run *run;
    struct rfade_survey *survey;
    struct rfade_column_map **maps;
    size_t map_count;
    struct rfade_ingest_names names;
    struct rfade_path_list paths;
    struct rfade_rows *rows;
};

/* Passes everything on to the survey; remembers what stopped it and the first refusal. */
struct listener {
    struct rfade_sink survey;
    enum rfade_status failed;
    char first_refusal[256];
};

static enum rfade_status heard(struct listener *listener, enum rfade_status status)
{
    if (status != RFADE_OK)
        listener->failed = status;
    return status;
}

static enum rfade_status hear_reading(void *context, const struct rfade_ingest_reading *reading,
                                      struct rfade_error *error)
{
    struct listener *listener = context;
    return heard(listener, listener->survey.reading(listener->survey.context, reading, error));
}

static enum rfade_status hear_fix(void *context, const struct rfade_ingest_fix *fix,
                                  struct rfade_error *error)
{
    struct listener *listener = context;
    return heard(listener, listener->survey.fix(listener->survey.context, fix, error));
}

static enum rfade_status hear_refusal(void *context, const struct rfade_ingest_refusal *refusal,
                                      struct rfade_error *error)
{
    struct listener *listener = context;
    if (listener->first_refusal[0] == '\0')
        (void)snprintf(listener->first_refusal, sizeof listener->first_refusal,
                       "first: line %zu: %s", refusal->line, refusal->reason);
    return heard(listener, listener->survey.refused(listener->survey.context, refusal, error));
}

static enum rfade_status write_row(struct job *job, const char *path,
                                   const struct rfade_import_counts *counts, const char *state,
                                   const char *why, struct rfade_error *error)
{
    const struct rfade_value values[COLUMNS] = {
        rfade_value_text(path),
        rfade_value_integer(counts ? counts->readings : 0),
        rfade_value_integer(counts ? counts->fixes : 0),
        rfade_value_integer(counts ? counts->refused : 0),
        rfade_value_text(state),
        rfade_value_text(why && *why ? why : NULL),
    };
    return rfade_rows_row(job->rows, values, error);
}

/* A file that is refused whole: told in its row and on standard error; the rest goes on. */
static enum rfade_status refuse_file(struct job *job, const char *path,
                                     const struct rfade_error *refusal,
                                     struct rfade_error *error)
{
    char why[1200], line[40] = "";
    job->run->file_refused = true;
    rfade_print_error(job->run->notes, refusal);
    if (refusal->line > 0)
        (void)snprintf(line, sizeof line, "line %zu: ", refusal->line);
    (void)snprintf(why, sizeof why, "%s%s%s%s", line, refusal->what,
                   refusal->remedy[0] ? "; " : "", refusal->remedy);
    return write_row(job, path, NULL, "refused", why, error);
}

/* A failure of the file itself, after which the survey can take the next one. */
static bool is_the_files(const struct listener *listener, enum rfade_status status)
{
    if (listener->failed != RFADE_OK) /* the survey said so: of a bad name, or its own */
        return listener->failed == RFADE_INPUT;
    return status == RFADE_INPUT || status == RFADE_STORAGE;
}

/* Reads an opened file into the survey. */
static enum rfade_status import_source(struct job *job, const char *path,
                                       struct rfade_log_source *source,
                                       struct rfade_error *error)
{
    struct rfade_import *import = NULL;
    struct rfade_import_counts counts = {0};
    struct rfade_ingest_summary summary;
    struct listener listener = {.failed = RFADE_OK};
    bool known = false;
    enum rfade_status status =
        rfade_import_begin(job->survey, path, rfade_log_source_sha256(source),
                           rfade_log_source_size_bytes(source), &import, &known, error);
    if (status != RFADE_OK)
        return status;
    if (known)
        return write_row(job, path, NULL, "known", "the survey has these bytes already", error);
    listener.survey = rfade_import_sink(import);
    const struct rfade_sink sink = {.context = &listener,
                                    .reading = hear_reading,
                                    .fix = hear_fix,
                                    .refused = hear_refusal};
    status = rfade_ingest(source, (const struct rfade_column_map *const *)job->maps,
                          job->map_count, &job->names, &sink, &summary, error);
    if (status != RFADE_OK) {
        rfade_import_abort(import);
        if (!is_the_files(&listener, status))
            return status;
        const struct rfade_error refusal = *error;
        return refuse_file(job, path, &refusal, error);
    }
    status = rfade_import_finish(import, (int64_t)summary.lines, &counts, error);
    if (status != RFADE_OK)
        return status;
    return write_row(job, path, &counts, "imported", listener.first_refusal, error);
}

static enum rfade_status import_file(struct job *job, const char *path,
                                     struct rfade_error *error)
{
    struct rfade_log_source *source = NULL;
    enum rfade_status status = rfade_log_source_open(path, &source, error);
    if (status == RFADE_INPUT || status == RFADE_STORAGE) {
        const struct rfade_error refusal = *error;
        return refuse_file(job, path, &refusal, error);
    }
    if (status == RFADE_OK)
        status = import_source(job, path, source, error);
    rfade_log_source_close(source);
    return status;
}

/* Everything that is checked before the survey is touched. */
static enum rfade_status prepare(struct job *job, const struct import_options *given,
                                 struct rfade_error *error)
{
    enum rfade_status status = RFADE_OK;
    if (given->vehicle)
        status = rfade_name_check(RFADE_NAMED_VEHICLE, given->vehicle, error);
    if (status == RFADE_OK && given->campaign)
        status = rfade_name_check(RFADE_NAMED_CAMPAIGN, given->campaign, error);
    if (status == RFADE_OK && given->channel)
        status = rfade_name_check(RFADE_NAMED_CHANNEL, given->channel, error);
    /* NOLINTNEXTLINE(bugprone-sizeof-expression): an array of pointers */
    job->maps = calloc(given->columns.count + 1, sizeof *job->maps);
    if (status == RFADE_OK && !job->maps)
        status = rfade_error_no_memory(error);
    for (size_t i = 0; status == RFADE_OK && i < given->columns.count; i++) {
        status = rfade_column_map_read(given->columns.items[i], &job->maps[i], error);
        job->map_count = i + 1;
    }
    for (size_t i = 0; status == RFADE_OK && i < job->run->arguments.count; i++)
        status = rfade_path_list_add(&job->paths, job->run->arguments.items[i], error);
    if (status == RFADE_OK && job->paths.count == 0)
        status = rfade_error_set(error, RFADE_INPUT, "name logger files, or a folder of them",
                                 "there are no files in what was named");
    return status;
}

static enum rfade_status import_files(struct job *job, struct rfade_error *error)
{
    struct rfade_run *run = job->run;
    bool progress = !run->common->quiet && isatty(fileno(run->notes));
    enum rfade_status status = rfade_rows_begin(run->common->format, run->output, NULL, columns,
                                                COLUMNS, &job->rows, error);
    if (status != RFADE_OK)
        return status;
    for (size_t i = 0; status == RFADE_OK && i < job->paths.count; i++) {
        if (progress)
            (void)fprintf(run->notes, "importing %zu of %zu\n", i + 1, job->paths.count);
        status = import_file(job, job->paths.paths[i], error);
    }
    /* What was imported before a failure is told, too. */
    enum rfade_status ended = rfade_rows_end(job->rows, status == RFADE_OK ? error : NULL);
    return status == RFADE_OK ? ended : status;
}

static enum rfade_status run_import(struct rfade_run *run, struct rfade_error *error)
{
    const struct import_options *given = run->options;
    struct job job = {.run = run,
                      .names = {.vehicle = given->vehicle,
                                .channel = given->channel,
                                .campaign = given->campaign}};
    enum rfade_status status = prepare(&job, given, error);
    if (status == RFADE_OK)
        status =
            rfade_survey_open(run->common->survey, RFADE_SURVEY_CREATE, &job.survey, error);
    if (status == RFADE_OK)
        status = import_files(&job, error);
    rfade_rows_destroy(job.rows);
    rfade_survey_close(job.survey);
    rfade_path_list_clear(&job.paths);
    for (size_t i = 0; i < job.map_count; i++)
        rfade_column_map_destroy(job.maps[i]);
    free(job.maps);
    return status;
}

const struct rfade_command rfade_command_import = {
    .name = "import",
    .arguments = "PATH...",
    .summary = "read logger files and folders of them into the survey",
    .details =
        "Each file comes in whole or not at all, and the same bytes only once. Headers that\n"
        "say what their columns hold need no column map.",
    .arguments_min = 1,
    .arguments_max = (size_t)-1,
    .options = options,
    .option_count = sizeof options / sizeof options[0],
    .defaults = &defaults,
    .options_size = sizeof defaults,
    .run = run_import,
};
