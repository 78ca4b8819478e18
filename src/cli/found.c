/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "cli/found.h"

#include <inttypes.h>
#include <math.h>
#include <stdlib.h>

#include "common/text.h"

/* Names come from logs: control characters are taken out before a terminal sees them. */
static void write_stream(FILE *stream, const struct rfade_stream_found *found)
{
    const char *const parts[] = {found->vehicle, found->channel, found->campaign};
    for (size_t i = 0; i < sizeof parts / sizeof parts[0]; i++) {
        char name[RFADE_NAME_SIZE];
        (void)snprintf(name, sizeof name, "%s", parts[i]);
        rfade_text_printable(name);
        (void)fprintf(stream, "%s%s", i ? ", " : "", name);
    }
}

static void write_gaps(FILE *stream, const struct rfade_stream_found *found)
{
    if (found->missing_count <= 0)
        return;
    write_stream(stream, found);
    (void)fprintf(stream,
                  ": %" PRId64 " readings are missing from a regular log of %" PRId64
                  "; if they were lost for a weak signal, fading and outage look too mild: "
                  "see [sequence] of the column map\n",
                  found->missing_count, found->reading_count);
}

void rfade_write_found(FILE *stream, const struct rfade_stream_found *found, size_t count)
{
    for (size_t i = 0; i < count; i++) {
        if (!isnan(found[i].floor_dbm)) {
            write_stream(stream, &found[i]);
            (void)fprintf(stream, ": readings pile up at a floor of %.2f dBm\n",
                          found[i].floor_dbm);
        }
        if (!isnan(found[i].ceiling_dbm)) {
            write_stream(stream, &found[i]);
            (void)fprintf(stream, ": readings pile up at a ceiling of %.2f dBm\n",
                          found[i].ceiling_dbm);
        }
        if (found[i].lost_count > 0) {
            write_stream(stream, &found[i]);
            (void)fprintf(stream,
                          ": %" PRId64 " numbered readings were lost beside %" PRId64
                          " that came\n",
                          found[i].lost_count, found[i].reading_count);
        }
        write_gaps(stream, &found[i]);
    }
}

enum rfade_status rfade_note_gaps(struct rfade_survey *survey, FILE *notes,
                                  struct rfade_error *error)
{
    struct rfade_stream_found *found = NULL;
    size_t count = 0;
    enum rfade_status status = rfade_survey_found(survey, &found, &count, error);
    for (size_t i = 0; i < count; i++)
        write_gaps(notes, &found[i]);
    free(found);
    return status;
}
