/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Rice fading: a steady component K times as strong as the scattered power (S. O. Rice,
 * "Mathematical analysis of random noise", Bell System Technical Journal 24, 1945, 3.10).
 * With a = sqrt(2K), b = sqrt(2(1+K) y), z = a b, offset = b - a and r = I1(z)/I0(z):
 *     P(y <= x) = 1 - Q1(a, b)
 *     density per neper of power = b^2/2 exp(-offset^2/2) exp(-z) I0(z)
 *     d ln density / d ln y = 1 - b/2 (offset + a (1 - r))
 *     dQ1/dK = exp(-offset^2/2) exp(-z) I0(z) (r b/a - y)
 * b - a is taken from K (y - 1) + y, so that nothing is lost near y = 1 at large K.
 */
#include <stddef.h>

#include "model/model.h"
#include "special/bessel.h"
#include "special/gauss_legendre.h"
#include "special/marcum.h"
#include "special/tails.h"

static const double k_max = 1e5;

/* Where the forms for small K hand over to those for large K; both are good around it. */
static const double large_k = 0.5;
/* Below, deep in the lower tail, the form for small K is the good one at any K. */
static const double small_z = 2.0;

/* K and what follows from it alone. */
struct rice {
    double k;
    double a;                /* sqrt(2K) */
    double scale;            /* sqrt(2(1+K)): b over the amplitude sqrt(y) */
    double amplitude_excess; /* (1+2K)/sqrt(K(1+K)) - 2; unused for small K */
};

struct point {
    double y;
    double b;
    double offset; /* b - a */
};

static bool parameter_valid(double k)
{
    return k >= 0.0 && k <= k_max;
}

static struct rice rice_of(double k)
{
    const double root = sqrt(k * (1.0 + k));
    return (struct rice){k, sqrt(2.0 * k), sqrt(2.0 * (1.0 + k)),
                         k > 0.0 ? 1.0 / (root * (1.0 + 2.0 * k + 2.0 * root)) : INFINITY};
}

static struct point point_at(const struct rice *rice, double x_db)
{
    const double log_y = rfade_log_ratio(x_db);
    struct point point;
    point.y = exp(log_y);
    point.b = sqrt(2.0 * (1.0 + rice->k) * point.y);
    point.offset = 2.0 * fma(rice->k, expm1(log_y), point.y) / (rice->a + point.b);
    return point;
}

/* sqrt(y) - 1 from b - a: with B = scale, B - a = 2/(B + a). */
static double amplitude_less_one(const struct rice *rice, const struct point *point)
{
    return (point->offset - 2.0 / (rice->scale + rice->a)) / rice->scale;
}

/* d ln density / dK = -K/(1+K) - y + (1+2K) y (2r/z), arranged so that nothing cancels. */
static double parameter_slope(const struct rice *rice, const struct point *point,
                              const struct rfade_bessel_pair *bessel)
{
    const double k = rice->k;
    if (k < large_k) {
        return point->y * (2.0 * k - (1.0 + 2.0 * k) * bessel->half_excess) - k / (1.0 + k);
    }
    const double less_one = amplitude_less_one(rice, point);
    const double excess = rice->amplitude_excess;
    return 1.0 / (1.0 + k) - less_one * less_one +
           (1.0 + less_one) * (excess - (2.0 + excess) * bessel->complement);
}

/* r b/a - y, likewise: dQ1/dK over exp(-offset^2/2) exp(-z) I0(z). */
static double tail_slope(const struct rice *rice, const struct point *point,
                         const struct rfade_bessel_pair *bessel)
{
    const double k = rice->k;
    if (k < large_k || rice->a * point->b < small_z) {
        return point->y * (k - (1.0 + k) * bessel->half_excess);
    }
    const double less_one = amplitude_less_one(rice, point);
    const double ratio = sqrt(1.0 + 1.0 / k);
    const double ratio_excess = 1.0 / (k * (ratio + 1.0));
    return point->b / rice->scale * (ratio_excess - less_one - ratio * bessel->complement);
}

static double level_slope(double a, double b, double offset,
                          const struct rfade_bessel_pair *bessel)
{
    return 1.0 - 0.5 * b * (offset + a * bessel->complement);
}

/* ln of the density per dB without its Bessel factor. */
static double log_density_base(const struct point *point)
{
    return log(0.5 * RFADE_LN_PER_DB) + 2.0 * log(point->b) -
           0.5 * point->offset * point->offset;
}

static enum rfade_status tails(double k, double x_db, struct rfade_tails *result)
{
    *result = rfade_tails_nan();
    if (!parameter_valid(k) || !rfade_level_valid(x_db)) {
        return RFADE_DOMAIN;
    }
    if (k == 0.0 || isinf(x_db)) {
        return rfade_model_rayleigh.tails(0.0, x_db, result);
    }
    const struct rice rice = rice_of(k);
    const struct point point = point_at(&rice, x_db);
    *result = rfade_marcum_tails_at(rice.a, point.b, point.offset);
    return RFADE_OK;
}

/*
 * Relative to the interval's middle, t nepers of power away, with u = b expm1(t/2) the way
 * in amplitude: exp(t) exp(-u (offset + u/2)) exp(-z) I0(z).
 */
static struct rfade_log_gradient narrow_interval(const struct rice *rice,
                                                 const struct point *middle, double width_db,
                                                 const struct rfade_gauss_rule *rule)
{
    const double half_width = 0.5 * RFADE_LN_PER_DB * width_db;
    double sum = 0.0;
    double sum_level = 0.0;
    double sum_parameter = 0.0;
    for (int i = 0; i < rule->half_count; i++) {
        const double t = half_width * rule->node[i];
        const double step_up = expm1(0.5 * t);
        const double steps[] = {step_up, -step_up / (1.0 + step_up)}; /* for t and -t */
        for (int side = 0; side < 2; side++) {
            const double growth = 1.0 + steps[side];
            const double u = middle->b * steps[side];
            const struct point node = {middle->y * growth * growth, middle->b + u,
                                       middle->offset + u};
            const struct rfade_bessel_pair bessel = rfade_bessel_pair(rice->a * node.b);
            const double term = rule->weight[i] * growth * growth * bessel.i0_scaled *
                                exp(-u * (middle->offset + 0.5 * u));
            sum += term;
            sum_level += term * level_slope(rice->a, node.b, node.offset, &bessel);
            sum_parameter += term * parameter_slope(rice, &node, &bessel);
        }
    }
    return (struct rfade_log_gradient){
        log_density_base(middle) + log(0.5 * width_db * sum),
        -RFADE_LN_PER_DB * sum_level / sum,
        sum_parameter / sum,
    };
}

static struct rfade_interval_end interval_end(const struct rice *rice, double x_db)
{
    if (isinf(x_db)) {
        return rfade_interval_end_at_infinity(x_db > 0.0);
    }
    const struct point point = point_at(rice, x_db);
    const struct rfade_bessel_pair bessel = rfade_bessel_pair(rice->a * point.b);
    const struct rfade_scaled_tail tail = rfade_marcum_scaled(rice->a, point.b, point.offset);
    const struct rfade_tails both =
        rfade_tails_from_scaled(&tail, rfade_exp_half_square(point.offset));
    /* density and dQ1/dK over the tail: exp(-offset^2/2) stands in both */
    const double share = bessel.i0_scaled * exp(-tail.log_factor);
    const double d_mean_db = 0.5 * RFADE_LN_PER_DB * point.b * point.b * share;
    const double d_parameter = tail_slope(rice, &point, &bessel) * share;
    return tail.is_upper ? rfade_interval_end_from(&both, true, d_mean_db, d_parameter)
                         : rfade_interval_end_from(&both, false, -d_mean_db, -d_parameter);
}

/*
 * The rule for an interval, from bounds: |slope| is at most 1.4 + b |b - a| / 2, and below a
 * that product is greatest half way, at b = a/2; |curvature| is at most b^2/2.
 */
static const struct rfade_gauss_rule *rule_for(double a, const struct point *middle,
                                               double width_db)
{
    const double half_width = 0.5 * RFADE_LN_PER_DB * width_db;
    const double step = expm1(0.5 * half_width);
    const double b_high = middle->b * (1.0 + step);
    const double b_low = middle->b / (1.0 + step);
    const double half_way = fmin(fmax(0.5 * a, b_low), b_high);
    const double drift = fmax(b_high * fabs(b_high - a),
                              fmax(b_low * fabs(b_low - a), half_way * (a - half_way)));
    return rfade_gauss_rule_for(half_width * (1.4 + 0.5 * drift),
                                0.5 * half_width * half_width * b_high * b_high);
}

enum { A, SCALE, AMPLITUDE_EXCESS }; /* constants */

static enum rfade_status prepare(double k, struct rfade_prepared *prepared)
{
    *prepared = (struct rfade_prepared){.parameter = NAN};
    if (!parameter_valid(k)) {
        return RFADE_DOMAIN;
    }
    const struct rice rice = rice_of(k);
    *prepared = (struct rfade_prepared){k, {rice.a, rice.scale, rice.amplitude_excess}};
    return RFADE_OK;
}

static struct rice rice_from(const struct rfade_prepared *prepared)
{
    return (struct rice){prepared->parameter, prepared->constants[A],
                         prepared->constants[SCALE], prepared->constants[AMPLITUDE_EXCESS]};
}

static enum rfade_status log_density_of(const struct rfade_prepared *prepared, double x_db,
                                        struct rfade_log_gradient *result)
{
    *result = rfade_log_gradient_nan();
    if (!parameter_valid(prepared->parameter) || !rfade_level_valid(x_db) || isinf(x_db)) {
        return RFADE_DOMAIN;
    }
    const struct rice rice = rice_from(prepared);
    const struct point point = point_at(&rice, x_db);
    const struct rfade_bessel_pair bessel = rfade_bessel_pair(rice.a * point.b);
    result->value = log_density_base(&point) + log(bessel.i0_scaled);
    result->d_mean_db = -RFADE_LN_PER_DB * level_slope(rice.a, point.b, point.offset, &bessel);
    result->d_parameter = parameter_slope(&rice, &point, &bessel);
    return RFADE_OK;
}

static enum rfade_status log_interval_of(const struct rfade_prepared *prepared, double low_db,
                                         double high_db, struct rfade_log_gradient *result)
{
    *result = rfade_log_gradient_nan();
    if (!parameter_valid(prepared->parameter) || !rfade_interval_valid(low_db, high_db)) {
        return RFADE_DOMAIN;
    }
    const struct rice rice = rice_from(prepared);
    const double width_db = high_db - low_db;
    if (width_db <= RFADE_NARROW_DB) {
        const struct point middle = point_at(&rice, 0.5 * (low_db + high_db));
        const struct rfade_gauss_rule *rule = rule_for(rice.a, &middle, width_db);
        if (rule != NULL) {
            *result = narrow_interval(&rice, &middle, width_db, rule);
            return RFADE_OK;
        }
    }
    const struct rfade_interval_end low = interval_end(&rice, low_db);
    const struct rfade_interval_end high = interval_end(&rice, high_db);
    *result = rfade_interval_from_ends(&low, &high);
    return RFADE_OK;
}

static enum rfade_status log_density(double k, double x_db, struct rfade_log_gradient *result)
{
    return rfade_log_density_once(&rfade_model_rice, k, x_db, result);
}

static enum rfade_status log_interval(double k, double low_db, double high_db,
                                      struct rfade_log_gradient *result)
{
    return rfade_log_interval_once(&rfade_model_rice, k, low_db, high_db, result);
}

static enum rfade_status quantile(double k, double lower, double upper, double *x_db)
{
    return rfade_quantile_by_newton(&rfade_model_rice, k, lower, upper, x_db);
}

/*
 * v = (1+2K)/(1+K)^2, so 1 - v = (K/(1+K))^2 (Greenstein, Michelson and Erceg 1999, eq. 7,
 * from the second and fourth moments of the amplitude); no K has v above 1.
 */
static double from_normalised_variance(double normalised_variance)
{
    if (!(normalised_variance > 0.0)) {
        return k_max;
    }
    const double root = sqrt(fmax(1.0 - normalised_variance, 0.0));
    return fmin(root * (1.0 + root) / normalised_variance, k_max);
}

static double normalised_variance(double k)
{
    return (1.0 + 2.0 * k) / ((1.0 + k) * (1.0 + k));
}

const struct rfade_model rfade_model_rice = {
    .id = RFADE_RICE,
    .name = "rice",
    .parameter_name = "k",
    .parameter_min = 0.0,
    .parameter_max = k_max,
    .fit_min = 0.0,
    .tails = tails,
    .log_density = log_density,
    .log_interval = log_interval,
    .prepare = prepare,
    .log_density_of = log_density_of,
    .log_interval_of = log_interval_of,
    .quantile = quantile,
    .from_normalised_variance = from_normalised_variance,
    .normalised_variance = normalised_variance,
};
