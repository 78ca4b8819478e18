/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/gpx_track.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#include "common/gpx.h"
#include "ingest/emit.h"
#include "ingest/time.h"

struct gpx_track {
    const char *vehicle;
    struct rfade_emitter *emitter;
    struct rfade_time_reader time_reader;
};

static enum rfade_status take_point(void *context, const struct rfade_gpx_point *point,
                                    struct rfade_error *error)
{
    struct gpx_track *track = context;
    const struct rfade_line line = {
        .text = point->text, .size = point->text_size, .number = point->line, .ended = true};
    struct rfade_row row;
    char text[200];
    if (point->kind != RFADE_GPX_TRACK)
        return RFADE_OK;
    rfade_row_begin(&row);
    const char *reason =
        rfade_time_read(&track->time_reader, point->time, strlen(point->time), &row.time_us);
    if (reason) {
        (void)snprintf(text, sizeof text, "the point's time '%.40s' %s", point->time, reason);
        return rfade_emitter_refuse(track->emitter, &line, text, error);
    }
    bool valid = fabs(point->latitude_deg) <= 90 && fabs(point->longitude_deg) <= 180;
    if (!valid)
        return rfade_emitter_refuse(track->emitter, &line, "the point is no place on the earth",
                                    error);
    row.vehicle = track->vehicle;
    row.has_place = point->latitude_deg != 0 || point->longitude_deg != 0;
    row.no_place = !row.has_place;
    row.latitude_deg = point->latitude_deg;
    row.longitude_deg = point->longitude_deg == 180 ? -180 : point->longitude_deg;
    if (point->speed_m_s >= 0 && point->speed_m_s <= RFADE_MOST_SPEED_M_S)
        row.speed_m_s = point->speed_m_s;
    return rfade_emitter_row(track->emitter, &row, true, &line, error);
}

static enum rfade_status read_all(struct rfade_gpx *gpx, struct rfade_line_reader *lines,
                                  struct rfade_ingest_summary *summary,
                                  struct rfade_error *error)
{
    enum rfade_status status = RFADE_OK;
    size_t size = 1;
    while (status == RFADE_OK && size > 0) {
        const char *bytes = NULL;
        status = rfade_line_bytes(lines, &bytes, &size, error);
        if (status == RFADE_OK)
            status = rfade_gpx_read(gpx, bytes, size, size == 0, error);
        summary->lines = rfade_gpx_lines(gpx);
    }
    return status;
}

/* What a file that was cut off has of its last point is refused; those before stay. */
static enum rfade_status refuse_rest(struct rfade_emitter *emitter,
                                     const struct rfade_ingest_summary *summary,
                                     struct rfade_error *error)
{
    const struct rfade_line line = {
        .text = "", .size = 0, .number = summary->lines ? summary->lines : 1, .ended = true};
    return rfade_emitter_refuse(emitter, &line, "the file stops before its XML is complete",
                                error);
}

enum rfade_status
rfade_gpx_track_read(struct rfade_line_reader *lines, const struct rfade_column_map *map,
                     const struct rfade_ingest_names *names, const struct rfade_sink *sink,
                     struct rfade_ingest_summary *summary, struct rfade_error *error)
{
    static const struct rfade_time_format iso8601 = {.form = RFADE_TIME_ISO8601};
    struct gpx_track track = {.time_reader = {.format = &iso8601}};
    struct rfade_gpx *gpx = NULL;
    enum rfade_status status = rfade_row_vehicle(map, names, &track.vehicle, error);
    if (status == RFADE_OK)
        status = rfade_emitter_create(map, sink, summary, &track.emitter, error);
    if (status == RFADE_OK) {
        gpx = rfade_gpx_create(take_point, &track);
        status = gpx ? read_all(gpx, lines, summary, error) : rfade_error_no_memory(error);
        if (status == RFADE_INPUT && rfade_gpx_is_cut_off(gpx))
            status = refuse_rest(track.emitter, summary, error);
    }
    if (status == RFADE_OK)
        status = rfade_emitter_finish(track.emitter, error);
    rfade_gpx_destroy(gpx);
    rfade_emitter_destroy(track.emitter);
    return status;
}
