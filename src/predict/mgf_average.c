/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Averages over fading by the moment generating function M(s) = E exp(-s SNR) (Simon and
 * Alouini 2005, eq. 5.3 and chapter 9): a term's exp(-u/sin^2 t) becomes M(factor/sin^2 t).
 *
 * With D = 1 + s scale all fading models here read M = D^-order exp(-steady (1 - 1/D)):
 * rayleigh and nakagami have steady = 0, rice has order = branches. Along the path of
 * integration D runs from D0, at t = pi/2, to infinity. With D = D0 exp(v) the logarithm of M
 * drops by order v + (steady/D0) (1 - exp(-v)), and v = sinh^2(x)/(order + steady/D0) makes
 * M(x) a bell of unit width whatever the parameters, even in x, with an algebraic tail made
 * double exponential. So the trapezoidal rule on the whole x axis converges exponentially (L.
 * N. Trefethen and J. A. C. Weideman, SIAM Review 56, 2014): the strip of analyticity is pi/4
 * wide (there v turns imaginary), and step 0.14 leaves exp(-2 pi (pi/4)/0.14) = 5e-16.
 *
 * At low SNR 1/s has a pole close by (s = 0). There the term is 1/2 less the integral of 1 - M,
 * in which the pole is none.
 */
#include "predict/mgf_average.h"

#include <gsl/gsl_math.h>
#include <math.h>
#include <stdbool.h>

#include "predict/fading_nodes.h"
#include "special/gauss_legendre.h"

/* The pole lies at sinh^2(x) = -distance: from here on outside the strip. */
static const double pole_distance = 1.2;

/* Length of a panel in x: the longest Gauss rule leaves 1e-15 on it. */
static const double panel_length = 2.5;

enum { NODES = sizeof node_square / sizeof node_square[0] };

/* A term's integrand, from its least s on. */
struct path {
    double order;
    double c;        /* D0 - 1 */
    double d0;       /* D where t = pi/2 */
    double steady;   /* over d0 */
    double exponent; /* -ln M there */
    double spread;   /* v over sinh^2 x */
    bool is_low;     /* low SNR: 1 - M is integrated */
};

struct rfade_mgf rfade_mgf_of(const struct rfade_model *model, double parameter, int branches)
{
    switch (model->id) {
    case RFADE_RICE:
        return (struct rfade_mgf){branches, branches * parameter, 1.0 / (1.0 + parameter)};
    case RFADE_NAKAGAMI:
        return (struct rfade_mgf){branches * parameter, 0.0, 1.0 / parameter};
    default:
        return (struct rfade_mgf){branches, 0.0, 1.0};
    }
}

static struct path path_of(const struct rfade_mgf *mgf, double factor)
{
    struct path path;
    path.c = factor * mgf->scale;
    path.d0 = 1.0 + path.c;
    path.order = mgf->order;
    path.steady = mgf->steady / path.d0;
    const double log_d0 = log1p(path.c);
    path.exponent = mgf->order * log_d0 + path.steady * path.c;
    const double slope = mgf->order + path.steady;
    path.spread = 1.0 / slope;
    path.is_low = slope * log_d0 < pole_distance;
    return path;
}

/* M over M at the start where it is large enough, else 1 - M. growth = expm1(v). */
static double transform(const struct path *path, double v, double growth)
{
    const double drop = path->order * v + path->steady * (growth / (1.0 + growth));
    return path->is_low ? -expm1(-(path->exponent + drop)) : exp(-drop);
}

/* dt/dx, with cot^2 t = D0 (exp(v) - 1)/c. */
static double angle_slope(const struct path *path, double growth, double double_sinh)
{
    const double d = path->d0 * (1.0 + growth);
    const double cot = sqrt(path->d0 * growth / path->c);
    return 0.5 * path->spread * double_sinh * d / (cot * (path->c + path->d0 * growth));
}

static struct rfade_scaled half_plane(const struct path *path)
{
    const double start = sqrt(path->d0 * path->spread / path->c); /* dt/dx at x = 0 */
    double sum = 0.5 * start * transform(path, 0.0, 0.0);
    for (int k = 1; k < NODES; k++) {
        const double v = path->spread * node_square[k];
        const double growth = expm1(v);
        const double part =
            angle_slope(path, growth, node_double[k]) * transform(path, v, growth);
        sum += part;
        if (part < 1e-17 * sum) {
            break;
        }
    }
    const double integral = node_step * sum / M_PI;
    return path->is_low ? (struct rfade_scaled){0.5 - integral, 0.0}
                        : (struct rfade_scaled){integral, -path->exponent};
}

/* At low SNR M is smooth in cot t. */
static double low_wedge(const struct path *path, double angle_cot)
{
    const struct rfade_gauss_rule *rule = rfade_gauss_rule_finest();
    double sum = 0.0;
    for (int i = 0; i < rule->half_count; i++) {
        for (int side = -1; side <= 1; side += 2) {
            const double cot = 0.5 * angle_cot * (1.0 + side * rule->node[i]);
            const double growth = path->c * cot * cot / path->d0;
            const double drop =
                path->order * log1p(growth) + path->steady * (growth / (1.0 + growth));
            sum += rule->weight[i] * exp(-path->exponent - drop) / (1.0 + cot * cot);
        }
    }
    return 0.5 * angle_cot * sum;
}

/* In x, from 0 to where t is the angle, as far as M counts. */
static double wedge_panel(const struct path *path, double x_low, double x_high)
{
    const struct rfade_gauss_rule *rule = rfade_gauss_rule_finest();
    const double half = 0.5 * (x_high - x_low);
    double sum = 0.0;
    for (int i = 0; i < rule->half_count; i++) {
        for (int side = -1; side <= 1; side += 2) {
            const double x = x_low + half * (1.0 + side * rule->node[i]);
            const double sine = sinh(x);
            const double v = path->spread * sine * sine;
            const double growth = expm1(v);
            sum += rule->weight[i] * transform(path, v, growth) *
                   angle_slope(path, growth, 2.0 * sine * sqrt(1.0 + sine * sine));
        }
    }
    return half * sum;
}

static struct rfade_scaled wedge(const struct path *path, double angle_cot)
{
    if (path->is_low) {
        return (struct rfade_scaled){low_wedge(path, angle_cot) / M_PI, 0.0};
    }
    const double v_end = log1p(path->c * angle_cot * angle_cot / path->d0);
    const double x_end = asinh(sqrt(v_end / path->spread));
    double sum = 0.0;
    const int panels = (int)ceil(x_end / panel_length);
    for (int i = 0; i < panels; i++) {
        const double x = i * panel_length;
        const double part = wedge_panel(path, x, fmin(x + panel_length, x_end));
        sum += part;
        if (part < 1e-17 * sum) {
            break;
        }
    }
    return (struct rfade_scaled){sum / M_PI, -path->exponent};
}

static struct rfade_scaled averaged_term(const struct rfade_term *term, const void *context)
{
    const struct path path = path_of(context, term->factor);
    switch (term->kind) {
    case RFADE_TERM_HALF_PLANE:
        return half_plane(&path);
    case RFADE_TERM_WEDGE:
        return wedge(&path, term->angle_cot);
    default:
        return (struct rfade_scaled){1.0, -path.exponent};
    }
}

struct rfade_error_rate rfade_error_rate_by_mgf(const struct rfade_modulation *modulation,
                                                const struct rfade_mgf *mgf, bool bits_only)
{
    return rfade_error_rate_by_terms(modulation, averaged_term, mgf, bits_only);
}
