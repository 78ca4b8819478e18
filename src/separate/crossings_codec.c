/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Crossings added up, and as bytes. */
#include "routefade/crossings.h"

#include "separate/integers.h"
#include "tally/checked.h"

static bool add_level(struct rfade_level_crossings *sum,
                      const struct rfade_level_crossings *other)
{
    if (other->longest_mm > sum->longest_mm) {
        sum->longest_mm = other->longest_mm;
    }
    if (other->longest_us > sum->longest_us) {
        sum->longest_us = other->longest_us;
    }
    return rfade_checked_add(sum->crossings, other->crossings, &sum->crossings) &&
           rfade_checked_add(sum->exposed_mm, other->exposed_mm, &sum->exposed_mm) &&
           rfade_checked_add(sum->below_mm, other->below_mm, &sum->below_mm) &&
           rfade_checked_add(sum->hidden_mm, other->hidden_mm, &sum->hidden_mm);
}

enum rfade_status rfade_crossings_merge(struct rfade_crossings *sum,
                                        const struct rfade_crossings *other)
{
    struct rfade_crossings total = *sum;
    bool fits = rfade_checked_add(total.travel_mm, other->travel_mm, &total.travel_mm) &&
                rfade_checked_add(total.moving_us, other->moving_us, &total.moving_us) &&
                rfade_checked_add(total.square_mm2, other->square_mm2, &total.square_mm2);

    for (int i = 0; i < RFADE_CROSSING_LEVELS && fits; i++) {
        fits = add_level(&total.level[i], &other->level[i]);
    }
    if (!fits) {
        return RFADE_OVERFLOW;
    }
    *sum = total;
    return RFADE_OK;
}

enum rfade_status rfade_crossings_encode(const struct rfade_crossings *crossings,
                                         uint8_t **bytes, size_t *size)
{
    return rfade_integers_encode(crossings, sizeof *crossings, bytes, size);
}

enum rfade_status rfade_crossings_decode(const uint8_t *bytes, size_t size,
                                         struct rfade_crossings *crossings)
{
    return rfade_integers_decode(bytes, size, crossings, sizeof *crossings);
}
