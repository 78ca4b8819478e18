/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * The root of twice the fall of the profile likelihood is nearly linear in theta; Newton's
 * method on it meets the wanted deviate in two or three evaluations. The other dimension
 * follows by the information at the maximum and is corrected by its own gradient at every
 * evaluation, in the manner of Venzon and Moolgavkar 1988.
 */
#include "estimate/profile.h"

#include <math.h>

enum { EVALUATIONS_MAX = 400, NEWTON_TRIES_MAX = 5 };

/* Relative, of the deviate; an interval's end is itself uncertain by more. */
static const double DEVIATE_ACCURACY = 1e-3;

/* What may be missing along the other dimension, of deviate^2. */
static const double RESIDUAL_SHARE = 1e-3;

/* What may be missing of a profile's value: it is held against chi-square quantiles. */
static const double VALUE_ACCURACY = 1e-4;

struct profile_point {
    double value;     /* profile log-likelihood */
    double slope;     /* of it, along the held dimension */
    double residual;  /* rise still to be had along the other dimension */
    double other;     /* best guess at the other dimension's place */
    bool other_above; /* does that lie above where this was evaluated? */
};

/* A way out from the maximum along one dimension. */
struct walk {
    const struct rfade_sample *sample;
    const struct rfade_maximum *maximum;
    int dimension;
    int direction;
    double deviate;
    double limit;      /* no end beyond this distance */
    double distance;   /* where it stands */
    double other;      /* and where in the other dimension */
    double other_low;  /* the other dimension's best place lies between these */
    double other_high; /* for the distance where it stands */
    double curvature;  /* of minus the log-likelihood along the other dimension, last seen */
    double last_other;
    double last_gradient;
    int tries;    /* at this distance, so far */
    int advances; /* from one distance to another, so far */
    double inner; /* distance where the fall is too small */
    double outer; /* and where it is too large; INFINITY as long as none is known */
};

static bool other_is_free(const struct rfade_sample *sample, int other, double place,
                          double gradient)
{
    if (other == RFADE_LOCATION) {
        return true;
    }
    return rfade_has_spread(sample->model) &&
           !(rfade_at_spread_min(sample, place) && gradient <= 0.0) &&
           !(rfade_at_spread_max(sample, place) && gradient >= 0.0);
}

/* Where the other dimension's best place is expected for a value of the held one. */
static double follow(const struct rfade_maximum *maximum, int dimension, double held)
{
    int other = 1 - dimension;
    const double(*inverse)[2] = maximum->inverse.at;
    double ratio = inverse[dimension][dimension] > 0.0
                       ? inverse[other][dimension] / inverse[dimension][dimension]
                       : 0.0;
    return maximum->theta[other] + ratio * (held - maximum->theta[dimension]);
}

static double held_at(const struct walk *walk, double distance)
{
    return walk->maximum->theta[walk->dimension] + walk->direction * distance;
}

/* Goes to a distance; the other dimension keeps its offset from where it was expected. */
static void go_to(struct walk *walk, double distance, double other)
{
    double shift = follow(walk->maximum, walk->dimension, held_at(walk, distance)) -
                   follow(walk->maximum, walk->dimension, held_at(walk, walk->distance));
    walk->distance = distance;
    walk->tries = 0;
    walk->other = other + shift;
    walk->other_low = -INFINITY;
    walk->other_high = INFINITY;
    if (walk->dimension == RFADE_LOCATION) {
        walk->other = rfade_spread_within(walk->sample, walk->other);
        walk->other_low = walk->sample->spread_min;
        walk->other_high = walk->sample->spread_max;
    }
}

/*
 * The curvature between the last place and this one, at one distance; at first that of the
 * maximum, or what the scores tell when that is lower.
 */
static void see_curvature(struct walk *walk, double gradient, double outer)
{
    int other = 1 - walk->dimension;
    double moved = walk->tries > 0 ? walk->other - walk->last_other : 0.0;
    double secant = moved != 0.0 ? (walk->last_gradient - gradient) / moved : 0.0;
    if (secant > 0.0) {
        walk->curvature = secant;
    } else {
        walk->curvature = fmax(walk->maximum->information.at[other][other], 0.5 * outer);
    }
    walk->last_other = walk->other;
    walk->last_gradient = gradient;
}

/*
 * One evaluation; the inner maximum by one Newton step, with the curvature last seen along the
 * other dimension.
 */
static enum rfade_status evaluate(struct walk *walk, struct profile_point *point)
{
    const struct rfade_sample *sample = walk->sample;
    int other = 1 - walk->dimension;
    double theta[2];
    struct rfade_likelihood at;
    theta[walk->dimension] = held_at(walk, walk->distance);
    theta[other] = walk->other;
    enum rfade_status status = rfade_likelihood_at(sample, theta, &at);
    if (status != RFADE_OK) {
        return status;
    }
    double gradient = at.gradient[other];
    see_curvature(walk, gradient, at.outer.at[other][other]);
    *point = (struct profile_point){at.value, at.gradient[walk->dimension], 0.0, walk->other,
                                    gradient > 0.0};
    if (other_is_free(sample, other, walk->other, gradient) && walk->curvature > 0.0) {
        double longest = other == RFADE_SPREAD ? RFADE_STEP_MAX_SPREAD : RFADE_STEP_MAX_DB;
        double step = fmin(fmax(gradient / walk->curvature, -longest), longest);
        if (other == RFADE_SPREAD) {
            step = rfade_spread_within(sample, walk->other + step) - walk->other;
        }
        point->residual = step * (gradient - 0.5 * walk->curvature * step);
        point->value += point->residual;
        point->slope -= walk->maximum->information.at[walk->dimension][other] * step;
        point->other += step;
    }
    return isfinite(point->value) && isfinite(point->slope) ? RFADE_OK : RFADE_NO_CONVERGENCE;
}

static struct walk set_out(const struct rfade_sample *sample,
                           const struct rfade_maximum *maximum, int dimension, int direction,
                           double deviate)
{
    double variance = maximum->inverse.at[dimension][dimension];
    double end = direction < 0 ? sample->spread_min : sample->spread_max;
    struct walk walk = {.sample = sample,
                        .maximum = maximum,
                        .dimension = dimension,
                        .direction = direction,
                        .deviate = deviate,
                        .outer = INFINITY};
    walk.limit =
        dimension == RFADE_SPREAD ? direction * (end - maximum->theta[RFADE_SPREAD]) : INFINITY;
    double guess = variance > 0.0 ? deviate * sqrt(variance) : 1.0;
    go_to(&walk, fmin(guess, walk.limit), maximum->theta[1 - dimension]);
    return walk;
}

/* The best location for the spread where the walk stands. */
static double best_location(const struct walk *walk)
{
    struct rfade_sample held = *walk->sample;
    struct rfade_maximum best;
    double spread = held_at(walk, walk->distance);
    double start[2] = {walk->maximum->theta[RFADE_LOCATION], spread};
    held.spread_min = spread;
    held.spread_max = spread;
    enum rfade_status status = rfade_maximise(&held, start, &best);
    return status == RFADE_OK ? best.theta[RFADE_LOCATION] : start[RFADE_LOCATION];
}

/*
 * Moves the other dimension, within what is known of its best place: by Newton's step, and
 * where that doesn't settle by halves (a spread), or by a maximisation (a location).
 */
static void improve_other(struct walk *walk, const struct profile_point *point)
{
    if (point->other_above) {
        walk->other_low = walk->other;
    } else {
        walk->other_high = walk->other;
    }
    bool inside = point->other > walk->other_low && point->other < walk->other_high;
    if (walk->tries < NEWTON_TRIES_MAX && inside) {
        walk->other = point->other;
    } else if (walk->dimension == RFADE_LOCATION) {
        walk->other = 0.5 * (walk->other_low + walk->other_high);
    } else {
        walk->other = best_location(walk);
    }
    walk->tries++;
}

/* Moves along: Newton's step on the root of the fall, within what is known of the end. */
static void advance(struct walk *walk, const struct profile_point *point, double root)
{
    double slope = -walk->direction * point->slope / fmax(root, 1e-3 * walk->deviate);
    double wanted = slope > 0.0 ? walk->distance + (walk->deviate - root) / slope : INFINITY;
    if (root < walk->deviate) {
        walk->inner = walk->distance;
    } else {
        walk->outer = walk->distance;
    }
    walk->advances++;
    bool inside = wanted > walk->inner && wanted < walk->outer;
    bool bracketed = isfinite(walk->outer);
    if (!inside || walk->advances > NEWTON_TRIES_MAX) {
        wanted = bracketed ? 0.5 * (walk->inner + walk->outer) : 2.0 * walk->distance;
    }
    go_to(walk, fmin(wanted, walk->limit), point->other);
}

enum rfade_status rfade_profile_end(const struct rfade_sample *sample,
                                    const struct rfade_maximum *maximum, int dimension,
                                    int direction, double deviate, double *end)
{
    struct walk walk = set_out(sample, maximum, dimension, direction, deviate);
    *end = held_at(&walk, walk.limit);
    if (!(walk.limit > 0.0)) {
        return RFADE_OK;
    }
    for (int count = 0; count < EVALUATIONS_MAX; count++) {
        struct profile_point point;
        if (evaluate(&walk, &point) != RFADE_OK) {
            /* Too far out to be evaluated: come back. */
            walk.outer = walk.distance;
            go_to(&walk, 0.5 * (walk.inner + walk.outer), walk.other);
            continue;
        }
        double root = sqrt(2.0 * fmax(maximum->value - point.value, 0.0));
        if (point.residual > RESIDUAL_SHARE * deviate * deviate) {
            improve_other(&walk, &point);
        } else if (fabs(root - deviate) <= DEVIATE_ACCURACY * deviate ||
                   walk.outer - walk.inner <= DEVIATE_ACCURACY * walk.inner) {
            *end = held_at(&walk, walk.distance);
            return RFADE_OK;
        } else if (root < deviate && walk.distance >= walk.limit) {
            return RFADE_OK;
        } else {
            advance(&walk, &point, root);
        }
    }
    *end = NAN;
    return RFADE_NO_CONVERGENCE;
}

enum rfade_status rfade_profile_value(const struct rfade_sample *sample,
                                      const struct rfade_maximum *maximum, int dimension,
                                      double held, double *value)
{
    double apart = held - maximum->theta[dimension];
    struct walk walk = set_out(sample, maximum, dimension, apart < 0.0 ? -1 : 1, 1.0);
    go_to(&walk, fabs(apart), walk.other);
    *value = NAN;
    for (int count = 0; count < EVALUATIONS_MAX; count++) {
        struct profile_point point;
        enum rfade_status status = evaluate(&walk, &point);
        if (status != RFADE_OK) {
            return status;
        }
        if (point.residual <= VALUE_ACCURACY) {
            *value = point.value;
            return RFADE_OK;
        }
        improve_other(&walk, &point);
    }
    return RFADE_NO_CONVERGENCE;
}
