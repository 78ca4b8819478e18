/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Error rates along a track of local means. The Gauss rule of n nodes for the track's own
 * distribution, exact for polynomials in dB of degree 2n - 1: recurrence coefficients by
 * Stieltjes' procedure, nodes and weights from the Jacobi matrix (Golub and Welsch 1969).
 */
#include <gsl/gsl_eigen.h>
#include <gsl/gsl_errno.h>
#include <gsl/gsl_math.h>
#include <math.h>
#include <stdbool.h>
#include <stdlib.h>

#include "model/model.h"
#include "predict/average.h"

enum { NODES_MIN = 3, NODES_MAX = 12 };

/* The error that the number of nodes is chosen for. */
static const double log_tolerance = -16.0;

struct nodes {
    size_t count;
    struct rfade_mean_snr levels[NODES_MAX]; /* weights sum to 1 */
};

struct range {
    double low_db;
    double high_db;
    double weight;
    size_t levels; /* with weight */
};

static enum rfade_status range_of(const struct rfade_mean_snr *track, size_t count,
                                  struct range *range)
{
    *range = (struct range){INFINITY, -INFINITY, 0.0, 0};
    for (size_t i = 0; i < count; i++) {
        if (!(fabs(track[i].mean_snr_db) <= RFADE_SNR_LIMIT_DB) ||
            !(track[i].weight >= 0.0 && track[i].weight < INFINITY)) {
            return RFADE_DOMAIN;
        }
        if (track[i].weight > 0.0) {
            range->low_db = fmin(range->low_db, track[i].mean_snr_db);
            range->high_db = fmax(range->high_db, track[i].mean_snr_db);
            range->weight += track[i].weight;
            range->levels++;
        }
    }
    return range->levels > 0 ? RFADE_OK : RFADE_NO_DATA;
}

/*
 * Rates are analytic in ln SNR within pi/2 of the real axis: n nodes leave rho^(-2n), rho the
 * sum of the half axes of the ellipse about the range that touches there.
 */
static size_t nodes_wanted(const struct range *range)
{
    const double half_range = 0.5 * RFADE_LN_PER_DB * (range->high_db - range->low_db);
    const double ratio = 0.5 * M_PI / fmax(half_range, 1e-6);
    const double count = ceil(-0.5 * log_tolerance / asinh(ratio));
    return (size_t)fmin(fmax(count, NODES_MIN), NODES_MAX);
}

/*
 * Recurrence coefficients of the polynomials orthonormal under the track's weights, into the
 * Jacobi matrix; `values` holds two of them at every level. Returns how many nodes there are.
 */
static size_t fill_jacobi(const struct rfade_mean_snr *track, size_t count,
                          const struct range *range, size_t wanted, double *values,
                          gsl_matrix *jacobi)
{
    double *before = values;
    double *here = values + count;
    double beta = 0.0;
    for (size_t i = 0; i < count; i++) {
        before[i] = 0.0;
        here[i] = 1.0;
    }
    for (size_t n = 0; n < wanted; n++) {
        double alpha = 0.0;
        for (size_t i = 0; i < count; i++) {
            alpha += track[i].weight / range->weight * here[i] * here[i] *
                     (track[i].mean_snr_db - range->low_db);
        }
        gsl_matrix_set(jacobi, n, n, alpha);
        double norm = 0.0;
        for (size_t i = 0; i < count; i++) {
            const double next =
                (track[i].mean_snr_db - range->low_db - alpha) * here[i] - beta * before[i];
            before[i] = here[i];
            here[i] = next;
            norm += track[i].weight / range->weight * next * next;
        }
        beta = sqrt(norm);
        /* no more levels than that */
        if (n + 1 == wanted || beta <= 1e-10 * (range->high_db - range->low_db)) {
            return n + 1;
        }
        gsl_matrix_set(jacobi, n, n + 1, beta);
        gsl_matrix_set(jacobi, n + 1, n, beta);
        for (size_t i = 0; i < count; i++) {
            here[i] /= beta;
        }
    }
    return wanted;
}

static enum rfade_status nodes_from(gsl_matrix *jacobi, const struct range *range,
                                    struct nodes *nodes)
{
    gsl_matrix_view part = gsl_matrix_submatrix(jacobi, 0, 0, nodes->count, nodes->count);
    gsl_eigen_symmv_workspace *workspace = gsl_eigen_symmv_alloc(nodes->count);
    gsl_matrix *vectors = gsl_matrix_alloc(nodes->count, nodes->count);
    double places_db[NODES_MAX];
    gsl_vector_view values = gsl_vector_view_array(places_db, nodes->count);
    enum rfade_status status = RFADE_NO_MEMORY;
    if (workspace != NULL && vectors != NULL) {
        status =
            gsl_eigen_symmv(&part.matrix, &values.vector, vectors, workspace) == GSL_SUCCESS
                ? RFADE_OK
                : RFADE_NO_CONVERGENCE;
    }
    for (size_t i = 0; status == RFADE_OK && i < nodes->count; i++) {
        const double first = gsl_matrix_get(vectors, 0, i);
        nodes->levels[i] = (struct rfade_mean_snr){range->low_db + places_db[i], first * first};
    }
    gsl_matrix_free(vectors);
    gsl_eigen_symmv_free(workspace);
    return status;
}

static enum rfade_status nodes_of(const struct rfade_mean_snr *track, size_t count,
                                  struct nodes *nodes)
{
    struct range range;
    enum rfade_status status = range_of(track, count, &range);
    if (status != RFADE_OK) {
        return status;
    }
    if (range.low_db == range.high_db) {
        *nodes = (struct nodes){1, {{range.low_db, 1.0}}};
        return RFADE_OK;
    }
    const size_t wanted = nodes_wanted(&range);
    double *values = malloc(2 * count * sizeof *values);
    gsl_matrix *jacobi = gsl_matrix_calloc(wanted, wanted);
    status = RFADE_NO_MEMORY;
    if (values != NULL && jacobi != NULL) {
        nodes->count = fill_jacobi(track, count, &range, wanted, values, jacobi);
        status = nodes_from(jacobi, &range, nodes);
    }
    gsl_matrix_free(jacobi);
    free(values);
    return status;
}

/* One modulation, at all levels. */
static enum rfade_status average_levels(struct rfade_average *average,
                                        const struct rfade_mean_snr *levels, size_t count,
                                        struct rfade_error_rate *rate)
{
    double bit = 0.0;
    double symbol = 0.0;
    double weight = 0.0;
    for (size_t i = 0; i < count; i++) {
        struct rfade_error_rate here;
        const enum rfade_status status =
            rfade_average_at(average, levels[i].mean_snr_db, &here);
        if (status != RFADE_OK) {
            return status;
        }
        bit += levels[i].weight * here.bit;
        symbol += levels[i].weight * here.symbol;
        weight += levels[i].weight;
    }
    bit /= weight;
    symbol /= weight;
    *rate = (struct rfade_error_rate){bit, symbol, log(bit), log(symbol)};
    return RFADE_OK;
}

enum rfade_status rfade_error_rates_track(const struct rfade_link *link,
                                          const struct rfade_mean_snr *track,
                                          size_t track_count,
                                          const struct rfade_modulation *const *modulations,
                                          size_t count, struct rfade_error_rate *rates)
{
    struct nodes nodes;
    struct rfade_average average;
    /* a steady rate is cheap, and steep: every level for itself */
    const bool unfaded = link->model == NULL && link->shadowing_db == 0.0;
    for (size_t i = 0; i < count; i++) {
        rates[i] = rfade_error_rate_nan();
    }
    enum rfade_status status = count == 0 ? RFADE_DOMAIN : nodes_of(track, track_count, &nodes);
    if (status != RFADE_OK) {
        return status;
    }
    const struct rfade_averaged what = {.modulation = modulations[0]};
    status = rfade_average_init(&average, link, &what);
    for (size_t i = 0; i < count && status == RFADE_OK; i++) {
        status = i == 0 ? RFADE_OK : rfade_average_change(&average, modulations[i]);
        if (status == RFADE_OK) {
            status = unfaded ? average_levels(&average, track, track_count, &rates[i])
                             : average_levels(&average, nodes.levels, nodes.count, &rates[i]);
        }
    }
    rfade_average_clear(&average);
    return status;
}
