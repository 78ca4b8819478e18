/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/clock.h"

#include <stdlib.h>

enum { MOST_KEPT = 8192 };

static const int64_t tolerance_us = 2000000;

struct rfade_clock {
    bool any;
    int64_t gnss_us; /* of the row before */
    size_t changes;
    size_t stride; /* one in so many changes is kept */
    size_t count;
    int64_t differences_us[MOST_KEPT];
};

struct rfade_clock *rfade_clock_create(void)
{
    struct rfade_clock *clock = calloc(1, sizeof *clock);
    if (clock)
        clock->stride = 1;
    return clock;
}

void rfade_clock_destroy(struct rfade_clock *clock)
{
    free(clock);
}

static void thin(struct rfade_clock *clock)
{
    for (size_t i = 0; 2 * i < clock->count; i++)
        clock->differences_us[i] = clock->differences_us[2 * i];
    clock->count /= 2;
    clock->stride *= 2;
}

void rfade_clock_add(struct rfade_clock *clock, int64_t logger_us, int64_t gnss_us)
{
    /* Nobody knows how long the first time has been held. */
    bool changed = clock->any && gnss_us != clock->gnss_us;
    clock->any = true;
    clock->gnss_us = gnss_us;
    if (!changed || clock->changes++ % clock->stride != 0)
        return;
    if (clock->count == MOST_KEPT)
        thin(clock);
    clock->differences_us[clock->count++] = gnss_us - logger_us;
}

static int by_size(const void *left, const void *right)
{
    const int64_t *a = left;
    const int64_t *b = right;
    return *a < *b ? -1 : *a > *b;
}

const char *rfade_clock_offset(struct rfade_clock *clock, int64_t *offset_us)
{
    size_t far = 0;
    *offset_us = 0;
    if (clock->count == 0)
        return "no GNSS time changes from row to row, so that the clock can't be compared";
    qsort(clock->differences_us, clock->count, sizeof *clock->differences_us, by_size);
    int64_t median_us = clock->differences_us[clock->count / 2];
    for (size_t i = 0; i < clock->count; i++) {
        int64_t off_us = clock->differences_us[i] - median_us;
        far += off_us > tolerance_us || off_us < -tolerance_us;
    }
    if (10 * far > clock->count)
        return "the logger's clock was set or runs away: its distance from GNSS time is not "
               "the "
               "same throughout";
    *offset_us = median_us;
    return NULL;
}
