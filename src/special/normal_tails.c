/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The normal distribution function through erfc, AMS 55 26.2.29. */
#include <gsl/gsl_math.h>
#include <gsl/gsl_sf_erf.h>
#include <math.h>

#include "special/tails.h"

enum rfade_status rfade_normal_tails(double z, struct rfade_tails *tails)
{
    *tails = rfade_tails_nan();
    if (isnan(z)) {
        return RFADE_DOMAIN;
    }
    const double argument = fabs(z) * M_SQRT1_2;
    gsl_sf_result log_erfc = {-INFINITY, 0.0};
    if (!isinf(z)) {
        (void)gsl_sf_log_erfc_e(argument, &log_erfc);
    }
    *tails = rfade_tails_from(0.5 * erfc(argument), log_erfc.val - M_LN2, z > 0.0);
    return RFADE_OK;
}
