/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/calendar.h"

/* Days before each month of a common year. */
static const int days_before[12] = {0, 31, 59, 90, 120, 151, 181, 212, 243, 273, 304, 334};

/* Days from 0000-01-01 to 1970-01-01: 1970 * 365 and a leap day for each of 478 years. */
static const int64_t days_to_1970 = 719528;

bool rfade_calendar_is_leap(int year)
{
    return year % 4 == 0 && (year % 100 != 0 || year % 400 == 0);
}

int rfade_calendar_month_days(int year, int month)
{
    if (month == 2)
        return rfade_calendar_is_leap(year) ? 29 : 28;
    return month == 4 || month == 6 || month == 9 || month == 11 ? 30 : 31;
}

/* Days from 0000-01-01 to the first of January of `year`, year 0 being a leap year. */
static int64_t days_before_year(int year)
{
    if (year <= 0)
        return (int64_t)year * 366;
    int64_t last = year - 1;
    return (int64_t)year * 365 + last / 4 - last / 100 + last / 400 + 1;
}

int64_t rfade_calendar_days(int year, int month, int day)
{
    int64_t days = days_before_year(year) + days_before[month - 1] + day - 1;
    if (month > 2 && rfade_calendar_is_leap(year))
        days++;
    return days - days_to_1970;
}

int rfade_calendar_year(int64_t days)
{
    /* 146097 days are 400 years. The guess is at most a year off, either way. */
    int year = (int)((days + days_to_1970) * 400 / 146097);
    while (rfade_calendar_days(year, 1, 1) > days)
        year--;
    while (rfade_calendar_days(year + 1, 1, 1) <= days)
        year++;
    return year;
}
