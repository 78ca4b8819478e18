/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file calendar.h  Days of the proleptic Gregorian calendar (ISO 8601). Pure functions. */
#ifndef ROUTEFADE_INGEST_CALENDAR_H
#define ROUTEFADE_INGEST_CALENDAR_H

#include <stdbool.h>
#include <stdint.h>

/** Days from 1970-01-01 to a date. Year in [0, 9999], month in [1, 12], day from 1. */
int64_t rfade_calendar_days(int year, int month, int day);

/** Year that a day since 1970-01-01 lies in. */
int rfade_calendar_year(int64_t days);

bool rfade_calendar_is_leap(int year);

/** Number of days of a month in [1, 12]. */
int rfade_calendar_month_days(int year, int month);

#endif
