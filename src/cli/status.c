/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <inttypes.h>
#include <stdlib.h>

#include "cli/command.h"
#include "cli/found.h"
#include "output/json.h"
#include "output/utc.h"
#include "survey/list.h"

/* Everything that is shown. */
struct holdings {
    struct rfade_survey_counts counts;
    struct rfade_stream *streams;
    size_t stream_count;
    struct rfade_logger_file *files;
    size_t file_count;
    struct rfade_stream_found *found;
    size_t found_count;
};

static enum rfade_status read_holdings(struct rfade_survey *survey, struct holdings *holdings,
                                       struct rfade_error *error)
{
    enum rfade_status status = rfade_survey_count(survey, &holdings->counts, error);
    if (status == RFADE_OK)
        status =
            rfade_survey_streams(survey, &holdings->streams, &holdings->stream_count, error);
    if (status == RFADE_OK)
        status =
            rfade_survey_logger_files(survey, &holdings->files, &holdings->file_count, error);
    if (status == RFADE_OK)
        status = rfade_survey_found(survey, &holdings->found, &holdings->found_count, error);
    return status;
}

static bool is_fitted(const struct rfade_survey_counts *counts)
{
    return counts->fitted_generation == counts->generation;
}

static const struct rfade_column columns[] = {
    {"vehicle", RFADE_COLUMN_TEXT, 0, false, false},
    {"channel", RFADE_COLUMN_TEXT, 0, false, false},
    {"campaign", RFADE_COLUMN_TEXT, 0, false, false},
    {"readings", RFADE_COLUMN_INTEGER, 0, false, false},
    {"start", RFADE_COLUMN_TEXT, 0, false, false},
    {"end", RFADE_COLUMN_TEXT, 0, false, false},
};
enum { COLUMNS = sizeof columns / sizeof columns[0] };

static enum rfade_status write_streams(const struct rfade_run *run,
                                       const struct holdings *holdings,
                                       struct rfade_error *error)
{
    struct rfade_rows *rows = NULL;
    enum rfade_status status = rfade_rows_begin(run->common->format, run->output, NULL, columns,
                                                COLUMNS, &rows, error);
    for (size_t i = 0; status == RFADE_OK && i < holdings->stream_count; i++) {
        const struct rfade_stream *stream = &holdings->streams[i];
        char start[RFADE_UTC_SIZE], end[RFADE_UTC_SIZE];
        rfade_utc_text(stream->start_us, start);
        rfade_utc_text(stream->end_us, end);
        const struct rfade_value values[COLUMNS] = {
            rfade_value_text(stream->vehicle),
            rfade_value_text(stream->channel),
            rfade_value_text(stream->campaign),
            rfade_value_integer(stream->reading_count),
            rfade_value_text(start),
            rfade_value_text(end),
        };
        status = rfade_rows_row(rows, values, error);
    }
    if (status == RFADE_OK)
        status = rfade_rows_end(rows, error);
    rfade_rows_destroy(rows);
    return status;
}

/* What a person reads above the table of streams. */
static void write_summary(FILE *stream, const struct rfade_survey_counts *counts)
{
    (void)fprintf(stream,
                  "logger files   %" PRId64 " (%" PRId64 " lines refused)\n"
                  "readings       %" PRId64 " in %" PRId64 " extents\n"
                  "positions      %" PRId64 "\n"
                  "vehicles       %" PRId64 "\n"
                  "channels       %" PRId64 "\n"
                  "campaigns      %" PRId64 "\n"
                  "routes         %" PRId64 " (%" PRId64 " segments)\n",
                  counts->logger_files, counts->refused_lines, counts->readings,
                  counts->extents, counts->fixes, counts->vehicles, counts->channels,
                  counts->campaigns, counts->routes, counts->segments);
    (void)fprintf(stream, "survey file    %.1f MB\n", (double)counts->size_bytes / 1e6);
    (void)fprintf(stream, "results        %s\n\n",
                  is_fitted(counts) ? "up to date" : "not up to date: run 'routefade fit'");
}

static json_t *counts_json(const struct rfade_survey_counts *counts)
{
    return json_pack(
        "{s:I, s:I, s:I, s:I, s:I, s:I, s:I, s:I, s:I, s:I, s:I, s:b}", "logger_files",
        (json_int_t)counts->logger_files, "refused_lines", (json_int_t)counts->refused_lines,
        "readings", (json_int_t)counts->readings, "extents", (json_int_t)counts->extents,
        "fixes", (json_int_t)counts->fixes, "vehicles", (json_int_t)counts->vehicles,
        "channels", (json_int_t)counts->channels, "campaigns", (json_int_t)counts->campaigns,
        "routes", (json_int_t)counts->routes, "segments", (json_int_t)counts->segments,
        "size_bytes", (json_int_t)counts->size_bytes, "fitted", (int)is_fitted(counts));
}

static json_t *stream_json(const struct rfade_stream *stream)
{
    char start[RFADE_UTC_SIZE], end[RFADE_UTC_SIZE];
    rfade_utc_text(stream->start_us, start);
    rfade_utc_text(stream->end_us, end);
    return json_pack("{s:o, s:o, s:o, s:I, s:s, s:s}", "vehicle",
                     rfade_json_text(stream->vehicle), "channel",
                     rfade_json_text(stream->channel), "campaign",
                     rfade_json_text(stream->campaign), "readings",
                     (json_int_t)stream->reading_count, "start", start, "end", end);
}

static json_t *file_json(const struct rfade_logger_file *file)
{
    char hash[2 * sizeof file->sha256 + 1];
    for (size_t i = 0; i < sizeof file->sha256; i++)
        (void)snprintf(hash + 2 * i, 3, "%02x", file->sha256[i]);
    return json_pack("{s:o, s:s, s:I, s:I, s:I}", "file", rfade_json_text(file->name), "sha256",
                     hash, "readings", (json_int_t)file->reading_count, "fixes",
                     (json_int_t)file->fix_count, "refused", (json_int_t)file->refused_count);
}

static json_t *count_json(int64_t count)
{
    return count < 0 ? json_null() : json_integer((json_int_t)count);
}

static json_t *found_json(const struct rfade_stream_found *found)
{
    return json_pack(
        "{s:o, s:o, s:o, s:o, s:o, s:o, s:o, s:o}", "vehicle", rfade_json_text(found->vehicle),
        "channel", rfade_json_text(found->channel), "campaign",
        rfade_json_text(found->campaign), "step_db", rfade_json_number(found->step_db),
        "floor_dbm", rfade_json_number(found->floor_dbm), "ceiling_dbm",
        rfade_json_number(found->ceiling_dbm), "lost", count_json(found->lost_count), "missing",
        count_json(found->missing_count));
}

/* Appends to an array; NULL once anything has failed. */
static json_t *append(json_t *array, json_t *element)
{
    if (array && json_array_append_new(array, element) == 0)
        return array;
    if (!array)
        json_decref(element);
    json_decref(array);
    return NULL;
}

static enum rfade_status write_json(const struct rfade_run *run,
                                    const struct holdings *holdings, struct rfade_error *error)
{
    json_t *streams = json_array(), *files = json_array(), *found = json_array();
    for (size_t i = 0; i < holdings->stream_count; i++)
        streams = append(streams, stream_json(&holdings->streams[i]));
    for (size_t i = 0; i < holdings->found_count; i++)
        found = append(found, found_json(&holdings->found[i]));
    for (size_t i = 0; i < holdings->file_count; i++)
        files = append(files, file_json(&holdings->files[i]));
    json_t *document = rfade_json_join(
        counts_json(&holdings->counts),
        json_pack("{s:o, s:o, s:o}", "streams", streams, "files", files, "found", found));
    return rfade_json_document(run->output, NULL, document, error);
}

static enum rfade_status run_status(struct rfade_run *run, struct rfade_error *error)
{
    struct rfade_survey *survey = NULL;
    struct holdings holdings = {.streams = NULL};
    enum rfade_status status =
        rfade_survey_open(run->common->survey, RFADE_SURVEY_READ, &survey, error);
    if (status == RFADE_OK)
        status = read_holdings(survey, &holdings, error);
    if (status == RFADE_OK && run->common->format == &rfade_rows_json) {
        status = write_json(run, &holdings, error);
    } else if (status == RFADE_OK) {
        if (run->common->format == &rfade_rows_table)
            write_summary(run->output, &holdings.counts);
        status = write_streams(run, &holdings, error);
        if (status == RFADE_OK && run->common->format == &rfade_rows_table)
            rfade_write_found(run->output, holdings.found, holdings.found_count);
    }
    free(holdings.streams);
    free(holdings.files);
    free(holdings.found);
    rfade_survey_close(survey);
    return status;
}

const struct rfade_command rfade_command_status = {
    .name = "status",
    .summary = "say what the survey holds",
    .run = run_status,
};
