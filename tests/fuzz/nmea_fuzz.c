/* SPDX-License-Identifier: GPL-3.0-or-later */
/* An NMEA 0183 log, as it is and with its checksums put right, so that what is behind them is
 * reached too. */
#include <string.h>

#include "ingest/column_map_parts.h"
#include "ingest/nmea.h"

#include "checked_log.h"
#include "fuzz.h"

static struct rfade_column_map *map;

static void read_log(const char *text, size_t size)
{
    struct checked_log log;
    checked_log_begin(&log, text, size);
    enum rfade_status status =
        rfade_nmea_read_log(log.lines, map, &log.names, &log.sink, &log.summary, NULL);
    FUZZ_REQUIRE(status == RFADE_OK || status == RFADE_INPUT);
    FUZZ_REQUIRE(log.summary.fixes == log.counts.fixes &&
                 log.summary.refused == log.counts.refused);
    checked_log_end(&log);
}

/* Replaces the two digits behind each star by the right ones. */
static void mend(char *text, size_t size)
{
    static const char digits[] = "0123456789ABCDEF";
    unsigned sum = 0;
    for (size_t i = 0; i < size; i++) {
        if (text[i] == '$') {
            sum = 0;
        } else if (text[i] == '*' && i + 2 < size) {
            text[i + 1] = digits[sum / 16 % 16];
            text[i + 2] = digits[sum % 16];
        } else {
            sum ^= (unsigned char)text[i];
        }
    }
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    if (!map)
        map = rfade_column_map_create("fuzz");
    char *copy = malloc(size ? size : 1);
    if (!map || !copy)
        abort();
    memcpy(copy, data, size);
    (void)rfade_nmea_is_log(copy, size);
    read_log(copy, size);
    mend(copy, size);
    read_log(copy, size);
    free(copy);
    return 0;
}
