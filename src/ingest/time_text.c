/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/time_text.h"

#include "ingest/number.h"
#include "ingest/time_cursor.h"

static const char no_iso8601[] = "is not an ISO 8601 time";

static const char *read_iso_date(struct rfade_cursor *cursor, struct rfade_clock_time *time)
{
    int year = 0;
    int month = 0;
    int day = 0;
    if (!rfade_cursor_digits(cursor, 4, 4, &year))
        return no_iso8601;
    bool dashes = rfade_cursor_skip(cursor, '-');
    if (!rfade_cursor_digits(cursor, 2, 2, &month) ||
        (dashes && !rfade_cursor_skip(cursor, '-')) || !rfade_cursor_digits(cursor, 2, 2, &day))
        return no_iso8601;
    return rfade_clock_time_set_date(time, year, month, day);
}

static const char *read_iso_clock(struct rfade_cursor *cursor, struct rfade_clock_time *time)
{
    int hour = 0;
    int minute = 0;
    int second = 0;
    int64_t fraction_us = 0;
    if (!rfade_cursor_digits(cursor, 2, 2, &hour))
        return no_iso8601;
    bool colons = rfade_cursor_skip(cursor, ':');
    if (!rfade_cursor_digits(cursor, 2, 2, &minute))
        return no_iso8601;
    if (colons ? rfade_cursor_skip(cursor, ':') : rfade_is_digit(rfade_cursor_peek(cursor)))
        if (!rfade_cursor_digits(cursor, 2, 2, &second) ||
            !rfade_cursor_optional_fraction(cursor, &fraction_us))
            return no_iso8601;
    return rfade_clock_time_set_clock(time, hour, minute, second, fraction_us);
}

const char *rfade_time_iso8601(const char *text, size_t size, struct rfade_clock_time *time)
{
    *time = (struct rfade_clock_time){0};
    struct rfade_cursor cursor = {text, text + size};
    rfade_cursor_skip_blanks(&cursor);
    bool bracket = rfade_cursor_skip(&cursor, '[');
    bool clock_only = cursor.end - cursor.at >= 5 && cursor.at[2] == ':';
    const char *reason = NULL;
    if (!clock_only) {
        reason = read_iso_date(&cursor, time);
        if (reason)
            return reason;
        if (!rfade_cursor_skip(&cursor, 'T') && !rfade_cursor_skip(&cursor, 't')) {
            if (rfade_cursor_peek(&cursor) != ' ')
                return no_iso8601;
            rfade_cursor_skip_blanks(&cursor);
        }
    }
    reason = read_iso_clock(&cursor, time);
    if (reason)
        return reason;
    rfade_cursor_skip_blanks(&cursor);
    if (cursor.at < cursor.end && rfade_cursor_peek(&cursor) != ']' &&
        !rfade_cursor_offset(&cursor, time))
        return no_iso8601;
    if (bracket && !rfade_cursor_skip(&cursor, ']'))
        return no_iso8601;
    rfade_cursor_skip_blanks(&cursor);
    return cursor.at == cursor.end ? NULL : no_iso8601;
}

/* Decimal places of the unit, from the digits before the decimal sign. */
static int epoch_digits(const char *text, size_t size)
{
    size_t digits = 0;
    size_t i = 0;
    while (i < size && (text[i] == ' ' || text[i] == '+'))
        i++;
    for (; i < size && rfade_is_digit(text[i]); i++)
        digits++;
    return digits <= 11 ? 0 : digits <= 14 ? 3 : digits <= 17 ? 6 : 9;
}

const char *rfade_time_epoch(const char *text, size_t size, int digits, char decimal_sign,
                             int64_t *time_us)
{
    struct rfade_decimal decimal;
    *time_us = 0;
    if (!rfade_decimal_read(text, size, decimal_sign, &decimal))
        return "is not a number";
    if (digits < 0)
        digits = epoch_digits(text, size);
    if (!rfade_decimal_scaled(&decimal, 6 - digits, time_us))
        return "is out of range";
    return NULL;
}
