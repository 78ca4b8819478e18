/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Symbols of every modulation drawn, faded, combined and decided upon, and their errors
 * counted: an independent check of the error rates. Nothing is shared with the library:
 * constellations, Gray codes, fading and decisions are written here.
 *
 * usage: test_predict_drawing [SYMBOLS]: the full form takes 5,000,000 symbols a case.
 */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <complex.h>
#include <gsl/gsl_errno.h>
#include <gsl/gsl_math.h>
#include <gsl/gsl_randist.h>
#include <gsl/gsl_rng.h>
#include <math.h>
#include <stdlib.h>

#include "routefade/error_rate.h"

static const double standard_errors_allowed = 4.0;
enum { SHORT_FORM = 20000, POINTS_MAX = 256 };

static long symbols_drawn = SHORT_FORM;

/* Errors of one decision. */
struct errors {
    int bits;
    int symbols;
};

static double complex noise(gsl_rng *generator)
{
    return gsl_ran_gaussian_ziggurat(generator, M_SQRT1_2) +
           I * gsl_ran_gaussian_ziggurat(generator, M_SQRT1_2);
}

static int gray(int index)
{
    return index ^ (index >> 1);
}

static int differing_bits(int a, int b)
{
    int count = 0;
    for (int bits = a ^ b; bits != 0; bits &= bits - 1) {
        count++;
    }
    return count;
}

/* Point `index` of unit mean energy; its bits in *code. */
static double complex point(int modulation, int count, int index, int *code)
{
    if (modulation == RFADE_BPSK) {
        *code = index;
        return index == 0 ? 1.0 : -1.0;
    }
    if (modulation == RFADE_QPSK || modulation == RFADE_8PSK) {
        *code = gray(index);
        return cexp(I * (2.0 * M_PI * index / count));
    }
    const int side = (int)lround(sqrt(count));
    const int row = index / side;
    const int column = index % side;
    const double half = sqrt(1.5 / (count - 1.0));
    *code = gray(row) * side + gray(column);
    return half * ((double)(2 * column - side + 1) + I * (double)(2 * row - side + 1));
}

struct constellation {
    int count;
    double complex points[POINTS_MAX];
    int codes[POINTS_MAX];
};

static struct constellation constellation_of(int modulation)
{
    struct constellation all;
    all.count =
        1 << rfade_modulation_bits(rfade_modulation((enum rfade_modulation_id)modulation));
    for (int i = 0; i < all.count; i++) {
        all.points[i] = point(modulation, all.count, i, &all.codes[i]);
    }
    return all;
}

/* The point nearest to what was received. */
static struct errors coherent(gsl_rng *generator, const struct constellation *all, double snr)
{
    const int sent = (int)gsl_rng_uniform_int(generator, (unsigned long)all->count);
    const double complex received = all->points[sent] + noise(generator) / sqrt(snr);
    double least = INFINITY;
    int decided = 0;
    for (int i = 0; i < all->count; i++) {
        const double complex gap = received - all->points[i];
        const double distance = creal(gap) * creal(gap) + cimag(gap) * cimag(gap);
        if (distance < least) {
            least = distance;
            decided = i;
        }
    }
    return (struct errors){differing_bits(all->codes[sent], all->codes[decided]),
                           decided != sent};
}

/* The phase from one symbol to the next; the fading is the same for both. */
static struct errors differential(gsl_rng *generator, double snr)
{
    const int bit = (int)gsl_rng_uniform_int(generator, 2);
    const double complex phase = cexp(I * gsl_ran_flat(generator, 0.0, 2.0 * M_PI));
    const double complex first = sqrt(snr) * phase + noise(generator);
    const double complex second =
        sqrt(snr) * phase * (bit == 0 ? 1.0 : -1.0) + noise(generator);
    const int decided = creal(second * conj(first)) < 0.0;
    return (struct errors){decided != bit, decided != bit};
}

/* The stronger of two tones, of unknown phase. */
static struct errors tones(gsl_rng *generator, double snr)
{
    const double complex phase = cexp(I * gsl_ran_flat(generator, 0.0, 2.0 * M_PI));
    const int wrong = cabs(noise(generator)) > cabs(sqrt(snr) * phase + noise(generator));
    return (struct errors){wrong, wrong};
}

static struct errors send(gsl_rng *generator, int modulation, const struct constellation *all,
                          double snr)
{
    switch (modulation) {
    case RFADE_DBPSK:
        return differential(generator, snr);
    case RFADE_NCFSK2:
        return tones(generator, snr);
    default:
        return coherent(generator, all, snr);
    }
}

/* Fast fading power of mean 1. */
static double fading_power(gsl_rng *generator, const struct rfade_link *link)
{
    if (link->model == NULL) {
        return 1.0;
    }
    if (link->model->id == RFADE_NAKAGAMI) {
        return gsl_ran_gamma(generator, link->parameter, 1.0 / link->parameter);
    }
    const double k = link->model->id == RFADE_RICE ? link->parameter : 0.0;
    const double complex amplitude = sqrt(k / (1.0 + k)) + noise(generator) / sqrt(1.0 + k);
    return creal(amplitude) * creal(amplitude) + cimag(amplitude) * cimag(amplitude);
}

/* SNR after combining: weights in ratio to the amplitudes add the SNRs; selection takes the
 * most. */
static double combined_snr(gsl_rng *generator, const struct rfade_link *link)
{
    const double sigma = link->shadowing_db * M_LN10 / 10.0;
    const double mean = pow(10.0, link->mean_snr_db / 10.0) *
                        exp(gsl_ran_gaussian_ziggurat(generator, sigma) - 0.5 * sigma * sigma);
    double sum = 0.0;
    double most = 0.0;
    for (int i = 0; i < link->branches; i++) {
        const double power = fading_power(generator, link);
        sum += power;
        most = fmax(most, power);
    }
    return mean * (link->combining == RFADE_SELECTION ? most : sum);
}

/* Whether a count's mean lies within the standard errors of the rate. */
static void check_mean(const char *what, double sum, double square_sum, double expected)
{
    const double count = (double)symbols_drawn;
    const double mean = sum / count;
    const double deviation = sqrt(fmax(square_sum / count - mean * mean, 0.0) / count);
    assert_true(sum >= 50.0); /* enough to say anything */
    if (!(fabs(mean - expected) <= standard_errors_allowed * deviation)) {
        fail_msg("%s: %g counted, %g expected, %.1f standard errors", what, mean, expected,
                 (mean - expected) / deviation);
    }
}

static void draw(gsl_rng *generator, const struct rfade_link *link, int modulation)
{
    const struct rfade_modulation *one = rfade_modulation((enum rfade_modulation_id)modulation);
    const int bits = rfade_modulation_bits(one);
    const struct constellation all = constellation_of(modulation);
    double sums[4] = {0.0, 0.0, 0.0, 0.0};
    for (long i = 0; i < symbols_drawn; i++) {
        const struct errors errors =
            send(generator, modulation, &all, combined_snr(generator, link));
        sums[0] += errors.bits;
        sums[1] += (double)errors.bits * errors.bits;
        sums[2] += errors.symbols;
        sums[3] += errors.symbols;
    }
    struct rfade_error_rate rate;
    assert_int_equal(rfade_error_rates(link, &one, 1, &rate), RFADE_OK);
    check_mean(rfade_modulation_name(one), sums[0], sums[1], rate.bit * bits);
    check_mean(rfade_modulation_name(one), sums[2], sums[3], rate.symbol);
}

/* About where 1 to 20 % of the symbols are wrong in a single branch. */
static const double snr_db[RFADE_MODULATION_COUNT] = {4.0,  7.0,  12.0, 14.0,
                                                      20.0, 26.0, 5.0,  8.0};

static void draw_all(const struct rfade_link *shape, double shift_db, unsigned long seed)
{
    gsl_rng *generator = gsl_rng_alloc(gsl_rng_mt19937);
    assert_non_null(generator);
    gsl_rng_set(generator, seed);
    for (int modulation = 0; modulation < RFADE_MODULATION_COUNT; modulation++) {
        struct rfade_link link = *shape;
        link.mean_snr_db = snr_db[modulation] + shift_db;
        draw(generator, &link, modulation);
    }
    gsl_rng_free(generator);
}

static void unfaded(void **state)
{
    (void)state;
    const struct rfade_link link = {.branches = 1};
    draw_all(&link, 0.0, 4571);
}

static void rayleigh(void **state)
{
    (void)state;
    const struct rfade_link link = {.model = rfade_model(RFADE_RAYLEIGH), .branches = 1};
    draw_all(&link, 3.0, 4572);
}

static void rice_of_three_branches(void **state)
{
    (void)state;
    const struct rfade_link link = {
        .model = rfade_model(RFADE_RICE), .parameter = 2.5, .branches = 3};
    draw_all(&link, -4.0, 4573);
}

static void nakagami_selected_and_shadowed(void **state)
{
    (void)state;
    const struct rfade_link link = {.model = rfade_model(RFADE_NAKAGAMI),
                                    .parameter = 0.8,
                                    .shadowing_db = 6.0,
                                    .branches = 2,
                                    .combining = RFADE_SELECTION};
    draw_all(&link, 0.0, 4574);
}

static void rice_shadowed(void **state)
{
    (void)state;
    const struct rfade_link link = {
        .model = rfade_model(RFADE_RICE), .parameter = 6.0, .shadowing_db = 8.0, .branches = 1};
    draw_all(&link, 2.0, 4575);
}

/* QPSK packets of which all bits fade as one. */
static void packets_in_a_block(void **state)
{
    (void)state;
    enum { BITS = 40 };
    const struct rfade_link link = {
        .model = rfade_model(RFADE_RICE), .parameter = 3.0, .mean_snr_db = 11.0, .branches = 1};
    const struct rfade_modulation *qpsk = rfade_modulation(RFADE_QPSK);
    gsl_rng *generator = gsl_rng_alloc(gsl_rng_mt19937);
    assert_non_null(generator);
    gsl_rng_set(generator, 4576);
    const struct constellation all = constellation_of(RFADE_QPSK);
    double lost = 0.0;
    for (long i = 0; i < symbols_drawn; i++) {
        const double snr = combined_snr(generator, &link);
        int wrong = 0;
        for (int symbol = 0; symbol < BITS / 2; symbol++) {
            wrong += coherent(generator, &all, snr).symbols;
        }
        lost += wrong > 0;
    }
    struct rfade_packet_error error;
    assert_int_equal(rfade_packet_error(&link, qpsk, BITS, &error), RFADE_OK);
    check_mean("packets", lost, lost, error.block);
    gsl_rng_free(generator);
}

int main(int argc, char **argv)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(unfaded),
        cmocka_unit_test(rayleigh),
        cmocka_unit_test(rice_of_three_branches),
        cmocka_unit_test(nakagami_selected_and_shadowed),
        cmocka_unit_test(rice_shadowed),
        cmocka_unit_test(packets_in_a_block),
    };
    if (argc > 1) {
        symbols_drawn = strtol(argv[1], NULL, 10);
    }
    gsl_set_error_handler_off();
    return cmocka_run_group_tests(tests, NULL, NULL);
}
