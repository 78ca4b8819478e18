/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdlib.h>

#include "common/gpx.h"
#include "route/read_line_text.h"

static const char *const remedy = "keep one track, or one route, in the file";

/* The points of the file's tracks, or of its routes as long as no track comes. */
struct line {
    struct rfade_place_list places;
    bool of_track;
    size_t number; /* of the latest track or route */
};

static enum rfade_status take_point(void *context, const struct rfade_gpx_point *point,
                                    struct rfade_error *error)
{
    struct line *line = context;
    bool of_track = point->kind == RFADE_GPX_TRACK;
    if (point->kind == RFADE_GPX_WAYPOINT || (line->of_track && !of_track))
        return RFADE_OK;
    if (of_track && !line->of_track)
        line->places.count = 0;
    line->of_track = of_track;
    const struct rfade_place place = {point->latitude_deg, point->longitude_deg};
    enum rfade_status status = RFADE_OK;
    if (line->places.count > 0 && point->number != line->number)
        status = rfade_error_set(error, RFADE_INPUT, remedy, "the file holds several %s",
                                 of_track ? "tracks" : "routes");
    else
        status = rfade_place_list_add(&line->places, &place,
                                      "give each point its lat and lon in degrees", error);
    line->number = point->number;
    if (status == RFADE_INPUT)
        rfade_error_at(error, NULL, point->line);
    return status;
}

enum rfade_status rfade_line_from_gpx(const char *name, const char *text, size_t size,
                                      struct rfade_place **places, size_t *count,
                                      struct rfade_error *error)
{
    struct line line = {.of_track = false};
    struct rfade_gpx *gpx = rfade_gpx_create(take_point, &line);
    enum rfade_status status =
        gpx ? rfade_gpx_read(gpx, text, size, true, error) : rfade_error_no_memory(error);
    rfade_gpx_destroy(gpx);
    if (status != RFADE_OK)
        rfade_error_at(error, name, error ? error->line : 0);
    *places = line.places.all;
    *count = line.places.count;
    return status;
}
