/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Correlation, joint outage and gain of two branches. Intervals: blocks of travel are taken as
 * independent. The correlation's is Fisher's z = atanh(r) with its variance by leaving out one
 * block after another [Tukey 1958; Miller 1974]; that of the share below on both is the ratio
 * estimator's over blocks [Cochran 1977, section 6.3] on the scale of ln(odds).
 */
#include "analyse/diversity.h"

#include <gsl/gsl_cdf.h>
#include <math.h>
#include <stdlib.h>

#include "analyse/bounds.h"

const double rfade_diversity_outages[RFADE_DIVERSITY_GAINS] = {0.1, 0.01};

enum { BLOCKS_MIN = 6, BISECTIONS = 32 };

/* A quantile needs that many independent places below it: half a wavelength makes one. */
static const double PLACES_MIN = 10.0;

/* Quantiles are looked for within this of the mean level. */
static const double REACH_DB = 80.0;

enum rfade_status rfade_paired_total_create(struct rfade_paired_total *total)
{
    *total = (struct rfade_paired_total){.blocks = NULL};
    enum rfade_status status = rfade_tally_create(&total->best);
    for (int b = 0; b < 2 && status == RFADE_OK; b++)
        status = rfade_tally_create(&total->level[b]);
    return status;
}

enum rfade_status rfade_paired_total_add(struct rfade_paired_total *total,
                                         const struct rfade_paired_run *run)
{
    size_t needed = total->block_count + run->block_count;
    if (needed > total->block_room) {
        size_t room = 2 * needed;
        struct rfade_paired_sums *blocks = realloc(total->blocks, room * sizeof *blocks);
        if (!blocks)
            return RFADE_NO_MEMORY;
        total->blocks = blocks;
        total->block_room = room;
    }
    for (size_t i = 0; i < run->block_count; i++)
        total->blocks[total->block_count++] = run->blocks[i];
    enum rfade_status status = rfade_tally_merge(total->best, run->best, 1);
    for (int b = 0; b < 2 && status == RFADE_OK; b++)
        status = rfade_tally_merge(total->level[b], run->level[b], 1);
    return status;
}

void rfade_paired_total_clear(struct rfade_paired_total *total)
{
    rfade_tally_destroy(total->level[0]);
    rfade_tally_destroy(total->level[1]);
    rfade_tally_destroy(total->best);
    free(total->blocks);
    *total = (struct rfade_paired_total){.blocks = NULL};
}

/* Sums of one block, or of several, as numbers. */
struct moments {
    double weight, sum[2], square[2], product;
};

static struct moments power_moments(const struct rfade_paired_sums *sums)
{
    return (struct moments){(double)sums->weight_mm,
                            {(double)sums->power[0], (double)sums->power[1]},
                            {(double)sums->power_square[0], (double)sums->power_square[1]},
                            (double)sums->power_product};
}

static struct moments envelope_moments(const struct rfade_paired_sums *sums)
{
    return (struct moments){
        (double)sums->weight_mm,
        {(double)sums->amplitude[0], (double)sums->amplitude[1]},
        {(double)sums->amplitude_square[0], (double)sums->amplitude_square[1]},
        (double)sums->amplitude_product};
}

static void add_moments(struct moments *sum, const struct moments *other, double sign)
{
    sum->weight += sign * other->weight;
    sum->product += sign * other->product;
    for (int b = 0; b < 2; b++) {
        sum->sum[b] += sign * other->sum[b];
        sum->square[b] += sign * other->square[b];
    }
}

static double correlation(const struct moments *m)
{
    double variance[2];
    for (int b = 0; b < 2; b++)
        variance[b] = m->square[b] * m->weight - m->sum[b] * m->sum[b];
    double covariance = m->product * m->weight - m->sum[0] * m->sum[1];
    double square = variance[0] * variance[1];
    return square > 0.0 ? covariance / sqrt(square) : NAN; /* levels that stood still */
}

/* Student's t at the upper end of a two-sided interval. */
static double reach(double confidence, size_t blocks)
{
    return gsl_cdf_tdist_Pinv(0.5 + 0.5 * confidence, (double)blocks - 1.0);
}

static void correlate(const struct rfade_paired_total *total, double confidence,
                      struct rfade_diversity *result)
{
    struct moments power = {0}, envelope = {0};
    for (size_t i = 0; i < total->block_count; i++) {
        struct moments one = power_moments(&total->blocks[i]);
        add_moments(&power, &one, 1.0);
        one = envelope_moments(&total->blocks[i]);
        add_moments(&envelope, &one, 1.0);
    }
    result->power_correlation = correlation(&power);
    result->envelope_correlation = correlation(&envelope);
    double blocks = (double)total->block_count;
    double sum = 0.0, squares = 0.0;
    if (total->block_count < BLOCKS_MIN || !(fabs(result->power_correlation) < 1.0))
        return;
    double z = atanh(result->power_correlation);
    for (size_t i = 0; i < total->block_count; i++) {
        struct moments rest = power;
        struct moments one = power_moments(&total->blocks[i]);
        add_moments(&rest, &one, -1.0);
        double apart = atanh(correlation(&rest)) - z;
        sum += apart;
        squares += apart * apart;
    }
    double error = sqrt((blocks - 1.0) / blocks * (squares - sum * sum / blocks));
    double far = reach(confidence, total->block_count) * error;
    result->power_correlation_low = tanh(z - far);
    result->power_correlation_high = tanh(z + far);
}

static void share_below(const struct rfade_paired_total *total, double wavelength_m,
                        double confidence, struct rfade_diversity *result)
{
    double known = 0.0, below[2] = {0.0, 0.0}, both = 0.0, squares = 0.0;
    for (size_t i = 0; i < total->block_count; i++) {
        const struct rfade_paired_sums *block = &total->blocks[i];
        known += (double)block->known_mm;
        both += (double)block->both_below_mm;
        for (int b = 0; b < 2; b++)
            below[b] += (double)block->below_mm[b];
    }
    if (!(known > 0.0))
        return;
    double share = both / known;
    result->both_below = share;
    for (int b = 0; b < 2; b++)
        result->below[b] = below[b] / known;
    if (total->block_count < BLOCKS_MIN)
        return;
    if (share == 0.0 || share == 1.0) {
        /* none of so many independent places [Clopper and Pearson 1934] */
        double places = known / (500.0 * wavelength_m);
        double rare = 1.0 - pow(0.5 - 0.5 * confidence, 1.0 / fmax(places, 1.0));
        result->both_below_low = share == 0.0 ? 0.0 : 1.0 - rare;
        result->both_below_high = share == 0.0 ? rare : 1.0;
        return;
    }
    for (size_t i = 0; i < total->block_count; i++) {
        double apart =
            (double)total->blocks[i].both_below_mm - share * (double)total->blocks[i].known_mm;
        squares += apart * apart;
    }
    double blocks = (double)total->block_count;
    double error = sqrt(blocks / (blocks - 1.0) * squares) / known;
    double odds = rfade_log_odds(share);
    double far = reach(confidence, total->block_count) * error / (share * (1.0 - share));
    result->both_below_low = rfade_from_log_odds(odds - far);
    result->both_below_high = rfade_from_log_odds(odds + far);
}

/* Shares of a tally below a level: the least and the most that it may be. */
static enum rfade_status tally_below(struct rfade_tally *tally, double level_db, double *least,
                                     double *most)
{
    const struct rfade_tally_cell *cells = NULL;
    size_t count = 0;
    double weights = 0.0;
    *least = *most = 0.0;
    enum rfade_status status = rfade_tally_cells(tally, &cells, &count);
    for (size_t i = 0; i < count && status == RFADE_OK; i++) {
        double weight = (double)cells[i].weight;
        double above_db = level_db - cells[i].key.centre_cdb / 100.0;
        weights += weight;
        if (cells[i].key.kind == RFADE_INTERVAL) {
            double part = 0.5 + above_db / (cells[i].key.step_cdb / 100.0);
            part = fmin(1.0, fmax(0.0, part)) * weight;
            *least += part;
            *most += part;
        } else if (cells[i].key.kind == RFADE_BELOW) {
            *least += above_db >= 0.0 ? weight : 0.0;
            *most += weight;
        } else {
            *most += above_db > 0.0 ? weight : 0.0;
        }
    }
    *least /= weights;
    *most /= weights;
    return status;
}

/* The level with that share below, NaN where censored readings hide it. */
static enum rfade_status tally_quantile(struct rfade_tally *tally, double about_db,
                                        double share, double *level_db)
{
    double low_db = about_db - REACH_DB, high_db = about_db + REACH_DB;
    double least = NAN, most = NAN;
    enum rfade_status status = RFADE_OK;
    for (int i = 0; i < BISECTIONS && status == RFADE_OK; i++) {
        double middle_db = 0.5 * (low_db + high_db);
        status = tally_below(tally, middle_db, &least, &most);
        if (most < share)
            low_db = middle_db;
        else
            high_db = middle_db;
    }
    *level_db = high_db;
    if (status == RFADE_OK)
        status = tally_below(tally, high_db, &least, &most);
    if (most - least > 1e-6 * share)
        *level_db = NAN;
    return status;
}

/* Which branches have to be below together. */
enum which { FIRST = 1, SECOND = 2, BOTH = 3 };

/*
 * Share of the track below a level by the fitted models, block by block: the fast fading of
 * the branches is taken as independent, their local means are as they were.
 */
static enum rfade_status model_below(const struct rfade_diversity_row *row, enum which which,
                                     double level_db, double *share)
{
    double weights = 0.0, sum = 0.0;
    for (size_t i = 0; i < row->total.block_count; i++) {
        const struct rfade_paired_sums *block = &row->total.blocks[i];
        double weight = (double)block->weight_mm, product = 1.0;
        for (int b = 0; b < 2; b++) {
            const struct rfade_stored_fit *fit = rfade_result_preferred(row->branch[b]);
            double mean_db = (double)block->mean_cdb[b] / weight / 100.0 + fit->offset_db;
            struct rfade_tails tails;
            if (!((unsigned)which & (1U << b)))
                continue;
            enum rfade_status status =
                fit->model->tails(fit->parameter, level_db - mean_db, &tails);
            if (status != RFADE_OK)
                return status;
            product *= tails.lower;
        }
        sum += weight * product;
        weights += weight;
    }
    *share = sum / weights;
    return RFADE_OK;
}

static enum rfade_status model_quantile(const struct rfade_diversity_row *row, enum which which,
                                        double about_db, double share, double *level_db)
{
    double low_db = about_db - REACH_DB, high_db = about_db + REACH_DB;
    enum rfade_status status = RFADE_OK;
    for (int i = 0; i < BISECTIONS && status == RFADE_OK; i++) {
        double middle_db = 0.5 * (low_db + high_db), below = NAN;
        status = model_below(row, which, middle_db, &below);
        if (below < share)
            low_db = middle_db;
        else
            high_db = middle_db;
    }
    *level_db = 0.5 * (low_db + high_db);
    return status;
}

/* Mean shifted local mean of the first branch: where quantiles are looked for. */
static double about_db(const struct rfade_paired_total *total)
{
    double weight = 0.0, sum = 0.0;
    for (size_t i = 0; i < total->block_count; i++) {
        weight += (double)total->blocks[i].weight_mm;
        sum += (double)total->blocks[i].mean_cdb[0];
    }
    return sum / weight / 100.0;
}

static enum rfade_status measure_gain(const struct rfade_diversity_row *row, double outage,
                                      double *gain_db)
{
    const struct rfade_paired_total *total = &row->total;
    struct rfade_tally *const tallies[] = {total->level[0], total->level[1], total->best};
    double level_db[3] = {NAN, NAN, NAN};
    enum rfade_status status = RFADE_OK;
    for (int i = 0; i < 3 && status == RFADE_OK; i++)
        status = tally_quantile(tallies[i], about_db(total), outage, &level_db[i]);
    /* NaN where either branch's level is hidden: not fmax, which would pass over it */
    double single_db = level_db[0] > level_db[1] ? level_db[0] : level_db[1];
    *gain_db = isnan(level_db[0]) ? NAN : level_db[2] - single_db;
    return status;
}

static enum rfade_status predict_gain(const struct rfade_diversity_row *row, double outage,
                                      double *gain_db)
{
    static const enum which ways[] = {FIRST, SECOND, BOTH};
    double level_db[3] = {NAN, NAN, NAN};
    enum rfade_status status = RFADE_OK;
    for (int i = 0; i < 3 && status == RFADE_OK; i++)
        status = model_quantile(row, ways[i], about_db(&row->total), outage, &level_db[i]);
    *gain_db = level_db[2] - fmax(level_db[0], level_db[1]);
    return status;
}

static bool has_models(const struct rfade_diversity_row *row)
{
    for (int b = 0; b < 2; b++) {
        const struct rfade_stored_fit *fit = rfade_result_preferred(row->branch[b]);
        if (!fit || !fit->model)
            return false;
    }
    return true;
}

static struct rfade_diversity nothing_known(void)
{
    struct rfade_diversity result = {.below = {NAN, NAN},
                                     .both_below = NAN,
                                     .both_below_low = NAN,
                                     .both_below_high = NAN,
                                     .both_below_independent = NAN,
                                     .power_correlation = NAN,
                                     .power_correlation_low = NAN,
                                     .power_correlation_high = NAN,
                                     .envelope_correlation = NAN};
    for (int i = 0; i < RFADE_DIVERSITY_GAINS; i++)
        result.gain_db[i] = result.gain_independent_db[i] = NAN;
    return result;
}

static enum rfade_status gains(const struct rfade_diversity_row *row,
                               struct rfade_diversity *result)
{
    double places = result->travel_m / (0.5 * row->branch[0]->wavelength_m);
    enum rfade_status status = RFADE_OK;
    for (int i = 0; i < RFADE_DIVERSITY_GAINS && status == RFADE_OK; i++) {
        double outage = rfade_diversity_outages[i];
        if (places * outage >= PLACES_MIN)
            status = measure_gain(row, outage, &result->gain_db[i]);
        if (status == RFADE_OK && has_models(row))
            status = predict_gain(row, outage, &result->gain_independent_db[i]);
    }
    return status;
}

enum rfade_status rfade_diversity_evaluate(const struct rfade_diversity_row *row,
                                           double threshold_db, double confidence,
                                           struct rfade_diversity *result,
                                           struct rfade_error *error)
{
    *result = nothing_known();
    for (size_t i = 0; i < row->total.block_count; i++) {
        result->pairs += row->total.blocks[i].pairs;
        result->travel_m += 1e-3 * (double)row->total.blocks[i].weight_mm;
    }
    if (result->pairs == 0)
        return RFADE_OK;
    correlate(&row->total, confidence, result);
    share_below(&row->total, row->branch[0]->wavelength_m, confidence, result);
    enum rfade_status status = gains(row, result);
    if (status == RFADE_OK && has_models(row))
        status = model_below(row, BOTH, threshold_db, &result->both_below_independent);
    if (status != RFADE_OK)
        return rfade_error_set(error, status, "run `routefade fit --all`",
                               "the branches on route %s, segment %lld can't be compared: %s",
                               row->branch[0]->route, (long long)row->branch[0]->segment,
                               rfade_status_text(status));
    return RFADE_OK;
}
