/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "estimate/correlation.h"

#include <math.h>
#include <string.h>

static const double LAG_WEIGHT[3] = {1.0, 2.0 / 3.0, 1.0 / 3.0};

/* Fewer blocks can't tell a variance from nothing once their mean is taken off. */
enum { BLOCKS_MIN = 6 };

static double table_value(const struct rfade_blocks *blocks, int i, int j)
{
    double next = (double)blocks->next[i][j] + (double)blocks->next[j][i];
    double second = (double)blocks->second[i][j] + (double)blocks->second[j][i];
    return LAG_WEIGHT[0] * (double)blocks->same[i][j] + LAG_WEIGHT[1] * next +
           LAG_WEIGHT[2] * second;
}

/*
 * Takes each block's expected share of every class off: with shares p and table T of
 * products, the sum of (w_i - w p_i)(w_j - w p_j) is T_ij - p_i R_j - R_i p_j + p_i p_j R.
 */
static void centre(struct rfade_class_covariance *covariance)
{
    double row[RFADE_COARSE_BINS] = {0.0};
    double all = 0.0;
    for (int i = 0; i < RFADE_COARSE_BINS; i++) {
        for (int j = 0; j < RFADE_COARSE_BINS; j++) {
            row[i] += covariance->value[i][j];
        }
        all += row[i];
    }
    for (int i = 0; i < RFADE_COARSE_BINS; i++) {
        double share_i = covariance->total[i] / covariance->readings;
        for (int j = 0; j < RFADE_COARSE_BINS; j++) {
            double share_j = covariance->total[j] / covariance->readings;
            covariance->value[i][j] +=
                share_i * share_j * all - share_i * row[j] - row[i] * share_j;
        }
    }
}

static void independent(struct rfade_class_covariance *covariance)
{
    for (int i = 0; i < RFADE_COARSE_BINS; i++) {
        for (int j = 0; j < RFADE_COARSE_BINS; j++) {
            double product = covariance->total[i] * covariance->total[j];
            covariance->value[i][j] =
                (i == j ? covariance->total[i] : 0.0) - product / covariance->readings;
        }
    }
    covariance->degrees_of_freedom = INFINITY;
    covariance->measured = true;
}

/*
 * Taking the mean off costs the sum of the lag weights in blocks; the degrees of freedom of
 * a lag window's estimate at frequency zero are blocks over the sum of squared lag weights
 * [Priestley 1981, section 6.2.4].
 */
static void measure(const struct rfade_blocks *blocks, double scale,
                    struct rfade_class_covariance *covariance)
{
    double weights = LAG_WEIGHT[0] + 2.0 * (LAG_WEIGHT[1] + LAG_WEIGHT[2]);
    double squares = LAG_WEIGHT[0] * LAG_WEIGHT[0] +
                     2.0 * (LAG_WEIGHT[1] * LAG_WEIGHT[1] + LAG_WEIGHT[2] * LAG_WEIGHT[2]);
    double count = (double)blocks->blocks;
    double unbiased = count / (count - weights);
    for (int i = 0; i < RFADE_COARSE_BINS; i++) {
        for (int j = 0; j < RFADE_COARSE_BINS; j++) {
            covariance->value[i][j] = scale * scale * unbiased * table_value(blocks, i, j);
        }
    }
    centre(covariance);
    covariance->degrees_of_freedom = (count - 1.0) / squares;
    covariance->measured = true;
}

void rfade_class_covariance(const struct rfade_blocks *blocks,
                            const double observed[RFADE_COARSE_BINS],
                            struct rfade_class_covariance *covariance)
{
    double block_total = 0.0;
    memset(covariance, 0, sizeof *covariance);
    for (int i = 0; i < RFADE_COARSE_BINS; i++) {
        covariance->readings += observed[i];
        block_total += blocks == NULL ? 0.0 : (double)blocks->total[i];
    }
    memcpy(covariance->observed, observed, sizeof covariance->observed);
    memcpy(covariance->total, observed, sizeof covariance->total);
    if (blocks == NULL) {
        independent(covariance);
        return;
    }
    covariance->blocks = (double)blocks->blocks;
    covariance->degrees_of_freedom = fmax(covariance->blocks - 1.0, 1.0);
    if (blocks->blocks < BLOCKS_MIN || !(block_total > 0.0)) {
        return;
    }
    double scale = covariance->readings / block_total;
    for (int i = 0; i < RFADE_COARSE_BINS; i++) {
        covariance->total[i] = scale * (double)blocks->total[i];
    }
    measure(blocks, scale, covariance);
}

/* Covariance of two sums over readings. */
static double product(const struct rfade_class_covariance *covariance,
                      const double first[RFADE_COARSE_BINS],
                      const double second[RFADE_COARSE_BINS])
{
    double sum = 0.0;
    for (int i = 0; i < RFADE_COARSE_BINS; i++) {
        for (int j = 0; j < RFADE_COARSE_BINS; j++) {
            sum += first[i] * second[j] * covariance->value[i][j];
        }
    }
    return sum;
}

double rfade_design_effect(const struct rfade_class_covariance *covariance,
                           const double influence[RFADE_COARSE_BINS])
{
    double mean = 0.0;
    double alone = 0.0;
    double together = product(covariance, influence, influence);
    for (int i = 0; i < RFADE_COARSE_BINS; i++) {
        mean += covariance->total[i] * influence[i] / covariance->readings;
    }
    for (int i = 0; i < RFADE_COARSE_BINS; i++) {
        double deviation = influence[i] - mean;
        alone += covariance->total[i] * deviation * deviation;
    }
    if (!covariance->measured || !(alone > 0.0) || !(together > 0.0)) {
        return fmax(1.0, covariance->readings / fmax(covariance->blocks, 1.0));
    }
    return together / alone;
}

enum rfade_status rfade_class_scores(const struct rfade_sample *sample, const double *edges_db,
                                     const struct rfade_maximum *maximum,
                                     struct rfade_class_scores *scores)
{
    double weight[RFADE_COARSE_BINS] = {0.0};
    double parameter = rfade_parameter_of_spread(sample->model, maximum->theta[RFADE_SPREAD]);
    memset(scores, 0, sizeof *scores);
    for (size_t i = 0; i < sample->bin_count; i++) {
        double score[2];
        double log_probability = NAN;
        const struct rfade_bin *bin = &sample->bins[i];
        enum rfade_status status =
            rfade_bin_score(sample->model, bin, maximum->theta[RFADE_LOCATION], parameter,
                            &log_probability, score);
        if (status != RFADE_OK) {
            return status;
        }
        int place = rfade_class_of_bin(edges_db, bin);
        weight[place] += bin->weight;
        scores->mean[place][0] += bin->weight * score[0];
        scores->mean[place][1] += bin->weight * score[1];
    }
    for (int i = 0; i < RFADE_COARSE_BINS; i++) {
        for (int k = 0; k < 2 && weight[i] > 0.0; k++) {
            scores->mean[i][k] /= weight[i];
        }
    }
    return RFADE_OK;
}

void rfade_estimates_spread(const struct rfade_class_covariance *covariance,
                            const struct rfade_class_scores *scores,
                            const struct rfade_maximum *maximum, int dimensions,
                            struct rfade_spread_of_estimates *result)
{
    double influence[2][RFADE_COARSE_BINS];
    memset(result, 0, sizeof *result);
    for (int i = 0; i < RFADE_COARSE_BINS; i++) {
        for (int k = 0; k < 2; k++) {
            influence[k][i] = maximum->inverse.at[k][0] * scores->mean[i][0] +
                              maximum->inverse.at[k][1] * scores->mean[i][1];
        }
    }
    for (int k = 0; k < dimensions; k++) {
        result->design_effect[k] = isinf(covariance->degrees_of_freedom)
                                       ? 1.0
                                       : rfade_design_effect(covariance, influence[k]);
        result->covariance[k][k] = result->design_effect[k] * maximum->inverse.at[k][k];
        result->trace += result->design_effect[k];
    }
    if (dimensions == 1) {
        return;
    }
    /* The correlation of the two comes from the sandwich, their variances from above. */
    double cross = maximum->inverse.at[0][1];
    double variance[2] = {maximum->inverse.at[0][0], maximum->inverse.at[1][1]};
    if (covariance->measured && isfinite(covariance->degrees_of_freedom)) {
        cross = product(covariance, influence[0], influence[1]);
        variance[0] = product(covariance, influence[0], influence[0]);
        variance[1] = product(covariance, influence[1], influence[1]);
    }
    bool known = variance[0] > 0.0 && variance[1] > 0.0;
    double correlation = known ? cross / sqrt(variance[0] * variance[1]) : 0.0;
    result->covariance[0][1] =
        correlation * sqrt(result->covariance[0][0] * result->covariance[1][1]);
    result->covariance[1][0] = result->covariance[0][1];
}
