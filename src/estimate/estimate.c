/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "estimate/estimate.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "estimate/bins.h"
#include "estimate/choice.h"
#include "estimate/fit.h"
#include "estimate/goodness.h"

/* The parts of a problem that are made for it and freed with it. */
struct workspace {
    struct rfade_problem problem;
    struct rfade_bin_moments moments;
    struct rfade_bin *quick;
    double edges_db[RFADE_CLASS_EDGES];
    struct rfade_class_covariance covariance;
    struct rfade_class_covariance counted;
};

static bool settings_valid(const struct rfade_estimate_settings *settings)
{
    return settings->confidence > 0.0 && settings->confidence < 1.0 &&
           settings->narrowing >= 0.0 && settings->narrowing < 1.0;
}

static void measure_covariances(struct workspace *workspace, const struct rfade_bin *bins,
                                size_t bin_count,
                                const struct rfade_estimate_settings *settings)
{
    double totals[RFADE_COARSE_BINS] = {0.0};
    for (size_t i = 0; i < bin_count; i++) {
        totals[rfade_class_of_bin(workspace->edges_db, &bins[i])] += bins[i].weight;
    }
    rfade_class_covariance(settings->blocks, totals, &workspace->covariance);
    workspace->counted = workspace->covariance;
    if (settings->counted_blocks != NULL) {
        rfade_class_covariance(settings->counted_blocks, totals, &workspace->counted);
    }
}

static enum rfade_status prepare(const struct rfade_bin *bins, size_t bin_count,
                                 const struct rfade_estimate_settings *settings,
                                 const double *edges_db, struct workspace *workspace)
{
    size_t quick_count = 0;
    memset(workspace, 0, sizeof *workspace);
    if (!settings_valid(settings)) {
        return RFADE_DOMAIN;
    }
    if (bin_count == 0) {
        return RFADE_NO_DATA;
    }
    enum rfade_status status = rfade_bins_moments(bins, bin_count, &workspace->moments);
    /* Edges that were given, those of a survey's blocks, or such as the readings suggest. */
    if (edges_db == NULL && settings->blocks != NULL) {
        edges_db = rfade_coarse_edges_db;
    }
    if (status == RFADE_OK) {
        status = rfade_bins_shorten(bins, bin_count, &workspace->moments, edges_db,
                                    &workspace->quick, &quick_count);
    }
    if (status != RFADE_OK) {
        return status;
    }
    if (edges_db != NULL) {
        memcpy(workspace->edges_db, edges_db, sizeof workspace->edges_db);
    } else {
        rfade_class_edges(workspace->quick, quick_count, workspace->edges_db);
    }
    measure_covariances(workspace, workspace->quick, quick_count, settings);
    workspace->problem = (struct rfade_problem){
        .bins = quick_count < bin_count ? bins : workspace->quick,
        .bin_count = bin_count,
        .quick = workspace->quick,
        .quick_count = quick_count,
        .edges_db = workspace->edges_db,
        .covariance = &workspace->covariance,
        .counted = &workspace->counted,
        .settings = settings,
        .start_db = workspace->moments.mean_power_db,
        .start_variance = workspace->moments.normalised_variance,
        .step_min_db = workspace->moments.step_min_db,
    };
    return RFADE_OK;
}

static void release(struct workspace *workspace)
{
    free(workspace->quick);
}

/* Readings over the design effect of their mean power. */
static double effective_count(const struct workspace *workspace)
{
    const struct rfade_problem *problem = &workspace->problem;
    double weight[RFADE_COARSE_BINS] = {0.0};
    double power[RFADE_COARSE_BINS] = {0.0};
    if (problem->settings->blocks == NULL) {
        return workspace->moments.readings;
    }
    for (size_t i = 0; i < problem->quick_count; i++) {
        const struct rfade_bin *bin = &problem->quick[i];
        int place = rfade_class_of_bin(workspace->edges_db, bin);
        weight[place] += bin->weight;
        power[place] += bin->weight * rfade_bin_power(bin, workspace->moments.mean_power_db);
    }
    for (int i = 0; i < RFADE_COARSE_BINS; i++) {
        power[i] = weight[i] > 0.0 ? power[i] / weight[i] : 0.0;
    }
    return workspace->moments.readings /
           fmax(1.0, rfade_design_effect(&workspace->covariance, power));
}

static void set_moments(const struct workspace *workspace, struct rfade_estimate *result)
{
    double variance = workspace->moments.normalised_variance;
    result->count = workspace->moments.readings;
    result->effective_count = effective_count(workspace);
    result->mean_power_db = workspace->moments.mean_power_db;
    result->mean_of_db = workspace->moments.mean_of_db;
    result->moment_k = NAN;
    result->moment_m = NAN;
    if (variance > 0.0) {
        /* K/(1+K) = sqrt(1 - V) [Greenstein, Michelson and Erceg 1999, eq. 9]; there is no
         * steady power in readings that vary more than Rayleigh's. */
        double root = sqrt(fmax(1.0 - variance, 0.0));
        result->moment_k = root * (1.0 + root) / fmin(variance, 1.0);
        result->moment_m = 1.0 / variance;
    }
}

void rfade_estimate_blank(struct rfade_estimate *result)
{
    memset(result, 0, sizeof *result);
    result->count = result->effective_count = NAN;
    result->moment_k = result->moment_m = NAN;
    result->mean_power_db = result->mean_of_db = NAN;
}

static enum rfade_status fit_all(const struct workspace *workspace,
                                 struct rfade_estimate *result)
{
    const struct rfade_problem *problem = &workspace->problem;
    struct rfade_fit_details details[RFADE_MODEL_COUNT];
    for (int id = 0; id < RFADE_MODEL_COUNT; id++) {
        const struct rfade_model *model = rfade_model((enum rfade_model_id)id);
        size_t place = result->fit_count;
        if (id == RFADE_LOGNORMAL && !problem->settings->with_lognormal) {
            continue;
        }
        enum rfade_status status =
            rfade_fit_problem(model, problem, &result->fits[place], &details[place]);
        if (status == RFADE_OK) {
            status = rfade_goodness(problem, &details[place], &result->fits[place].goodness_p);
        }
        if (status != RFADE_OK) {
            return status;
        }
        result->fit_count++;
    }
    return rfade_choose(problem, details, result);
}

enum rfade_status rfade_estimate_classes(const struct rfade_bin *bins, size_t bin_count,
                                         const struct rfade_estimate_settings *settings,
                                         const double *edges_db, struct rfade_estimate *result)
{
    struct workspace workspace;
    rfade_estimate_blank(result);
    enum rfade_status status = prepare(bins, bin_count, settings, edges_db, &workspace);
    if (status == RFADE_OK) {
        set_moments(&workspace, result);
        status = fit_all(&workspace, result);
    }
    release(&workspace);
    return status;
}

enum rfade_status rfade_estimate_bins(const struct rfade_bin *bins, size_t bin_count,
                                      const struct rfade_estimate_settings *settings,
                                      struct rfade_estimate *result)
{
    return rfade_estimate_classes(bins, bin_count, settings, NULL, result);
}

enum rfade_status rfade_fit_bins(const struct rfade_model *model, const struct rfade_bin *bins,
                                 size_t bin_count,
                                 const struct rfade_estimate_settings *settings,
                                 struct rfade_fit *fit)
{
    struct workspace workspace;
    struct rfade_fit_details details;
    rfade_fit_blank(model, fit);
    enum rfade_status status = prepare(bins, bin_count, settings, NULL, &workspace);
    if (status == RFADE_OK) {
        status = rfade_fit_problem(model, &workspace.problem, fit, &details);
    }
    release(&workspace);
    return status;
}
