/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "survey/withdraw.h"

#include <stdio.h>
#include <string.h>

enum { LEAST_SHA256_DIGITS = 8, SHA256_DIGITS = 64 };

enum rfade_status rfade_logger_file_by_sha256(struct rfade_survey *survey,
                                              const unsigned char sha256[32],
                                              int64_t *logger_file_id,
                                              struct rfade_error *error)
{
    bool found = false;
    enum rfade_status status =
        rfade_survey_integer(survey, logger_file_id, &found, error,
                             "SELECT logger_file_id FROM logger_file WHERE sha256 = ?1", "b",
                             (const void *)sha256, (size_t)32);
    if (status == RFADE_OK && !found)
        return rfade_error_set(error, RFADE_INPUT, "see `routefade status` for its files",
                               "the survey does not hold these bytes");
    return status;
}

static bool is_sha256_beginning(const char *text)
{
    size_t length = strlen(text);
    return length >= LEAST_SHA256_DIGITS && length <= SHA256_DIGITS &&
           strspn(text, "0123456789abcdefABCDEF") == length;
}

enum rfade_status rfade_logger_file_by_name(struct rfade_survey *survey, const char *name,
                                            int64_t *logger_file_id, struct rfade_error *error)
{
    int64_t count = 0;
    bool found = false;
    const char *digits = is_sha256_beginning(name) ? name : NULL;
    static const char *const counted = "SELECT count(*) FROM logger_file WHERE name = ?1 "
                                       "OR substr(hex(sha256), 1, length(?2)) = upper(?2)";
    static const char *const first = "SELECT logger_file_id FROM logger_file WHERE name = ?1 "
                                     "OR substr(hex(sha256), 1, length(?2)) = upper(?2)";
    enum rfade_status status =
        rfade_survey_integer(survey, &count, &found, error, counted, "tt", name, digits);
    if (status != RFADE_OK)
        return status;
    if (count == 0)
        return rfade_error_set(error, RFADE_INPUT, "see `routefade status` for its files",
                               "the survey holds no logger file '%s'", name);
    if (count > 1)
        return rfade_error_set(
            error, RFADE_INPUT, "give the first digits of its SHA-256 (`routefade status`)",
            "the survey holds %lld logger files '%s'", (long long)count, name);
    return rfade_survey_integer(survey, logger_file_id, &found, error, first, "tt", name,
                                digits);
}

/* Where the file's readings and positions lie in time, by vehicle. */
static enum rfade_status find_reach(struct rfade_survey *survey, int64_t logger_file_id,
                                    struct rfade_error *error)
{
    enum rfade_status status =
        rfade_survey_execute(survey,
                             "DROP TABLE IF EXISTS temp.reach; CREATE TEMP TABLE reach "
                             "(vehicle_id INTEGER, channel_id INTEGER, campaign_id INTEGER, "
                             "start_us INTEGER, end_us INTEGER)",
                             error);
    if (status == RFADE_OK)
        status = rfade_survey_run(
            survey, error,
            "INSERT INTO temp.reach SELECT vehicle_id, channel_id, campaign_id, "
            "min(start_us), max(end_us) FROM extent WHERE logger_file_id = ?1 GROUP BY 1, 2, 3",
            "i", logger_file_id);
    if (status == RFADE_OK) /* positions serve every channel of their vehicle */
        status = rfade_survey_run(
            survey, error,
            "INSERT INTO temp.reach SELECT vehicle_id, NULL, NULL, min(time_us), max(time_us) "
            "FROM fix WHERE logger_file_id = ?1 GROUP BY vehicle_id",
            "i", logger_file_id);
    return status;
}

static enum rfade_status drop_results(struct rfade_survey *survey, int64_t *traces,
                                      struct rfade_error *error)
{
    enum rfade_status status = rfade_survey_execute(
        survey,
        "DROP TABLE IF EXISTS temp.gone; CREATE TEMP TABLE gone AS SELECT DISTINCT trace_id "
        "FROM trace JOIN temp.reach AS reach ON reach.vehicle_id = trace.vehicle_id "
        "AND trace.channel_id = coalesce(reach.channel_id, trace.channel_id) "
        "AND trace.campaign_id = coalesce(reach.campaign_id, trace.campaign_id) "
        "AND trace.start_us <= reach.end_us AND trace.end_us >= reach.start_us",
        error);
    bool found = false;
    if (status == RFADE_OK)
        status = rfade_survey_integer(survey, traces, &found, error,
                                      "SELECT count(*) FROM temp.gone", "");
    if (status == RFADE_OK)
        status = rfade_survey_execute(
            survey,
            "DELETE FROM fading WHERE EXISTS (SELECT 1 FROM traversal JOIN trace "
            "USING (trace_id) JOIN temp.gone USING (trace_id) "
            "WHERE traversal.segment_id = fading.segment_id "
            "AND trace.channel_id = fading.channel_id "
            "AND trace.campaign_id = fading.campaign_id); "
            "DELETE FROM trace WHERE trace_id IN (SELECT trace_id FROM temp.gone);",
            error);
    return status;
}

/* Names that only the file brought in: nobody described them, and nothing else has them. */
static enum rfade_status drop_names(struct rfade_survey *survey, struct rfade_error *error)
{
    return rfade_survey_execute(
        survey,
        "DELETE FROM campaign WHERE campaign_id IN (SELECT campaign_id FROM temp.reach) "
        "AND campaign_id NOT IN (SELECT campaign_id FROM extent);"
        "DELETE FROM channel WHERE channel_id IN (SELECT channel_id FROM temp.reach) "
        "AND channel_id NOT IN (SELECT channel_id FROM extent) "
        "AND channel_id NOT IN (SELECT channel_id FROM noise) "
        "AND coalesce(carrier_hz, bandwidth_hz, symbol_rate_hz, noise_figure_db, "
        "noise_floor_dbm, step_db, floor_dbm, ceiling_dbm) IS NULL;"
        "DELETE FROM vehicle WHERE vehicle_id IN (SELECT vehicle_id FROM temp.reach) "
        "AND vehicle_id NOT IN (SELECT vehicle_id FROM extent) "
        "AND vehicle_id NOT IN (SELECT vehicle_id FROM fix) "
        "AND vehicle_id NOT IN (SELECT vehicle_id FROM calibration);",
        error);
}

static void read_counts(sqlite3_stmt *statement, struct rfade_withdrawn *withdrawn)
{
    const unsigned char *name = sqlite3_column_text(statement, 0);
    (void)snprintf(withdrawn->name, sizeof withdrawn->name, "%s",
                   name ? (const char *)name : "");
    withdrawn->readings = sqlite3_column_int64(statement, 1);
    withdrawn->fixes = sqlite3_column_int64(statement, 2);
    withdrawn->refused_lines = sqlite3_column_int64(statement, 3);
}

static enum rfade_status count_file(struct rfade_survey *survey, int64_t logger_file_id,
                                    struct rfade_withdrawn *withdrawn,
                                    struct rfade_error *error)
{
    sqlite3_stmt *statement = NULL;
    bool row = false;
    enum rfade_status status =
        rfade_survey_prepare(survey, &statement, error,
                             "SELECT name, reading_count, fix_count, refused_count "
                             "FROM logger_file WHERE logger_file_id = ?1",
                             "i", logger_file_id);
    if (status == RFADE_OK)
        status = rfade_survey_step(survey, statement, &row, error);
    if (status == RFADE_OK && row)
        read_counts(statement, withdrawn);
    sqlite3_finalize(statement);
    return status;
}

static enum rfade_status withdraw_inside(struct rfade_survey *survey, int64_t logger_file_id,
                                         struct rfade_withdrawn *withdrawn,
                                         struct rfade_error *error)
{
    enum rfade_status status = count_file(survey, logger_file_id, withdrawn, error);
    if (status == RFADE_OK)
        status = find_reach(survey, logger_file_id, error);
    if (status == RFADE_OK)
        status = drop_results(survey, &withdrawn->traces, error);
    if (status == RFADE_OK)
        status =
            rfade_survey_run(survey, error, "DELETE FROM logger_file WHERE logger_file_id = ?1",
                             "i", logger_file_id);
    if (status == RFADE_OK)
        status = drop_names(survey, error);
    if (status == RFADE_OK)
        status = rfade_survey_changed(survey, error);
    return status;
}

enum rfade_status rfade_survey_withdraw(struct rfade_survey *survey, int64_t logger_file_id,
                                        struct rfade_withdrawn *withdrawn,
                                        struct rfade_error *error)
{
    *withdrawn = (struct rfade_withdrawn){.name = ""};
    enum rfade_status status = rfade_survey_begin(survey, error);
    if (status == RFADE_OK)
        status = withdraw_inside(survey, logger_file_id, withdrawn, error);
    if (status == RFADE_OK)
        status = rfade_survey_commit(survey, error);
    rfade_survey_rollback(survey);
    return status;
}
