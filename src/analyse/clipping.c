/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analyse/clipping.h"

#include <math.h>
#include <stdbool.h>

#include "routefade/separate.h"

static const double LEAST_COUNT = 20.0;
static const double LEAST_RATIO = 2.0;
static const double LEAST_ERRORS = 4.0;
enum { LEAST_RUNS = 10, LEAST_OTHER_LEVELS = 5, NEXT_LEVELS = 4 };

/* The readings about one end of the range. */
struct end {
    size_t at_end; /* readings at the extreme level */
    size_t runs;   /* of them, how many lie next to no other in time */
    size_t longest_run;
    size_t next[NEXT_LEVELS]; /* readings one to four steps further in */
    uint64_t levels;          /* a bit for each level further in, by its step modulo 64 */
};

/* Levels from the end inwards are counted upwards; `sign` turns the ceiling into a floor. */
static struct end look_at_end(const struct rfade_survey_reading *readings, size_t count,
                              int32_t step_cdb, int32_t sign, int32_t end_cdb)
{
    struct end end = {0};
    size_t run = 0;
    for (size_t i = 0; i < count; i++) {
        int32_t steps = (sign * readings[i].level_cdb - end_cdb) / step_cdb;
        if (steps > 0) {
            run = 0;
            end.levels |= (uint64_t)1 << (steps % 64);
            if (steps <= NEXT_LEVELS)
                end.next[steps - 1]++;
            continue;
        }
        end.runs += run == 0;
        end.at_end++;
        run++;
        if (run > end.longest_run)
            end.longest_run = run;
    }
    return end;
}

static int bits(uint64_t word)
{
    int count = 0;
    for (; word; word &= word - 1)
        count++;
    return count;
}

static bool is_pile_up(const struct end *end)
{
    if (end->runs < LEAST_RUNS || bits(end->levels) < LEAST_OTHER_LEVELS)
        return false;
    double counted = (double)(end->at_end - end->longest_run);
    /* Half a reading more keeps the expectation above 0 where levels are sparse. */
    double near = (double)(end->next[0] + end->next[1]) + 0.5;
    double far = (double)(end->next[2] + end->next[3]) + 0.5;
    double ratio = sqrt(near / far);
    double expected = near * ratio * ratio / (1.0 + ratio);
    /* First-order errors of ln(expected) by ln(near) and ln(far). */
    double by_far = 1.0 - 0.5 * ratio / (1.0 + ratio);
    double by_near = 1.0 + by_far;
    double expected_error = expected * sqrt(by_near * by_near / near + by_far * by_far / far);
    double readings_a_run = (double)end->at_end / (double)end->runs;
    double error = sqrt(readings_a_run * (counted + expected_error * expected_error));
    return counted >= LEAST_COUNT && counted > LEAST_RATIO * expected &&
           counted - expected > LEAST_ERRORS * error;
}

struct rfade_clipping rfade_find_clipping(const struct rfade_survey_reading *readings,
                                          size_t count, int32_t step_cdb)
{
    struct rfade_clipping found = {RFADE_NO_FLOOR_CDB, RFADE_NO_CEILING_CDB};
    if (count == 0)
        return found;
    int32_t lowest_cdb = readings[0].level_cdb, highest_cdb = lowest_cdb;
    for (size_t i = 1; i < count; i++) {
        lowest_cdb = readings[i].level_cdb < lowest_cdb ? readings[i].level_cdb : lowest_cdb;
        highest_cdb = readings[i].level_cdb > highest_cdb ? readings[i].level_cdb : highest_cdb;
    }
    struct end low = look_at_end(readings, count, step_cdb, 1, lowest_cdb);
    struct end high = look_at_end(readings, count, step_cdb, -1, -highest_cdb);
    if (is_pile_up(&low))
        found.floor_cdb = lowest_cdb;
    if (is_pile_up(&high))
        found.ceiling_cdb = highest_cdb;
    return found;
}
