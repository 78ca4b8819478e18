/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "survey/dump.h"

#include <string.h>

/* Columns whose names end in _id are not written. */
static const struct {
    const char *table;
    const char *sql;
} tables[] = {
    {"campaign", "SELECT * FROM campaign ORDER BY name"},
    {"vehicle", "SELECT * FROM vehicle ORDER BY name"},
    {"calibration", "SELECT vehicle.name AS vehicle, calibration.* FROM calibration "
                    "JOIN vehicle USING (vehicle_id) ORDER BY vehicle, from_us"},
    {"channel", "SELECT * FROM channel ORDER BY name"},
    {"logger_file", "SELECT sha256, size_bytes, line_count, reading_count, fix_count, "
                    "differing_fix_count, refused_count FROM logger_file ORDER BY sha256"},
    {"refused_line", "SELECT sha256, line, reason, text FROM refused_line "
                     "JOIN logger_file USING (logger_file_id) "
                     "ORDER BY sha256, line, reason, text"},
    {"fix", "SELECT sha256, vehicle.name AS vehicle, time_us, latitude_deg, longitude_deg, "
            "speed_m_s FROM fix JOIN logger_file USING (logger_file_id) "
            "JOIN vehicle USING (vehicle_id) ORDER BY sha256, vehicle, time_us"},
    {"extent", "SELECT sha256, ordinal, vehicle.name AS vehicle, channel.name AS channel, "
               "campaign.name AS campaign, extent.reading_count, start_us, end_us FROM extent "
               "JOIN logger_file USING (logger_file_id) JOIN vehicle USING (vehicle_id) "
               "JOIN channel USING (channel_id) JOIN campaign USING (campaign_id) "
               "ORDER BY sha256, ordinal"},
    {"reading",
     "SELECT sha256, ordinal, offset_us, level_cdb, snr_cdb, lost_before FROM extent "
     "JOIN logger_file USING (logger_file_id) JOIN reading ON reading_id BETWEEN "
     "first_reading_id AND first_reading_id + extent.reading_count - 1 "
     "ORDER BY sha256, ordinal, reading_id"},
    {"route", "SELECT * FROM route ORDER BY name"},
    {"route_point", "SELECT route.name AS route, route_point.* FROM route_point "
                    "JOIN route USING (route_id) ORDER BY route, ordinal"},
    {"segment", "SELECT route.name AS route, segment.* FROM segment "
                "JOIN route USING (route_id) ORDER BY route, number"},
    {"noise", "SELECT route.name AS route, channel.name AS channel, noise.* FROM noise "
              "JOIN route USING (route_id) JOIN channel USING (channel_id) "
              "ORDER BY route, channel, from_m"},
    {"trace", "SELECT route.name AS route, vehicle.name AS vehicle, channel.name AS channel, "
              "campaign.name AS campaign, trace.* FROM trace JOIN route USING (route_id) "
              "JOIN vehicle USING (vehicle_id) JOIN channel USING (channel_id) "
              "JOIN campaign USING (campaign_id) "
              "ORDER BY route, vehicle, channel, campaign, start_us, end_us"},
    {"traversal",
     "SELECT route.name AS route, vehicle.name AS vehicle, channel.name AS channel, "
     "campaign.name AS campaign, segment.number AS segment, traversal.* FROM traversal "
     "JOIN trace USING (trace_id) JOIN segment USING (segment_id) "
     "JOIN route ON route.route_id = segment.route_id JOIN vehicle USING (vehicle_id) "
     "JOIN channel USING (channel_id) JOIN campaign USING (campaign_id) "
     "ORDER BY route, vehicle, channel, campaign, traversal.start_us, segment.number, "
     "pass_start_us"},
    {"fading",
     "SELECT route.name AS route, segment.number AS segment, channel.name AS channel, "
     "campaign.name AS campaign, fading.* FROM fading "
     "JOIN segment USING (segment_id) JOIN route USING (route_id) "
     "JOIN channel USING (channel_id) JOIN campaign USING (campaign_id) "
     "ORDER BY route, segment.number, channel, campaign"},
    {"fit", "SELECT route.name AS route, segment.number AS segment, channel.name AS channel, "
            "campaign.name AS campaign, fit.* FROM fit JOIN fading USING (fading_id) "
            "JOIN segment USING (segment_id) JOIN route USING (route_id) "
            "JOIN channel USING (channel_id) JOIN campaign USING (campaign_id) "
            "ORDER BY route, segment.number, channel, campaign, model"},
};

static void write_bytes(const unsigned char *bytes, int size, FILE *out)
{
    for (int i = 0; i < size; i++)
        (void)fprintf(out, "%02x", bytes[i]);
}

static void write_text(const unsigned char *text, int size, FILE *out)
{
    (void)fputc('"', out);
    for (int i = 0; i < size; i++)
        if (text[i] < 0x20 || text[i] > 0x7E || text[i] == '"' || text[i] == '\\')
            (void)fprintf(out, "\\x%02x", text[i]);
        else
            (void)fputc(text[i], out);
    (void)fputc('"', out);
}

static void write_value(sqlite3_stmt *statement, int column, FILE *out)
{
    switch (sqlite3_column_type(statement, column)) {
    case SQLITE_INTEGER:
        (void)fprintf(out, "%lld", sqlite3_column_int64(statement, column));
        break;
    case SQLITE_FLOAT:
        (void)fprintf(out, "%.17g", sqlite3_column_double(statement, column));
        break;
    case SQLITE_TEXT: {
        const unsigned char *text = sqlite3_column_text(statement, column);
        write_text(text, sqlite3_column_bytes(statement, column), out);
        break;
    }
    case SQLITE_BLOB: {
        const unsigned char *bytes = sqlite3_column_blob(statement, column);
        write_bytes(bytes, sqlite3_column_bytes(statement, column), out);
        break;
    }
    default:
        break; /* NULL is nothing */
    }
}

static bool is_id(const char *name)
{
    size_t length = strlen(name);
    return length > 3 && strcmp(name + length - 3, "_id") == 0;
}

static enum rfade_status dump_table(struct rfade_survey *survey, const char *table,
                                    const char *sql, FILE *out, struct rfade_error *error)
{
    sqlite3_stmt *statement = NULL;
    bool row = false;
    enum rfade_status status = rfade_survey_prepare(survey, &statement, error, sql, "");
    while (status == RFADE_OK) {
        status = rfade_survey_step(survey, statement, &row, error);
        if (status != RFADE_OK || !row)
            break;
        (void)fputs(table, out);
        for (int column = 0; column < sqlite3_column_count(statement); column++) {
            const char *name = sqlite3_column_name(statement, column);
            if (is_id(name))
                continue;
            (void)fprintf(out, "\t%s=", name);
            write_value(statement, column, out);
        }
        (void)fputc('\n', out);
    }
    sqlite3_finalize(statement);
    return status;
}

enum rfade_status rfade_survey_dump(struct rfade_survey *survey, FILE *out,
                                    struct rfade_error *error)
{
    /* One transaction: all tables as they were at one moment. */
    enum rfade_status status = rfade_survey_execute(survey, "BEGIN", error);
    for (size_t i = 0; status == RFADE_OK && i < sizeof tables / sizeof tables[0]; i++)
        status = dump_table(survey, tables[i].table, tables[i].sql, out, error);
    rfade_survey_rollback(survey);
    if (status == RFADE_OK && (fflush(out) != 0 || ferror(out)))
        status = rfade_error_set(error, RFADE_STORAGE, "make room for the output",
                                 "the dump can't be written");
    return status;
}
