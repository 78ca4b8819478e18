/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "estimate/likelihood.h"

#include <math.h>

double rfade_parameter_of_spread(const struct rfade_model *model, double spread)
{
    if (!rfade_has_spread(model)) {
        return NAN;
    }
    return model->from_normalised_variance(exp(-spread));
}

double rfade_spread_of_parameter(const struct rfade_model *model, double parameter)
{
    return -log(model->normalised_variance(parameter));
}

double rfade_spread_slope(const struct rfade_model *model, double parameter)
{
    double difference = 1e-5 * parameter;
    return (rfade_spread_of_parameter(model, parameter + difference) -
            rfade_spread_of_parameter(model, parameter - difference)) /
           (2.0 * difference);
}

/* One bin; score about location and the model's own parameter. */
static enum rfade_status bin_gradient(const struct rfade_model *model,
                                      const struct rfade_bin *bin, double location_db,
                                      const struct rfade_prepared *prepared,
                                      struct rfade_log_gradient *gradient)
{
    double low_db = bin->low_db - location_db;
    double high_db = bin->high_db - location_db;
    if (bin->low_db == bin->high_db) {
        return model->log_density_of(prepared, low_db, gradient);
    }
    return model->log_interval_of(prepared, low_db, high_db, gradient);
}

static enum rfade_status bin_gradient_once(const struct rfade_model *model,
                                           const struct rfade_bin *bin, double location_db,
                                           double parameter,
                                           struct rfade_log_gradient *gradient)
{
    struct rfade_prepared prepared;
    enum rfade_status status = model->prepare(parameter, &prepared);
    return status == RFADE_OK ? bin_gradient(model, bin, location_db, &prepared, gradient)
                              : status;
}

enum rfade_status rfade_bin_log_probability(const struct rfade_model *model,
                                            const struct rfade_bin *bin, double location_db,
                                            double parameter, double *log_probability)
{
    struct rfade_log_gradient gradient = {NAN, NAN, NAN};
    enum rfade_status status = bin_gradient_once(model, bin, location_db, parameter, &gradient);
    *log_probability = gradient.value;
    return status;
}

enum rfade_status rfade_bin_score(const struct rfade_model *model, const struct rfade_bin *bin,
                                  double location_db, double parameter, double *log_probability,
                                  double score[2])
{
    struct rfade_log_gradient gradient = {NAN, NAN, NAN};
    enum rfade_status status = bin_gradient_once(model, bin, location_db, parameter, &gradient);
    *log_probability = gradient.value;
    score[RFADE_LOCATION] = gradient.d_mean_db;
    score[RFADE_SPREAD] = !rfade_has_spread(model)
                              ? 0.0
                              : gradient.d_parameter / rfade_spread_slope(model, parameter);
    return status;
}

enum rfade_status rfade_likelihood_at(const struct rfade_sample *sample, const double theta[2],
                                      struct rfade_likelihood *result)
{
    const struct rfade_model *model = sample->model;
    double parameter = rfade_parameter_of_spread(model, theta[RFADE_SPREAD]);
    double scale = isnan(parameter) ? 0.0 : 1.0 / rfade_spread_slope(model, parameter);
    struct rfade_likelihood sum = {0.0, {0.0, 0.0}, {{{0.0, 0.0}, {0.0, 0.0}}}};
    struct rfade_prepared prepared;
    enum rfade_status status = model->prepare(parameter, &prepared);
    if (status != RFADE_OK) {
        return status;
    }
    for (size_t i = 0; i < sample->bin_count; i++) {
        const struct rfade_bin *bin = &sample->bins[i];
        struct rfade_log_gradient gradient = {NAN, NAN, NAN};
        status = bin_gradient(model, bin, theta[RFADE_LOCATION], &prepared, &gradient);
        if (status != RFADE_OK) {
            return status;
        }
        double score = gradient.d_parameter * scale;
        sum.value += bin->weight * gradient.value;
        sum.gradient[0] += bin->weight * gradient.d_mean_db;
        sum.gradient[1] += bin->weight * score;
        sum.outer.at[0][0] += bin->weight * gradient.d_mean_db * gradient.d_mean_db;
        sum.outer.at[0][1] += bin->weight * gradient.d_mean_db * score;
        sum.outer.at[1][1] += bin->weight * score * score;
    }
    sum.outer.at[1][0] = sum.outer.at[0][1];
    *result = sum;
    bool finite = isfinite(sum.value) && isfinite(sum.gradient[0]) && isfinite(sum.gradient[1]);
    return finite ? RFADE_OK : RFADE_NO_CONVERGENCE;
}
