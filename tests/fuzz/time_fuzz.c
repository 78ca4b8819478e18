/* SPDX-License-Identifier: GPL-3.0-or-later */
/* First line: a pattern; second line: a text, read in all forms twice over. */
#include <string.h>

#include "ingest/number.h"
#include "ingest/time.h"
#include "ingest/time_text.h"

#include "fuzz.h"

static void read_as(struct rfade_time_format *format, const char *text, size_t size)
{
    struct rfade_time_reader reader = {.format = format};
    for (int i = 0; i < 2; i++) {
        int64_t time_us = 1;
        const char *reason = rfade_time_read(&reader, text, size, &time_us);
        FUZZ_REQUIRE(reason ? time_us == 0
                            : time_us >= RFADE_EARLIEST_US && time_us < RFADE_LATEST_US);
    }
}

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    static struct rfade_zone *zone;
    if (!zone && rfade_zone_create("Europe/Berlin", &zone, NULL) != RFADE_OK)
        abort();
    const char *text = (const char *)data;
    const char *newline = size ? memchr(text, '\n', size) : NULL;
    size_t pattern_size = newline ? (size_t)(newline - text) : 0;
    struct rfade_time_format format = {.decimal_sign = '.', .zone = zone, .has_date = true};
    if (newline && pattern_size < sizeof format.pattern) {
        memcpy(format.pattern, text, pattern_size);
        size -= pattern_size + 1;
        text = newline + 1;
        format.form = RFADE_TIME_PATTERN;
        if (!rfade_time_pattern_check(format.pattern))
            read_as(&format, text, size);
    }
    format.form = RFADE_TIME_ISO8601;
    read_as(&format, text, size);
    format.form = RFADE_TIME_AUTO;
    read_as(&format, text, size);
    format.form = RFADE_TIME_EPOCH;
    for (format.epoch_digits = 0; format.epoch_digits <= 9; format.epoch_digits += 3)
        read_as(&format, text, size);
    struct rfade_decimal decimal;
    int64_t value = 0;
    if (rfade_decimal_read(text, size, RFADE_DECIMAL_EITHER, &decimal) &&
        rfade_decimal_scaled(&decimal, 2, &value)) {
        double scaled = 100 * rfade_decimal_double(&decimal);
        double difference = scaled - (double)value;
        double tolerance = 0.51 + 1e-15 * (scaled < 0 ? -scaled : scaled);
        FUZZ_REQUIRE(difference >= -tolerance && difference <= tolerance);
    }
    return 0;
}
