/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Outage of fast fading over a lognormal local mean (H. Suzuki, "A statistical model for
 * urban radio propagation", IEEE Transactions on Communications 25, 1977, for Rayleigh).
 *
 * The level is u + s, u the fast fading about its mean power and s normal with the standard
 * deviation of the shadowing. Either tail T at x is an integral over u of positive terms, in
 * the form whose narrow factor is a density, so that its sum is short:
 *     T_fast(u) phi((x - u)/sigma)/sigma   or   f(u) T_normal((x - u)/sigma).
 * Both are analytic, so the trapezoidal rule on the whole line converges exponentially
 * (L. N. Trefethen and J. A. C. Weideman, SIAM Review 56, 2014): halving the step about
 * squares the error. Sums go outward from the peaks.
 *
 * ln f of Rayleigh and Nakagami is concave in u, as are all the other factors, so there is one
 * peak. ln f of Rice bends upward in deep fades, where the slope climbs from 1 (the power law)
 * to K/4 and more at 6 dB below the mean: a deep outage may then come from a deep fade, a deep
 * local mean, or both, with a valley between.
 */
#include "routefade/predict.h"

#include <gsl/gsl_math.h>
#include <math.h>
#include <stdbool.h>
#include <stddef.h>

#include "model/model.h"
#include "special/tails.h"

static const double shadowing_max_db = 30.0;
static const double threshold_max_db = RFADE_OUTAGE_LEVEL_LIMIT_DB;
/* No peak lies further beyond the threshold or the mean: ten standard deviations. */
static const double peak_margin_db = 10.0 * 30.0;
/* Where the slope of ln f of Rice is greatest, at large K: half the steady amplitude. */
static const double rice_steepest_db = -6.0;

/* Two steps that agree to here leave about the square of it. */
static const double step_tolerance = 1e-9;
/* Terms this far below the highest peak, in nepers, end a sum. */
static const double negligible_exponent = 45.0;
/* Below, the tail is 0 many times over and rounding of the logarithms drowns its sum. */
static const double log_vanishing = -1e5;
enum { HALVINGS_MAX = 12, BISECTIONS_MAX = 60, VALLEY_PARTS = 24, POINTS_MAX = 1000000 };

/* Of the integrand: the lowest and the highest peak, which may be one. */
struct peaks {
    double low_db;
    double high_db;
    double log_value; /* at the higher of them */
};

struct mixture {
    const struct rfade_model *model;
    double parameter;
    double shadowing_db;
    double x_db;
    bool is_upper;
    double spread_db; /* scale on which the integrand varies */
    /* its logarithm, of the variable that it has been written in */
    double (*integrand)(const struct mixture *mixture, double v_db);
    double origin_db; /* the level u at which that variable is 0 */
};

static double small_tail(const struct mixture *mixture, const struct rfade_tails *tails)
{
    return mixture->is_upper ? tails->log_upper : tails->log_lower;
}

static double log_shadowing_density(const struct mixture *mixture, double s_db)
{
    const double z = s_db / mixture->shadowing_db;
    return -0.5 * z * z - log(mixture->shadowing_db * (M_SQRT2 * M_SQRTPI));
}

/* ln of the integrand, in v = u - x = -s, so that a narrow shadowing is not lost in the
 * rounding of x; -infinity beyond the levels that the model takes. */
static double over_shadowing(const struct mixture *mixture, double v_db)
{
    struct rfade_tails tails;
    if (mixture->model->tails(mixture->parameter, mixture->x_db + v_db, &tails) != RFADE_OK) {
        return -INFINITY;
    }
    return small_tail(mixture, &tails) + log_shadowing_density(mixture, v_db);
}

/* Likewise in u itself. */
static double over_fading(const struct mixture *mixture, double u_db)
{
    const double s_db = mixture->x_db - u_db;
    struct rfade_tails tails;
    struct rfade_log_gradient density;
    if (mixture->model->log_density(mixture->parameter, u_db, &density) != RFADE_OK ||
        rfade_normal_tails(s_db / mixture->shadowing_db, &tails) != RFADE_OK) {
        return -INFINITY;
    }
    return small_tail(mixture, &tails) + density.value;
}

/* The density of the level: of both, in either variable. */
static double over_density(const struct mixture *mixture, double v_db)
{
    const double s_db = (mixture->x_db - mixture->origin_db) - v_db;
    struct rfade_log_gradient density;
    if (mixture->model->log_density(mixture->parameter, mixture->origin_db + v_db, &density) !=
        RFADE_OK) {
        return -INFINITY;
    }
    return density.value + log_shadowing_density(mixture, s_db);
}

/* By a difference: where logarithms are huge, it is right when a slope is lost in rounding. */
static bool rises_at(const struct mixture *mixture, double v_db)
{
    const double aside_db = 1e-2 * mixture->spread_db;
    return mixture->integrand(mixture, v_db + aside_db) >
           mixture->integrand(mixture, v_db - aside_db);
}

/* Near enough to the peak between two levels where the integrand rises and falls. */
static double bisect_peak(const struct mixture *mixture, double low_db, double high_db)
{
    for (int i = 0; i < BISECTIONS_MAX && high_db - low_db > 1e-2 * mixture->spread_db; i++) {
        const double middle_db = 0.5 * (low_db + high_db);
        if (rises_at(mixture, middle_db)) {
            low_db = middle_db;
        } else {
            high_db = middle_db;
        }
    }
    return 0.5 * (low_db + high_db);
}

/* The lowest and the highest peak: one and the same, or two with a valley between. */
static void find_peaks(const struct mixture *mixture, struct peaks *peaks)
{
    const double low_db = fmin(mixture->x_db, 0.0) - peak_margin_db;
    const double high_db = fmax(mixture->x_db, 0.0) + peak_margin_db;
    const bool may_have_valley = mixture->model->id == RFADE_RICE && !mixture->is_upper;
    const int parts = may_have_valley ? VALLEY_PARTS : 1;
    const double ends_db[] = {low_db - mixture->origin_db,
                              fmax(rice_steepest_db, low_db) - mixture->origin_db,
                              high_db - mixture->origin_db};
    double before_db = ends_db[0];
    bool rises = true;
    *peaks = (struct peaks){NAN, NAN, -INFINITY};
    for (int i = 1; i <= 2 * parts; i++) {
        const int half = i > parts ? 1 : 0;
        const double share = (double)(i - half * parts) / parts;
        const double at_db = ends_db[half] + share * (ends_db[half + 1] - ends_db[half]);
        const bool rises_here = rises_at(mixture, at_db);
        if (rises && !rises_here) {
            peaks->high_db = bisect_peak(mixture, before_db, at_db);
            peaks->low_db = isnan(peaks->low_db) ? peaks->high_db : peaks->low_db;
            peaks->log_value =
                fmax(peaks->log_value, mixture->integrand(mixture, peaks->high_db));
        }
        rises = rises_here;
        before_db = at_db;
    }
}

/*
 * Sum of the integrand, relative to the highest peak, at first_db, first_db + step_db, ...
 * until it is negligible or a limit is passed; where that was, in *end_db.
 */
static double sum_outward(const struct mixture *mixture, const struct peaks *peaks,
                          double first_db, double step_db, double limit_db, double *end_db)
{
    double sum = 0.0;
    for (int i = 0; i < POINTS_MAX; i++) {
        const double at_db = first_db + i * step_db;
        const double relative = mixture->integrand(mixture, at_db) - peaks->log_value;
        *end_db = at_db;
        if (!(relative > -negligible_exponent) || (at_db - limit_db) * step_db > 0.0) {
            return sum;
        }
        sum += exp(relative);
    }
    return NAN; /* agrees with nothing: no convergence */
}

/* Sum over the whole line at high peak + offset_db + any multiple of step_db. */
static double sum_line(const struct mixture *mixture, const struct peaks *peaks,
                       double offset_db, double step_db)
{
    const double first_db = peaks->high_db + offset_db;
    double reached_db = NAN;
    double end_db = NAN;
    double sum =
        sum_outward(mixture, peaks, first_db, step_db, INFINITY, &end_db) +
        sum_outward(mixture, peaks, first_db - step_db, -step_db, -INFINITY, &reached_db);
    if (peaks->low_db < reached_db) {
        /* the valley was negligible: on the same grid, about the peak beyond it */
        const double steps = ceil((first_db - peaks->low_db) / step_db);
        const double low_first_db = first_db - steps * step_db;
        sum += sum_outward(mixture, peaks, low_first_db, -step_db, -INFINITY, &end_db) +
               sum_outward(mixture, peaks, low_first_db + step_db, step_db,
                           reached_db - 0.5 * step_db, &end_db);
    }
    return sum;
}

static enum rfade_status integrate(const struct mixture *mixture, double *log_tail)
{
    struct peaks peaks;
    find_peaks(mixture, &peaks);
    if (isnan(peaks.high_db)) {
        return RFADE_NO_CONVERGENCE;
    }
    if (peaks.log_value < log_vanishing) {
        *log_tail = peaks.log_value;
        return RFADE_OK;
    }
    double step_db = 0.5 * mixture->spread_db;
    double sum = sum_line(mixture, &peaks, 0.0, step_db);
    for (int i = 0; i < HALVINGS_MAX; i++) {
        /* the new points lie half way between the old ones */
        const double between = sum_line(mixture, &peaks, 0.5 * step_db, step_db);
        const bool agrees = fabs(between - sum) <= 2.0 * step_tolerance * (sum + between);
        sum += between;
        step_db *= 0.5;
        if (agrees) {
            *log_tail = peaks.log_value + log(sum * step_db);
            return RFADE_OK;
        }
    }
    return RFADE_NO_CONVERGENCE;
}

/* One tail first; if it proves the large one, the other is integrated for itself. */
static enum rfade_status integrate_small_tail(struct mixture *mixture,
                                              struct rfade_tails *result)
{
    for (int attempt = 0; attempt < 2; attempt++) {
        double log_tail = NAN;
        const enum rfade_status status = integrate(mixture, &log_tail);
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

/* Whether the arguments are such that there is an integral to take. */
static bool valid(const struct rfade_model *model, double parameter, double shadowing_db)
{
    struct rfade_tails probe;
    return model != NULL && model->id != RFADE_LOGNORMAL && shadowing_db >= 0.0 &&
           shadowing_db <= shadowing_max_db && model->tails(parameter, 0.0, &probe) == RFADE_OK;
}

/* With the variable that makes the narrower factor a density. */
static struct mixture make_mixture(const struct rfade_model *model, double parameter,
                                   double shadowing_db, double x_db)
{
    /* the spread of the level is near that of the power, in nepers, as long as both are small
     */
    const double fading_db =
        RFADE_DB_PER_NEPER_OF_POWER * fmin(sqrt(model->normalised_variance(parameter)), 1.0);
    return (struct mixture){
        .model = model,
        .parameter = parameter,
        .shadowing_db = shadowing_db,
        .x_db = x_db,
        .is_upper = x_db > 0.0,
        .spread_db = fmin(shadowing_db, fading_db),
        .integrand = shadowing_db < fading_db ? over_shadowing : over_fading,
        .origin_db = shadowing_db < fading_db ? x_db : 0.0,
    };
}

enum rfade_status rfade_outage(const struct rfade_model *model, double parameter,
                               double shadowing_db, double x_db, struct rfade_tails *result)
{
    *result = rfade_tails_nan();
    if (isnan(x_db) || !valid(model, parameter, shadowing_db)) {
        return RFADE_DOMAIN;
    }
    if (shadowing_db == 0.0 || isinf(x_db)) {
        return model->tails(parameter, x_db, result);
    }
    if (fabs(x_db) > threshold_max_db) {
        return RFADE_DOMAIN;
    }
    struct mixture mixture = make_mixture(model, parameter, shadowing_db, x_db);
    return integrate_small_tail(&mixture, result);
}

enum rfade_status rfade_outage_log_density(const struct rfade_model *model, double parameter,
                                           double shadowing_db, double x_db,
                                           double *log_density)
{
    *log_density = NAN;
    if (!(fabs(x_db) <= threshold_max_db) || !valid(model, parameter, shadowing_db)) {
        return RFADE_DOMAIN;
    }
    if (shadowing_db == 0.0) {
        struct rfade_log_gradient gradient;
        const enum rfade_status status = model->log_density(parameter, x_db, &gradient);
        *log_density = gradient.value;
        return status;
    }
    struct mixture mixture = make_mixture(model, parameter, shadowing_db, x_db);
    mixture.integrand = over_density;
    return integrate(&mixture, log_density);
}

double rfade_lognormal_mean_over_median_db(double sigma_db)
{
    return 0.5 * sigma_db * sigma_db / RFADE_DB_PER_NEPER_OF_POWER;
}
