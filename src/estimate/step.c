/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "routefade/estimate.h"

#include <math.h>
#include <stdbool.h>
#include <stdint.h>

/* Steps that receivers report in, centi-dB. */
static const int64_t USUAL_STEPS_CDB[] = {300, 200, 100, 50, 25, 20, 10, 5, 2, 1};

/*
 * n changes of level in steps of 1 dB are all even by chance once in 2^n times; under 30 of
 * them a step above 1 dB is not believed.
 */
enum { CHANGES_FOR_COARSE = 30, NO_CHANGE_NEEDED_CDB = 100 };

/*
 * A decimal with two places differs from its double by at most 2^-53 of itself; levels in
 * dBm are below 1e4. What comes from an amplitude or a power through a logarithm is on no
 * grid, and meets this tolerance by chance in one of 50,000 readings.
 */
static const double TOLERANCE_CDB = 1e-5;

static int64_t greatest_common_divisor(int64_t a, int64_t b)
{
    while (b != 0) {
        int64_t rest = a % b;
        a = b;
        b = rest;
    }
    return a;
}

static bool to_cdb(double level_dbm, int64_t *level_cdb)
{
    double scaled = level_dbm * 100.0;
    double whole = nearbyint(scaled);
    if (!(fabs(scaled) < 1e9) || fabs(scaled - whole) > TOLERANCE_CDB) {
        return false;
    }
    *level_cdb = (int64_t)whole;
    return true;
}

double rfade_find_step_db(const double *levels_dbm, size_t count)
{
    int64_t first = 0;
    int64_t before = 0;
    int64_t divisor = 0;
    size_t changes = 0;
    for (size_t i = 0; i < count; i++) {
        int64_t level = 0;
        if (!to_cdb(levels_dbm[i], &level)) {
            return 0.0;
        }
        if (i == 0) {
            first = level;
        }
        int64_t apart = level > first ? level - first : first - level;
        divisor = greatest_common_divisor(divisor, apart);
        changes += i > 0 && level != before;
        before = level;
    }
    if (divisor == 0) {
        /* One value only: its own last decimal is all there is, up to 1 dB. */
        divisor = greatest_common_divisor(100, first < 0 ? -first : first);
    }
    size_t steps = sizeof USUAL_STEPS_CDB / sizeof *USUAL_STEPS_CDB;
    for (size_t i = 0; i < steps; i++) {
        bool believed =
            changes >= CHANGES_FOR_COARSE || USUAL_STEPS_CDB[i] <= NO_CHANGE_NEEDED_CDB;
        if (believed && divisor % USUAL_STEPS_CDB[i] == 0) {
            return (double)USUAL_STEPS_CDB[i] / 100.0;
        }
    }
    return 0.0;
}
