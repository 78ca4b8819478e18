/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "statistics/count.h"

#include <gsl/gsl_cdf.h>
#include <gsl/gsl_sort.h>
#include <gsl/gsl_statistics.h>
#include <math.h>
#include <stdlib.h>

/* Quantile of the beta distribution by halves: gsl_cdf_beta_Pinv gives NaN for some counts of
 * several hundred (GSL 2.7.1). */
static double beta_quantile(double probability, double first, double second)
{
    double low = 0.0, high = 1.0;
    for (int i = 0; i < 50; i++) {
        double middle = 0.5 * (low + high);
        if (gsl_cdf_beta_P(middle, first, second) < probability) {
            low = middle;
        } else {
            high = middle;
        }
    }
    return 0.5 * (low + high);
}

void share_ends(const struct share *share, double *low, double *high)
{
    double hits = (double)share->hits, missed = (double)(share->trials - share->hits);
    *low = share->hits == 0 ? 0.0 : beta_quantile(0.025, hits, missed + 1.0);
    *high = share->hits == share->trials ? 1.0 : beta_quantile(0.975, hits + 1.0, missed);
}

bool share_excludes(const struct share *share, double low, double high)
{
    double ends[2];
    share_ends(share, &ends[0], &ends[1]);
    return ends[1] < low || ends[0] > high;
}

/* Probabilities are compared as log odds; an observed fraction has no such scale. */
static double on_scale(enum measure measure, double value)
{
    bool probability = measure >= MEASURE_OUTAGE && measure < MEASURE_SAME;
    return probability ? log(value) - log1p(-value) : value;
}

static void add_interval(enum measure measure, const struct interval *interval,
                         struct coverage *coverage)
{
    if (isnan(interval->truth) || isnan(interval->low) || isnan(interval->high)) {
        return;
    }
    bool below = interval->truth < interval->low;
    bool above = interval->truth > interval->high;
    coverage->share.trials++;
    coverage->share.hits += !below && !above;
    coverage->below += below;
    coverage->above += above;
    double width = on_scale(measure, interval->high) - on_scale(measure, interval->low);
    double error = on_scale(measure, interval->estimate) - on_scale(measure, interval->truth);
    bool open = measure == MEASURE_K && (interval->low <= 0.0 || interval->high >= 1e4);
    if (isfinite(width) && isfinite(error) && !open) {
        coverage->width += width;
        coverage->error += error;
        coverage->square += error * error;
        coverage->finite++;
    }
}

static void add_p(double p, struct share *share)
{
    if (!isnan(p)) {
        share->trials++;
        share->hits += p < 0.05;
    }
}

static void add_outcome(const struct circumstances *circumstances,
                        const struct outcome *outcome, struct count *count)
{
    count->resolved += outcome->sampling == RFADE_RESOLVED;
    count->inseparable += outcome->sampling == RFADE_INSEPARABLE;
    if (!outcome->fitted) {
        return;
    }
    for (int i = 0; i < MEASURE_COUNT; i++) {
        bool parameter = i == MEASURE_K || i == MEASURE_M;
        if (!parameter || outcome->sampling == RFADE_RESOLVED) {
            add_interval((enum measure)i, &outcome->intervals[i], &count->coverage[i]);
        }
    }
    if (outcome->sampling != RFADE_RESOLVED) {
        return;
    }
    count->k[count->k_count++] = outcome->intervals[MEASURE_K].estimate;
    add_p(outcome->goodness_p, &count->goodness);
    add_p(outcome->rice_goodness_p, &count->rice_goodness);
    if (circumstances->k == 0.0) {
        count->rice.trials++;
        count->rice.hits += outcome->rice_significant;
        count->preferred.trials++;
        count->preferred.hits += !outcome->rayleigh_preferred;
    }
}

bool count_segments(const struct circumstances *circumstances, int64_t segments,
                    uint64_t first_seed, struct count *count)
{
    *count = (struct count){.k = calloc((size_t)segments, sizeof *count->k)};
    if (count->k == NULL) {
        return false;
    }
    for (int64_t i = 0; i < segments; i++) {
        struct outcome outcome;
        count->segments++;
        if (segment_run(circumstances, first_seed + (uint64_t)i, &outcome)) {
            add_outcome(circumstances, &outcome, count);
        } else {
            count->failed++;
        }
    }
    return true;
}

void count_clear(struct count *count)
{
    free(count->k);
    *count = (struct count){0};
}

static double spread(const struct coverage *coverage)
{
    double n = (double)coverage->finite;
    double mean = coverage->error / n;
    return sqrt(fmax(coverage->square / n - mean * mean, 0.0));
}

double coverage_width_ratio(const struct coverage *coverage)
{
    return coverage->width / (double)coverage->finite / (3.92 * spread(coverage));
}

double coverage_bias(const struct coverage *coverage)
{
    return coverage->error / (double)coverage->finite / spread(coverage);
}

double count_median_k(struct count *count)
{
    gsl_sort(count->k, 1, (size_t)count->k_count);
    return gsl_stats_median_from_sorted_data(count->k, 1, (size_t)count->k_count);
}
