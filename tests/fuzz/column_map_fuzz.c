/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <string.h>

#include "ingest/column_map_parts.h"

#include "fuzz.h"

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    struct rfade_column_map *map = NULL;
    struct rfade_error error = {0};
    enum rfade_status status =
        rfade_column_map_parse((const char *)data, size, "fuzz.ini", &map, &error);
    FUZZ_REQUIRE((status == RFADE_OK) == (map != NULL));
    if (map) {
        FUZZ_REQUIRE(map->level_count <= RFADE_MOST_LEVELS);
        FUZZ_REQUIRE(rfade_column_given(&map->time_column) ||
                     rfade_format_is_positions(map->file.format));
    } else {
        FUZZ_REQUIRE(error.status == status && error.what[0] != '\0');
    }
    rfade_column_map_destroy(map);
    return 0;
}
