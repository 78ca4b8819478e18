/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analyse/verdict.h"

#include <gsl/gsl_cdf.h>
#include <math.h>
#include <stdlib.h>

const char *rfade_verdict_name(enum rfade_verdict verdict)
{
    static const char *const names[] = {"not judged", "meets", "fails", "undecided"};
    return names[verdict];
}

/*
 * What settles a segment whose estimate is a distance d from the target: the bound's own
 * distance is the root of calibration^2 + rest^2/n after n times the travel at hand, so that
 * n = rest^2 / (d^2 - calibration^2).
 */
static void settle(const struct rfade_outage_bounds *bounds, double d, double bound,
                   double calibration, double travel_m, double passes,
                   struct rfade_judgement *judgement)
{
    double rest = rfade_own_distance(bound, calibration);
    double room = d * d - calibration * calibration;
    if (room > 0.0) {
        double more = fmax(0.0, rest * rest / room - 1.0);
        judgement->more_m = more * travel_m;
        judgement->more_passes = fmax(1.0, ceil(more * passes));
        return;
    }
    if (!(d > 0.0)) /* an estimate at the target itself is settled by nothing */
        return;
    double allowed = d > rest ? sqrt(d * d - rest * rest) : d;
    judgement->calibration_needed_db = bounds->calibration_db * allowed / calibration;
    judgement->calibration_is_enough = d > rest;
}

/* Of a normal error whose bound lies a distance away; certain where there is no error. */
static double p_value(double d, double bound, double confidence)
{
    if (bound > 0.0)
        return gsl_cdf_ugaussian_Q(gsl_cdf_ugaussian_Pinv(confidence) * d / bound);
    return d >= 0.0 ? 0.0 : 1.0;
}

struct rfade_judgement rfade_judge(const struct rfade_outage_bounds *bounds, double confidence,
                                   double target, double travel_m, double passes)
{
    struct rfade_judgement judgement = {RFADE_NOT_JUDGED, NAN, NAN, NAN, NAN, false};
    if (isnan(bounds->outage))
        return judgement;
    double d = rfade_log_odds(target) - bounds->log_odds; /* > 0: the estimate meets it */
    judgement.p_meets = p_value(d, d >= 0.0 ? bounds->above : bounds->below, confidence);
    if (d >= bounds->above) {
        judgement.verdict = RFADE_MEETS;
    } else if (-d > bounds->below) {
        judgement.verdict = RFADE_FAILS;
    } else {
        judgement.verdict = RFADE_UNDECIDED;
        if (d > 0.0)
            settle(bounds, d, bounds->above, bounds->calibration_above, travel_m, passes,
                   &judgement);
        else
            settle(bounds, -d, bounds->below, bounds->calibration_below, travel_m, passes,
                   &judgement);
    }
    return judgement;
}

static int compare_places(const void *left, const void *right)
{
    double a = **(const double *const *)left, b = **(const double *const *)right;
    return (a > b) - (a < b);
}

enum rfade_status rfade_verdicts_together(const double *p, size_t count, double confidence,
                                          bool *meets)
{
    const double **places = malloc((count + 1) * sizeof *places);
    if (!places)
        return RFADE_NO_MEMORY;
    size_t family = 0;
    for (size_t i = 0; i < count; i++) {
        meets[i] = false;
        if (!isnan(p[i]))
            places[family++] = &p[i];
    }
    qsort((void *)places, family, sizeof *places, compare_places);
    for (size_t i = 0; i < family; i++) {
        if (!(*places[i] <= (1.0 - confidence) / (double)(family - i)))
            break;
        meets[places[i] - p] = true;
    }
    free((void *)places);
    return RFADE_OK;
}
