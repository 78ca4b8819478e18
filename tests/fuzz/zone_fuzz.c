/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/zone.h"

#include "fuzz.h"

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    struct rfade_zone *zone = NULL;
    if (rfade_zone_from_tzif(data, size, &zone, NULL) != RFADE_OK) {
        FUZZ_REQUIRE(!zone);
        return 0;
    }
    for (int64_t local_s = 0; local_s < INT64_C(7258118400); local_s += 10000019) {
        int64_t times_s[2] = {0, 0};
        struct rfade_zone_span spans[2];
        int count = rfade_zone_times(zone, local_s, times_s, spans);
        FUZZ_REQUIRE(count >= 0 && count <= 2);
        for (int i = 0; i < count; i++) {
            struct rfade_zone_span span = rfade_zone_span(zone, times_s[i]);
            FUZZ_REQUIRE(times_s[i] + span.offset_s == local_s);
        }
    }
    rfade_zone_destroy(zone);
    return 0;
}
