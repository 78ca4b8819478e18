/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Outage under Rice fading is 1 - Q1(a, b), a = sqrt(2K), b = sqrt(2(1 + K) 10^(x/10)); from
 * the series of Q1 [Marcum 1960] dQ1/da = b exp(-(a^2 + b^2)/2) I1(ab).
 * A change da moves the mean power by a da/(1 + K), relative.
 */
#include "predict/response.h"

#include <gsl/gsl_sf_bessel.h>
#include <math.h>

#include "model/model.h"

/* Below it I1(ab)/a is taken at its limit b/2. */
static const double LEAST_RAY = 1e-6;

static double rice_slow_response(double k, double x_db)
{
    double a = sqrt(2.0 * k);
    double b = sqrt(2.0 * (1.0 + k) * pow(10.0, x_db / 10.0));
    if (a < LEAST_RAY)
        return 0.5 * b * b * exp(-0.5 * b * b);
    return b * exp(-0.5 * (a - b) * (a - b)) * gsl_sf_bessel_I1_scaled(a * b) * (1.0 + k) / a;
}

enum rfade_status rfade_response(const struct rfade_model *model, double parameter, double x_db,
                                 struct rfade_response *response)
{
    *response = (struct rfade_response){NAN, NAN};
    struct rfade_log_gradient density;
    enum rfade_status status = model->log_density(parameter, x_db, &density);
    if (status != RFADE_OK)
        return status;
    response->level = exp(density.value);
    response->slow = model->id == RFADE_RICE ? rice_slow_response(parameter, x_db)
                                             : RFADE_DB_PER_NEPER_OF_POWER * response->level;
    return RFADE_OK;
}
