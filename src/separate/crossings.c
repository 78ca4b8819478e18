/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Level crossings along a pass.
 *
 * A reading lies below a level where its reported level less its own local mean is below it.
 * Receivers round: what was below the edge between two steps is reported as below, so that each
 * reading is held against the edge nearest to the level, at most half a step off. The local
 * mean moves by more than a step along a segment or two, and takes the edge from one side of
 * the level to the other: over many segments what is left is the mean of the rate over a step
 * (rfade_step_crossing_factor), which is 0.1 % for Rayleigh fading and 1 dB.
 *
 * A crossing lies between two readings next to each other; travel between them that exceeds
 * the wavelength says nothing, and ends a fade. Of the readings at one place (a vehicle that
 * stands) the first counts: what happened meanwhile happened in time, not along the way. A
 * reading at the floor or ceiling lies below or above its own bound. Where the level is on the
 * far side of that bound it is not known to be above or below; the travel on either side of it
 * is then `hidden`.
 */
#include <math.h>
#include <stdbool.h>
#include <string.h>

#include "separate/pass.h"

const int32_t rfade_crossing_levels_cdb[RFADE_CROSSING_LEVELS] = {
    500, 0, -300, -500, -1000, -1500, -2000, -2500, -3000};

enum side { UNKNOWN, BELOW, ABOVE };

/* What a reading says: its level about the local mean lies between the two, cdB. */
struct sight {
    double low_cdb;
    double high_cdb;
};

static struct sight sight_of(const struct rfade_pass *pass, size_t i)
{
    const struct rfade_receiver *receiver = &pass->receiver;
    double mean_cdb = pass->local_mean_cdb[i];
    int32_t level_cdb = pass->readings[i].level_cdb;
    double half_step_cdb = 0.5 * receiver->step_cdb;

    if (level_cdb <= receiver->floor_cdb) {
        return (struct sight){-INFINITY, receiver->floor_cdb + half_step_cdb - mean_cdb};
    }
    if (level_cdb >= receiver->ceiling_cdb) {
        return (struct sight){receiver->ceiling_cdb - half_step_cdb - mean_cdb, INFINITY};
    }
    return (struct sight){level_cdb - mean_cdb, level_cdb - mean_cdb};
}

static enum side side_of(struct sight sight, double level_cdb)
{
    if (isinf(sight.low_cdb)) {
        return sight.high_cdb <= level_cdb ? BELOW : UNKNOWN;
    }
    if (isinf(sight.high_cdb)) {
        return sight.low_cdb >= level_cdb ? ABOVE : UNKNOWN;
    }
    return sight.low_cdb < level_cdb ? BELOW : ABOVE;
}

/* A fade that lasts on. */
struct fade {
    int64_t mm;
    int64_t us;
};

/* The way from one reading to the next. */
struct step {
    struct sight before;
    struct sight after;
    int64_t mm;
    int64_t us;
};

static void count_step(const struct step *step, double level_cdb, struct fade *fade,
                       struct rfade_level_crossings *level)
{
    enum side before = side_of(step->before, level_cdb);
    enum side after = side_of(step->after, level_cdb);
    struct fade part = {0, 0};

    if (before == UNKNOWN || after == UNKNOWN) {
        level->hidden_mm += step->mm;
        *fade = part;
        return;
    }
    level->exposed_mm += step->mm;
    if (before == BELOW) {
        part = (struct fade){step->mm / 2, step->us / 2};
    }
    if (after == BELOW) {
        part.mm += step->mm - step->mm / 2;
        part.us += step->us - step->us / 2;
    }
    level->crossings += before == ABOVE && after == BELOW;
    level->below_mm += part.mm;
    fade->mm += part.mm;
    fade->us += part.us;
    level->longest_mm = fade->mm > level->longest_mm ? fade->mm : level->longest_mm;
    level->longest_us = fade->us > level->longest_us ? fade->us : level->longest_us;
    if (after == ABOVE) {
        *fade = (struct fade){0, 0};
    }
}

/* The last place before a run: its first reading with weight, or the pass's count. */
static size_t place_before(const struct rfade_pass *pass, size_t from, int64_t *left_us)
{
    size_t place = pass->count;

    for (size_t i = from; i-- > 0;) {
        bool here = place < pass->count &&
                    pass->readings[i].travel_mm == pass->readings[place].travel_mm;

        if (place < pass->count && !here) {
            break;
        }
        if (pass->weight_mm[i] > 0) {
            *left_us = place < pass->count ? *left_us : pass->readings[i].time_us;
            place = i;
        }
    }
    return place;
}

/* The counting along a run: the place that was reached, and the fades that last on. */
struct walk {
    size_t place; /* index of its first reading; the pass's count: none yet */
    int64_t left_us;
    struct step step;
    struct fade fades[RFADE_CROSSING_LEVELS];
};

static void count_levels(struct walk *walk, struct rfade_crossings *crossings)
{
    const struct step *step = &walk->step;

    crossings->travel_mm += step->mm;
    crossings->moving_us += step->us;
    crossings->square_mm2 += step->mm * step->mm;
    for (int i = 0; i < RFADE_CROSSING_LEVELS; i++) {
        count_step(step, rfade_crossing_levels_cdb[i], &walk->fades[i], &crossings->level[i]);
    }
}

static void walk_to(const struct rfade_pass *pass, size_t i, struct walk *walk,
                    struct rfade_crossings *crossings)
{
    const struct rfade_track_reading *reading = &pass->readings[i];
    bool first = walk->place == pass->count;

    walk->step.before = walk->step.after;
    walk->step.after = sight_of(pass, i);
    walk->step.mm = first ? 0 : reading->travel_mm - pass->readings[walk->place].travel_mm;
    walk->step.us = reading->time_us - walk->left_us;
    walk->place = i;
    walk->left_us = reading->time_us;
    if (!first && walk->step.mm <= 2 * pass->half_wave_mm) {
        count_levels(walk, crossings);
    } else {
        memset(walk->fades, 0, sizeof walk->fades);
    }
}

void rfade_pass_crossings(const struct rfade_pass *pass, struct rfade_range run,
                          struct rfade_crossings *crossings)
{
    struct walk walk = {.left_us = 0};

    *crossings = (struct rfade_crossings){0};
    walk.place = place_before(pass, run.from, &walk.left_us);
    if (walk.place < pass->count) {
        walk.step.after = sight_of(pass, walk.place);
    }
    for (size_t i = run.from; i < run.to; i++) {
        const struct rfade_track_reading *reading = &pass->readings[i];

        if (walk.place < pass->count &&
            reading->travel_mm == pass->readings[walk.place].travel_mm) {
            walk.left_us = reading->time_us;
        } else if (pass->weight_mm[i] > 0) {
            walk_to(pass, i, &walk, crossings);
        }
    }
}
