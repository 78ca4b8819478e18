/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Two cases, thought equally likely before anything is seen: passes differ by their fading
 * alone, with the variance f^2 that theory gives their mean levels; or by something else as
 * well (another lane, wet trees, a parked lorry), with a variance v of which is known
 * beforehand that it is about (2 dB)^2, as much as two degrees of freedom tell: a scaled
 * inverse chi-square [Gelman et al., Bayesian Data Analysis, 3rd ed. 2013, section 2.6]. With
 * the sample variance s^2 of n passes
 *   fading alone:  (n - 1) s^2 / f^2 is chi-square with n - 1 degrees of freedom,
 *   more:          s^2 / (2 dB)^2 is F with n - 1 and 2,
 * from which follows how likely each is. Under the second, v is not taken to be below f^2, and
 * levels are Student's t with n + 1 degrees of freedom about their mean. Two or three passes
 * that happen to agree don't tell that others will: intervals are then wider than those of
 * passes that are known not to differ, by half with three, by a tenth with six.
 */
#include "analyse/pass_spread.h"

#include <gsl/gsl_cdf.h>
#include <gsl/gsl_math.h>
#include <gsl/gsl_randist.h>
#include <math.h>
#include <stdlib.h>

static const double EXPECTED_DB = 2.0;
static const double EXPECTED_FREEDOM = 2.0;

/* A pass that covered less of the segment than this share of the longest has another level
 * for that alone. */
static const double LEAST_SHARE = 0.8;

/* Relative, of a deviation. */
static const double ACCURACY = 1e-6;

void rfade_pass_levels_clear(struct rfade_pass_levels *levels)
{
    free(levels->passes);
    *levels = (struct rfade_pass_levels){NULL, 0};
}

static struct rfade_pass_level *find_pass(struct rfade_pass_levels *levels, int64_t vehicle_id,
                                          int64_t start_us)
{
    for (size_t i = 0; i < levels->count; i++)
        if (levels->passes[i].vehicle_id == vehicle_id &&
            levels->passes[i].start_us == start_us)
            return &levels->passes[i];
    struct rfade_pass_level *more =
        realloc(levels->passes, (levels->count + 1) * sizeof *levels->passes);
    if (!more)
        return NULL;
    levels->passes = more;
    more[levels->count] = (struct rfade_pass_level){vehicle_id, start_us, 0.0, 0.0};
    return &more[levels->count++];
}

enum rfade_status rfade_pass_levels_add(struct rfade_pass_levels *levels, int64_t vehicle_id,
                                        int64_t start_us, struct rfade_tally *local_mean)
{
    const struct rfade_tally_cell *cells = NULL;
    size_t count = 0;
    enum rfade_status status = rfade_tally_cells(local_mean, &cells, &count);
    if (status != RFADE_OK)
        return status;
    struct rfade_pass_level *pass = find_pass(levels, vehicle_id, start_us);
    if (!pass)
        return RFADE_NO_MEMORY;
    for (size_t i = 0; i < count; i++) {
        pass->travel_mm += (double)cells[i].weight;
        pass->sum_mm_db += (double)cells[i].weight * (cells[i].key.centre_cdb / 100.0);
    }
    return RFADE_OK;
}

/* Sample variance of the levels of passes that covered the segment; how many they are. */
static double sample_variance(const struct rfade_pass_levels *levels, double *count)
{
    double longest_mm = 0.0, sum = 0.0, squares = 0.0, reference_db = NAN;
    *count = 0.0;
    for (size_t i = 0; i < levels->count; i++)
        longest_mm = fmax(longest_mm, levels->passes[i].travel_mm);
    for (size_t i = 0; i < levels->count; i++) {
        const struct rfade_pass_level *pass = &levels->passes[i];
        if (!(pass->travel_mm > 0.0 && pass->travel_mm >= LEAST_SHARE * longest_mm))
            continue;
        double level_db = pass->sum_mm_db / pass->travel_mm;
        reference_db = *count > 0.0 ? reference_db : level_db;
        sum += level_db - reference_db;
        squares += (level_db - reference_db) * (level_db - reference_db);
        *count += 1.0;
    }
    return *count > 1.0 ? fmax(squares - sum * sum / *count, 0.0) / (*count - 1.0) : 0.0;
}

/* Two deviations, and the degrees of freedom of the second, which is likely to `more`. */
struct mixture {
    double alone_db;
    double more_db;
    double freedom;
    double more;
};

/* The normal deviation with the same two-sided quantile. */
static double deviation(const struct mixture *mixture, double confidence)
{
    double tail = 0.5 * (1.0 - confidence);
    double low = 0.0;
    double high = fmax(mixture->alone_db * gsl_cdf_ugaussian_Qinv(tail),
                       mixture->more_db * gsl_cdf_tdist_Qinv(tail, mixture->freedom));
    while (high - low > ACCURACY * high) {
        double middle = 0.5 * (low + high);
        double alone =
            mixture->alone_db > 0.0 ? gsl_cdf_ugaussian_Q(middle / mixture->alone_db) : 0.0;
        double more = mixture->more_db > 0.0
                          ? gsl_cdf_tdist_Q(middle / mixture->more_db, mixture->freedom)
                          : 0.0;
        if ((1.0 - mixture->more) * alone + mixture->more * more > tail)
            low = middle;
        else
            high = middle;
    }
    return high / gsl_cdf_ugaussian_Qinv(tail);
}

struct rfade_pass_spread rfade_find_pass_spread(const struct rfade_pass_levels *levels,
                                                double fading_db, double confidence)
{
    double count = 0.0;
    double square = sample_variance(levels, &count);
    double passes = fmax((double)levels->count, 1.0);
    if (count < 2.0 || !(fading_db > 0.0))
        return (struct rfade_pass_spread){fading_db / sqrt(passes), NAN};
    double freedom = count - 1.0, fading = fading_db * fading_db;
    double expected = EXPECTED_DB * EXPECTED_DB;
    double alone = gsl_ran_chisq_pdf(freedom * square / fading, freedom) * freedom / fading;
    double more = gsl_ran_fdist_pdf(square / expected, freedom, EXPECTED_FREEDOM) / expected;
    double known = EXPECTED_FREEDOM + freedom;
    double variance = fmax((EXPECTED_FREEDOM * expected + freedom * square) / known, fading);
    struct mixture mixture = {fading_db / sqrt(passes), sqrt(variance / passes), known,
                              more / (more + alone)};
    struct rfade_pass_spread spread;
    if (!(alone + more > 0.0)) /* far beyond fading */
        mixture.more = 1.0;
    spread.mean_db = deviation(&mixture, confidence);
    mixture.alone_db = 0.0;
    mixture.more_db = sqrt(variance - fading);
    spread.next_db = deviation(&mixture, confidence);
    return spread;
}
