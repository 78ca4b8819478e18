/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file clock.h  How far a logger's clock is off GNSS time, from rows that have both.
 *
 * A receiver's time is held from row to row until the next fix comes. So the two are compared
 * where it changes, and the median is taken: right to half the spacing of rows and whatever
 * time passes from fix to row. Bounded memory: of many changes every second, fourth, ...
 * counts.
 */
#ifndef ROUTEFADE_INGEST_CLOCK_H
#define ROUTEFADE_INGEST_CLOCK_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

struct rfade_clock; /* opaque */

struct rfade_clock *rfade_clock_create(void); /* NULL: no memory */
void rfade_clock_destroy(struct rfade_clock *clock);

/** The next row's two times. */
void rfade_clock_add(struct rfade_clock *clock, int64_t logger_us, int64_t gnss_us);

/**
 * @param[out] offset_us  to be added to the logger's time; 0 on failure
 * @return NULL, or a reason why there is none (a plain sentence, static storage): no row has
 *     GNSS time, or over a tenth of the comparisons are more than 2 s off their median
 */
const char *rfade_clock_offset(struct rfade_clock *clock, int64_t *offset_us);

#endif
