/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * The modulations. Coherent ones are half planes and wedges of the noise plane, by the
 * integrals of Craig (J. W. Craig, IEEE Military Communications Conference 1991, eq. 4 and 5):
 *     Q(sqrt(2u)) = H(u) = 1/pi integral of exp(-u/sin^2 t) dt from 0 to pi/2,
 *     Q^2(sqrt(2u)) = H(u) - W(u), the wedge W from pi/4 to pi/2,
 *     P(phase error > psi) = H(u) + W(u), u = sin^2(psi) Es/N0, the wedge from psi to pi/2.
 * 8-PSK: a reflected Gray code errs 1 bit in the sectors beside the sent one and 2 on average
 * beyond (Lassing, Strom, Agrell and Ottosson 2003), so that a bit's rate is a third of
 * P(> pi/8) + P(> 3 pi/8).
 * Square M-QAM: bits by Cho and Yoon 2002, the sums over bits and thresholds worked out: the
 * weights are those of Q at 1, 3, 5 ... half distances, u = odd^2 3/(2(M-1)) Es/N0. Symbols:
 * 4 k Q - 4 k^2 Q^2 = 4 k (1-k) H + 4 k^2 W with k = 1 - 1/sqrt(M): no differences.
 */
#include "predict/modulation.h"

#include <gsl/gsl_math.h>
#include <math.h>
#include <stddef.h>
#include <string.h>

#define EXPONENTIAL(weight, factor)                                                            \
    {                                                                                          \
        RFADE_TERM_EXPONENTIAL, weight, factor, 0.0, 0.0                                       \
    }
#define HALF_PLANE(weight, factor)                                                             \
    {                                                                                          \
        RFADE_TERM_HALF_PLANE, weight, factor, 0.0, 0.0                                        \
    }
#define WEDGE(weight, factor, angle, cot)                                                      \
    {                                                                                          \
        RFADE_TERM_WEDGE, weight, factor, angle, cot                                           \
    }
#define RIGHT_WEDGE(weight, factor) WEDGE(weight, factor, M_PI_4, 1.0)

/* sin^2 and cot of pi/8 and 3 pi/8 */
#define SINE2_1 0.14644660940672623780
#define SINE2_3 0.85355339059327376220
#define COT_1 2.41421356237309504880
#define COT_3 0.41421356237309504880

/* A threshold of square QAM `odd` half distances away; `points` of the constellation. */
#define RAIL(weight, odd, points) HALF_PLANE(weight, (odd) * (odd)*1.5 / ((points)-1.0))

static const struct rfade_modulation modulations[] = {
    {.id = RFADE_BPSK, .name = "bpsk", .bits = 1, .bit = {1, 0.5, {HALF_PLANE(1.0, 1.0)}}},
    {.id = RFADE_QPSK,
     .name = "qpsk",
     .bits = 2,
     .bit = {1, 0.5, {HALF_PLANE(1.0, 0.5)}},
     .symbol = {2, 0.75, {HALF_PLANE(1.0, 0.5), RIGHT_WEDGE(1.0, 0.5)}}},
    {.id = RFADE_8PSK,
     .name = "8psk",
     .bits = 3,
     .bit = {4,
             0.5,
             {HALF_PLANE(1.0 / 3, SINE2_1), WEDGE(1.0 / 3, SINE2_1, M_PI / 8, COT_1),
              HALF_PLANE(1.0 / 3, SINE2_3), WEDGE(1.0 / 3, SINE2_3, 3 * M_PI / 8, COT_3)}},
     .symbol = {2, 0.875, {HALF_PLANE(1.0, SINE2_1), WEDGE(1.0, SINE2_1, M_PI / 8, COT_1)}}},
    {.id = RFADE_16QAM,
     .name = "16qam",
     .bits = 4,
     .bit = {3, 0.5, {RAIL(3.0 / 4, 1, 16), RAIL(1.0 / 2, 3, 16), RAIL(-1.0 / 4, 5, 16)}},
     .symbol = {2, 15.0 / 16, {RAIL(0.75, 1, 16), RIGHT_WEDGE(2.25, 1.5 / 15)}}},
    {.id = RFADE_64QAM,
     .name = "64qam",
     .bits = 6,
     .bit = {5,
             0.5,
             {RAIL(7.0 / 12, 1, 64), RAIL(1.0 / 2, 3, 64), RAIL(-1.0 / 12, 5, 64),
              RAIL(1.0 / 12, 9, 64), RAIL(-1.0 / 12, 13, 64)}},
     .symbol = {2, 63.0 / 64, {RAIL(0.4375, 1, 64), RIGHT_WEDGE(3.0625, 1.5 / 63)}}},
    {.id = RFADE_256QAM,
     .name = "256qam",
     .bits = 8,
     .bit = {13,
             0.5,
             {RAIL(15.0 / 32, 1, 256), RAIL(7.0 / 16, 3, 256), RAIL(-1.0 / 32, 5, 256),
              RAIL(5.0 / 32, 9, 256), RAIL(1.0 / 8, 11, 256), RAIL(-5.0 / 32, 13, 256),
              RAIL(-1.0 / 8, 15, 256), RAIL(5.0 / 32, 17, 256), RAIL(1.0 / 8, 19, 256),
              RAIL(-3.0 / 32, 21, 256), RAIL(-1.0 / 16, 23, 256), RAIL(1.0 / 32, 25, 256),
              RAIL(-1.0 / 32, 29, 256)}},
     .symbol = {2, 255.0 / 256, {RAIL(0.234375, 1, 256), RIGHT_WEDGE(3.515625, 1.5 / 255)}}},
    {.id = RFADE_DBPSK, .name = "dbpsk", .bits = 1, .bit = {1, 0.5, {EXPONENTIAL(0.5, 1.0)}}},
    {.id = RFADE_NCFSK2, .name = "ncfsk2", .bits = 1, .bit = {1, 0.5, {EXPONENTIAL(0.5, 0.5)}}},
};
_Static_assert(sizeof modulations / sizeof modulations[0] == RFADE_MODULATION_COUNT,
               "one entry for each modulation");

const struct rfade_modulation *rfade_modulation(enum rfade_modulation_id id)
{
    for (size_t i = 0; i < RFADE_MODULATION_COUNT; i++) {
        if (modulations[i].id == id) {
            return &modulations[i];
        }
    }
    return NULL;
}

const struct rfade_modulation *rfade_modulation_by_name(const char *name)
{
    for (size_t i = 0; i < RFADE_MODULATION_COUNT; i++) {
        if (strcmp(modulations[i].name, name) == 0) {
            return &modulations[i];
        }
    }
    return NULL;
}

const char *rfade_modulation_name(const struct rfade_modulation *modulation)
{
    return modulation->name;
}

int rfade_modulation_bits(const struct rfade_modulation *modulation)
{
    return modulation->bits;
}

const struct rfade_term_sum *rfade_symbol_terms(const struct rfade_modulation *modulation)
{
    return modulation->symbol.count > 0 ? &modulation->symbol : &modulation->bit;
}

struct rfade_error_rate rfade_error_rate_nan(void)
{
    return (struct rfade_error_rate){NAN, NAN, NAN, NAN};
}
