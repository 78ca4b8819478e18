/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/emit.h"

#include <stdio.h>
#include <stdlib.h>

#include "ingest/row_spread.h"
#include "ingest/track.h"

/* A clock that goes back by more has begun another session. */
static const int64_t session_us = INT64_C(3600000000);

enum { MOST_VEHICLES = 64 };

/* Of a vehicle whose clock may not go back. */
struct latest {
    const char *vehicle;
    int64_t time_us;
};

struct rfade_emitter {
    const struct rfade_column_map *map;
    const struct rfade_sink *sink;
    struct rfade_ingest_summary *summary;
    struct rfade_tracks *tracks;
    struct rfade_row_spread *spread; /* NULL: times stay as they are */
    size_t vehicle_count;
    struct latest latest[MOST_VEHICLES];
    bool any_time;
    size_t first_refused_line;
    char first_refused[256];
};

void rfade_emitter_destroy(struct rfade_emitter *emitter)
{
    if (!emitter)
        return;
    rfade_tracks_destroy(emitter->tracks);
    rfade_row_spread_destroy(emitter->spread);
    free(emitter);
}

static enum rfade_status refuse(struct rfade_emitter *emitter, const struct rfade_line *line,
                                const char *reason, struct rfade_error *error)
{
    if (emitter->summary->refused++ == 0) {
        emitter->first_refused_line = line->number;
        (void)snprintf(emitter->first_refused, sizeof emitter->first_refused, "%s", reason);
    }
    struct rfade_ingest_refusal refusal = {line->number, reason, line->text, line->size};
    return emitter->sink->refused(emitter->sink->context, &refusal, error);
}

enum rfade_status rfade_emitter_refuse(struct rfade_emitter *emitter,
                                       const struct rfade_line *line, const char *reason,
                                       struct rfade_error *error)
{
    emitter->summary->rows++;
    return refuse(emitter, line, reason, error);
}

static void note_time(struct rfade_emitter *emitter, int64_t time_us)
{
    struct rfade_ingest_summary *summary = emitter->summary;
    if (!emitter->any_time || time_us < summary->first_us)
        summary->first_us = time_us;
    if (!emitter->any_time || time_us > summary->last_us)
        summary->last_us = time_us;
    emitter->any_time = true;
}

/* What the readings of a row have in common; no level yet. */
static struct rfade_ingest_reading row_reading(const struct rfade_emitter *emitter,
                                               const struct rfade_row *row, const char *channel)
{
    return (struct rfade_ingest_reading){
        .time_us = row->time_us,
        .vehicle = row->vehicle,
        .channel = channel,
        .campaign = row->campaign,
        .level_cdb = RFADE_NO_VALUE_CDB,
        .snr_cdb = RFADE_NO_VALUE_CDB,
        .numbered = row->numbered,
        .sequence = row->sequence,
        .modulus = (int64_t)emitter->map->sequence_modulus,
    };
}

/* A number that came without a level that can be used was not lost. */
static enum rfade_status emit_numbers(struct rfade_emitter *emitter,
                                      const struct rfade_row *row, struct rfade_error *error)
{
    enum rfade_status status = RFADE_OK;
    size_t count = row->numbered ? row->valueless_count : 0;
    for (size_t i = 0; i < count && status == RFADE_OK; i++) {
        struct rfade_ingest_reading reading = row_reading(emitter, row, row->valueless[i]);
        status = emitter->sink->reading(emitter->sink->context, &reading, error);
    }
    return status;
}

static enum rfade_status emit(struct rfade_emitter *emitter, const struct rfade_row *row,
                              const struct rfade_line *line, struct rfade_error *error)
{
    struct rfade_ingest_summary *summary = emitter->summary;
    enum rfade_status status = RFADE_OK;
    if (row->has_place) {
        struct rfade_ingest_fix fix = {row->time_us, row->vehicle, row->latitude_deg,
                                       row->longitude_deg, row->speed_m_s};
        status = rfade_tracks_add(emitter->tracks, &fix, line, error);
    }
    for (size_t i = 0; i < row->level_count && status == RFADE_OK; i++) {
        const struct rfade_row_level *level = &row->levels[i];
        struct rfade_ingest_reading reading = row_reading(emitter, row, level->channel);
        reading.level_cdb = level->level_cdb;
        reading.snr_cdb = level->snr_cdb;
        status = emitter->sink->reading(emitter->sink->context, &reading, error);
        summary->readings++;
    }
    summary->no_reading += row->no_reading;
    summary->no_position += row->no_place;
    note_time(emitter, row->time_us);
    return status;
}

static enum rfade_status pass_row(void *context, const struct rfade_row *row, bool usable,
                                  const struct rfade_line *line, struct rfade_error *error)
{
    struct rfade_emitter *emitter = context;
    enum rfade_status status = RFADE_OK;
    if (usable)
        status = emit(emitter, row, line, error);
    else if (row->refused[0] == '\0')
        emitter->summary->no_reading += row->no_reading;
    if (status == RFADE_OK)
        status = emit_numbers(emitter, row, error);
    if (status == RFADE_OK && row->refused[0])
        status = refuse(emitter, line, row->refused, error);
    return status;
}

enum rfade_status rfade_emitter_create(const struct rfade_column_map *map,
                                       const struct rfade_sink *sink,
                                       struct rfade_ingest_summary *summary,
                                       struct rfade_emitter **emitter,
                                       struct rfade_error *error)
{
    *emitter = calloc(1, sizeof **emitter);
    if (!*emitter)
        return rfade_error_no_memory(error);
    (*emitter)->map = map;
    (*emitter)->sink = sink;
    (*emitter)->summary = summary;
    (*emitter)->tracks = rfade_tracks_create(&map->position, sink);
    if (map->time_spread)
        (*emitter)->spread = rfade_row_spread_create(pass_row, *emitter);
    if ((*emitter)->tracks && (!map->time_spread || (*emitter)->spread))
        return RFADE_OK;
    rfade_emitter_destroy(*emitter);
    *emitter = NULL;
    return rfade_error_no_memory(error);
}

/* Whether the row lies before one of its vehicle that came earlier in the same session. */
static bool goes_back(struct rfade_emitter *emitter, const struct rfade_row *row)
{
    size_t i = 0;
    while (i < emitter->vehicle_count && emitter->latest[i].vehicle != row->vehicle)
        i++;
    if (i == MOST_VEHICLES)
        return false;
    struct latest *latest = &emitter->latest[i];
    bool known = i < emitter->vehicle_count;
    if (known && row->time_us < latest->time_us && latest->time_us - row->time_us < session_us)
        return true;
    *latest = (struct latest){row->vehicle, row->time_us};
    emitter->vehicle_count += !known;
    return false;
}

enum rfade_status rfade_emitter_row(struct rfade_emitter *emitter, const struct rfade_row *row,
                                    bool usable, const struct rfade_line *line,
                                    struct rfade_error *error)
{
    enum rfade_status status = RFADE_OK;
    emitter->summary->rows++;
    if (usable && row->has_gnss && emitter->sink->clocks)
        status =
            emitter->sink->clocks(emitter->sink->context, row->time_us, row->gnss_us, error);
    if (status != RFADE_OK)
        return status;
    if (usable && emitter->map->backward_refused && goes_back(emitter, row))
        return refuse(emitter, line, "the clock went back: a row before this has a later time",
                      error);
    if (emitter->spread)
        return rfade_row_spread_add(emitter->spread, emitter->map->time_offset_us, row, usable,
                                    line, error);
    return pass_row(emitter, row, usable, line, error);
}

static enum rfade_status check_yield(const struct rfade_emitter *emitter,
                                     struct rfade_error *error)
{
    const struct rfade_ingest_summary *summary = emitter->summary;
    if (summary->rows == 0)
        return rfade_error_set(error, RFADE_INPUT, "check that the file is complete",
                               "the file holds no row of data");
    if (emitter->any_time)
        return RFADE_OK;
    enum rfade_status status = rfade_error_set(
        error, RFADE_INPUT, "check that the column map describes this file",
        "none of %zu rows can be used; the first: %s", summary->rows, emitter->first_refused);
    rfade_error_at(error, NULL, emitter->first_refused_line);
    return status;
}

enum rfade_status rfade_emitter_finish(struct rfade_emitter *emitter, struct rfade_error *error)
{
    enum rfade_status status =
        emitter->spread ? rfade_row_spread_flush(emitter->spread, error) : RFADE_OK;
    if (status == RFADE_OK)
        status = rfade_tracks_finish(emitter->tracks, error);
    emitter->summary->fixes = rfade_tracks_fixes(emitter->tracks);
    emitter->summary->refused += rfade_tracks_refused(emitter->tracks);
    return status == RFADE_OK ? check_yield(emitter, error) : status;
}
