/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The readings of two channels brought together, outing by outing, without storing anything. */
#include <stdlib.h>
#include <string.h>

#include "analyse/diversity.h"
#include "analyse/trace.h"
#include "survey/store.h"

/* A branch's readings along one pass. */
struct chunk {
    size_t pass;
    struct rfade_branch branch;
    struct rfade_track_reading *owned;
};

struct chunks {
    struct chunk *items;
    size_t count;
};

static void clear_chunks(struct chunks *chunks)
{
    for (size_t i = 0; i < chunks->count; i++)
        free(chunks->items[i].owned);
    free(chunks->items);
    *chunks = (struct chunks){NULL, 0};
}

static enum rfade_status keep(void *context, const struct rfade_located_pass *located,
                              struct rfade_error *error)
{
    struct chunks *chunks = context;
    struct chunk *items = realloc(chunks->items, (chunks->count + 1) * sizeof *items);
    if (!items)
        return rfade_error_no_memory(error);
    chunks->items = items;
    struct rfade_track_reading *owned = malloc(located->count * sizeof *owned);
    if (!owned)
        return rfade_error_no_memory(error);
    memcpy(owned, located->readings, located->count * sizeof *owned);
    items[chunks->count++] = (struct chunk){.pass = located->pass,
                                            .branch = {.readings = owned,
                                                       .count = located->count,
                                                       .receiver = located->receiver,
                                                       .settings = located->settings},
                                            .owned = owned};
    return RFADE_OK;
}

/* All that pairing needs, read once. */
struct pairing {
    struct rfade_survey *survey;
    const struct rfade_analysis_settings *settings;
    int32_t threshold_cdb;
    struct rfade_diversity_row *rows;
    size_t row_count;
    struct rfade_channel channels[2];
    struct rfade_calibration *calibrations;
    size_t calibration_count;
    struct rfade_outing *outings;
    size_t outing_count;
    struct rfade_route_row *routes;
    size_t route_count;
};

/* Where the rows of one route and campaign are, by segment. */
struct places {
    struct rfade_diversity_row **row; /* [segments]; NULL: none */
    int32_t *shift_cdb[2];
    bool any;
};

static void clear_places(struct places *places)
{
    free(places->row);
    free(places->shift_cdb[0]);
    free(places->shift_cdb[1]);
}

static enum rfade_status find_places(const struct pairing *work,
                                     const struct rfade_route_work *route, int64_t campaign_id,
                                     struct places *places, struct rfade_error *error)
{
    size_t segments = route->segment_count;
    *places = (struct places){.row = calloc(segments + 1, sizeof(struct rfade_diversity_row *)),
                              .shift_cdb = {calloc(segments + 1, sizeof(int32_t)),
                                            calloc(segments + 1, sizeof(int32_t))}};
    if (!places->row || !places->shift_cdb[0] || !places->shift_cdb[1])
        return rfade_error_no_memory(error);
    for (size_t i = 0; i < work->row_count; i++) {
        struct rfade_diversity_row *row = &work->rows[i];
        if (row->campaign_id != campaign_id ||
            strcmp(row->branch[0]->route, route->row.name) != 0)
            continue;
        size_t at = (size_t)(row->branch[0]->segment - 1);
        if (at >= segments)
            continue;
        places->row[at] = row;
        places->shift_cdb[0][at] = row->shift_cdb[0];
        places->shift_cdb[1][at] = row->shift_cdb[1];
        places->any = true;
    }
    return RFADE_OK;
}

static enum rfade_status pair_chunks(const struct pairing *work, const struct places *places,
                                     const struct chunk *first, const struct chunk *second,
                                     struct rfade_error *error)
{
    struct rfade_branch branches[2] = {first->branch, second->branch};
    const struct rfade_track_reading *a = first->branch.readings, *b = second->branch.readings;
    if (first->pass != second->pass || a[0].time_us > b[second->branch.count - 1].time_us ||
        b[0].time_us > a[first->branch.count - 1].time_us)
        return RFADE_OK;
    branches[0].shift_cdb = places->shift_cdb[0];
    branches[1].shift_cdb = places->shift_cdb[1];
    struct rfade_pairing pairing;
    enum rfade_status status = rfade_pair_branches(branches, work->threshold_cdb, &pairing);
    for (size_t i = 0; i < pairing.count && status == RFADE_OK; i++) {
        struct rfade_diversity_row *row = places->row[pairing.runs[i].segment];
        if (row)
            status = rfade_paired_total_add(&row->total, &pairing.runs[i]);
    }
    rfade_pairing_clear(&pairing);
    return status == RFADE_OK
               ? RFADE_OK
               : rfade_error_set(error, status, "", "readings can't be paired: %s",
                                 rfade_status_text(status));
}

static enum rfade_status locate(const struct pairing *work,
                                const struct rfade_route_work *route,
                                const struct rfade_outing *outing,
                                const struct rfade_drive *drive, int64_t campaign_id,
                                int branch, struct chunks *chunks, struct rfade_error *error)
{
    const struct rfade_outing_stream stream = {work->channels[branch].channel_id, campaign_id};
    const struct rfade_trace_work trace = {
        .survey = work->survey,
        .settings = work->settings,
        .route = route,
        .outing = outing,
        .stream = &stream,
        .channel = &work->channels[branch],
        .calibration = rfade_calibration_at(work->calibrations, work->calibration_count,
                                            outing->vehicle_id, outing->start_us),
    };
    const struct rfade_trace_listener listener = {keep, chunks};
    return rfade_trace_locate(&trace, drive, &listener, error);
}

static enum rfade_status pair_campaign(const struct pairing *work,
                                       const struct rfade_route_work *route,
                                       const struct rfade_outing *outing, int64_t campaign_id,
                                       struct rfade_error *error)
{
    struct places places;
    struct chunks chunks[2] = {{NULL, 0}, {NULL, 0}};
    struct rfade_drive drive = {NULL, NULL, 0};
    enum rfade_status status = find_places(work, route, campaign_id, &places, error);
    if (status != RFADE_OK || !places.any)
        goto out;
    status = rfade_drive_make(work->survey, work->settings, route, outing, &drive, error);
    for (int b = 0; b < 2 && status == RFADE_OK; b++)
        status = locate(work, route, outing, &drive, campaign_id, b, &chunks[b], error);
    for (size_t i = 0; i < chunks[0].count && status == RFADE_OK; i++)
        for (size_t j = 0; j < chunks[1].count && status == RFADE_OK; j++)
            status =
                pair_chunks(work, &places, &chunks[0].items[i], &chunks[1].items[j], error);
out:
    rfade_drive_clear(&drive);
    clear_chunks(&chunks[0]);
    clear_chunks(&chunks[1]);
    clear_places(&places);
    return status;
}

static bool has_stream(const struct rfade_outing_stream *streams, size_t count,
                       int64_t channel_id, int64_t campaign_id)
{
    for (size_t i = 0; i < count; i++)
        if (streams[i].channel_id == channel_id && streams[i].campaign_id == campaign_id)
            return true;
    return false;
}

static enum rfade_status pair_outing(const struct pairing *work,
                                     const struct rfade_route_work *route,
                                     const struct rfade_outing *outing,
                                     struct rfade_error *error)
{
    struct rfade_outing_stream *streams = NULL;
    size_t count = 0;
    enum rfade_status status =
        rfade_outing_streams(work->survey, outing, &streams, &count, error);
    for (size_t i = 0; i < count && status == RFADE_OK; i++)
        if (streams[i].channel_id == work->channels[0].channel_id &&
            has_stream(streams, count, work->channels[1].channel_id, streams[i].campaign_id))
            status = pair_campaign(work, route, outing, streams[i].campaign_id, error);
    free(streams);
    return status;
}

static enum rfade_status pair_route(const struct pairing *work,
                                    const struct rfade_route_row *row,
                                    struct rfade_error *error)
{
    struct rfade_route_work route;
    bool wanted = false;
    for (size_t i = 0; i < work->row_count; i++)
        wanted = wanted || strcmp(work->rows[i].branch[0]->route, row->name) == 0;
    if (!wanted)
        return RFADE_OK;
    enum rfade_status status = rfade_route_work_load(work->survey, row, &route, error);
    if (status != RFADE_OK)
        return status;
    for (size_t i = 0; i < work->outing_count && status == RFADE_OK; i++)
        status = pair_outing(work, &route, &work->outings[i], error);
    rfade_route_work_clear(&route);
    return status;
}

static enum rfade_status prepare_rows(const struct pairing *work, struct rfade_error *error)
{
    enum rfade_status status = RFADE_OK;
    for (size_t i = 0; i < work->row_count && status == RFADE_OK; i++) {
        bool found = false;
        status = rfade_survey_integer(work->survey, &work->rows[i].campaign_id, &found, error,
                                      "SELECT campaign_id FROM campaign WHERE name = ?1", "t",
                                      work->rows[i].branch[0]->campaign);
        if (status == RFADE_OK && rfade_paired_total_create(&work->rows[i].total) != RFADE_OK)
            status = rfade_error_no_memory(error);
    }
    return status;
}

enum rfade_status rfade_diversity_pair(struct rfade_survey *survey,
                                       const struct rfade_analysis_settings *settings,
                                       const char *const channels[2], int32_t threshold_cdb,
                                       struct rfade_diversity_row *rows, size_t count,
                                       struct rfade_error *error)
{
    struct pairing work = {.survey = survey,
                           .settings = settings,
                           .threshold_cdb = threshold_cdb,
                           .rows = rows,
                           .row_count = count};
    enum rfade_status status = prepare_rows(&work, error);
    for (int b = 0; b < 2 && status == RFADE_OK; b++)
        status = rfade_survey_channel(survey, channels[b], &work.channels[b], error);
    if (status == RFADE_OK)
        status = rfade_survey_calibrations(survey, &work.calibrations, &work.calibration_count,
                                           error);
    if (status == RFADE_OK)
        status = rfade_survey_routes(survey, &work.routes, &work.route_count, error);
    if (status == RFADE_OK)
        status =
            rfade_outings(survey, settings->gap_s, &work.outings, &work.outing_count, error);
    for (size_t i = 0; i < work.route_count && status == RFADE_OK; i++)
        status = pair_route(&work, &work.routes[i], error);
    free(work.calibrations);
    free(work.outings);
    free(work.routes);
    return status;
}
