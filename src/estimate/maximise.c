/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "estimate/maximise.h"

#include <math.h>
#include <string.h>

enum { STEPS_MAX = 200, HALVINGS_MAX = 40, IDLE_STEPS_MAX = 8, POLISH_STEPS_MAX = 20 };

/*
 * Convergence is superlinear: a last step of this size, in units of the standard deviation
 * of one reading, leaves an error far below the 1e-6 that is promised.
 */
static const double STEP_SMALL = 1e-8;

/*
 * The curvature of a shorter form is that of the whole to a share of 1e-3 or better: so much
 * of a last step of this size is what is left.
 */
static const double POLISH_STEP_SMALL = 1e-6;

/*
 * A rise of this share of the log-likelihood is 5e-8 of a reading's standard deviation; where
 * no step promises as much the likelihood is flat, along a ridge perhaps.
 */
static const double RISE_SMALL = 1e-15;

bool rfade_invert(const struct rfade_matrix *matrix, bool single, struct rfade_matrix *inverse)
{
    const double(*m)[2] = matrix->at;
    double determinant = m[0][0] * m[1][1] - m[0][1] * m[1][0];
    memset(inverse, 0, sizeof *inverse);
    if (!(m[0][0] > 0.0)) {
        return false;
    }
    if (single) {
        inverse->at[0][0] = 1.0 / m[0][0];
        return true;
    }
    /* Below this share of its diagonal a determinant is rounding. */
    if (!(determinant > 1e-13 * m[0][0] * m[1][1])) {
        return false;
    }
    inverse->at[0][0] = m[1][1] / determinant;
    inverse->at[1][1] = m[0][0] / determinant;
    inverse->at[0][1] = -m[0][1] / determinant;
    inverse->at[1][0] = -m[1][0] / determinant;
    return true;
}

/* Is the spread held: no parameter, or at an end of its range and pulled outwards? */
static bool spread_held(const struct rfade_sample *sample, const double theta[2],
                        double gradient)
{
    return !rfade_has_spread(sample->model) ||
           (rfade_at_spread_min(sample, theta[1]) && gradient <= 0.0) ||
           (rfade_at_spread_max(sample, theta[1]) && gradient >= 0.0);
}

/* Standard deviation of one reading in dB, roughly: what a location step is measured by. */
static double reading_deviation_db(const struct rfade_sample *sample, const double theta[2])
{
    return rfade_has_spread(sample->model) ? 4.34 * exp(-0.5 * theta[RFADE_SPREAD]) : 4.34;
}

/* The quasi-Newton step, cut to size and range. */
static void choose_step(const struct rfade_sample *sample, const double theta[2],
                        const struct rfade_likelihood *at, const struct rfade_matrix *curvature,
                        double step[2])
{
    bool held = spread_held(sample, theta, at->gradient[1]);
    struct rfade_matrix inverse;
    if (!rfade_invert(curvature, held, &inverse)) {
        /* A curvature that can't be used: follow the gradient, each direction for itself. */
        memset(&inverse, 0, sizeof inverse);
        inverse.at[0][0] = 1.0 / fmax(at->outer.at[0][0], 1e-300);
        inverse.at[1][1] = held ? 0.0 : 1.0 / fmax(at->outer.at[1][1], 1e-300);
    }
    for (int i = 0; i < 2; i++) {
        step[i] = inverse.at[i][0] * at->gradient[0] + inverse.at[i][1] * at->gradient[1];
    }
    if (rfade_has_spread(sample->model)) {
        double within = rfade_spread_within(sample, theta[1] + step[1]) - theta[1];
        if (within != step[1] && curvature->at[0][0] > 0.0) {
            /* The spread stops at its end: the best location for that. */
            step[0] = (at->gradient[0] - curvature->at[0][1] * within) / curvature->at[0][0];
        }
        step[1] = within;
    }
    double largest =
        fmax(fabs(step[0]) / RFADE_STEP_MAX_DB, fabs(step[1]) / RFADE_STEP_MAX_SPREAD);
    if (largest > 1.0) {
        step[0] /= largest;
        step[1] /= largest;
    }
}

/* BFGS update of a curvature (of minus the log-likelihood) after a step. */
static void update_curvature(struct rfade_matrix *curvature, const double step[2],
                             const struct rfade_likelihood *before,
                             const struct rfade_likelihood *after)
{
    double change[2];
    double product[2];
    for (int i = 0; i < 2; i++) {
        change[i] = before->gradient[i] - after->gradient[i];
        product[i] = curvature->at[i][0] * step[0] + curvature->at[i][1] * step[1];
    }
    double curved = step[0] * change[0] + step[1] * change[1];
    double expected = step[0] * product[0] + step[1] * product[1];
    if (!(curved > 1e-10 * expected) || !(expected > 0.0)) {
        *curvature = after->outer;
        return;
    }
    for (int i = 0; i < 2; i++) {
        for (int j = 0; j < 2; j++) {
            curvature->at[i][j] +=
                change[i] * change[j] / curved - product[i] * product[j] / expected;
        }
    }
}

/*
 * Halves the step until the likelihood rises by a share of what the gradient promises.
 * Below the rounding of the sum a rise can't be seen; there the full step is taken.
 */
static bool search(const struct rfade_sample *sample, double theta[2], double step[2],
                   struct rfade_likelihood *at)
{
    double promised = step[0] * at->gradient[0] + step[1] * at->gradient[1];
    double rounding = 1e-13 * (1.0 + fabs(at->value));
    for (int halving = 0; halving < HALVINGS_MAX; halving++) {
        double next[2] = {theta[0] + step[0], theta[1] + step[1]};
        struct rfade_likelihood there;
        if (rfade_likelihood_at(sample, next, &there) == RFADE_OK &&
            there.value >= at->value + 1e-4 * promised - rounding) {
            memcpy(theta, next, sizeof next);
            *at = there;
            return true;
        }
        promised *= 0.5;
        step[0] *= 0.5;
        step[1] *= 0.5;
    }
    return false;
}

static bool step_within(const struct rfade_sample *sample, const double theta[2],
                        const double step[2], double size)
{
    return fabs(step[0]) <= size * reading_deviation_db(sample, theta) && fabs(step[1]) <= size;
}

/* Minus the derivative of the gradient along one dimension, by differences to the inside. */
static enum rfade_status measure_column(const struct rfade_sample *sample,
                                        const double centre[2], int dimension, double column[2])
{
    bool spread = dimension == RFADE_SPREAD;
    double size = spread ? 1e-4 : 1e-4 * reading_deviation_db(sample, centre);
    double down = spread && centre[1] - size < sample->spread_min ? 0.0 : size;
    double up = spread && centre[1] + size > sample->spread_max ? 0.0 : size;
    double theta[2] = {centre[0], centre[1]};
    column[0] = column[1] = 0.0;
    if (!(down + up > 0.0)) {
        return RFADE_OK; /* a spread held at one value */
    }
    struct rfade_likelihood below;
    struct rfade_likelihood above;
    theta[dimension] = centre[dimension] - down;
    enum rfade_status status = rfade_likelihood_at(sample, theta, &below);
    if (status == RFADE_OK) {
        theta[dimension] = centre[dimension] + up;
        status = rfade_likelihood_at(sample, theta, &above);
    }
    if (status != RFADE_OK) {
        return status;
    }
    column[0] = (below.gradient[0] - above.gradient[0]) / (down + up);
    column[1] = (below.gradient[1] - above.gradient[1]) / (down + up);
    return RFADE_OK;
}

static enum rfade_status measure_information(const struct rfade_sample *sample,
                                             struct rfade_maximum *maximum)
{
    double location[2] = {0.0, 0.0};
    double spread[2] = {0.0, 0.0};
    enum rfade_status status = measure_column(sample, maximum->theta, RFADE_LOCATION, location);
    if (status == RFADE_OK && rfade_has_spread(sample->model)) {
        status = measure_column(sample, maximum->theta, RFADE_SPREAD, spread);
    }
    double cross = rfade_has_spread(sample->model) ? 0.5 * (location[1] + spread[0]) : 0.0;
    maximum->information.at[0][0] = location[0];
    maximum->information.at[0][1] = cross;
    maximum->information.at[1][0] = cross;
    maximum->information.at[1][1] = spread[1];
    return status;
}

static enum rfade_status finish(const struct rfade_sample *sample,
                                const struct rfade_likelihood *at,
                                struct rfade_maximum *maximum)
{
    bool held = spread_held(sample, maximum->theta, at->gradient[1]);
    maximum->value = at->value;
    maximum->at_spread_min = rfade_has_spread(sample->model) && held &&
                             rfade_at_spread_min(sample, maximum->theta[1]);
    maximum->at_spread_max = rfade_has_spread(sample->model) && held && !maximum->at_spread_min;
    enum rfade_status status = measure_information(sample, maximum);
    if (status != RFADE_OK) {
        return status;
    }
    /* At an end of the range the curvature may be of either sign: the scores serve instead. */
    if (!rfade_invert(&maximum->information, !rfade_has_spread(sample->model),
                      &maximum->inverse)) {
        maximum->information = at->outer;
        if (!rfade_invert(&maximum->information, !rfade_has_spread(sample->model),
                          &maximum->inverse)) {
            rfade_invert(&maximum->information, true, &maximum->inverse);
        }
    }
    return RFADE_OK;
}

enum rfade_status rfade_maximise(const struct rfade_sample *sample, const double start[2],
                                 struct rfade_maximum *maximum)
{
    struct rfade_likelihood at;
    struct rfade_matrix curvature;
    double *theta = maximum->theta;
    memset(maximum, 0, sizeof *maximum);
    theta[0] = start[0];
    theta[1] = rfade_has_spread(sample->model) ? rfade_spread_within(sample, start[1]) : 0.0;
    enum rfade_status status = rfade_likelihood_at(sample, theta, &at);
    if (status != RFADE_OK) {
        return status;
    }
    curvature = at.outer;
    int idle = 0;      /* steps in a row that brought nothing: a ridge */
    bool fresh = true; /* the curvature is that of the scores here */
    for (int count = 0; count < STEPS_MAX; count++) {
        struct rfade_likelihood before = at;
        double step[2];
        choose_step(sample, theta, &at, &curvature, step);
        double promised = step[0] * at.gradient[0] + step[1] * at.gradient[1];
        double little = RISE_SMALL * (1.0 + fabs(at.value));
        bool small = step_within(sample, theta, step, STEP_SMALL) || promised <= little;
        bool risen = search(sample, theta, step, &at);
        idle = at.value - before.value <= little ? idle + 1 : 0;
        if (small || idle >= IDLE_STEPS_MAX) {
            return finish(sample, &at, maximum);
        }
        if (!risen && fresh) {
            return RFADE_NO_CONVERGENCE;
        }
        if (risen) {
            update_curvature(&curvature, step, &before, &at);
            fresh = false;
        } else {
            curvature = at.outer;
            fresh = true;
        }
    }
    return RFADE_NO_CONVERGENCE;
}

enum rfade_status rfade_polish(const struct rfade_sample *sample, struct rfade_maximum *maximum)
{
    for (int count = 0; count < POLISH_STEPS_MAX; count++) {
        struct rfade_likelihood at;
        double step[2];
        enum rfade_status status = rfade_likelihood_at(sample, maximum->theta, &at);
        if (status != RFADE_OK) {
            return status;
        }
        choose_step(sample, maximum->theta, &at, &maximum->information, step);
        /* So near the top half of what the gradient promises is the rise, to third order. */
        maximum->value = at.value + 0.5 * (step[0] * at.gradient[0] + step[1] * at.gradient[1]);
        maximum->theta[0] += step[0];
        maximum->theta[1] += step[1];
        if (step_within(sample, maximum->theta, step, POLISH_STEP_SMALL)) {
            bool held = spread_held(sample, maximum->theta, at.gradient[1]);
            maximum->at_spread_min = held && rfade_has_spread(sample->model) &&
                                     rfade_at_spread_min(sample, maximum->theta[1]);
            return RFADE_OK;
        }
    }
    return RFADE_NO_CONVERGENCE;
}
