/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file generate.h  Fading drawn by GSL's generators, independent of the library's models. */
#ifndef ROUTEFADE_TESTS_GENERATE_H
#define ROUTEFADE_TESTS_GENERATE_H

#include <gsl/gsl_rng.h>

/** A generator with a fixed seed; gsl_rng_free() it. Switches GSL's error handler off. */
gsl_rng *generator_create(unsigned long seed);

/** Level of one Rice reading about its mean power, dB: steady plus two Gaussian parts. */
double draw_rice_db(gsl_rng *generator, double k);

/** Level of one Nakagami reading about its mean power, dB: gamma distributed power. */
double draw_nakagami_db(gsl_rng *generator, double m);

/** A level as a receiver with that step reports it. */
double quantise_db(double level_db, double step_db);

#endif
