/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Spectral synthesis: independent complex normal amplitudes, each with the power that the
 * spectrum has in its bin, through an inverse FFT [Rice 1944, Mathematical analysis of random
 * noise, section 2.8; Smith 1975, IEEE Trans. Veh. Technol. 24(3), 39-40; Young and Beaulieu
 * 2000, IEEE Trans. Commun. 48(7), 1114-1127]. The outcome is Gaussian exactly, whatever the
 * number of bins, unlike sums of a few sinusoids.
 *
 * With a period L of the grid the autocorrelation comes out as R(d) sin(pi d/L)/(pi d/L)
 * plus images at d + nL. L is longer than the drive by a quarter and many scales, so that the
 * drive doesn't see the repetition.
 */
#include "simulate/process.h"

#include <gsl/gsl_fft_complex.h>
#include <gsl/gsl_math.h>
#include <gsl/gsl_randist.h>
#include <math.h>
#include <stdlib.h>

enum {
    SAMPLES_A_SCALE = 16,
    MARGIN_SCALES = 64,
    NODES = 8, /* of the interpolating polynomial */
    LARGEST_COUNT_LOG2 = 24
};

double rfade_spectrum_clarke(double frequency, double scale_m)
{
    double ratio = fmax(-1.0, fmin(1.0, frequency * scale_m));

    return 0.5 + asin(ratio) / M_PI;
}

double rfade_spectrum_gaussian(double frequency, double scale_m)
{
    return 0.5 * erfc(-M_PI * scale_m * frequency);
}

static void draw_amplitudes(const struct rfade_process *process, gsl_rng *generator,
                            rfade_spectrum *spectrum, double scale_m)
{
    double width = 1.0 / ((double)process->count * process->spacing_m);
    double half = 0.5 * (double)process->count;

    for (size_t i = 0; i < process->count; i++) {
        double bin = (double)i < half ? (double)i : (double)i - (double)process->count;
        double power =
            spectrum((bin + 0.5) * width, scale_m) - spectrum((bin - 0.5) * width, scale_m);
        double deviation = sqrt(0.5 * power);

        if (deviation > 0.0) {
            process->values[2 * i] = gsl_ran_gaussian_ziggurat(generator, deviation);
            process->values[2 * i + 1] = gsl_ran_gaussian_ziggurat(generator, deviation);
        }
    }
}

enum rfade_status rfade_process_create(struct rfade_process *process, gsl_rng *generator,
                                       rfade_spectrum *spectrum, double scale_m,
                                       double length_m)
{
    double needed = SAMPLES_A_SCALE * (1.25 * length_m / scale_m + MARGIN_SCALES);

    *process = (struct rfade_process){.spacing_m = scale_m / SAMPLES_A_SCALE};
    if (!(needed <= (double)((size_t)1 << LARGEST_COUNT_LOG2))) {
        return RFADE_DOMAIN;
    }
    process->count = 1;
    while ((double)process->count < needed) {
        process->count *= 2;
    }
    process->values = calloc(process->count, 2 * sizeof *process->values);
    if (process->values == NULL) {
        return RFADE_NO_MEMORY;
    }
    draw_amplitudes(process, generator, spectrum, scale_m);
    if (gsl_fft_complex_radix2_backward(process->values, 1, process->count) != 0) {
        rfade_process_destroy(process);
        return RFADE_NO_CONVERGENCE;
    }
    return RFADE_OK;
}

void rfade_process_destroy(struct rfade_process *process)
{
    free(process->values);
    process->values = NULL;
}

/* Lagrange's polynomials of the nodes 0 .. 7 at x, by products from the left and the right. */
static void lagrange_weights(double x, double weights[NODES])
{
    static const double denominator[NODES] = {-5040.0, 720.0, -240.0, 144.0,
                                              -144.0,  240.0, -720.0, 5040.0};
    double left = 1.0;
    double right = 1.0;

    for (int i = 0; i < NODES; i++) {
        weights[i] = left / denominator[i];
        left *= x - (double)i;
    }
    for (int i = NODES - 1; i >= 0; i--) {
        weights[i] *= right;
        right *= x - (double)i;
    }
}

/*
 * The polynomial through the 8 nearest samples. Remainder: at most (pi/8)^8 / 8! times the
 * product of the distances to the nodes (43.1), 6e-7 for a sinusoid at Clarke's highest
 * frequency; less for the Gaussian spectrum.
 */
void rfade_process_at(const struct rfade_process *process, double distance_m, double value[2])
{
    double weights[NODES];
    double place = distance_m / process->spacing_m;
    size_t before = NODES / 2 - 1;
    size_t first = (size_t)place + process->count - before;

    lagrange_weights(place - floor(place) + (double)before, weights);
    value[0] = 0.0;
    value[1] = 0.0;
    for (size_t i = 0; i < NODES; i++) {
        size_t index = (first + i) & (process->count - 1);

        value[0] += weights[i] * process->values[2 * index];
        value[1] += weights[i] * process->values[2 * index + 1];
    }
}
