/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/time_text.h"

#include <string.h>

#include "ingest/calendar.h"
#include "ingest/number.h"

enum { SECOND_US = 1000000 };

static const char no_iso8601[] = "is not an ISO 8601 time";
static const char no_match[] = "does not match the pattern";
static const char no_day[] = "names a day that does not exist";
static const char no_clock[] = "names a time of day that does not exist";

/* A text being read from the left. Nothing reads at or beyond `end`. */
struct cursor {
    const char *at;
    const char *end;
};

static char peek(const struct cursor *cursor)
{
    if (cursor->at == cursor->end)
        return '\0';
    return *cursor->at;
}

static bool is_digit(char c)
{
    return c >= '0' && c <= '9';
}

static bool skip(struct cursor *cursor, char c)
{
    if (cursor->at == cursor->end || *cursor->at != c)
        return false;
    cursor->at++;
    return true;
}

static void skip_blanks(struct cursor *cursor)
{
    while (cursor->at < cursor->end && (*cursor->at == ' ' || *cursor->at == '\t'))
        cursor->at++;
}

/* At least `least` and at most `most` digits. */
static bool read_digits(struct cursor *cursor, int least, int most, int *value)
{
    int count = 0;
    *value = 0;
    while (count < most && is_digit(peek(cursor))) {
        *value = *value * 10 + (*cursor->at++ - '0');
        count++;
    }
    return count >= least;
}

/* Digits of a fraction of a second, rounded to microseconds; which may be a whole second. */
static bool read_fraction(struct cursor *cursor, int64_t *fraction_us)
{
    int64_t value = 0;
    int count = 0;
    bool up = false;
    for (; is_digit(peek(cursor)); cursor->at++, count++) {
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

/* A fraction if one follows. */
static bool read_optional_fraction(struct cursor *cursor, int64_t *fraction_us)
{
    *fraction_us = 0;
    if (peek(cursor) != '.' && peek(cursor) != ',')
        return true;
    cursor->at++;
    return read_fraction(cursor, fraction_us);
}

/* Z, UTC, +hh, +hhmm or +hh:mm */
static bool read_offset(struct cursor *cursor, struct rfade_clock_time *time)
{
    time->has_offset = true;
    time->offset_s = 0;
    if (skip(cursor, 'Z') || skip(cursor, 'z'))
        return true;
    if (skip(cursor, 'U'))
        return skip(cursor, 'T') && skip(cursor, 'C');
    char sign = peek(cursor);
    int hours = 0;
    int minutes = 0;
    if (sign != '+' && sign != '-')
        return false;
    cursor->at++;
    if (!read_digits(cursor, 2, 2, &hours))
        return false;
    bool colon = skip(cursor, ':');
    if ((colon || is_digit(peek(cursor))) && !read_digits(cursor, 2, 2, &minutes))
        return false;
    time->offset_s = (sign == '-' ? -1 : 1) * (hours * 3600 + minutes * 60);
    return hours <= 15 && minutes <= 59;
}

static const char *set_date(struct rfade_clock_time *time, int year, int month, int day)
{
    if (month < 1 || month > 12 || day < 1 || day > rfade_calendar_month_days(year, month))
        return no_day;
    time->has_date = true;
    time->days = rfade_calendar_days(year, month, day);
    return NULL;
}

static const char *set_clock(struct rfade_clock_time *time, int hour, int minute, int second,
                             int64_t fraction_us)
{
    bool midnight = hour == 24 && minute == 0 && second == 0 && fraction_us == 0;
    if ((hour > 23 && !midnight) || minute > 59 || second > 60)
        return no_clock;
    time->of_day_us =
        ((int64_t)hour * 3600 + (int64_t)minute * 60 + second) * SECOND_US + fraction_us;
    return NULL;
}

static const char *read_iso_date(struct cursor *cursor, struct rfade_clock_time *time)
{
    int year = 0;
    int month = 0;
    int day = 0;
    if (!read_digits(cursor, 4, 4, &year))
        return no_iso8601;
    bool dashes = skip(cursor, '-');
    if (!read_digits(cursor, 2, 2, &month) || (dashes && !skip(cursor, '-')) ||
        !read_digits(cursor, 2, 2, &day))
        return no_iso8601;
    return set_date(time, year, month, day);
}

static const char *read_iso_clock(struct cursor *cursor, struct rfade_clock_time *time)
{
    int hour = 0;
    int minute = 0;
    int second = 0;
    int64_t fraction_us = 0;
    if (!read_digits(cursor, 2, 2, &hour))
        return no_iso8601;
    bool colons = skip(cursor, ':');
    if (!read_digits(cursor, 2, 2, &minute))
        return no_iso8601;
    if (colons ? skip(cursor, ':') : is_digit(peek(cursor)))
        if (!read_digits(cursor, 2, 2, &second) ||
            !read_optional_fraction(cursor, &fraction_us))
            return no_iso8601;
    return set_clock(time, hour, minute, second, fraction_us);
}

const char *rfade_time_iso8601(const char *text, size_t size, struct rfade_clock_time *time)
{
    *time = (struct rfade_clock_time){0};
    struct cursor cursor = {text, text + size};
    skip_blanks(&cursor);
    bool bracket = skip(&cursor, '[');
    bool clock_only = cursor.end - cursor.at >= 5 && cursor.at[2] == ':';
    const char *reason = NULL;
    if (!clock_only) {
        reason = read_iso_date(&cursor, time);
        if (reason)
            return reason;
        if (!skip(&cursor, 'T') && !skip(&cursor, 't')) {
            if (peek(&cursor) != ' ')
                return no_iso8601;
            skip_blanks(&cursor);
        }
    }
    reason = read_iso_clock(&cursor, time);
    if (reason)
        return reason;
    skip_blanks(&cursor);
    if (cursor.at < cursor.end && peek(&cursor) != ']' && !read_offset(&cursor, time))
        return no_iso8601;
    if (bracket && !skip(&cursor, ']'))
        return no_iso8601;
    skip_blanks(&cursor);
    return cursor.at == cursor.end ? NULL : no_iso8601;
}

/* What a pattern has gathered so far. */
struct parts {
    int year, month, day, day_of_year;
    int hour, minute, second;
    int64_t fraction_us;
    int afternoon; /* -1 unless %p was there */
    bool has_day;
    struct rfade_clock_time *time;
};

static bool read_month_name(struct cursor *cursor, int *month)
{
    static const char names[] = "janfebmaraprmayjunjulaugsepoctnovdec";
    if (cursor->end - cursor->at < 3)
        return false;
    for (int i = 0; i < 12; i++) {
        int k = 0;
        while (k < 3 && (cursor->at[k] | 0x20) == names[3 * i + k])
            k++;
        if (k == 3) {
            cursor->at += 3;
            *month = i + 1;
            return true;
        }
    }
    return false;
}

static bool read_half_day(struct cursor *cursor, int *afternoon)
{
    char first = (char)(peek(cursor) | 0x20);
    if (first != 'a' && first != 'p')
        return false;
    cursor->at++;
    *afternoon = first == 'p';
    return skip(cursor, 'm') || skip(cursor, 'M');
}

static bool read_short_year(struct cursor *cursor, int *year)
{
    if (!read_digits(cursor, 2, 2, year))
        return false;
    *year += *year >= 80 ? 1900 : 2000;
    return true;
}

static bool read_day(struct cursor *cursor, struct parts *parts)
{
    parts->has_day = true;
    skip_blanks(cursor);
    return read_digits(cursor, 1, 2, &parts->day);
}

/* One conversion; %T and %F are taken apart by the caller. */
static bool read_conversion(char letter, struct cursor *cursor, struct parts *parts)
{
    switch (letter) {
    case 'Y':
        return read_digits(cursor, 4, 4, &parts->year);
    case 'y':
        return read_short_year(cursor, &parts->year);
    case 'm':
        return read_digits(cursor, 1, 2, &parts->month);
    case 'b':
        return read_month_name(cursor, &parts->month);
    case 'd':
    case 'e':
        return read_day(cursor, parts);
    case 'j':
        return read_digits(cursor, 1, 3, &parts->day_of_year);
    case 'H':
    case 'I':
        return read_digits(cursor, 1, 2, &parts->hour);
    case 'M':
        return read_digits(cursor, 1, 2, &parts->minute);
    case 'S':
        return read_digits(cursor, 1, 2, &parts->second);
    case 'f':
        return read_fraction(cursor, &parts->fraction_us);
    case 'p':
        return read_half_day(cursor, &parts->afternoon);
    case 'z':
        return read_offset(cursor, parts->time);
    default:
        return skip(cursor, letter);
    }
}

/* %S takes a fraction along unless the pattern goes on with the sign itself. */
static bool read_seconds_fraction(char next, struct cursor *cursor, struct parts *parts)
{
    if (next == '.' || next == ',')
        return true;
    return read_optional_fraction(cursor, &parts->fraction_us);
}

static bool match(const char *pattern, struct cursor *cursor, struct parts *parts)
{
    for (const char *p = pattern; *p; p++) {
        bool matched = true;
        if (*p == ' ' || *p == '\t') {
            skip_blanks(cursor);
        } else if (*p != '%') {
            matched = skip(cursor, *p);
        } else {
            p++;
            if (*p == 'T')
                matched = match("%H:%M:%S", cursor, parts);
            else if (*p == 'F')
                matched = match("%Y-%m-%d", cursor, parts);
            else
                matched = read_conversion(*p, cursor, parts);
            if (matched && *p == 'S')
                matched = read_seconds_fraction(p[1], cursor, parts);
        }
        if (!matched)
            return false;
    }
    return true;
}

/* The day out of year and month and day, or year and day of year. */
static const char *take_day(struct parts *parts)
{
    if (parts->has_day)
        return set_date(parts->time, parts->year, parts->month, parts->day);
    if (parts->day_of_year < 0)
        return NULL;
    int days = rfade_calendar_is_leap(parts->year) ? 366 : 365;
    if (parts->day_of_year < 1 || parts->day_of_year > days)
        return no_day;
    parts->time->has_date = true;
    parts->time->days = rfade_calendar_days(parts->year, 1, 1) + parts->day_of_year - 1;
    return NULL;
}

const char *rfade_time_pattern(const char *pattern, const char *text, size_t size,
                               struct rfade_clock_time *time)
{
    *time = (struct rfade_clock_time){0};
    struct cursor cursor = {text, text + size};
    struct parts parts = {.afternoon = -1, .day_of_year = -1, .time = time};
    skip_blanks(&cursor);
    if (!match(pattern, &cursor, &parts))
        return no_match;
    skip_blanks(&cursor);
    if (cursor.at != cursor.end)
        return no_match;
    if (parts.afternoon >= 0) {
        if (parts.hour < 1 || parts.hour > 12)
            return no_clock;
        parts.hour = parts.hour % 12 + 12 * parts.afternoon;
    }
    const char *reason = take_day(&parts);
    if (reason)
        return reason;
    return set_clock(time, parts.hour, parts.minute, parts.second, parts.fraction_us);
}

/* The conversions of a pattern as a text of their letters, %T and %F taken apart. */
static const char *list_conversions(const char *pattern, char *letters, size_t capacity)
{
    size_t count = 0;
    for (const char *p = pattern; *p; p++) {
        if (*p != '%')
            continue;
        p++;
        if (*p == '\0' || !strchr("YymbdejHIMSfpzTF%", *p))
            return "has a conversion that is not known";
        const char *add = *p == 'T' ? "HMS" : *p == 'F' ? "Ymd" : "";
        size_t size = *add ? 3 : 1;
        if (count + size >= capacity)
            return "has too many conversions";
        memcpy(letters + count, *add ? add : p, size);
        count += size;
    }
    letters[count] = '\0';
    return NULL;
}

const char *rfade_time_pattern_check(const char *pattern)
{
    char letters[64];
    const char *reason = list_conversions(pattern, letters, sizeof letters);
    if (reason)
        return reason;
    bool year = strpbrk(letters, "Yy") != NULL;
    bool month = strpbrk(letters, "mb") != NULL;
    bool day = strpbrk(letters, "de") != NULL;
    bool day_of_year = strchr(letters, 'j') != NULL;
    if (!strpbrk(letters, "HI"))
        return "has no hour (%H or %I)";
    if ((strchr(letters, 'I') != NULL) != (strchr(letters, 'p') != NULL))
        return "needs both %I and %p, or %H";
    if ((year || month || day) &&
        !(year && ((month && day) || (day_of_year && !month && !day))))
        return "has part of a date only";
    if (day_of_year && (!year || day))
        return "needs %j with the year alone";
    return NULL;
}

/* Decimal places of the unit, from the digits before the decimal sign. */
static int epoch_digits(const char *text, size_t size)
{
    size_t digits = 0;
    size_t i = 0;
    while (i < size && (text[i] == ' ' || text[i] == '+'))
        i++;
    for (; i < size && is_digit(text[i]); i++)
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
