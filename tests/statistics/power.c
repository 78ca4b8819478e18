/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "statistics/power.h"

#include <gsl/gsl_randist.h>
#include <math.h>
#include <stdlib.h>

#include "estimate/generate.h"
#include "routefade/estimate.h"

static double draw_db(gsl_rng *generator, enum population population)
{
    switch (population) {
    case POPULATION_LOGNORMAL:
        return gsl_ran_gaussian(generator, 6.0);
    case POPULATION_TWO:
        return gsl_rng_uniform(generator) < 0.5 ? draw_rice_db(generator, 10.0)
                                                : draw_rice_db(generator, 0.0) - 10.0;
    default:
        return draw_rice_db(generator, 4.0);
    }
}

static bool judge(const double *levels_dbm, size_t count, struct share *refused)
{
    const struct rfade_column_settings settings = {1.0, NAN, NAN, false, 0.95};
    struct rfade_column_estimate result;
    if (rfade_estimate_column(levels_dbm, count, &settings, &result) != RFADE_OK) {
        return false;
    }
    for (size_t i = 0; i < result.estimate.fit_count; i++) {
        const struct rfade_fit *fit = &result.estimate.fits[i];
        if (fit->model == RFADE_RICE && !isnan(fit->goodness_p)) {
            refused->trials++;
            refused->hits += fit->goodness_p < 0.05 ? 1 : 0;
        }
    }
    return true;
}

bool power_run(const struct power_cell *cell, unsigned long seed, int samples,
               struct share *refused)
{
    size_t repeats = (size_t)cell->repeats;
    size_t count = (size_t)cell->effective * repeats;
    double *levels_dbm = malloc(count * sizeof *levels_dbm);
    gsl_rng *generator = generator_create(seed);
    bool done = levels_dbm != NULL;
    *refused = (struct share){0, 0};
    for (int sample = 0; sample < samples && done; sample++) {
        double level_dbm = NAN;
        for (size_t i = 0; i < count; i++) {
            if (i % repeats == 0) {
                level_dbm = quantise_db(draw_db(generator, cell->population), 1.0) - 85.0;
            }
            levels_dbm[i] = level_dbm;
        }
        done = judge(levels_dbm, count, refused);
    }
    gsl_rng_free(generator);
    free(levels_dbm);
    return done;
}
