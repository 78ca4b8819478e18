/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "estimate/generate.h"

#include <gsl/gsl_errno.h>
#include <gsl/gsl_randist.h>
#include <math.h>

gsl_rng *generator_create(unsigned long seed)
{
    gsl_set_error_handler_off();
    gsl_rng *generator = gsl_rng_alloc(gsl_rng_mt19937);
    gsl_rng_set(generator, seed);
    return generator;
}

double draw_rice_db(gsl_rng *generator, double k)
{
    double deviation = sqrt(0.5 / (1.0 + k));
    double in_phase = sqrt(k / (1.0 + k)) + gsl_ran_gaussian(generator, deviation);
    double quadrature = gsl_ran_gaussian(generator, deviation);
    return 10.0 * log10(in_phase * in_phase + quadrature * quadrature);
}

double draw_nakagami_db(gsl_rng *generator, double m)
{
    return 10.0 * log10(gsl_ran_gamma(generator, m, 1.0 / m));
}

double quantise_db(double level_db, double step_db)
{
    return step_db * floor(level_db / step_db + 0.5);
}
