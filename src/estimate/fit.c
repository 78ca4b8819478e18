/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "estimate/fit.h"

#include <gsl/gsl_cdf.h>
#include <math.h>
#include <string.h>

#include "estimate/profile.h"
#include "model/model.h"

/* Starts this far inside the range, so that a boundary is met only if the readings say so. */
static const double START_INSIDE = 0.05;

/*
 * eta at Rice's K = 0 is 0, where the model's own score vanishes; K = 1e-4 stands for it
 * (eta = 1e-8), which moves the likelihood by less than its rounding.
 */
static const double SPREAD_INSIDE = 1e-8;

/*
 * A spread of 1/30 of the step changes nothing any more: a reading lands in the one or the
 * other interval by the mean alone.
 */
static const double RESOLVED_SHARE = 1.0 / 30.0;

double rfade_deviate(double probability, double degrees_of_freedom)
{
    return isinf(degrees_of_freedom) ? gsl_cdf_ugaussian_Pinv(probability)
                                     : gsl_cdf_tdist_Pinv(probability, degrees_of_freedom);
}

static void set_range(const struct rfade_problem *problem, struct rfade_sample *sample)
{
    const struct rfade_model *model = sample->model;
    if (!rfade_has_spread(model)) {
        return;
    }
    double ends[2] = {rfade_spread_of_parameter(model, model->fit_min),
                      rfade_spread_of_parameter(model, model->parameter_max)};
    sample->spread_min = fmin(ends[0], ends[1]) + SPREAD_INSIDE;
    sample->spread_max = fmax(ends[0], ends[1]) - SPREAD_INSIDE;
    if (problem->step_min_db > 0.0) {
        double deviation = RESOLVED_SHARE * problem->step_min_db / RFADE_DB_PER_NEPER_OF_POWER;
        sample->spread_max = fmin(sample->spread_max, -2.0 * log(deviation));
    }
}

/* The log-likelihood at the end of the model's domain itself, not just inside it. */
static enum rfade_status value_at_boundary(const struct rfade_sample *sample,
                                           double location_db, double *value)
{
    double parameter =
        rfade_parameter_of_spread(sample->model, sample->spread_min - SPREAD_INSIDE);
    *value = 0.0;
    for (size_t i = 0; i < sample->bin_count; i++) {
        double log_probability = NAN;
        enum rfade_status status = rfade_bin_log_probability(
            sample->model, &sample->bins[i], location_db, parameter, &log_probability);
        if (status != RFADE_OK) {
            return status;
        }
        *value += sample->bins[i].weight * log_probability;
    }
    return RFADE_OK;
}

/*
 * If one level lies in every interval, an ever narrower spread about it meets the readings
 * ever better, or as well: nothing of the fading was resolved. Then the likelihood has a
 * ridge without a top, and the narrowest spread stands for it.
 */
static bool unresolved(const struct rfade_sample *sample, double *common_db)
{
    double low_db = -INFINITY;
    double high_db = INFINITY;
    for (size_t i = 0; i < sample->bin_count; i++) {
        low_db = fmax(low_db, sample->bins[i].low_db);
        high_db = fmin(high_db, sample->bins[i].high_db);
    }
    *common_db = 0.5 * (low_db + high_db);
    return low_db <= high_db;
}

static enum rfade_status maximise(const struct rfade_problem *problem,
                                  const struct rfade_sample *sample,
                                  struct rfade_maximum *maximum)
{
    double spread = -log(fmax(problem->start_variance, 1e-300));
    double start[2] = {problem->start_db, fmax(spread, sample->spread_min + START_INSIDE)};
    struct rfade_sample narrowest = *sample;
    double common_db = NAN;
    if (!rfade_has_spread(sample->model) || !unresolved(sample, &common_db)) {
        return rfade_maximise(sample, start, maximum);
    }
    start[RFADE_LOCATION] = common_db;
    narrowest.spread_min = sample->spread_max;
    enum rfade_status status = rfade_maximise(&narrowest, start, maximum);
    maximum->at_spread_min = false;
    maximum->at_spread_max = true;
    return status;
}

/* Maximum on the quick bins, and from there on all of them. */
static enum rfade_status find_maximum(const struct rfade_problem *problem,
                                      const struct rfade_sample *sample,
                                      struct rfade_maximum *quick, struct rfade_maximum *exact)
{
    struct rfade_sample all = *sample;
    enum rfade_status status = maximise(problem, sample, quick);
    *exact = *quick;
    all.bins = problem->bins;
    all.bin_count = problem->bin_count;
    if (status == RFADE_OK && problem->bins != problem->quick) {
        status = rfade_polish(&all, exact);
        if (status == RFADE_NO_CONVERGENCE) {
            status = rfade_maximise(&all, quick->theta, exact);
        }
    }
    if (status == RFADE_OK && exact->at_spread_min) {
        status = value_at_boundary(&all, exact->theta[RFADE_LOCATION], &exact->value);
    }
    return status;
}

/* The parameter that the spread stands for once the window's narrowing is taken back. */
static double corrected_parameter(const struct rfade_problem *problem,
                                  const struct rfade_sample *sample, double spread)
{
    const struct rfade_model *model = sample->model;
    double corrected = spread + log1p(-problem->settings->narrowing);
    double lowest = sample->spread_min - SPREAD_INSIDE;
    bool widest = fmin(spread, corrected) <= sample->spread_min + SPREAD_INSIDE;
    return rfade_parameter_of_spread(model, widest ? lowest : corrected);
}

/*
 * Both ends of an interval in theta[dimension]; one-sided where the estimate is at an end.
 * Profiles of the quick bins are set off from their own maximum.
 */
static enum rfade_status find_ends(const struct rfade_problem *problem,
                                   const struct rfade_fit_details *details, int dimension,
                                   bool one_sided, double ends[2])
{
    const struct rfade_sample *sample = &details->sample;
    double confidence = problem->settings->confidence;
    double probability = one_sided ? confidence : 0.5 * (1.0 + confidence);
    double deviate = rfade_deviate(probability, problem->covariance->degrees_of_freedom) *
                     sqrt(details->spread.design_effect[dimension]);
    double offset = details->exact.theta[dimension] - details->maximum.theta[dimension];
    for (int i = 0; i < 2; i++) {
        enum rfade_status status = rfade_profile_end(sample, &details->maximum, dimension,
                                                     i == 0 ? -1 : 1, deviate, &ends[i]);
        if (status != RFADE_OK) {
            return status;
        }
        bool limited = dimension == RFADE_SPREAD && (rfade_at_spread_min(sample, ends[i]) ||
                                                     rfade_at_spread_max(sample, ends[i]));
        ends[i] += limited ? 0.0 : offset;
    }
    return RFADE_OK;
}

static enum rfade_status set_parameter(const struct rfade_problem *problem,
                                       const struct rfade_fit_details *details,
                                       struct rfade_fit *fit)
{
    const struct rfade_sample *sample = &details->sample;
    const struct rfade_maximum *maximum = &details->exact;
    double spread = maximum->theta[RFADE_SPREAD];
    double ends[2] = {NAN, NAN};
    double corrected = spread + log1p(-problem->settings->narrowing);
    fit->at_lower_boundary =
        maximum->at_spread_min || corrected <= sample->spread_min + SPREAD_INSIDE;
    fit->at_upper_boundary = maximum->at_spread_max;
    fit->parameter = corrected_parameter(problem, sample, spread);
    fit->parameter_design_effect = details->spread.design_effect[RFADE_SPREAD];
    enum rfade_status status = find_ends(
        problem, details, RFADE_SPREAD, fit->at_lower_boundary || fit->at_upper_boundary, ends);
    if (status != RFADE_OK) {
        return status;
    }
    for (int i = 0; i < 2; i++) {
        bool unresolved = rfade_at_spread_max(sample, ends[i]);
        ends[i] = corrected_parameter(problem, sample, ends[i]);
        if (unresolved) {
            ends[i] = sample->model->parameter_max;
        }
    }
    fit->parameter_low = fmin(ends[0], ends[1]);
    fit->parameter_high = fmax(ends[0], ends[1]);
    return RFADE_OK;
}

/*
 * From theta to (mean power, parameter). Where the readings don't resolve the fading there is
 * no information about the parameter, and no variance.
 */
static void set_matrices(const struct rfade_fit_details *details, struct rfade_fit *fit)
{
    const struct rfade_maximum *maximum = &details->maximum;
    const struct rfade_model *model = details->sample.model;
    double slope[2] = {1.0, 1.0};
    int dimensions = rfade_has_spread(model) ? 2 : 1;
    if (dimensions == 2) {
        double raw = rfade_parameter_of_spread(model, maximum->theta[RFADE_SPREAD]);
        slope[1] = rfade_spread_slope(model, raw);
    }
    for (int i = 0; i < dimensions; i++) {
        for (int j = 0; j < dimensions; j++) {
            double scale = slope[i] * slope[j];
            bool known = maximum->inverse.at[i][i] > 0.0 && maximum->inverse.at[j][j] > 0.0;
            fit->information[i][j] = maximum->information.at[i][j] * scale;
            fit->covariance[i][j] = known ? details->spread.covariance[i][j] / scale : NAN;
        }
    }
}

void rfade_fit_blank(const struct rfade_model *model, struct rfade_fit *fit)
{
    memset(fit, 0, sizeof *fit);
    fit->model = model->id;
    fit->parameter = fit->parameter_low = fit->parameter_high = NAN;
    fit->mean_power_db = fit->mean_power_low_db = fit->mean_power_high_db = NAN;
    fit->log_likelihood = fit->aic = fit->weight = fit->goodness_p = NAN;
    fit->parameter_design_effect = NAN;
}

enum rfade_status rfade_fit_problem(const struct rfade_model *model,
                                    const struct rfade_problem *problem, struct rfade_fit *fit,
                                    struct rfade_fit_details *details)
{
    double ends[2] = {NAN, NAN};
    const struct rfade_maximum *exact = &details->exact;
    rfade_fit_blank(model, fit);
    memset(details, 0, sizeof *details);
    details->sample = (struct rfade_sample){model, problem->quick, problem->quick_count, 0, 0};
    set_range(problem, &details->sample);
    enum rfade_status status =
        find_maximum(problem, &details->sample, &details->maximum, &details->exact);
    if (status != RFADE_OK) {
        return status;
    }
    status = rfade_class_scores(&details->sample, problem->edges_db, &details->maximum,
                                &details->scores);
    if (status != RFADE_OK) {
        return status;
    }
    rfade_estimates_spread(problem->covariance, &details->scores, &details->maximum,
                           rfade_has_spread(model) ? 2 : 1, &details->spread);
    fit->mean_power_db = exact->theta[RFADE_LOCATION];
    fit->log_likelihood = exact->value;
    fit->aic = 2.0 * (details->spread.trace - fit->log_likelihood);
    set_matrices(details, fit);
    status = find_ends(problem, details, RFADE_LOCATION, false, ends);
    fit->mean_power_low_db = ends[0];
    fit->mean_power_high_db = ends[1];
    if (status == RFADE_OK && rfade_has_spread(model)) {
        status = set_parameter(problem, details, fit);
    }
    return status;
}
