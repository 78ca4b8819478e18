/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/zone_rule.h"

#include <string.h>

#include "ingest/calendar.h"

enum { DAY_S = 86400, HOUR_S = 3600, MINUTE_S = 60 };

/* What is left of the text, or NULL once something in it was wrong. */
static const char *read_number(const char *at, int low, int high, int *value)
{
    *value = 0;
    if (!at || *at < '0' || *at > '9')
        return NULL;
    for (; *at >= '0' && *at <= '9'; at++) {
        *value = *value * 10 + (*at - '0');
        if (*value > high)
            return NULL;
    }
    return *value >= low ? at : NULL;
}

/* [+-]h[h[h]][:mm[:ss]] */
static const char *read_clock(const char *at, int most_hours, int32_t *seconds)
{
    *seconds = 0;
    if (!at)
        return NULL;
    int sign = *at == '-' ? -1 : 1;
    if (*at == '-' || *at == '+')
        at++;
    int parts[3] = {0, 0, 0};
    at = read_number(at, 0, most_hours, &parts[0]);
    for (int i = 1; i < 3 && at && *at == ':'; i++)
        at = read_number(at + 1, 0, 59, &parts[i]);
    *seconds = sign * (parts[0] * HOUR_S + parts[1] * MINUTE_S + parts[2]);
    return at;
}

/* Three letters or more, or <...>. */
static const char *skip_name(const char *at)
{
    static const char letters[] = "ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz";
    if (!at)
        return NULL;
    if (*at == '<') {
        const char *end = strchr(at, '>');
        return end ? end + 1 : NULL;
    }
    size_t length = strspn(at, letters);
    return length >= 3 ? at + length : NULL;
}

static const char *expect(const char *at, char c)
{
    return at && *at == c ? at + 1 : NULL;
}

static const char *read_change(const char *at, struct rfade_zone_change *change)
{
    *change = (struct rfade_zone_change){.form = 'N', .time_s = 2 * HOUR_S};
    at = expect(at, ',');
    if (!at)
        return NULL;
    if (*at == 'M') {
        change->form = 'M';
        at = read_number(at + 1, 1, 12, &change->month);
        at = read_number(expect(at, '.'), 1, 5, &change->week);
        at = read_number(expect(at, '.'), 0, 6, &change->day);
    } else if (*at == 'J') {
        change->form = 'J';
        at = read_number(at + 1, 1, 365, &change->day);
    } else {
        at = read_number(at, 0, 365, &change->day);
    }
    if (at && *at == '/')
        at = read_clock(at + 1, 167, &change->time_s);
    return at;
}

bool rfade_zone_rule_read(const char *text, struct rfade_zone_rule *rule)
{
    *rule = (struct rfade_zone_rule){0};
    /* The string counts offsets west of Greenwich. */
    const char *at = read_clock(skip_name(text), 24, &rule->standard_s);
    rule->standard_s = -rule->standard_s;
    if (!at || *at == '\0')
        return at != NULL;
    rule->changes = true;
    rule->summer_s = rule->standard_s + HOUR_S;
    at = skip_name(at);
    if (at && *at != ',') {
        at = read_clock(at, 24, &rule->summer_s);
        rule->summer_s = -rule->summer_s;
    }
    at = read_change(at, &rule->to_summer);
    at = read_change(at, &rule->to_standard);
    return at && *at == '\0';
}

/* Day since 1970 of the change in a year. */
static int64_t change_day(const struct rfade_zone_change *change, int year)
{
    if (change->form == 'N')
        return rfade_calendar_days(year, 1, 1) + change->day;
    if (change->form == 'J') {
        bool after_february = rfade_calendar_is_leap(year) && change->day >= 60;
        return rfade_calendar_days(year, 1, 1) + change->day - 1 + after_february;
    }
    int64_t first = rfade_calendar_days(year, change->month, 1);
    int64_t weekday = (first + 4) % 7; /* 1970-01-01 was a Thursday */
    if (weekday < 0)
        weekday += 7;
    int64_t day = (change->day - weekday + 7) % 7 + 7 * ((int64_t)change->week - 1);
    if (day >= rfade_calendar_month_days(year, change->month))
        day -= 7;
    return first + day;
}

struct rfade_zone_span rfade_zone_rule_span(const struct rfade_zone_rule *rule, int64_t time_s)
{
    struct rfade_zone_span span = {INT64_MIN, INT64_MAX, rule->standard_s};
    if (!rule->changes)
        return span;
    int year = rfade_calendar_year(time_s / DAY_S);
    for (int y = year - 1; y <= year + 1; y++) {
        int64_t summer =
            change_day(&rule->to_summer, y) * DAY_S + rule->to_summer.time_s - rule->standard_s;
        int64_t standard = change_day(&rule->to_standard, y) * DAY_S +
                           rule->to_standard.time_s - rule->summer_s;
        const struct {
            int64_t time_s;
            int32_t offset_s;
        } changes[2] = {{summer, rule->summer_s}, {standard, rule->standard_s}};
        for (int i = 0; i < 2; i++) {
            if (changes[i].time_s <= time_s && changes[i].time_s > span.from_s) {
                span.from_s = changes[i].time_s;
                span.offset_s = changes[i].offset_s;
            } else if (changes[i].time_s > time_s && changes[i].time_s < span.until_s) {
                span.until_s = changes[i].time_s;
            }
        }
    }
    return span;
}
