/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file power.h  How often goodness refuses what isn't Rice fading, and what is, in columns of
 * readings whose correlation is known: each of `effective` independent levels is read several
 * times in a row. Levels are drawn by GSL's generators.
 */
#ifndef ROUTEFADE_TEST_STATISTICS_POWER_H
#define ROUTEFADE_TEST_STATISTICS_POWER_H

#include <stdbool.h>

#include "statistics/count.h"

enum population {
    POPULATION_RICE,      /**< K = 4: what is fitted */
    POPULATION_LOGNORMAL, /**< 6 dB */
    POPULATION_TWO,       /**< half the levels Rice with K = 10, half Rayleigh 10 dB below */
    POPULATION_COUNT
};

struct power_cell {
    enum population population;
    int effective; /**< independent levels */
    int repeats;   /**< readings of each */
};

/** Rice's goodness below 5 %, of samples in 1 dB steps. False if memory ran out or a fit
 * failed. */
bool power_run(const struct power_cell *cell, unsigned long seed, int samples,
               struct share *refused);

#endif
