/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Outage of fast fading over a lognormal local mean (H. Suzuki, "A statistical model for
 * urban radio propagation", IEEE Transactions on Communications 25, 1977, for Rayleigh).
 *
 * The level is u + s, u the fast fading about its mean power and s normal with the standard
 * deviation of the shadowing. Either tail T at x is an integral of positive terms, written in
 * the narrower of the two variables:
 *     over s: T_fast(x - s) phi(s/sigma)/sigma ds,   over u: f(u) T_normal((x - u)/sigma) du.
 * All factors are log-concave and analytic, so the trapezoidal rule on the whole line
 * converges exponentially (L. N. Trefethen and J. A. C. Weideman, SIAM Review 56, 2014):
 * halving the step about squares the error, and sums go outward from the peak.
 */
#include "routefade/predict.h"

#include <gsl/gsl_math.h>
#include <math.h>
#include <stdbool.h>
#include <stddef.h>

#include "special/tails.h"

static const double shadowing_max_db = 30.0;
static const double threshold_max_db = 1000.0;
static const double search_max_db = 2900.0; /* leaves the sums room within the models' domain */
static const double db_per_neper = 10.0 / M_LN10;

/* Two steps that agree to here leave about the square of it. */
static const double step_tolerance = 1e-9;
/* Terms this far below the peak, in nepers, end a sum of log-concave terms. */
static const double negligible_exponent = 45.0;
enum { HALVINGS_MAX = 12, BISECTIONS_MAX = 60 };

struct mixture;

/* ln of an integrand, and its slope. */
struct term {
    double log_value;
    double slope;
};

struct mixture {
    const struct rfade_model *model;
    double parameter;
    double shadowing_db;
    double x_db;
    bool is_upper;
    struct term (*integrand)(const struct mixture *mixture, double v_db);
};

/* ln of a tail and its slope, which is the density's share of it. */
static struct term tail_term(const struct mixture *mixture, const struct rfade_tails *tails,
                             double log_density)
{
    const double log_tail = mixture->is_upper ? tails->log_upper : tails->log_lower;
    const double share = exp(log_density - log_tail);
    return (struct term){log_tail, mixture->is_upper ? -share : share};
}

static double log_shadowing_density(const struct mixture *mixture, double s_db)
{
    const double z = s_db / mixture->shadowing_db;
    return -0.5 * z * z - log(mixture->shadowing_db * (M_SQRT2 * M_SQRTPI));
}

static struct term over_shadowing(const struct mixture *mixture, double s_db)
{
    const double u_db = mixture->x_db - s_db;
    struct rfade_tails tails;
    struct rfade_log_gradient density;
    if (mixture->model->tails(mixture->parameter, u_db, &tails) != RFADE_OK ||
        mixture->model->log_density(mixture->parameter, u_db, &density) != RFADE_OK) {
        return (struct term){-INFINITY, 0.0};
    }
    const struct term tail = tail_term(mixture, &tails, density.value);
    return (struct term){tail.log_value + log_shadowing_density(mixture, s_db),
                         -tail.slope - s_db / (mixture->shadowing_db * mixture->shadowing_db)};
}

static struct term over_fading(const struct mixture *mixture, double u_db)
{
    const double s_db = mixture->x_db - u_db;
    struct rfade_tails tails;
    struct rfade_log_gradient density;
    if (mixture->model->log_density(mixture->parameter, u_db, &density) != RFADE_OK ||
        rfade_normal_tails(s_db / mixture->shadowing_db, &tails) != RFADE_OK) {
        return (struct term){-INFINITY, 0.0};
    }
    const struct term tail = tail_term(mixture, &tails, log_shadowing_density(mixture, s_db));
    return (struct term){tail.log_value + density.value, -tail.slope - density.d_mean_db};
}

/* Near enough to the integrand's peak: within a thousandth of the narrower spread. */
static double find_peak(const struct mixture *mixture, double spread_db)
{
    const double centre_db = mixture->integrand == over_shadowing ? mixture->x_db : 0.0;
    double low = centre_db - search_max_db;
    double high = centre_db + search_max_db;
    for (int i = 0; i < BISECTIONS_MAX && high - low > 1e-3 * spread_db; i++) {
        const double middle = 0.5 * (low + high);
        if (mixture->integrand(mixture, middle).slope > 0.0) {
            low = middle;
        } else {
            high = middle;
        }
    }
    return 0.5 * (low + high);
}

/* Sum of the integrand over its peak at `first_db`, first_db + step_db, ... outward. */
static double sum_outward(const struct mixture *mixture, double first_db, double step_db,
                          double log_peak)
{
    double sum = 0.0;
    for (size_t i = 0;; i++) {
        const double below_peak =
            mixture->integrand(mixture, first_db + (double)i * step_db).log_value - log_peak;
        if (!(below_peak > -negligible_exponent)) {
            return sum;
        }
        sum += exp(below_peak);
    }
}

static enum rfade_status integrate(const struct mixture *mixture, double spread_db,
                                   double *log_tail)
{
    const double peak_db = find_peak(mixture, spread_db);
    const double log_peak = mixture->integrand(mixture, peak_db).log_value;
    double step_db = 0.5 * spread_db;
    double sum = sum_outward(mixture, peak_db, step_db, log_peak) +
                 sum_outward(mixture, peak_db - step_db, -step_db, log_peak);
    for (int i = 0; i < HALVINGS_MAX; i++) {
        /* the new points lie half way between the old ones */
        const double between =
            sum_outward(mixture, peak_db + 0.5 * step_db, step_db, log_peak) +
            sum_outward(mixture, peak_db - 0.5 * step_db, -step_db, log_peak);
        const double refined = 0.5 * (sum + between);
        const bool agrees = fabs(refined - sum) <= step_tolerance * refined;
        sum = sum + between;
        step_db *= 0.5;
        if (agrees) {
            *log_tail = log_peak + log(sum * step_db);
            return RFADE_OK;
        }
    }
    return RFADE_NO_CONVERGENCE;
}

/* One tail first; if it proves the large one, the other is integrated for itself. */
static enum rfade_status integrate_small_tail(struct mixture *mixture, double spread_db,
                                              struct rfade_tails *result)
{
    for (int attempt = 0; attempt < 2; attempt++) {
        double log_tail = NAN;
        const enum rfade_status status = integrate(mixture, spread_db, &log_tail);
        if (status != RFADE_OK) {
            return status;
        }
        if (log_tail <= -M_LN2 || attempt == 1) {
            *result = rfade_tails_from(exp(log_tail), log_tail, mixture->is_upper);
            return RFADE_OK;
        }
        mixture->is_upper = !mixture->is_upper;
    }
    return RFADE_NO_CONVERGENCE;
}

enum rfade_status rfade_outage(const struct rfade_model *model, double parameter,
                               double shadowing_db, double x_db, struct rfade_tails *result)
{
    *result = rfade_tails_nan();
    if (model == NULL || model->id == RFADE_LOGNORMAL || isnan(x_db) ||
        !(shadowing_db >= 0.0 && shadowing_db <= shadowing_max_db)) {
        return RFADE_DOMAIN;
    }
    if (shadowing_db == 0.0 || isinf(x_db)) {
        return model->tails(parameter, x_db, result);
    }
    struct rfade_tails probe;
    const enum rfade_status status = model->tails(parameter, 0.0, &probe);
    if (status != RFADE_OK || fabs(x_db) > threshold_max_db) {
        return RFADE_DOMAIN;
    }
    /* the spread of the level is near that of the power, in nepers, as long as both are small
     */
    const double fading_db =
        db_per_neper * fmin(sqrt(model->normalised_variance(parameter)), 1.0);
    const bool shadowing_narrower = shadowing_db < fading_db;
    struct mixture mixture = {model,        parameter,
                              shadowing_db, x_db,
                              x_db > 0.0,   shadowing_narrower ? over_shadowing : over_fading};
    return integrate_small_tail(&mixture, fmin(shadowing_db, fading_db), result);
}

double rfade_lognormal_mean_over_median_db(double sigma_db)
{
    return 0.5 * sigma_db * sigma_db / db_per_neper;
}
