/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "survey/noise.h"

#include "survey/rows.h"

static enum rfade_status check(const struct rfade_noise *stretch, struct rfade_error *error)
{
    if (!(stretch->from_m >= 0 && stretch->to_m > stretch->from_m))
        return rfade_error_set(error, RFADE_INPUT,
                               "give from_m and a larger to_m, in metres of chainage",
                               "%g to %g m is no stretch", stretch->from_m, stretch->to_m);
    if (!(stretch->noise_dbm >= -250 && stretch->noise_dbm <= 100))
        return rfade_error_set(error, RFADE_INPUT, "give it in dBm, from -250 to 100",
                               "a noise of %g dBm is impossible", stretch->noise_dbm);
    return RFADE_OK;
}

struct ids {
    int64_t route_id;
    int64_t channel_id;
};

static enum rfade_status find_ids(struct rfade_survey *survey,
                                  const struct rfade_noise *stretch, struct ids *ids,
                                  struct rfade_error *error)
{
    enum rfade_status status =
        rfade_name_require(survey, RFADE_NAMED_ROUTE, stretch->route, &ids->route_id, error);
    if (status == RFADE_OK)
        status = rfade_name_require(survey, RFADE_NAMED_CHANNEL, stretch->channel,
                                    &ids->channel_id, error);
    return status;
}

static enum rfade_status forget(struct rfade_survey *survey, const struct rfade_noise *stretch,
                                struct rfade_error *error)
{
    struct ids ids = {0, 0};
    enum rfade_status status = check(stretch, error);
    if (status == RFADE_OK)
        status = find_ids(survey, stretch, &ids, error);
    if (status == RFADE_OK)
        status = rfade_survey_run(survey, error,
                                  "DELETE FROM noise WHERE route_id = ?1 AND channel_id = ?2",
                                  "ii", ids.route_id, ids.channel_id);
    return status;
}

static enum rfade_status add(struct rfade_survey *survey, const struct rfade_noise *stretch,
                             struct rfade_error *error)
{
    struct ids ids = {0, 0};
    int64_t ignored = 0;
    bool overlaps = false;
    enum rfade_status status = find_ids(survey, stretch, &ids, error);
    if (status == RFADE_OK)
        status = rfade_survey_integer(survey, &ignored, &overlaps, error,
                                      "SELECT 1 FROM noise WHERE route_id = ?1 AND "
                                      "channel_id = ?2 AND from_m < ?4 AND to_m > ?3",
                                      "iidd", ids.route_id, ids.channel_id, stretch->from_m,
                                      stretch->to_m);
    if (status == RFADE_OK && overlaps)
        return rfade_error_set(error, RFADE_INPUT, "list each place once",
                               "%g to %g m overlaps another stretch of the list",
                               stretch->from_m, stretch->to_m);
    if (status == RFADE_OK)
        status = rfade_survey_run(
            survey, error, "INSERT INTO noise VALUES (?1, ?2, ?3, ?4, ?5)", "iiddd",
            ids.route_id, ids.channel_id, stretch->from_m, stretch->to_m, stretch->noise_dbm);
    return status;
}

enum rfade_status rfade_survey_noise_list(struct rfade_survey *survey,
                                          const struct rfade_noise *stretches, size_t count,
                                          size_t *refused, struct rfade_error *error)
{
    *refused = count;
    enum rfade_status status = rfade_survey_begin(survey, error);
    for (size_t i = 0; i < count && status == RFADE_OK; i++) {
        status = forget(survey, &stretches[i], error);
        *refused = status == RFADE_OK ? count : i;
    }
    for (size_t i = 0; i < count && status == RFADE_OK; i++) {
        status = add(survey, &stretches[i], error);
        *refused = status == RFADE_OK ? count : i;
    }
    if (status == RFADE_OK)
        status = rfade_survey_commit(survey, error);
    rfade_survey_rollback(survey);
    return status;
}

static void read_noise(sqlite3_stmt *statement, void *row)
{
    struct rfade_noise *noise = row;
    rfade_name_copy(noise->route, statement, 0);
    rfade_name_copy(noise->channel, statement, 1);
    noise->from_m = sqlite3_column_double(statement, 2);
    noise->to_m = sqlite3_column_double(statement, 3);
    noise->noise_dbm = sqlite3_column_double(statement, 4);
}

enum rfade_status rfade_survey_noise(struct rfade_survey *survey,
                                     struct rfade_noise **stretches, size_t *count,
                                     struct rfade_error *error)
{
    void *rows = NULL;
    enum rfade_status status =
        rfade_rows_query(survey, sizeof **stretches, read_noise, &rows, count, error,
                         "SELECT route.name, channel.name, from_m, to_m, noise_dbm "
                         "FROM noise JOIN route USING (route_id) "
                         "JOIN channel USING (channel_id) ORDER BY 1, 2, 3",
                         "");
    *stretches = rows;
    return status;
}
