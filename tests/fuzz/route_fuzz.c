/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A reference line as GeoJSON and as delimited text; gpx_fuzz.c has GPX. */
#include <string.h>

#include "route/read_line_text.h"

#include "fuzz.h"

static void read_as(enum rfade_status (*read)(const char *, const char *, size_t,
                                              struct rfade_place **, size_t *,
                                              struct rfade_error *),
                    const char *text, size_t size)
{
    struct rfade_place *places = NULL;
    size_t count = 0;
    struct rfade_error error = {0};
    enum rfade_status status = read("fuzz", text, size, &places, &count, &error);
    FUZZ_REQUIRE(status == RFADE_OK || error.what[0] != '\0');
    for (size_t i = 0; status == RFADE_OK && i < count; i++)
        FUZZ_REQUIRE(rfade_place_is_valid(&places[i]));
    free(places);
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    char *text = malloc(size + 1);
    if (!text)
        abort();
    memcpy(text, data, size);
    text[size] = '\0';
    size_t length = strlen(text); /* what holds a NUL is refused before */
    read_as(rfade_line_from_geojson, text, length);
    read_as(rfade_line_from_csv, text, length);
    free(text);
    return 0;
}
