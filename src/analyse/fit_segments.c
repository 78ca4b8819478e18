/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analyse/fit_segments.h"

#include <math.h>
#include <stdlib.h>

#include "analyse/pool.h"
#include "survey/rows.h"

/* One row of `fading`: which traversals belong together. */
struct group {
    int64_t segment_id;
    int64_t channel_id;
    int64_t campaign_id;
};

static void read_group(sqlite3_stmt *statement, void *row)
{
    *(struct group *)row =
        (struct group){sqlite3_column_int64(statement, 0), sqlite3_column_int64(statement, 1),
                       sqlite3_column_int64(statement, 2)};
}

static enum rfade_status list_groups(struct rfade_survey *survey, struct group **groups,
                                     size_t *count, struct rfade_error *error)
{
    void *rows = NULL;
    enum rfade_status status =
        rfade_rows_query(survey, sizeof **groups, read_group, &rows, count, error,
                         "SELECT DISTINCT segment_id, channel_id, campaign_id"
                         " FROM traversal JOIN trace USING (trace_id) ORDER BY 1, 2, 3",
                         "");
    *groups = rows;
    return status;
}

/* The traversals of a group in an order that does not depend on ids, which follow import. */
static enum rfade_status prepare_traversals(struct rfade_survey *survey,
                                            const struct group *group, sqlite3_stmt **statement,
                                            struct rfade_error *error)
{
    return rfade_survey_prepare(
        survey, statement, error,
        "SELECT trace.fingerprint, traversal.start_us, traversal.end_us,"
        " traversal.reading_count, travel_m, level_uncertainty_db, wavelength_m,"
        " fading_tally, level_tally, local_mean_tally, snr_tally, noise_tally, blocks, "
        "sampling,"
        " vehicle_id, pass_start_us"
        " FROM traversal JOIN trace USING (trace_id)"
        " WHERE segment_id = ?1 AND channel_id = ?2 AND campaign_id = ?3"
        " ORDER BY trace.fingerprint, traversal.start_us, traversal.end_us",
        "iii", group->segment_id, group->channel_id, group->campaign_id);
}

static enum rfade_status group_fingerprint(struct rfade_survey *survey,
                                           const struct rfade_analysis_settings *settings,
                                           const struct group *group,
                                           struct rfade_fingerprint *fingerprint,
                                           struct rfade_error *error)
{
    struct rfade_fingerprint_writer writer;
    rfade_fingerprint_begin(&writer);
    rfade_analysis_settings_fingerprint(settings, &writer);
    sqlite3_stmt *statement = NULL;
    enum rfade_status status = prepare_traversals(survey, group, &statement, error);
    while (status == RFADE_OK) {
        bool more = false;
        status = rfade_survey_step(survey, statement, &more, error);
        if (status != RFADE_OK || !more)
            break;
        rfade_fingerprint_bytes(&writer, sqlite3_column_blob(statement, 0),
                                (size_t)sqlite3_column_bytes(statement, 0));
        rfade_fingerprint_integer(&writer, sqlite3_column_int64(statement, 1));
        rfade_fingerprint_integer(&writer, sqlite3_column_int64(statement, 2));
    }
    sqlite3_finalize(statement);
    *fingerprint = rfade_fingerprint_end(&writer);
    return status;
}

static enum rfade_status merge_tally(sqlite3_stmt *statement, int column,
                                     struct rfade_tally *sum)
{
    struct rfade_tally *tally = NULL;
    const void *bytes = sqlite3_column_blob(statement, column);
    enum rfade_status status =
        rfade_tally_decode(bytes, (size_t)sqlite3_column_bytes(statement, column), &tally);
    if (status == RFADE_OK)
        status = rfade_tally_merge(sum, tally, 1);
    rfade_tally_destroy(tally);
    return status;
}

/* A pass may be cut into several traversals of one segment, by gaps between its traces. */
static enum rfade_status merge_pass(sqlite3_stmt *statement, struct rfade_pass_levels *levels)
{
    struct rfade_tally *local_mean = NULL;
    const void *bytes = sqlite3_column_blob(statement, 9);
    enum rfade_status status =
        rfade_tally_decode(bytes, (size_t)sqlite3_column_bytes(statement, 9), &local_mean);
    if (status == RFADE_OK)
        status = rfade_pass_levels_add(levels, sqlite3_column_int64(statement, 14),
                                       sqlite3_column_int64(statement, 15), local_mean);
    rfade_tally_destroy(local_mean);
    return status;
}

static enum rfade_status merge_traversal(sqlite3_stmt *statement, struct rfade_pool *pool)
{
    pool->readings += sqlite3_column_int64(statement, 3);
    pool->travel_m += sqlite3_column_double(statement, 4);
    pool->calibration_db = fmax(pool->calibration_db, sqlite3_column_double(statement, 5));
    pool->wavelength_m = sqlite3_column_double(statement, 6);
    struct rfade_tally *const sums_of[] = {pool->fading, pool->level, pool->local_mean,
                                           pool->snr, pool->noise};
    enum rfade_status status = RFADE_OK;
    for (int i = 0; i < (int)(sizeof sums_of / sizeof sums_of[0]) && status == RFADE_OK; i++)
        status = merge_tally(statement, 7 + i, sums_of[i]);
    if (status == RFADE_OK)
        status = merge_pass(statement, &pool->pass_levels);
    struct rfade_blocks blocks = {0};
    const void *bytes = sqlite3_column_blob(statement, 12);
    if (status == RFADE_OK)
        status =
            rfade_blocks_decode(bytes, (size_t)sqlite3_column_bytes(statement, 12), &blocks);
    if (status == RFADE_OK)
        status = rfade_blocks_merge(&pool->blocks, &blocks, 1);
    struct rfade_sampling_sums sums = {0};
    bytes = sqlite3_column_blob(statement, 13);
    if (status == RFADE_OK)
        status =
            rfade_sampling_decode(bytes, (size_t)sqlite3_column_bytes(statement, 13), &sums);
    if (status == RFADE_OK)
        status = rfade_sampling_merge(&pool->sampling, &sums, 1);
    return status;
}

static enum rfade_status fill_pool(struct rfade_survey *survey, const struct group *group,
                                   struct rfade_pool *pool, struct rfade_error *error)
{
    sqlite3_stmt *statement = NULL;
    enum rfade_status status = prepare_traversals(survey, group, &statement, error);
    while (status == RFADE_OK) {
        bool more = false;
        status = rfade_survey_step(survey, statement, &more, error);
        if (status != RFADE_OK || !more)
            break;
        status = merge_traversal(statement, pool);
        if (status != RFADE_OK)
            (void)rfade_error_set(error, status, "run `routefade fit --all`",
                                  "a stored traversal can't be added up: %s",
                                  rfade_status_text(status));
    }
    sqlite3_finalize(statement);
    return status;
}

static enum rfade_status store_fits(struct rfade_survey *survey, const struct group *group,
                                    const struct rfade_pool_result *result,
                                    struct rfade_error *error)
{
    enum rfade_status status = RFADE_OK;
    size_t count = result->fitted ? result->estimate.fit_count : 0;
    for (size_t i = 0; i < count && status == RFADE_OK; i++) {
        const struct rfade_fit *fit = &result->estimate.fits[i];
        status = rfade_survey_run(
            survey, error,
            "INSERT INTO fit SELECT fading_id, ?4, ?5, ?6, ?7, ?8, ?9, ?10, ?11, ?12, ?13"
            " FROM fading WHERE segment_id = ?1 AND channel_id = ?2 AND campaign_id = ?3",
            "iiitidddddddd", group->segment_id, group->channel_id, group->campaign_id,
            rfade_model(fit->model)->name, (int64_t)(i == result->estimate.preferred),
            fit->mean_power_db, fit->parameter, fit->parameter_low, fit->parameter_high,
            fit->log_likelihood, fit->aic, fit->weight, fit->goodness_p);
    }
    return status;
}

static enum rfade_status store_result(struct rfade_survey *survey, const struct group *group,
                                      struct rfade_pool *pool,
                                      const struct rfade_fingerprint *fingerprint,
                                      const struct rfade_pool_result *result,
                                      struct rfade_error *error)
{
    struct rfade_tally *const tallies[] = {pool->level, pool->local_mean, pool->snr};
    enum { STORED = sizeof tallies / sizeof tallies[0] };
    uint8_t *bytes[STORED] = {NULL};
    size_t sizes[STORED] = {0};
    enum rfade_status status = RFADE_OK;
    for (size_t i = 0; i < STORED && status == RFADE_OK; i++)
        status = rfade_tally_encode(tallies[i], &bytes[i], &sizes[i]);
    if (status != RFADE_OK) {
        status = rfade_error_no_memory(error);
        goto out;
    }
    status = rfade_survey_run(
        survey, error,
        "INSERT INTO fading (segment_id, channel_id, campaign_id, fingerprint, sampling,"
        " pass_count, reading_count, travel_m, wavelength_m, effective_count,"
        " mean_power_dbm, local_mean_dbm, local_sigma_db, local_sigma_low_db,"
        " local_sigma_high_db, window_noise_db, level_uncertainty_db, calibration_db, "
        "pass_deviation_db, "
        "noise_dbm,"
        " level_tally, local_mean_tally, snr_tally) VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7, ?8,"
        " ?9, ?10, ?11, ?12, ?13, ?14, ?15, ?16, ?17, ?18, ?19, ?20, ?21, ?22, ?23)",
        "iiibtiidddddddddddddbbb", group->segment_id, group->channel_id, group->campaign_id,
        (const void *)fingerprint->bytes, sizeof fingerprint->bytes,
        rfade_sampling_name(result->sampling), pool->passes, pool->readings, pool->travel_m,
        pool->wavelength_m, result->effective_count, result->mean_power_dbm,
        result->local_mean_dbm, result->local_sigma_db, result->local_sigma_low_db,
        result->local_sigma_high_db, result->window_noise_db, result->level_uncertainty_db,
        pool->calibration_db, result->pass_deviation_db, result->noise_dbm,
        (const void *)bytes[0], sizes[0], (const void *)bytes[1], sizes[1],
        (const void *)bytes[2], sizes[2]);
    if (status == RFADE_OK)
        status = store_fits(survey, group, result, error);
out:
    for (size_t i = 0; i < STORED; i++)
        free(bytes[i]);
    return status;
}

static enum rfade_status fit_group(struct rfade_survey *survey,
                                   const struct rfade_analysis_settings *settings,
                                   const struct group *group,
                                   const struct rfade_fingerprint *fingerprint,
                                   struct rfade_error *error)
{
    struct rfade_pool pool;
    struct rfade_pool_result result;
    if (rfade_pool_create(&pool) != RFADE_OK)
        return rfade_error_no_memory(error);
    enum rfade_status status = fill_pool(survey, group, &pool, error);
    pool.passes = (int64_t)pool.pass_levels.count;
    if (status == RFADE_OK)
        status = rfade_pool_evaluate(&pool, settings, &result, error);
    if (status == RFADE_OK)
        status =
            rfade_survey_run(survey, error,
                             "DELETE FROM fading WHERE segment_id = ?1"
                             " AND channel_id = ?2 AND campaign_id = ?3",
                             "iii", group->segment_id, group->channel_id, group->campaign_id);
    if (status == RFADE_OK)
        status = store_result(survey, group, &pool, fingerprint, &result, error);
    rfade_pool_clear(&pool);
    return status;
}

/* Whether the stored row of a group was made from the same. */
static enum rfade_status stands(struct rfade_survey *survey, const struct group *group,
                                const struct rfade_fingerprint *fingerprint, bool *same,
                                struct rfade_error *error)
{
    int64_t ignored = 0;
    return rfade_survey_integer(survey, &ignored, same, error,
                                "SELECT 1 FROM fading WHERE segment_id = ?1"
                                " AND channel_id = ?2 AND campaign_id = ?3"
                                " AND fingerprint = ?4",
                                "iiib", group->segment_id, group->channel_id,
                                group->campaign_id, (const void *)fingerprint->bytes,
                                sizeof fingerprint->bytes);
}

static enum rfade_status drop_orphans(struct rfade_survey *survey, struct rfade_error *error)
{
    return rfade_survey_execute(
        survey,
        "DELETE FROM fading WHERE NOT EXISTS (SELECT 1 FROM traversal JOIN trace"
        " USING (trace_id) WHERE traversal.segment_id = fading.segment_id"
        " AND trace.channel_id = fading.channel_id"
        " AND trace.campaign_id = fading.campaign_id)",
        error);
}

enum rfade_status rfade_fit_segments(struct rfade_survey *survey,
                                     const struct rfade_analysis_settings *settings,
                                     int64_t *fitted, int64_t *kept, struct rfade_error *error)
{
    *fitted = *kept = 0;
    struct group *groups = NULL;
    size_t count = 0;
    enum rfade_status status = list_groups(survey, &groups, &count, error);
    for (size_t i = 0; i < count && status == RFADE_OK; i++) {
        struct rfade_fingerprint fingerprint;
        bool same = false;
        status = group_fingerprint(survey, settings, &groups[i], &fingerprint, error);
        if (status == RFADE_OK)
            status = stands(survey, &groups[i], &fingerprint, &same, error);
        if (status != RFADE_OK)
            break;
        if (same)
            ++*kept;
        else
            status = fit_group(survey, settings, &groups[i], &fingerprint, error);
        *fitted += !same;
    }
    free(groups);
    return status == RFADE_OK ? drop_orphans(survey, error) : status;
}
