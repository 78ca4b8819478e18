/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file time_cursor.h  The parts of a time written as text. Private to time_text.h. */
#ifndef ROUTEFADE_INGEST_TIME_CURSOR_H
#define ROUTEFADE_INGEST_TIME_CURSOR_H

#include "ingest/time_text.h"

/** A text being read from the left. Nothing reads at or beyond `end`. */
struct rfade_cursor {
    const char *at;
    const char *end;
};

bool rfade_is_digit(char c);

/* Each reads on; false: there is no such part. */

char rfade_cursor_peek(const struct rfade_cursor *cursor);

bool rfade_cursor_skip(struct rfade_cursor *cursor, char c);

void rfade_cursor_skip_blanks(struct rfade_cursor *cursor);

/** At least `least` and at most `most` digits. */
bool rfade_cursor_digits(struct rfade_cursor *cursor, int least, int most, int *value);

/** Digits of a fraction of a second, rounded to microseconds; which may be a whole second. */
bool rfade_cursor_fraction(struct rfade_cursor *cursor, int64_t *fraction_us);

/** A fraction if one follows. */
bool rfade_cursor_optional_fraction(struct rfade_cursor *cursor, int64_t *fraction_us);

/** Z, UTC, +hh, +hhmm or +hh:mm */
bool rfade_cursor_offset(struct rfade_cursor *cursor, struct rfade_clock_time *time);

/** These return NULL, or why there is no such day or time: a plain clause, static storage. */
const char *rfade_clock_time_set_date(struct rfade_clock_time *time, int year, int month,
                                      int day);

const char *rfade_clock_time_set_clock(struct rfade_clock_time *time, int hour, int minute,
                                       int second, int64_t fraction_us);

#endif
