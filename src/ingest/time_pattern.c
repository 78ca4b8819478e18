/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <string.h>

#include "ingest/calendar.h"
#include "ingest/time_cursor.h"

static const char no_match[] = "does not match the pattern";
static const char no_day[] = "names a day that does not exist";
static const char no_clock[] = "names a time of day that does not exist";

/* What a pattern has gathered so far. */
struct parts {
    int year, month, day, day_of_year;
    int hour, minute, second;
    int64_t fraction_us;
    int afternoon; /* -1 unless %p was there */
    bool has_day;
    struct rfade_clock_time *time;
};

static bool read_month_name(struct rfade_cursor *cursor, int *month)
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

static bool read_half_day(struct rfade_cursor *cursor, int *afternoon)
{
    char first = (char)(rfade_cursor_peek(cursor) | 0x20);
    if (first != 'a' && first != 'p')
        return false;
    cursor->at++;
    *afternoon = first == 'p';
    return rfade_cursor_skip(cursor, 'm') || rfade_cursor_skip(cursor, 'M');
}

static bool read_short_year(struct rfade_cursor *cursor, int *year)
{
    if (!rfade_cursor_digits(cursor, 2, 2, year))
        return false;
    *year += *year >= 80 ? 1900 : 2000;
    return true;
}

static bool read_day(struct rfade_cursor *cursor, struct parts *parts)
{
    parts->has_day = true;
    rfade_cursor_skip_blanks(cursor);
    return rfade_cursor_digits(cursor, 1, 2, &parts->day);
}

/* One conversion; %T and %F are taken apart by the caller. */
static bool read_conversion(char letter, struct rfade_cursor *cursor, struct parts *parts)
{
    switch (letter) {
    case 'Y':
        return rfade_cursor_digits(cursor, 4, 4, &parts->year);
    case 'y':
        return read_short_year(cursor, &parts->year);
    case 'm':
        return rfade_cursor_digits(cursor, 1, 2, &parts->month);
    case 'b':
        return read_month_name(cursor, &parts->month);
    case 'd':
    case 'e':
        return read_day(cursor, parts);
    case 'j':
        return rfade_cursor_digits(cursor, 1, 3, &parts->day_of_year);
    case 'H':
    case 'I':
        return rfade_cursor_digits(cursor, 1, 2, &parts->hour);
    case 'M':
        return rfade_cursor_digits(cursor, 1, 2, &parts->minute);
    case 'S':
        return rfade_cursor_digits(cursor, 1, 2, &parts->second);
    case 'f':
        return rfade_cursor_fraction(cursor, &parts->fraction_us);
    case 'p':
        return read_half_day(cursor, &parts->afternoon);
    case 'z':
        return rfade_cursor_offset(cursor, parts->time);
    default:
        return rfade_cursor_skip(cursor, letter);
    }
}

/* %S takes a fraction along unless the pattern goes on with the sign itself. */
static bool read_seconds_fraction(char next, struct rfade_cursor *cursor, struct parts *parts)
{
    if (next == '.' || next == ',')
        return true;
    return rfade_cursor_optional_fraction(cursor, &parts->fraction_us);
}

static bool match(const char *pattern, struct rfade_cursor *cursor, struct parts *parts)
{
    for (const char *p = pattern; *p; p++) {
        bool matched = true;
        if (*p == ' ' || *p == '\t') {
            rfade_cursor_skip_blanks(cursor);
        } else if (*p != '%') {
            matched = rfade_cursor_skip(cursor, *p);
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
        return rfade_clock_time_set_date(parts->time, parts->year, parts->month, parts->day);
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
    struct rfade_cursor cursor = {text, text + size};
    struct parts parts = {.afternoon = -1, .day_of_year = -1, .time = time};
    rfade_cursor_skip_blanks(&cursor);
    if (!match(pattern, &cursor, &parts))
        return no_match;
    rfade_cursor_skip_blanks(&cursor);
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
    return rfade_clock_time_set_clock(time, parts.hour, parts.minute, parts.second,
                                      parts.fraction_us);
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
