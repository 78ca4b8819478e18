/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "survey/list.h"

#include <stdio.h>
#include <string.h>

#include "survey/rows.h"

static void read_logger_file(sqlite3_stmt *statement, void *row)
{
    struct rfade_logger_file *file = row;
    *file = (struct rfade_logger_file){.logger_file_id = sqlite3_column_int64(statement, 0)};
    const void *sha256 = sqlite3_column_blob(statement, 1);
    if (sha256 && sqlite3_column_bytes(statement, 1) == (int)sizeof file->sha256)
        memcpy(file->sha256, sha256, sizeof file->sha256);
    const unsigned char *name = sqlite3_column_text(statement, 2);
    (void)snprintf(file->name, sizeof file->name, "%s", name ? (const char *)name : "");
    file->size_bytes = sqlite3_column_int64(statement, 3);
    file->line_count = sqlite3_column_int64(statement, 4);
    file->reading_count = sqlite3_column_int64(statement, 5);
    file->fix_count = sqlite3_column_int64(statement, 6);
    file->differing_fix_count = sqlite3_column_int64(statement, 7);
    file->refused_count = sqlite3_column_int64(statement, 8);
}

enum rfade_status rfade_survey_logger_files(struct rfade_survey *survey,
                                            struct rfade_logger_file **files, size_t *count,
                                            struct rfade_error *error)
{
    void *rows = NULL;
    enum rfade_status status = rfade_rows_query(
        survey, sizeof **files, read_logger_file, &rows, count, error,
        "SELECT logger_file_id, sha256, name, size_bytes, line_count, reading_count, fix_count,"
        " differing_fix_count, refused_count FROM logger_file ORDER BY name, sha256",
        "");
    *files = rows;
    return status;
}

static void read_stream(sqlite3_stmt *statement, void *row)
{
    struct rfade_stream *stream = row;
    stream->vehicle_id = sqlite3_column_int64(statement, 0);
    stream->channel_id = sqlite3_column_int64(statement, 1);
    stream->campaign_id = sqlite3_column_int64(statement, 2);
    rfade_name_copy(stream->vehicle, statement, 3);
    rfade_name_copy(stream->channel, statement, 4);
    rfade_name_copy(stream->campaign, statement, 5);
    stream->extent_count = sqlite3_column_int64(statement, 6);
    stream->reading_count = sqlite3_column_int64(statement, 7);
    stream->start_us = sqlite3_column_int64(statement, 8);
    stream->end_us = sqlite3_column_int64(statement, 9);
}

enum rfade_status rfade_survey_streams(struct rfade_survey *survey,
                                       struct rfade_stream **streams, size_t *count,
                                       struct rfade_error *error)
{
    void *rows = NULL;
    enum rfade_status status = rfade_rows_query(
        survey, sizeof **streams, read_stream, &rows, count, error,
        "SELECT vehicle_id, channel_id, campaign_id, vehicle.name, channel.name, "
        "campaign.name, "
        "count(*), sum(reading_count), min(start_us), max(end_us) FROM extent "
        "JOIN vehicle USING (vehicle_id) JOIN channel USING (channel_id) "
        "JOIN campaign USING (campaign_id) GROUP BY vehicle_id, channel_id, campaign_id "
        "ORDER BY vehicle.name, channel.name, campaign.name",
        "");
    *streams = rows;
    return status;
}

static void read_found(sqlite3_stmt *statement, void *row)
{
    struct rfade_stream_found *found = row;
    rfade_name_copy(found->vehicle, statement, 0);
    rfade_name_copy(found->channel, statement, 1);
    rfade_name_copy(found->campaign, statement, 2);
    found->reading_count = sqlite3_column_int64(statement, 3);
    found->step_db = rfade_column_real(statement, 4);
    found->floor_dbm = rfade_column_real(statement, 5);
    found->ceiling_dbm = rfade_column_real(statement, 6);
    found->lost_count = sqlite3_column_int64(statement, 7);
    found->missing_count = sqlite3_column_int64(statement, 8);
}

enum rfade_status rfade_survey_found(struct rfade_survey *survey,
                                     struct rfade_stream_found **found, size_t *count,
                                     struct rfade_error *error)
{
    void *rows = NULL;
    /* A trace stands once for each route, with the same readings. */
    enum rfade_status status = rfade_rows_query(
        survey, sizeof **found, read_found, &rows, count, error,
        "SELECT vehicle.name, channel.name, campaign.name, sum(reading_count), "
        "max(CASE WHEN step_found THEN made.step_db END), "
        "max(CASE floor_source WHEN 'pile-up' THEN made.floor_dbm END), "
        "min(CASE ceiling_source WHEN 'pile-up' THEN made.ceiling_dbm END), "
        "ifnull(sum(lost_count), -1), ifnull(sum(missing_count), -1) FROM "
        "(SELECT * FROM trace GROUP BY vehicle_id, channel_id, campaign_id, start_us) AS made "
        "JOIN vehicle USING (vehicle_id) JOIN channel USING (channel_id) "
        "JOIN campaign USING (campaign_id) GROUP BY vehicle_id, channel_id, campaign_id "
        "ORDER BY vehicle.name, channel.name, campaign.name",
        "");
    *found = rows;
    return status;
}

enum rfade_status rfade_survey_count(struct rfade_survey *survey,
                                     struct rfade_survey_counts *counts,
                                     struct rfade_error *error)
{
    *counts = (struct rfade_survey_counts){0};
    sqlite3_stmt *statement = NULL;
    bool row = false;
    /* Readings are counted by their extents: the table itself can be gigabytes. */
    enum rfade_status status = rfade_survey_prepare(
        survey, &statement, error,
        "SELECT (SELECT count(*) FROM logger_file), (SELECT count(*) FROM campaign), "
        "(SELECT count(*) FROM vehicle), (SELECT count(*) FROM channel), "
        "(SELECT count(*) FROM route), (SELECT count(*) FROM segment), "
        "(SELECT count(*) FROM extent), (SELECT sum(reading_count) FROM extent), "
        "(SELECT sum(fix_count) FROM logger_file), "
        "(SELECT sum(refused_count) FROM logger_file), "
        "(SELECT current FROM generation), (SELECT generation FROM analysed), "
        "(SELECT page_count * page_size FROM pragma_page_count, pragma_page_size)",
        "");
    if (status == RFADE_OK)
        status = rfade_survey_step(survey, statement, &row, error);
    if (status == RFADE_OK && row) {
        int64_t *const values[] = {
            &counts->logger_files,  &counts->campaigns,  &counts->vehicles,
            &counts->channels,      &counts->routes,     &counts->segments,
            &counts->extents,       &counts->readings,   &counts->fixes,
            &counts->refused_lines, &counts->generation, &counts->fitted_generation,
            &counts->size_bytes,
        };
        for (size_t i = 0; i < sizeof values / sizeof values[0]; i++)
            *values[i] = sqlite3_column_int64(statement, (int)i);
    }
    sqlite3_finalize(statement);
    return status;
}
