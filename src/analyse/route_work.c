/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analyse/route_work.h"

#include <stdlib.h>

static void take_fingerprint(struct rfade_route_work *work)
{
    struct rfade_fingerprint_writer writer;
    rfade_fingerprint_begin(&writer);
    rfade_fingerprint_text(&writer, work->row.name);
    rfade_fingerprint_number(&writer, work->row.corridor_m);
    for (size_t i = 0; i < work->segment_count; i++) {
        rfade_fingerprint_number(&writer, work->segments[i].from_m);
        rfade_fingerprint_number(&writer, work->segments[i].to_m);
    }
    size_t count = 0;
    const struct rfade_route_point *points = rfade_route_points(work->line, &count);
    for (size_t i = 0; i < count; i++) {
        rfade_fingerprint_number(&writer, points[i].place.latitude_deg);
        rfade_fingerprint_number(&writer, points[i].place.longitude_deg);
    }
    work->fingerprint = rfade_fingerprint_end(&writer);
}

enum rfade_status rfade_route_work_load(struct rfade_survey *survey,
                                        const struct rfade_route_row *row,
                                        struct rfade_route_work *work,
                                        struct rfade_error *error)
{
    *work = (struct rfade_route_work){.row = *row};
    struct rfade_match_settings match = rfade_match_defaults();
    match.corridor_m = row->corridor_m;
    enum rfade_status status =
        rfade_survey_route_load(survey, row->route_id, &work->line, error);
    if (status == RFADE_OK)
        status = rfade_survey_segments(survey, row->route_id, &work->segments,
                                       &work->segment_count, error);
    if (status == RFADE_OK)
        status = rfade_matcher_create(work->line, &match, &work->matcher, error);
    if (status == RFADE_OK)
        take_fingerprint(work);
    else
        rfade_route_work_clear(work);
    return status;
}

void rfade_route_work_clear(struct rfade_route_work *work)
{
    rfade_matcher_destroy(work->matcher);
    rfade_route_destroy(work->line);
    free(work->segments);
    *work = (struct rfade_route_work){.line = NULL};
}

int32_t rfade_route_work_segment(const struct rfade_route_work *work, double chainage_m)
{
    size_t low = 0, high = work->segment_count;
    while (high - low > 1) { /* from_m of `low` <= chainage < from_m of `high` */
        size_t middle = low + (high - low) / 2;
        if (work->segments[middle].from_m <= chainage_m)
            low = middle;
        else
            high = middle;
    }
    return (int32_t)low;
}
