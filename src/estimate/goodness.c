/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Expected weights. A reading with an interval of width S could have fallen into any interval
 * of its own grid (S and the place of one centre). So each grid's readings are expected in a
 * class with the probability from the last interval's end below the class to its own last
 * interval's end: exact for one grid and for a survey's many, which the local mean shifts.
 * Censored readings carry their own bounds, unknown for the readings that weren't censored;
 * so all classes that a censored reading could reach into are pooled.
 */
#include "estimate/goodness.h"

#include <gsl/gsl_cdf.h>
#include <math.h>
#include <string.h>

#include "model/model.h"

enum { GRIDS_MAX = 64, CLASSES = RFADE_COARSE_BINS };

static const double EXPECTED_MIN = 5.0;    /* a pool's expectation, in independent readings */
static const double CENSORED_LOST = 1e-3;  /* share of censored readings beyond the pool */
static const double GRID_TOLERANCE = 1e-6; /* of a step: two grids closer than that are one */
static const double FREEDOM_MIN = 4.0;     /* fewer can't tell two moments of a covariance */

struct grid {
    double width_db; /* 0: readings without quantisation */
    double offset_db;
    double weight;
};

struct expectation {
    struct grid grids[GRIDS_MAX];
    size_t grid_count;
    double censored; /* weight of censored readings */
    int first;       /* class that the lower censored readings are pooled up to */
    int last;        /* class from which the upper ones are pooled */
    double expected[CLASSES];
    double slope[CLASSES][2]; /* of expected, about theta */
};

static bool add_to_grid(struct expectation *expectation, const struct rfade_bin *bin)
{
    double width = bin->high_db - bin->low_db;
    double offset = width > 0.0 ? bin->high_db - width * floor(bin->high_db / width) : 0.0;
    for (size_t i = 0; i < expectation->grid_count; i++) {
        struct grid *grid = &expectation->grids[i];
        double apart = fabs(grid->offset_db - offset);
        bool same_offset =
            apart <= GRID_TOLERANCE * width || fabs(apart - width) <= GRID_TOLERANCE * width;
        if (fabs(grid->width_db - width) <= GRID_TOLERANCE * width && same_offset) {
            grid->weight += bin->weight;
            return true;
        }
    }
    if (expectation->grid_count == GRIDS_MAX) {
        return false;
    }
    expectation->grids[expectation->grid_count++] = (struct grid){width, offset, bin->weight};
    return true;
}

/* Sorts the bins into grids and finds which classes the censored readings reach. */
static bool gather(const struct rfade_problem *problem, struct expectation *expectation)
{
    double below[CLASSES] = {0.0};
    double above[CLASSES] = {0.0};
    double lost = CENSORED_LOST * problem->counted->readings;
    memset(expectation, 0, sizeof *expectation);
    for (size_t i = 0; i < problem->bin_count; i++) {
        const struct rfade_bin *bin = &problem->bins[i];
        int class_of = rfade_class_of(problem->edges_db, rfade_bin_place(bin));
        if (isinf(bin->low_db)) {
            below[class_of] += bin->weight;
            expectation->censored += bin->weight;
        } else if (isinf(bin->high_db)) {
            above[class_of] += bin->weight;
            expectation->censored += bin->weight;
        } else if (!add_to_grid(expectation, bin)) {
            return false;
        }
    }
    expectation->last = CLASSES - 1;
    double beyond = 0.0;
    for (int i = CLASSES - 1; i >= 0 && beyond <= lost; i--) {
        beyond += below[i];
        expectation->first = i;
    }
    beyond = 0.0;
    for (int i = 0; i < CLASSES && beyond <= lost; i++) {
        beyond += above[i];
        expectation->last = i;
    }
    return expectation->first < expectation->last;
}

/* Where a grid's last interval of the class ends. */
static double end_of_class(const struct grid *grid, double edge_db)
{
    if (!(grid->width_db > 0.0) || isinf(edge_db)) {
        return edge_db;
    }
    /* An interval belongs to the class that its middle lies in. */
    double last = floor((edge_db - grid->offset_db) / grid->width_db + 0.5 + GRID_TOLERANCE);
    return grid->offset_db + last * grid->width_db;
}

/*
 * Dividing by the window's mean takes a share n of the variance away, to which a model with a
 * spread has fitted itself; Rayleigh fading can't. To first order its density becomes
 * exp(-x) (1 - n/2 L2(x)), L2 the Laguerre polynomial 1 - 2x + x^2/2: of the corrections that
 * keep the mean the one that takes n of the variance away. This is the integral of L2(x)
 * exp(-x) up to a level.
 */
static double laguerre_share(double level_db)
{
    double x = exp(level_db / RFADE_DB_PER_NEPER_OF_POWER);
    return isinf(x) ? 0.0 : x * exp(-x) * (1.0 - 0.5 * x);
}

/* What the window moves out of an interval, as a share of all readings. */
static double window_share(const struct rfade_problem *problem,
                           const struct rfade_fit_details *details, const struct rfade_bin *bin)
{
    double location_db = details->maximum.theta[RFADE_LOCATION];
    if (rfade_has_spread(details->sample.model)) {
        return 0.0;
    }
    return 0.5 * problem->settings->narrowing *
           (laguerre_share(bin->high_db - location_db) -
            laguerre_share(bin->low_db - location_db));
}

static enum rfade_status expect_grid(const struct rfade_problem *problem,
                                     const struct rfade_fit_details *details,
                                     const struct grid *grid, double weight,
                                     struct expectation *expectation)
{
    const struct rfade_model *model = details->sample.model;
    const double *theta = details->maximum.theta;
    double parameter = rfade_parameter_of_spread(model, theta[RFADE_SPREAD]);
    double low = -INFINITY;
    for (int i = 0; i < CLASSES; i++) {
        double edge = i == CLASSES - 1 ? INFINITY : problem->edges_db[i];
        struct rfade_bin bin = {low, end_of_class(grid, edge), weight};
        double score[2] = {0.0, 0.0};
        double log_probability = -INFINITY;
        if (!(bin.high_db > bin.low_db)) {
            continue;
        }
        enum rfade_status status = rfade_bin_score(model, &bin, theta[RFADE_LOCATION],
                                                   parameter, &log_probability, score);
        if (status != RFADE_OK) {
            return status;
        }
        double expected = weight * exp(log_probability);
        expectation->expected[i] += expected - weight * window_share(problem, details, &bin);
        expectation->slope[i][0] += expected * score[0];
        expectation->slope[i][1] += expected * score[1];
        low = bin.high_db;
    }
    return RFADE_OK;
}

/* Censored readings share the grids of the others in proportion. */
static enum rfade_status expect(const struct rfade_problem *problem,
                                const struct rfade_fit_details *details,
                                struct expectation *expectation)
{
    double on_grids = 0.0;
    for (size_t i = 0; i < expectation->grid_count; i++) {
        on_grids += expectation->grids[i].weight;
    }
    for (size_t i = 0; i < expectation->grid_count; i++) {
        const struct grid *grid = &expectation->grids[i];
        double weight = grid->weight * (1.0 + expectation->censored / on_grids);
        enum rfade_status status = expect_grid(problem, details, grid, weight, expectation);
        if (status != RFADE_OK) {
            return status;
        }
    }
    return RFADE_OK;
}

/* The pool of each class; the number of pools. */
static int pool_classes(const struct expectation *expectation, double design_effect,
                        int pool_of[CLASSES])
{
    double enough = EXPECTED_MIN * fmax(design_effect, 1.0);
    double sum = 0.0;
    int pool = 0;
    for (int i = 0; i < CLASSES; i++) {
        bool whole = sum >= enough && i > expectation->first && i <= expectation->last;
        if (whole) {
            pool++;
            sum = 0.0;
        }
        pool_of[i] = pool;
        sum += expectation->expected[i];
    }
    /* What is left at the end joins the pool before it. */
    for (int i = 0; i < CLASSES && sum < enough && pool > 0; i++) {
        pool_of[i] = pool_of[i] == pool ? pool - 1 : pool_of[i];
    }
    return sum < enough && pool > 0 ? pool : pool + 1;
}

struct pooled {
    int count;
    double observed[CLASSES];
    double expected[CLASSES];
    double residual[CLASSES][CLASSES]; /* what a unit of weight in a class adds to a pool's
                                          observed less expected weight */
};

/* Estimation moves the expectation: residual = indicator - slope H^-1 score. */
static void pool(const struct rfade_problem *problem, const struct rfade_fit_details *details,
                 const struct expectation *expectation, const int pool_of[CLASSES],
                 struct pooled *pooled)
{
    double slope[CLASSES][2] = {{0.0}};
    const double(*inverse)[2] = details->maximum.inverse.at;
    memset(pooled->observed, 0, sizeof pooled->observed);
    memset(pooled->expected, 0, sizeof pooled->expected);
    for (int c = 0; c < CLASSES; c++) {
        pooled->observed[pool_of[c]] += problem->counted->observed[c];
        pooled->expected[pool_of[c]] += expectation->expected[c];
        slope[pool_of[c]][0] += expectation->slope[c][0];
        slope[pool_of[c]][1] += expectation->slope[c][1];
    }
    for (int p = 0; p < pooled->count; p++) {
        for (int c = 0; c < CLASSES; c++) {
            const double *score = details->scores.mean[c];
            double move[2] = {inverse[0][0] * score[0] + inverse[0][1] * score[1],
                              inverse[1][0] * score[0] + inverse[1][1] * score[1]};
            pooled->residual[p][c] =
                (pool_of[c] == p ? 1.0 : 0.0) - slope[p][0] * move[0] - slope[p][1] * move[1];
        }
    }
}

/* Trace of the standardised residuals' covariance, and of its square. */
static void traces(const struct rfade_class_covariance *covariance, const struct pooled *pooled,
                   double *trace, double *square)
{
    double matrix[CLASSES][CLASSES];
    *trace = 0.0;
    *square = 0.0;
    for (int p = 0; p < pooled->count; p++) {
        double row[CLASSES] = {0.0};
        for (int c = 0; c < CLASSES; c++) {
            for (int d = 0; d < CLASSES; d++) {
                row[d] += pooled->residual[p][c] * covariance->value[c][d];
            }
        }
        for (int q = 0; q < pooled->count; q++) {
            double sum = 0.0;
            for (int d = 0; d < CLASSES; d++) {
                sum += row[d] * pooled->residual[q][d];
            }
            matrix[p][q] = sum / sqrt(pooled->expected[p] * pooled->expected[q]);
            *square += matrix[p][q] * matrix[p][q];
        }
        *trace += matrix[p][p];
    }
    /*
     * The square of a covariance measured with f degrees of freedom is too large by the
     * spread of its own elements; unbiased form [Srivastava 2005, eq. 2.3].
     */
    double f = covariance->degrees_of_freedom;
    if (isfinite(f)) {
        *square = f * f / ((f - 1.0) * (f + 2.0)) * (*square - *trace * *trace / f);
    }
}

/*
 * Degrees of freedom by two moments: trace squared over the square's trace, at most those of
 * independent readings. Of a covariance measured with f degrees of freedom the ratio is too
 * large by 4/f^2 and, with d classes alike, 2/(f d), which is left out [delta method on the
 * moments of the Wishart distribution].
 */
static double match_freedom(double trace, double square, double f, double most)
{
    double noise = isinf(f) ? 0.0 : 4.0 / (f * f);
    double freedom = square > 0.0 ? trace * trace / square / (1.0 + noise) : most;
    return fmin(fmax(freedom, 1.0), most);
}

/* p-value of a statistic whose null distribution has these traces. */
static double judge(const struct rfade_class_covariance *covariance,
                    const struct pooled *pooled, int parameters)
{
    double statistic = 0.0;
    double trace = 0.0;
    double square = 0.0;
    double f = covariance->degrees_of_freedom;
    for (int i = 0; i < pooled->count; i++) {
        double difference = pooled->observed[i] - pooled->expected[i];
        statistic += difference * difference / pooled->expected[i];
    }
    traces(covariance, pooled, &trace, &square);
    if (!(trace > 0.0)) {
        return NAN;
    }
    double freedom = match_freedom(trace, square, f, pooled->count - 1 - parameters);
    return isinf(f) ? gsl_cdf_chisq_Q(statistic * freedom / trace, freedom)
                    : gsl_cdf_fdist_Q(statistic / trace, freedom, freedom * f);
}

enum rfade_status rfade_goodness(const struct rfade_problem *problem,
                                 const struct rfade_fit_details *details, double *p)
{
    const struct rfade_class_covariance *covariance = problem->counted;
    struct expectation expectation;
    struct pooled pooled;
    int pool_of[CLASSES];
    int parameters = rfade_has_spread(details->sample.model) ? 2 : 1;
    *p = NAN;
    if (!covariance->measured || covariance->degrees_of_freedom < FREEDOM_MIN ||
        details->maximum.at_spread_max || !gather(problem, &expectation)) {
        return RFADE_OK;
    }
    enum rfade_status status = expect(problem, details, &expectation);
    if (status != RFADE_OK) {
        return status;
    }
    pooled.count = pool_classes(&expectation, details->spread.trace / parameters, pool_of);
    if (pooled.count >= parameters + 2) {
        pool(problem, details, &expectation, pool_of, &pooled);
        *p = judge(covariance, &pooled, parameters);
    }
    return RFADE_OK;
}
