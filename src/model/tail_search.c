/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "model/tail_search.h"

#include <float.h>
#include <math.h>

enum { ITERATIONS_MAX = 200 };

enum rfade_status rfade_tail_search(const struct rfade_tail_search *search, double *x_db)
{
    double low = -search->limit_db;
    double high = search->limit_db;
    double x = 0.0;
    for (int i = 0; i < ITERATIONS_MAX; i++) {
        struct rfade_tail_place place = {NAN, NAN};
        const enum rfade_status status = search->look_at(search, x, &place);
        if (status != RFADE_OK) {
            return status;
        }
        const double error = place.log_tail - search->log_tail;
        if ((error > 0.0) == search->is_upper) {
            low = x;
        } else {
            high = x;
        }
        const double step = search->step(search, &place);
        const double resolution = DBL_EPSILON * fabs(x);
        if (fabs(error) <= search->good_enough || fabs(step) <= 0.5 * resolution ||
            high - low <= 2.0 * resolution) {
            const double allowed =
                search->forward_tolerance + 2.0 * resolution * fabs(place.slope);
            if (!(fabs(error) <= allowed)) {
                return RFADE_NO_CONVERGENCE;
            }
            *x_db = x;
            return RFADE_OK;
        }
        const double next = x + step;
        x = next > low && next < high ? next : 0.5 * (low + high);
    }
    return RFADE_NO_CONVERGENCE;
}
