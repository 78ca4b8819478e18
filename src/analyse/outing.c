/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analyse/outing.h"

#include <math.h>

#include "survey/rows.h"

static void read_extent(sqlite3_stmt *statement, void *row)
{
    *(struct rfade_outing *)row = (struct rfade_outing){sqlite3_column_int64(statement, 0),
                                                        sqlite3_column_int64(statement, 1),
                                                        sqlite3_column_int64(statement, 2)};
}

/* Joins what follows within the gap, in place; returns how many are left. */
static size_t join(struct rfade_outing *outings, size_t count, int64_t gap_us)
{
    size_t joined = 0;
    for (size_t i = 0; i < count; i++) {
        struct rfade_outing *last = joined ? &outings[joined - 1] : NULL;
        if (!last || last->vehicle_id != outings[i].vehicle_id ||
            outings[i].start_us - last->end_us > gap_us)
            outings[joined++] = outings[i];
        else if (outings[i].end_us > last->end_us)
            last->end_us = outings[i].end_us;
    }
    return joined;
}

enum rfade_status rfade_outings(struct rfade_survey *survey, double gap_s,
                                struct rfade_outing **outings, size_t *count,
                                struct rfade_error *error)
{
    void *rows = NULL;
    enum rfade_status status =
        rfade_rows_query(survey, sizeof **outings, read_extent, &rows, count, error,
                         "SELECT vehicle_id, start_us, end_us FROM extent"
                         " ORDER BY vehicle_id, start_us",
                         "");
    *outings = rows;
    if (status == RFADE_OK)
        *count = join(*outings, *count, llround(gap_s * 1e6));
    return status;
}

static void read_stream(sqlite3_stmt *statement, void *row)
{
    *(struct rfade_outing_stream *)row = (struct rfade_outing_stream){
        sqlite3_column_int64(statement, 0), sqlite3_column_int64(statement, 1)};
}

enum rfade_status rfade_outing_streams(struct rfade_survey *survey,
                                       const struct rfade_outing *outing,
                                       struct rfade_outing_stream **streams, size_t *count,
                                       struct rfade_error *error)
{
    void *rows = NULL;
    enum rfade_status status = rfade_rows_query(
        survey, sizeof **streams, read_stream, &rows, count, error,
        "SELECT DISTINCT channel_id, campaign_id FROM extent"
        " WHERE vehicle_id = ?1 AND start_us <= ?3 AND end_us >= ?2 ORDER BY 1, 2",
        "iii", outing->vehicle_id, outing->start_us, outing->end_us);
    *streams = rows;
    return status;
}
