/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "statistics/wrong.h"

#include <gsl/gsl_cdf.h>
#include <math.h>
#include <string.h>

#include "analyse/acceptance.h"

/* Bounds as `acceptance` takes them from the two-sided interval of 95 %. */
static struct rfade_outage_bounds bounds_of(const struct interval *interval, double confidence)
{
    double scale = gsl_cdf_ugaussian_Pinv(confidence) / gsl_cdf_ugaussian_Pinv(0.975);
    double centre = rfade_log_odds(interval->estimate);
    struct rfade_outage_bounds bounds = {
        .outage = interval->estimate,
        .log_odds = centre,
        .below = scale * (centre - rfade_log_odds(interval->low)),
        .above = scale * (rfade_log_odds(interval->high) - centre),
    };
    rfade_acceptance_widen(&bounds);
    return bounds;
}

static void judge(const struct interval *interval, double confidence, struct share *met,
                  struct share *failing)
{
    static const double next_to = 1e-9;
    struct rfade_outage_bounds bounds = bounds_of(interval, confidence);
    struct rfade_judgement below =
        rfade_judge(&bounds, confidence, interval->truth * (1.0 - next_to), 100.0, 1.0);
    struct rfade_judgement above =
        rfade_judge(&bounds, confidence, interval->truth * (1.0 + next_to), 100.0, 1.0);
    met->trials++;
    met->hits += below.verdict == RFADE_MEETS;
    failing->trials++;
    failing->hits += above.verdict == RFADE_FAILS;
}

bool wrong_verdicts(const struct circumstances *circumstances, enum rfade_sampling sampling,
                    int64_t segments, uint64_t first_seed, double confidence,
                    struct wrong *wrong)
{
    memset(wrong, 0, sizeof *wrong);
    for (int64_t i = 0; i < segments; i++) {
        struct outcome outcome;
        wrong->segments++;
        if (!segment_run(circumstances, first_seed + (uint64_t)i, &outcome)) {
            wrong->failed++;
            continue;
        }
        wrong->inseparable += outcome.sampling == RFADE_INSEPARABLE;
        if (!outcome.fitted || outcome.sampling != sampling) {
            continue;
        }
        for (int t = 0; t < THRESHOLDS; t++) {
            const struct interval *interval = &outcome.intervals[MEASURE_OUTAGE + t];
            double error = rfade_log_odds(interval->estimate) - rfade_log_odds(interval->truth);
            judge(interval, confidence, &wrong->met[t], &wrong->failing[t]);
            wrong->error[t] += error;
            wrong->square[t] += error * error;
        }
    }
    return wrong->failed == 0;
}
