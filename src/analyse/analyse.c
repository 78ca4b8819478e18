/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analyse/analyse.h"

#include <math.h>
#include <stdlib.h>

#include "analyse/fit_segments.h"
#include "analyse/trace.h"
#include "survey/list.h"

/* What every stream needs, read once. */
struct material {
    struct rfade_channel *channels;
    size_t channel_count;
    struct rfade_calibration *calibrations; /* by vehicle and time */
    size_t calibration_count;
    struct rfade_outing *outings;
    size_t outing_count;
    struct rfade_route_row *routes;
    size_t route_count;
};

static void clear_material(struct material *material)
{
    free(material->channels);
    free(material->calibrations);
    free(material->outings);
    free(material->routes);
}

static enum rfade_status read_material(struct rfade_survey *survey,
                                       const struct rfade_analysis_settings *settings,
                                       struct material *material, struct rfade_error *error)
{
    *material = (struct material){.channels = NULL};
    enum rfade_status status =
        rfade_survey_channels(survey, &material->channels, &material->channel_count, error);
    if (status == RFADE_OK)
        status = rfade_survey_calibrations(survey, &material->calibrations,
                                           &material->calibration_count, error);
    if (status == RFADE_OK)
        status = rfade_survey_routes(survey, &material->routes, &material->route_count, error);
    if (status == RFADE_OK)
        status = rfade_outings(survey, settings->gap_s, &material->outings,
                               &material->outing_count, error);
    if (status != RFADE_OK)
        return status;
    if (material->outing_count == 0)
        return rfade_error_set(error, RFADE_NO_DATA, "bring some in with `routefade import`",
                               "the survey holds no readings");
    if (material->route_count == 0)
        return rfade_error_set(error, RFADE_NO_DATA,
                               "add one with `routefade route NAME FILE` or `routefade route "
                               "NAME --from-vehicle V`",
                               "the survey holds no route");
    return RFADE_OK;
}

static const struct rfade_channel *channel_of(const struct material *material,
                                              int64_t channel_id)
{
    for (size_t i = 0; i < material->channel_count; i++)
        if (material->channels[i].channel_id == channel_id)
            return &material->channels[i];
    return NULL;
}

/* All that has readings needs a carrier: without it there is no wavelength to measure by. */
static enum rfade_status check_carriers(struct rfade_survey *survey,
                                        const struct material *material,
                                        struct rfade_error *error)
{
    for (size_t i = 0; i < material->channel_count; i++) {
        const struct rfade_channel *channel = &material->channels[i];
        int64_t ignored = 0;
        bool used = false;
        if (!isnan(channel->carrier_hz))
            continue;
        enum rfade_status status = rfade_survey_integer(
            survey, &ignored, &used, error,
            "SELECT 1 FROM extent WHERE channel_id = ?1 LIMIT 1", "i", channel->channel_id);
        if (status != RFADE_OK)
            return status;
        if (used)
            return rfade_error_set(error, RFADE_INPUT,
                                   "give it with `routefade channel NAME --carrier-hz F`",
                                   "the carrier of channel '%s' is not known", channel->name);
    }
    return RFADE_OK;
}

/*
 * Whether the stream's traces stand as they were made; then they are marked as still wanted.
 * A stream's traces carry one fingerprint.
 */
static enum rfade_status traces_stand(const struct rfade_trace_work *work,
                                      const struct rfade_fingerprint *fingerprint, bool *stand,
                                      struct rfade_error *error)
{
    enum rfade_status status = rfade_survey_run(
        work->survey, error,
        "INSERT INTO temp.wanted SELECT trace_id FROM trace WHERE route_id = ?1"
        " AND vehicle_id = ?2 AND channel_id = ?3 AND campaign_id = ?4 AND fingerprint = ?5",
        "iiiib", work->route->row.route_id, work->outing->vehicle_id, work->stream->channel_id,
        work->stream->campaign_id, (const void *)fingerprint->bytes, sizeof fingerprint->bytes);
    *stand = status == RFADE_OK && sqlite3_changes(rfade_survey_database(work->survey)) > 0;
    return status;
}

/* A drive is made at most once an outing and route, and only if a stream needs it. */
struct lazy_drive {
    bool made;
    struct rfade_drive drive;
};

static enum rfade_status work_stream(const struct rfade_trace_work *work,
                                     struct lazy_drive *lazy,
                                     struct rfade_analysis_summary *summary,
                                     struct rfade_error *error)
{
    struct rfade_fingerprint fingerprint;
    bool stand = false;
    enum rfade_status status = rfade_trace_fingerprint(work, &fingerprint, error);
    if (status == RFADE_OK)
        status = traces_stand(work, &fingerprint, &stand, error);
    if (status != RFADE_OK || stand) {
        summary->streams_kept += stand;
        return status;
    }
    if (!lazy->made)
        status = rfade_drive_make(work->survey, work->settings, work->route, work->outing,
                                  &lazy->drive, error);
    lazy->made = status == RFADE_OK;
    if (status == RFADE_OK)
        status = rfade_trace_make(work, &lazy->drive, &fingerprint, error);
    if (status == RFADE_OK)
        status = traces_stand(work, &fingerprint, &stand, error);
    summary->streams_made++;
    return status;
}

static enum rfade_status
work_outing(struct rfade_survey *survey, const struct rfade_analysis_settings *settings,
            const struct material *material, const struct rfade_route_work *route,
            const struct rfade_outing *outing, struct rfade_analysis_summary *summary,
            struct rfade_error *error)
{
    struct rfade_outing_stream *streams = NULL;
    size_t count = 0;
    struct lazy_drive lazy = {.made = false};
    enum rfade_status status = rfade_outing_streams(survey, outing, &streams, &count, error);
    for (size_t i = 0; i < count && status == RFADE_OK; i++) {
        const struct rfade_trace_work work = {
            .survey = survey,
            .settings = settings,
            .route = route,
            .outing = outing,
            .stream = &streams[i],
            .channel = channel_of(material, streams[i].channel_id),
            .calibration =
                rfade_calibration_at(material->calibrations, material->calibration_count,
                                     outing->vehicle_id, outing->start_us),
        };
        status = work_stream(&work, &lazy, summary, error);
    }
    if (lazy.made)
        rfade_drive_clear(&lazy.drive);
    free(streams);
    return status;
}

static enum rfade_status
work_route(struct rfade_survey *survey, const struct rfade_analysis_settings *settings,
           const struct material *material, const struct rfade_route_row *row,
           struct rfade_analysis_summary *summary, struct rfade_error *error)
{
    struct rfade_route_work route;
    enum rfade_status status = rfade_route_work_load(survey, row, &route, error);
    if (status != RFADE_OK)
        return status;
    for (size_t i = 0; i < material->outing_count && status == RFADE_OK; i++)
        status = work_outing(survey, settings, material, &route, &material->outings[i], summary,
                             error);
    rfade_route_work_clear(&route);
    return status;
}

static enum rfade_status drop_unwanted(struct rfade_survey *survey, struct rfade_error *error)
{
    return rfade_survey_execute(
        survey, "DELETE FROM trace WHERE trace_id NOT IN (SELECT trace_id FROM temp.wanted)",
        error);
}

static struct rfade_fingerprint
settings_fingerprint(const struct rfade_analysis_settings *settings)
{
    struct rfade_fingerprint_writer writer;
    rfade_fingerprint_begin(&writer);
    rfade_analysis_settings_fingerprint(settings, &writer);
    return rfade_fingerprint_end(&writer);
}

static enum rfade_status is_up_to_date(struct rfade_survey *survey,
                                       const struct rfade_fingerprint *settings,
                                       bool *up_to_date, struct rfade_error *error)
{
    int64_t ignored = 0;
    return rfade_survey_integer(survey, &ignored, up_to_date, error,
                                "SELECT 1 FROM analysed JOIN generation USING (only)"
                                " WHERE analysed.generation = generation.current"
                                " AND analysed.settings = ?1",
                                "b", (const void *)settings->bytes, sizeof settings->bytes);
}

static enum rfade_status mark_up_to_date(struct rfade_survey *survey,
                                         const struct rfade_fingerprint *settings,
                                         struct rfade_error *error)
{
    return rfade_survey_run(survey, error,
                            "INSERT OR REPLACE INTO analysed"
                            " SELECT 1, current, ?1 FROM generation",
                            "b", (const void *)settings->bytes, sizeof settings->bytes);
}

static enum rfade_status work_survey(struct rfade_survey *survey,
                                     const struct rfade_analysis_settings *settings,
                                     struct rfade_analysis_summary *summary,
                                     struct rfade_error *error)
{
    struct material material;
    enum rfade_status status = read_material(survey, settings, &material, error);
    if (status == RFADE_OK)
        status = check_carriers(survey, &material, error);
    for (size_t i = 0; i < material.route_count && status == RFADE_OK; i++)
        status = work_route(survey, settings, &material, &material.routes[i], summary, error);
    clear_material(&material);
    if (status == RFADE_OK)
        status = drop_unwanted(survey, error);
    if (status == RFADE_OK)
        status = rfade_fit_segments(survey, settings, &summary->segments_fitted,
                                    &summary->segments_kept, error);
    return status;
}

static enum rfade_status analyse_in_transaction(struct rfade_survey *survey,
                                                const struct rfade_analysis_settings *settings,
                                                bool all,
                                                struct rfade_analysis_summary *summary,
                                                struct rfade_error *error)
{
    struct rfade_fingerprint fingerprint = settings_fingerprint(settings);
    enum rfade_status status = RFADE_OK;
    if (all)
        status = rfade_survey_execute(
            survey, "DELETE FROM trace; DELETE FROM fading; DELETE FROM analysed;", error);
    if (status == RFADE_OK)
        status = is_up_to_date(survey, &fingerprint, &summary->nothing_new, error);
    if (status != RFADE_OK || summary->nothing_new)
        return status;
    status = work_survey(survey, settings, summary, error);
    return status == RFADE_OK ? mark_up_to_date(survey, &fingerprint, error) : status;
}

enum rfade_status rfade_analyse(struct rfade_survey *survey,
                                const struct rfade_analysis_settings *settings, bool all,
                                struct rfade_analysis_summary *summary,
                                struct rfade_error *error)
{
    *summary = (struct rfade_analysis_summary){false, 0, 0, 0, 0};
    enum rfade_status status =
        rfade_survey_execute(survey,
                             "CREATE TEMP TABLE IF NOT EXISTS wanted (trace_id INTEGER); "
                             "DELETE FROM temp.wanted;",
                             error);
    if (status == RFADE_OK)
        status = rfade_survey_begin(survey, error);
    if (status == RFADE_OK)
        status = analyse_in_transaction(survey, settings, all, summary, error);
    if (status == RFADE_OK)
        status = rfade_survey_commit(survey, error);
    if (status != RFADE_OK)
        rfade_survey_rollback(survey);
    return status;
}
