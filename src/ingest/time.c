/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/time.h"

#include <string.h>

#include "ingest/time_text.h"

static const int64_t second_us = 1000000;
static const int64_t day_us = INT64_C(86400000000);
static const int64_t disorder_us = INT64_C(60000000);

/* A margin wider than any offset and its change. */
static const int64_t margin_s = INT64_C(2) * 26 * 3600;

static int64_t floor_second(int64_t time_us)
{
    return time_us / second_us - (time_us % second_us < 0);
}

/* Which of two times a repeated local time means; see the header. */
static int64_t choose(const struct rfade_time_reader *reader, int64_t earlier_us,
                      int64_t later_us)
{
    if (!reader->any)
        return earlier_us;
    if (reader->falling)
        return later_us > reader->previous_us + disorder_us ? earlier_us : later_us;
    return earlier_us < reader->previous_us - disorder_us ? later_us : earlier_us;
}

/* Remembers where the zone's offset holds alone, so that most rows need no look-up. */
static void remember_span(struct rfade_time_reader *reader, struct rfade_zone_span span)
{
    reader->safe_offset_s = span.offset_s;
    reader->safe_from_s = span.from_s == INT64_MIN ? INT64_MIN : span.from_s + margin_s;
    reader->safe_until_s = span.until_s == INT64_MAX ? INT64_MAX : span.until_s - margin_s;
}

static const char *from_zone(struct rfade_time_reader *reader, int64_t local_us,
                             int64_t *time_us)
{
    int64_t local_s = floor_second(local_us);
    if (local_s >= reader->safe_from_s && local_s < reader->safe_until_s) {
        *time_us = local_us - reader->safe_offset_s * second_us;
        return NULL;
    }
    int64_t times_s[2];
    struct rfade_zone_span spans[2];
    int count = rfade_zone_times(reader->format->zone, local_s, times_s, spans);
    if (count == 0)
        return "does not exist in the zone: the clock was put forward past it";
    int64_t fraction_us = local_us - local_s * second_us;
    *time_us = times_s[0] * second_us + fraction_us;
    if (count == 2)
        *time_us = choose(reader, *time_us, times_s[1] * second_us + fraction_us);
    else
        remember_span(reader, spans[0]);
    return NULL;
}

/* Local day of a time of day: one on where it fell by more than half a day. */
static int64_t day_of(struct rfade_time_reader *reader, int64_t of_day_us)
{
    if (reader->any && of_day_us < reader->of_day_us - day_us / 2)
        reader->day_offset++;
    else if (reader->any && of_day_us > reader->of_day_us + day_us / 2)
        reader->day_offset--;
    reader->of_day_us = of_day_us;
    return reader->format->date_days + reader->day_offset;
}

static const char *from_clock(struct rfade_time_reader *reader,
                              const struct rfade_clock_time *clock, int64_t *time_us)
{
    int64_t days = clock->days;
    if (!clock->has_date) {
        if (!reader->format->has_date)
            return "has no date";
        days = day_of(reader, clock->of_day_us);
    }
    int64_t local_us = days * day_us + clock->of_day_us;
    *time_us = local_us - clock->offset_s * second_us;
    if (clock->has_offset || !reader->format->zone)
        return NULL;
    return from_zone(reader, local_us, time_us);
}

/* Digits, one decimal sign and blanks only: a count, not a calendar date. */
static bool looks_like_epoch(const char *text, size_t size)
{
    size_t digits = 0;
    for (size_t i = 0; i < size; i++) {
        if (text[i] >= '0' && text[i] <= '9')
            digits++;
        else if (!strchr("+., \teE", text[i]))
            return false;
    }
    return digits > 0;
}

static const char *read_any(struct rfade_time_reader *reader, const char *text, size_t size,
                            int64_t *time_us)
{
    const struct rfade_time_format *format = reader->format;
    bool automatic = format->form == RFADE_TIME_AUTO;
    if (format->form == RFADE_TIME_EPOCH || (automatic && looks_like_epoch(text, size))) {
        const char *reason = rfade_time_epoch(text, size, automatic ? -1 : format->epoch_digits,
                                              format->decimal_sign, time_us);
        if (!reason && *time_us > RFADE_LATEST_US)
            reason = "lies after the year 2199";
        else if (!reason)
            *time_us += format->origin_us;
        return reason;
    }
    struct rfade_clock_time clock;
    const char *reason = format->form == RFADE_TIME_PATTERN
                             ? rfade_time_pattern(format->pattern, text, size, &clock)
                             : rfade_time_iso8601(text, size, &clock);
    return reason ? reason : from_clock(reader, &clock, time_us);
}

const char *rfade_time_read(struct rfade_time_reader *reader, const char *text, size_t size,
                            int64_t *time_us)
{
    *time_us = 0;
    int64_t read_us = 0;
    if (size == 0)
        return "is empty";
    const char *reason = read_any(reader, text, size, &read_us);
    if (reason)
        return reason;
    if (read_us < RFADE_EARLIEST_US)
        return "lies before the year 1980: the logger's clock was not set";
    if (read_us >= RFADE_LATEST_US)
        return "lies after the year 2199";
    if (reader->any && read_us != reader->previous_us)
        reader->falling = read_us < reader->previous_us;
    reader->any = true;
    reader->previous_us = read_us;
    *time_us = read_us;
    return NULL;
}
