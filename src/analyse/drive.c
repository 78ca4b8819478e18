/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analyse/drive.h"

#include <math.h>
#include <stdlib.h>

#include "survey/read.h"

static enum rfade_status make_tracks(const struct rfade_analysis_settings *settings,
                                     const struct rfade_position *positions,
                                     const struct rfade_match *matches, size_t count,
                                     struct rfade_drive *drive, struct rfade_error *error)
{
    struct rfade_track_settings how = rfade_track_defaults();
    how.gap_s = settings->fix_gap_s;
    drive->tracks = calloc(drive->pass_count + 1, sizeof(struct rfade_track *));
    if (!drive->tracks)
        return rfade_error_no_memory(error);
    enum rfade_status status = RFADE_OK;
    for (size_t i = 0; i < drive->pass_count && status == RFADE_OK; i++)
        status = rfade_track_create(positions, matches, count, &drive->passes[i], &how,
                                    &drive->tracks[i], error);
    return status;
}

enum rfade_status rfade_drive_make(struct rfade_survey *survey,
                                   const struct rfade_analysis_settings *settings,
                                   const struct rfade_route_work *route,
                                   const struct rfade_outing *outing, struct rfade_drive *drive,
                                   struct rfade_error *error)
{
    *drive = (struct rfade_drive){NULL, NULL, 0};
    struct rfade_position *positions = NULL;
    struct rfade_match *matches = NULL;
    size_t count = 0;
    int64_t margin_us = llround(settings->fix_gap_s * 1e6);
    enum rfade_status status =
        rfade_survey_fixes(survey, outing->vehicle_id, outing->start_us - margin_us,
                           outing->end_us + margin_us, &positions, &count, error);
    if (status != RFADE_OK)
        goto out;
    matches = malloc((count + 1) * sizeof *matches);
    if (!matches) {
        status = rfade_error_no_memory(error);
        goto out;
    }
    status = rfade_match_positions(route->matcher, positions, count, matches, &drive->passes,
                                   &drive->pass_count, error);
    if (status == RFADE_OK)
        status = make_tracks(settings, positions, matches, count, drive, error);
out:
    free(positions);
    free(matches);
    if (status != RFADE_OK)
        rfade_drive_clear(drive);
    return status;
}

void rfade_drive_clear(struct rfade_drive *drive)
{
    for (size_t i = 0; drive->tracks && i < drive->pass_count; i++)
        rfade_track_destroy(drive->tracks[i]);
    free(drive->tracks);
    free(drive->passes);
    *drive = (struct rfade_drive){NULL, NULL, 0};
}

void rfade_drive_pass_times(const struct rfade_drive *drive, size_t pass, int64_t *start_us,
                            int64_t *end_us)
{
    *start_us = rfade_track_start_us(drive->tracks[pass]);
    *end_us = rfade_track_end_us(drive->tracks[pass]) + 1;
    if (pass + 1 < drive->pass_count) {
        int64_t next_us = rfade_track_start_us(drive->tracks[pass + 1]);
        *end_us = next_us < *end_us ? next_us : *end_us;
    }
}
