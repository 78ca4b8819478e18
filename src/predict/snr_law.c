/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * In the logarithm of the SNR, y, densities and error rates are analytic and the trapezoidal
 * rule on the whole line converges exponentially. A density of spread s grows by exp(eta^2/(2
 * s^2)) on the line Im y = eta, and the rate at most as much again where the two meet; against
 * exp(-2 pi eta/step) a step of s/2 leaves 1e-16, as long as eta stays below pi/2: hence at
 * most 1/4.
 */
#include "predict/snr_law.h"

#include <math.h>
#include <stdlib.h>

#include "model/model.h"
#include "predict/branches.h"

static const double step_limit = 0.25;

/* Place of the upper end, in steps. */
static long upper_end(const struct rfade_link *link, double step, double log_depth)
{
    double peak = -INFINITY;
    for (long i = 0;; i++) {
        const double log_density =
            rfade_branches_log_density(link, (double)i * step * RFADE_DB_PER_NEPER_OF_POWER);
        peak = fmax(peak, log_density);
        if (log_density < peak - log_depth) {
            return i;
        }
    }
}

double rfade_snr_law_step(const struct rfade_link *link)
{
    double spread = rfade_branches_spread(link);
    if (link->combining == RFADE_SELECTION) {
        spread /= sqrt(link->branches);
    }
    return fmin(0.5 * spread, step_limit);
}

void rfade_snr_law_init(struct rfade_snr_law *law, const struct rfade_link *link,
                        double step_max, double log_depth)
{
    *law = (struct rfade_snr_law){.link = *link};
    law->step = fmin(rfade_snr_law_step(link), step_max);
    law->first = upper_end(link, law->step, log_depth);
}

void rfade_snr_law_clear(struct rfade_snr_law *law)
{
    free(law->nodes);
    law->nodes = NULL;
    law->count = 0;
    law->capacity = 0;
}

double rfade_snr_law_place(const struct rfade_snr_law *law, size_t index)
{
    return (double)(law->first - (long)index) * law->step;
}

static enum rfade_status grow(struct rfade_snr_law *law)
{
    const size_t capacity = law->capacity == 0 ? 256 : 2 * law->capacity;
    struct rfade_snr_node *more = realloc(law->nodes, capacity * sizeof *more);
    if (more == NULL) {
        return RFADE_NO_MEMORY;
    }
    law->nodes = more;
    law->capacity = capacity;
    return RFADE_OK;
}

enum rfade_status rfade_snr_law_node(struct rfade_snr_law *law, size_t index,
                                     struct rfade_snr_node *node)
{
    while (law->count <= index) {
        if (law->count == law->capacity && grow(law) != RFADE_OK) {
            return RFADE_NO_MEMORY;
        }
        const double x_db = rfade_snr_law_place(law, law->count) * RFADE_DB_PER_NEPER_OF_POWER;
        const double log_mass = log(law->step) + rfade_branches_log_density(&law->link, x_db);
        law->nodes[law->count++] = (struct rfade_snr_node){exp(log_mass), log_mass};
    }
    *node = law->nodes[index];
    return RFADE_OK;
}
