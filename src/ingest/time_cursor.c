/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/time_cursor.h"

#include "ingest/calendar.h"

enum { SECOND_US = 1000000 };

static const char no_day[] = "names a day that does not exist";
static const char no_clock[] = "names a time of day that does not exist";

char rfade_cursor_peek(const struct rfade_cursor *cursor)
{
    if (cursor->at == cursor->end)
        return '\0';
    return *cursor->at;
}

bool rfade_is_digit(char c)
{
    return c >= '0' && c <= '9';
}

bool rfade_cursor_skip(struct rfade_cursor *cursor, char c)
{
    if (cursor->at == cursor->end || *cursor->at != c)
        return false;
    cursor->at++;
    return true;
}

void rfade_cursor_skip_blanks(struct rfade_cursor *cursor)
{
    while (cursor->at < cursor->end && (*cursor->at == ' ' || *cursor->at == '\t'))
        cursor->at++;
}

bool rfade_cursor_digits(struct rfade_cursor *cursor, int least, int most, int *value)
{
    int count = 0;
    *value = 0;
    while (count < most && rfade_is_digit(rfade_cursor_peek(cursor))) {
        *value = *value * 10 + (*cursor->at++ - '0');
        count++;
    }
    return count >= least;
}

bool rfade_cursor_fraction(struct rfade_cursor *cursor, int64_t *fraction_us)
{
    int64_t value = 0;
    int count = 0;
    bool up = false;
    for (; rfade_is_digit(rfade_cursor_peek(cursor)); cursor->at++, count++) {
        if (count < 6)
            value = value * 10 + (*cursor->at - '0');
        else if (count == 6)
            up = *cursor->at >= '5';
    }
    for (int i = count; i < 6; i++)
        value *= 10;
    *fraction_us = value + up;
    return count > 0;
}

bool rfade_cursor_optional_fraction(struct rfade_cursor *cursor, int64_t *fraction_us)
{
    *fraction_us = 0;
    if (rfade_cursor_peek(cursor) != '.' && rfade_cursor_peek(cursor) != ',')
        return true;
    cursor->at++;
    return rfade_cursor_fraction(cursor, fraction_us);
}

bool rfade_cursor_offset(struct rfade_cursor *cursor, struct rfade_clock_time *time)
{
    time->has_offset = true;
    time->offset_s = 0;
    if (rfade_cursor_skip(cursor, 'Z') || rfade_cursor_skip(cursor, 'z'))
        return true;
    if (rfade_cursor_skip(cursor, 'U'))
        return rfade_cursor_skip(cursor, 'T') && rfade_cursor_skip(cursor, 'C');
    char sign = rfade_cursor_peek(cursor);
    int hours = 0;
    int minutes = 0;
    if (sign != '+' && sign != '-')
        return false;
    cursor->at++;
    if (!rfade_cursor_digits(cursor, 2, 2, &hours))
        return false;
    bool colon = rfade_cursor_skip(cursor, ':');
    if ((colon || rfade_is_digit(rfade_cursor_peek(cursor))) &&
        !rfade_cursor_digits(cursor, 2, 2, &minutes))
        return false;
    time->offset_s = (sign == '-' ? -1 : 1) * (hours * 3600 + minutes * 60);
    return hours <= 15 && minutes <= 59;
}

const char *rfade_clock_time_set_date(struct rfade_clock_time *time, int year, int month,
                                      int day)
{
    if (month < 1 || month > 12 || day < 1 || day > rfade_calendar_month_days(year, month))
        return no_day;
    time->has_date = true;
    time->days = rfade_calendar_days(year, month, day);
    return NULL;
}

const char *rfade_clock_time_set_clock(struct rfade_clock_time *time, int hour, int minute,
                                       int second, int64_t fraction_us)
{
    bool midnight = hour == 24 && minute == 0 && second == 0 && fraction_us == 0;
    if ((hour > 23 && !midnight) || minute > 59 || second > 60)
        return no_clock;
    time->of_day_us =
        ((int64_t)hour * 3600 + (int64_t)minute * 60 + second) * SECOND_US + fraction_us;
    return NULL;
}
