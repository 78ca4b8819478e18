/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Sums of terms, and the terms at a steady SNR. The terms of one sum share a scale, so that
 * nothing underflows before its logarithm is taken.
 */
#include <gsl/gsl_math.h>
#include <math.h>
#include <stddef.h>

#include "model/model.h"
#include "predict/modulation.h"
#include "special/gauss_legendre.h"

/* Terms this much below the first, in nepers, do not reach its last digit. */
static const double negligible_exponent = 45.0;

/* Beyond, erfc nears the end of the range of doubles and is scaled by exp(u). */
static const double erfc_range = 650.0;

static struct rfade_scaled sum_terms(const struct rfade_term_sum *terms,
                                     rfade_term_value *value_of, const void *context)
{
    struct rfade_scaled sum = {0.0, 0.0};
    for (int i = 0; i < terms->count; i++) {
        const struct rfade_scaled term = value_of(&terms->terms[i], context);
        if (i == 0) {
            sum.log_scale = term.log_scale;
        }
        const double below = term.log_scale - sum.log_scale;
        const double scale = below == 0.0 ? 1.0 : exp(below);
        sum.value += terms->terms[i].weight * term.value * scale;
        if (below < -negligible_exponent) {
            break;
        }
    }
    return sum;
}

static void finish(const struct rfade_scaled *sum, double limit, double *rate, double *log_rate)
{
    *rate = fmin(sum->value * exp(sum->log_scale), limit);
    *log_rate = sum->value < limit && sum->log_scale == 0.0 ? log(*rate)
                                                            : sum->log_scale + log(sum->value);
    *log_rate = fmin(*log_rate, log(limit));
}

struct rfade_error_rate rfade_error_rate_by_terms(const struct rfade_modulation *modulation,
                                                  rfade_term_value *value_of,
                                                  const void *context, bool bits_only)
{
    struct rfade_error_rate rate;
    const struct rfade_scaled bit = sum_terms(&modulation->bit, value_of, context);
    finish(&bit, modulation->bit.limit, &rate.bit, &rate.log_bit);
    if (bits_only || modulation->symbol.count == 0) {
        rate.symbol = rate.bit;
        rate.log_symbol = rate.log_bit;
        return rate;
    }
    const struct rfade_scaled symbol = sum_terms(&modulation->symbol, value_of, context);
    finish(&symbol, modulation->symbol.limit, &rate.symbol, &rate.log_symbol);
    return rate;
}

static struct rfade_scaled half_plane(double u)
{
    if (u < erfc_range) {
        return (struct rfade_scaled){0.5 * erfc(sqrt(u)), 0.0};
    }
    /* AMS 55 7.1.23; the next term is below 1e-16 */
    const double v = 0.5 / u;
    const double series = 1.0 - v * (1.0 - 3.0 * v * (1.0 - 5.0 * v * (1.0 - 7.0 * v)));
    return (struct rfade_scaled){0.5 * series / sqrt(M_PI * u), -u};
}

/* In c = cot t: exp(-u)/pi integral of exp(-u c^2)/(1 + c^2) from 0 to the angle's cotangent.
 */
static struct rfade_scaled wedge(double u, double angle_cot)
{
    const struct rfade_gauss_rule *rule = rfade_gauss_rule_finest();
    const double end = u * angle_cot * angle_cot > negligible_exponent
                           ? sqrt(negligible_exponent / u)
                           : angle_cot;
    double sum = 0.0;
    for (int i = 0; i < rule->half_count; i++) {
        for (int side = -1; side <= 1; side += 2) {
            const double c = 0.5 * end * (1.0 + side * rule->node[i]);
            sum += rule->weight[i] * exp(-u * c * c) / (1.0 + c * c);
        }
    }
    return (struct rfade_scaled){0.5 * end * sum / M_PI, -u};
}

static struct rfade_scaled steady_term(const struct rfade_term *term, const void *context)
{
    const double u = term->factor * *(const double *)context;
    if (term->kind == RFADE_TERM_EXPONENTIAL) {
        return (struct rfade_scaled){1.0, -u};
    }
    struct rfade_scaled half = half_plane(u);
    if (term->kind == RFADE_TERM_HALF_PLANE) {
        return half;
    }
    if (term->angle_cot == 1.0) { /* Q - Q^2 */
        half.value *= 1.0 - half.value * exp(half.log_scale);
        return half;
    }
    return wedge(u, term->angle_cot);
}

struct rfade_error_rate rfade_error_rate_at(const struct rfade_modulation *modulation,
                                            double snr, bool bits_only)
{
    if (isinf(snr)) {
        return (struct rfade_error_rate){0.0, 0.0, -INFINITY, -INFINITY};
    }
    return rfade_error_rate_by_terms(modulation, steady_term, &snr, bits_only);
}

enum rfade_status rfade_error_rate_steady(const struct rfade_modulation *modulation,
                                          double snr_db, struct rfade_error_rate *rate)
{
    *rate = rfade_error_rate_nan();
    if (modulation == NULL ||
        !(fabs(snr_db) <= RFADE_SNR_LIMIT_DB || (isinf(snr_db) && !isnan(snr_db)))) {
        return RFADE_DOMAIN;
    }
    *rate = rfade_error_rate_at(modulation, exp(rfade_log_ratio(snr_db)), false);
    return RFADE_OK;
}
