/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * AIC of each fit is -2 ln L + 2 tr(J H^-1), which for independent readings is Akaike's
 * -2 ln L + 2 p [Varin and Vidoni 2005, eq. 4]. A log-likelihood of correlated readings
 * varies more than its penalty supposes; for the weights all differences are therefore
 * divided by one common design effect, the mean over the parameters of all models.
 *
 * Rule of choice: the model of the lowest AIC, but a model with a parameter is preferred to
 * Rayleigh, which both Rice and Nakagami contain, only if the likelihood ratio, divided by
 * the parameter's design effect, is significant at 5 %. For Rice, whose K = 0 lies on the
 * boundary, the ratio is half 0 and half chi-square of one degree [Chernoff 1954; Self and
 * Liang 1987, case 5]: one-sided 5 %. For Nakagami m = 1 lies inside: two-sided 5 %. With
 * the design effect measured in blocks, the root of the ratio is held against Student's t.
 */
#include "estimate/choice.h"

#include <math.h>

#include "estimate/profile.h"

static const double SIGNIFICANCE = 0.05;

/*
 * Is the spread of a model significantly apart from Rayleigh's (V = 1, or 1 - narrowing as
 * seen through the window)?
 */
static enum rfade_status differs_from_rayleigh(const struct rfade_problem *problem,
                                               const struct rfade_fit_details *details,
                                               bool *differs)
{
    const struct rfade_sample *sample = &details->sample;
    double null = -log1p(-problem->settings->narrowing);
    bool boundary = null <= sample->spread_min ||
                    (problem->settings->narrowing > 0.0 && sample->spread_min < 1e-6);
    double value = NAN;
    *differs = false;
    if (boundary && details->maximum.theta[RFADE_SPREAD] <= fmax(null, sample->spread_min)) {
        return RFADE_OK;
    }
    enum rfade_status status = rfade_profile_value(sample, &details->maximum, RFADE_SPREAD,
                                                   fmax(null, sample->spread_min), &value);
    if (status != RFADE_OK) {
        return status;
    }
    double ratio = 2.0 * fmax(details->maximum.value - value, 0.0) /
                   details->spread.design_effect[RFADE_SPREAD];
    double probability = boundary ? 1.0 - SIGNIFICANCE : 1.0 - 0.5 * SIGNIFICANCE;
    *differs =
        sqrt(ratio) > rfade_deviate(probability, problem->covariance->degrees_of_freedom);
    return RFADE_OK;
}

static double common_design_effect(const struct rfade_fit_details *details, size_t count)
{
    double trace = 0.0;
    double parameters = 0.0;
    for (size_t i = 0; i < count; i++) {
        trace += details[i].spread.trace;
        parameters += rfade_has_spread(details[i].sample.model) ? 2.0 : 1.0;
    }
    return trace / parameters;
}

static void set_weights(struct rfade_estimate *estimate, double design_effect)
{
    double best = INFINITY;
    double sum = 0.0;
    for (size_t i = 0; i < estimate->fit_count; i++) {
        best = fmin(best, estimate->fits[i].aic);
    }
    for (size_t i = 0; i < estimate->fit_count; i++) {
        struct rfade_fit *fit = &estimate->fits[i];
        fit->weight = exp(-0.5 * (fit->aic - best) / design_effect);
        sum += fit->weight;
    }
    for (size_t i = 0; i < estimate->fit_count; i++) {
        estimate->fits[i].weight /= sum;
    }
}

enum rfade_status rfade_choose(const struct rfade_problem *problem,
                               const struct rfade_fit_details *details,
                               struct rfade_estimate *estimate)
{
    set_weights(estimate, common_design_effect(details, estimate->fit_count));
    double best = INFINITY;
    for (size_t i = 0; i < estimate->fit_count; i++) {
        const struct rfade_fit *fit = &estimate->fits[i];
        bool candidate = true;
        enum rfade_status status = RFADE_OK;
        if (fit->model == RFADE_RICE || fit->model == RFADE_NAKAGAMI) {
            status = differs_from_rayleigh(problem, &details[i], &candidate);
        }
        if (status != RFADE_OK) {
            return status;
        }
        if (candidate && fit->aic < best) {
            best = fit->aic;
            estimate->preferred = i;
        }
    }
    return RFADE_OK;
}
