/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file efficiency_full.c  The full form: efficiency_full [DRAWS]
 * A line a cell, errors in units of the Cramer-Rao bound: root mean square error of the maximum
 * likelihood estimate as drawn and controlled, its bias beside what Cox and Snell's theory says
 * to first order, root mean square error of the moment estimate; +- one standard error of the
 * simulation. "FAIL" where, at 1,000 readings, the controlled error is above 1.05 or the bias
 * above 0.1 by more than 1.96 of these. Exit status 1 if any cell failed.
 */
#include <gsl/gsl_errno.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>

#include "statistics/efficiency.h"

static const double ks[] = {1.0, 3.0, 10.0, 30.0};
static const double ms[] = {0.6, 1.0, 2.0, 5.0};
static const double steps_db[] = {0.0, 1.0};
static const int counts[] = {1000, 100};

enum { CELLS = 2 * 2 * 2 * 4 };

static struct efficiency_cell cell(int index)
{
    bool rice = index / 4 % 2 == 0;
    return (struct efficiency_cell){rice ? RFADE_RICE : RFADE_NAKAGAMI,
                                    rice ? ks[index % 4] : ms[index % 4],
                                    steps_db[index / 8 % 2], counts[index / 16]};
}

static bool run_cell(int index, int draws)
{
    struct efficiency_cell it = cell(index);
    struct efficiency result;
    if (!efficiency_run(&it, 7001 + (unsigned long)index, draws, &result)) {
        return false;
    }
    const struct efficiency_mean *ratio = &result.ratio, *bias = &result.bias;
    bool sharp = ratio->value - 1.96 * ratio->error <= 1.05;
    bool central = fabs(bias->value) - 1.96 * bias->error <= 0.1;
    bool good = result.failed == 0 && (it.readings < 1000 || (sharp && central));
    printf("%4d readings, %s %-4g step %g: bound %8.5f, error %.3f +- %.3f, controlled %.4f +- "
           "%.4f, bias %+.4f +- %.4f (theory %+.4f), moments %.3f%s\n",
           it.readings, rfade_model(it.model)->parameter_name, it.parameter, it.step_db,
           result.bound.deviation, result.plain.value, result.plain.error, ratio->value,
           ratio->error, bias->value, bias->error, result.bound.bias / result.bound.deviation,
           result.moment.value, good ? "" : " FAIL");
    fflush(stdout);
    return good;
}

int main(int count, char **values)
{
    long draws = count > 1 ? strtol(values[1], NULL, 10) : 2000;
    bool good = draws > 1 && draws < 1000000;
    gsl_set_error_handler_off();
    for (int i = 0; i < CELLS && draws > 1; i++) {
        good &= run_cell(i, (int)draws);
    }
    return good ? EXIT_SUCCESS : EXIT_FAILURE;
}
