/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/track.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

enum { KEPT_TEXT = 200 };

/* Scatter of a receiver that has lost its view, allowed on top of the speed. */
static const double scatter_m = 200;
static const double metres_per_degree = 111195; /* of a great circle, mean radius 6371.0 km */
static const double radians_per_degree = 0.017453292519943295769;

/* A position and the rows that repeat it. */
struct stay {
    bool any;
    struct rfade_ingest_fix first;  /* as the first of them said */
    struct rfade_ingest_fix latest; /* same place, latest row */
    int64_t told_us;                /* time of the latest fix told of it */
};

struct vehicle_track {
    const char *vehicle;
    struct stay present; /* told */
    struct stay waiting; /* not reachable from there, or the file's first */
    size_t waiting_line;
    size_t waiting_size;
    char waiting_text[KEPT_TEXT];
};

struct rfade_tracks {
    const struct rfade_sink *sink;
    int64_t held_us;
    double max_speed_m_s;
    size_t fixes;
    size_t refused;
    size_t count;
    size_t capacity;
    size_t latest; /* index of the vehicle of the row before */
    struct vehicle_track *vehicles;
};

struct rfade_tracks *rfade_tracks_create(const struct rfade_position_map *map,
                                         const struct rfade_sink *sink)
{
    struct rfade_tracks *tracks = calloc(1, sizeof *tracks);
    if (tracks) {
        tracks->sink = sink;
        tracks->held_us = llround(map->held_s * 1e6);
        tracks->max_speed_m_s = map->max_speed_m_s;
    }
    return tracks;
}

void rfade_tracks_destroy(struct rfade_tracks *tracks)
{
    if (tracks)
        free(tracks->vehicles);
    free(tracks);
}

static struct vehicle_track *find(struct rfade_tracks *tracks, const char *vehicle)
{
    if (tracks->count > 0 && tracks->vehicles[tracks->latest].vehicle == vehicle)
        return &tracks->vehicles[tracks->latest];
    for (size_t i = 0; i < tracks->count; i++)
        if (tracks->vehicles[i].vehicle == vehicle) {
            tracks->latest = i;
            return &tracks->vehicles[i];
        }
    if (tracks->count == tracks->capacity) {
        size_t capacity = 2 * tracks->capacity + 4;
        struct vehicle_track *grown =
            realloc(tracks->vehicles, capacity * sizeof *tracks->vehicles);
        if (!grown)
            return NULL;
        tracks->vehicles = grown;
        tracks->capacity = capacity;
    }
    tracks->latest = tracks->count++;
    tracks->vehicles[tracks->latest] = (struct vehicle_track){.vehicle = vehicle};
    return &tracks->vehicles[tracks->latest];
}

static bool same_place(const struct rfade_ingest_fix *a, const struct rfade_ingest_fix *b)
{
    return a->latitude_deg == b->latitude_deg && a->longitude_deg == b->longitude_deg;
}

static int64_t between_us(int64_t a_us, int64_t b_us)
{
    return a_us > b_us ? a_us - b_us : b_us - a_us;
}

/* Whether one could get from the end of a stay to a fix. */
static bool reachable(const struct rfade_tracks *tracks, const struct stay *stay,
                      const struct rfade_ingest_fix *fix)
{
    if (!stay->any)
        return false;
    double north_deg = fix->latitude_deg - stay->latest.latitude_deg;
    double east_deg = fabs(fix->longitude_deg - stay->latest.longitude_deg);
    if (east_deg > 180)
        east_deg = 360 - east_deg;
    /* Most steps are so small that the longitude needs no scaling. */
    if (fabs(north_deg) + east_deg < scatter_m / metres_per_degree)
        return true;
    east_deg *= cos(fix->latitude_deg * radians_per_degree);
    double distance_m = hypot(north_deg, east_deg) * metres_per_degree;
    double time_s = (double)between_us(fix->time_us, stay->latest.time_us) * 1e-6;
    return distance_m <= scatter_m + tracks->max_speed_m_s * time_s;
}

static enum rfade_status tell(struct rfade_tracks *tracks, struct stay *stay,
                              const struct rfade_ingest_fix *fix, struct rfade_error *error)
{
    stay->told_us = fix->time_us;
    tracks->fixes++;
    return tracks->sink->fix(tracks->sink->context, fix, error);
}

/* Whether the stay is too long for a position that is only held. */
static bool stands(const struct rfade_tracks *tracks, const struct stay *stay)
{
    return between_us(stay->latest.time_us, stay->first.time_us) > tracks->held_us;
}

/* Tells the end of a standstill. */
static enum rfade_status leave(struct rfade_tracks *tracks, struct stay *stay,
                               struct rfade_error *error)
{
    if (!stay->any || !stands(tracks, stay) || stay->told_us == stay->latest.time_us)
        return RFADE_OK;
    return tell(tracks, stay, &stay->latest, error);
}

static enum rfade_status arrive(struct rfade_tracks *tracks, struct vehicle_track *track,
                                const struct rfade_ingest_fix *fix, struct rfade_error *error)
{
    enum rfade_status status = leave(tracks, &track->present, error);
    if (status != RFADE_OK)
        return status;
    if (track->present.any && track->present.told_us == fix->time_us)
        return RFADE_OK; /* one fix an instant */
    track->present = (struct stay){.any = true, .first = *fix, .latest = *fix};
    return tell(tracks, &track->present, fix, error);
}

static enum rfade_status refuse_waiting(struct rfade_tracks *tracks,
                                        struct vehicle_track *track, struct rfade_error *error)
{
    if (!track->waiting.any)
        return RFADE_OK;
    track->waiting.any = false;
    tracks->refused++;
    struct rfade_ingest_refusal refusal = {
        .line = track->waiting_line,
        .reason = "the position can't be reached from those before and after; not used",
        .text = track->waiting_text,
        .text_size = track->waiting_size};
    return tracks->sink->refused(tracks->sink->context, &refusal, error);
}

/* The place that waited is where the vehicle is. */
static enum rfade_status accept_waiting(struct rfade_tracks *tracks,
                                        struct vehicle_track *track, struct rfade_error *error)
{
    struct stay stay = track->waiting;
    track->waiting.any = false;
    enum rfade_status status = arrive(tracks, track, &stay.first, error);
    if (status == RFADE_OK && same_place(&track->present.first, &stay.first))
        track->present.latest = stay.latest;
    return status;
}

static void wait_for_next(struct vehicle_track *track, const struct rfade_ingest_fix *fix,
                          const struct rfade_line *line)
{
    track->waiting = (struct stay){.any = true, .first = *fix, .latest = *fix};
    track->waiting_line = line->number;
    track->waiting_size = line->size < KEPT_TEXT ? line->size : KEPT_TEXT;
    memcpy(track->waiting_text, line->text, track->waiting_size);
}

static enum rfade_status stay_here(struct rfade_tracks *tracks, struct stay *stay,
                                   const struct rfade_ingest_fix *fix,
                                   struct rfade_error *error)
{
    stay->latest = *fix;
    if (between_us(fix->time_us, stay->told_us) <= tracks->held_us)
        return RFADE_OK;
    return tell(tracks, stay, fix, error);
}

enum rfade_status rfade_tracks_add(struct rfade_tracks *tracks,
                                   const struct rfade_ingest_fix *fix,
                                   const struct rfade_line *line, struct rfade_error *error)
{
    struct vehicle_track *track = find(tracks, fix->vehicle);
    if (!track)
        return rfade_error_no_memory(error);
    enum rfade_status status = RFADE_OK;
    if (track->waiting.any && same_place(&track->waiting.first, fix)) {
        track->waiting.latest = *fix;
        if (!stands(tracks, &track->waiting))
            return RFADE_OK;
        status = accept_waiting(tracks, track, error);
        return status == RFADE_OK ? stay_here(tracks, &track->present, fix, error) : status;
    }
    if (reachable(tracks, &track->present, fix)) {
        status = refuse_waiting(tracks, track, error);
        if (status != RFADE_OK)
            return status;
        if (same_place(&track->present.first, fix))
            return stay_here(tracks, &track->present, fix, error);
        return arrive(tracks, track, fix, error);
    }
    if (reachable(tracks, &track->waiting, fix)) {
        status = accept_waiting(tracks, track, error);
        return status == RFADE_OK ? arrive(tracks, track, fix, error) : status;
    }
    status = refuse_waiting(tracks, track, error);
    wait_for_next(track, fix, line);
    return status;
}

enum rfade_status rfade_tracks_finish(struct rfade_tracks *tracks, struct rfade_error *error)
{
    enum rfade_status status = RFADE_OK;
    for (size_t i = 0; i < tracks->count && status == RFADE_OK; i++) {
        struct vehicle_track *track = &tracks->vehicles[i];
        if (track->waiting.any && !track->present.any)
            status = accept_waiting(tracks, track, error);
        else
            status = refuse_waiting(tracks, track, error);
        if (status == RFADE_OK)
            status = leave(tracks, &track->present, error);
    }
    return status;
}

size_t rfade_tracks_fixes(const struct rfade_tracks *tracks)
{
    return tracks->fixes;
}

size_t rfade_tracks_refused(const struct rfade_tracks *tracks)
{
    return tracks->refused;
}
