/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "predict/rate_grid.h"

#include <math.h>
#include <stdlib.h>

/* 280 dB either way, as long as that is not too many; what lies beyond is worked out every
 * time. */
static const double reach_nepers = 64.0;
static const double reach_max = 8192.0;

void rfade_rate_grid_init(struct rfade_rate_grid *grid, double step)
{
    *grid =
        (struct rfade_rate_grid){step, (long)fmin(ceil(reach_nepers / step), reach_max), NULL};
}

void rfade_rate_grid_clear(struct rfade_rate_grid *grid)
{
    free(grid->rates);
    grid->rates = NULL;
}

struct rfade_error_rate *rfade_rate_grid_place(struct rfade_rate_grid *grid, long index)
{
    const size_t count = 2 * (size_t)grid->reach + 1;
    if (labs(index) > grid->reach) {
        return NULL;
    }
    if (grid->rates == NULL) {
        grid->rates = malloc(count * sizeof *grid->rates);
        for (size_t i = 0; grid->rates != NULL && i < count; i++) {
            grid->rates[i].bit = -1.0;
        }
    }
    return grid->rates == NULL ? NULL : &grid->rates[index + grid->reach];
}
