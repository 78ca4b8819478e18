/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file process.h  A stationary complex Gaussian process over distance, by its spectrum. */
#ifndef ROUTEFADE_SIMULATE_PROCESS_H
#define ROUTEFADE_SIMULATE_PROCESS_H

#include <gsl/gsl_rng.h>
#include <stddef.h>

#include "routefade/status.h"

/**
 * Share of a process's power at spatial frequencies (cycles/m) up to `frequency`: rises
 * from 0 to 1. `scale_m` is the wavelength or the decorrelation distance.
 */
typedef double rfade_spectrum(double frequency, double scale_m);

/** Isotropic scatter in the plane, autocorrelation J0(2 pi d / wavelength) [Clarke 1968]. */
rfade_spectrum rfade_spectrum_clarke;

/** Autocorrelation exp(-(d / decorrelation)^2). */
rfade_spectrum rfade_spectrum_gaussian;

/** One period of a process, sampled every `spacing_m`. */
struct rfade_process {
    double *values; /**< `count` pairs of real and imaginary part */
    size_t count;   /**< a power of two */
    double spacing_m;
};

/**
 * Draws a process of power 1 (real and imaginary part 1/2 each) that is good for distances
 * from 0 to length_m.
 * @return RFADE_OK | RFADE_DOMAIN (too long for its scale) | RFADE_NO_MEMORY
 */
enum rfade_status rfade_process_create(struct rfade_process *process, gsl_rng *generator,
                                       rfade_spectrum *spectrum, double scale_m,
                                       double length_m);
void rfade_process_destroy(struct rfade_process *process);

/**
 * The process at a distance >= 0: real and imaginary part. Interpolated between samples
 * sixteen to the scale; the error's rms is below 1e-6 of the process's.
 */
void rfade_process_at(const struct rfade_process *process, double distance_m, double value[2]);

#endif
