/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file zone_rule.h  The rule by which a zone changes its clocks every year, as the last line
 * of a TZif file has it: a POSIX TZ string (IEEE Std 1003.1-2017, 8.3) with the wider hours
 * of RFC 8536, 3.3.1. Pure functions.
 */
#ifndef ROUTEFADE_INGEST_ZONE_RULE_H
#define ROUTEFADE_INGEST_ZONE_RULE_H

#include <stdbool.h>
#include <stdint.h>

#include "ingest/zone.h"

/** One of the two changes of a year. */
struct rfade_zone_change {
    char
        form; /**< 'J' day 1..365 without 29 February, 'N' day 0..365, 'M' month.week.weekday */
    int day;  /**< of the year; for 'M' the weekday, 0 being Sunday */
    int month;
    int week;       /**< 1..5, 5 being the last */
    int32_t time_s; /**< local time of the change, may be outside the day */
};

struct rfade_zone_rule {
    int32_t standard_s; /**< offsets, local less UTC */
    int32_t summer_s;
    bool changes; /**< false: standard time all year */
    struct rfade_zone_change to_summer;
    struct rfade_zone_change to_standard;
};

/** Reads "CET-1CEST,M3.5.0,M10.5.0/3". False if the text is no such rule. */
bool rfade_zone_rule_read(const char *text, struct rfade_zone_rule *rule);

/** The span of a rule that holds the UTC second `time_s`. */
struct rfade_zone_span rfade_zone_rule_span(const struct rfade_zone_rule *rule, int64_t time_s);

#endif
