/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Being in a class of level is a function of the scatter, a complex normal process. Its parts
 * in complex Hermite polynomials of degrees p and q are correlated, at u wavelengths, by
 * J0(2 pi u)^(p + q) cos((p - q) 2 pi u c) under isotropic scatter [Clarke 1968; Ito 1952;
 * Price 1958], c the cosine of the ray's direction. With scatter of power 1, a ray of power
 * t = a^2 and a level of power b^2, the coefficient of being below the level is
 *   sum over j of j! C(p, j) C(q, j) a^(p + q - 2j) F^(p + q - j)(t) / sqrt(p! q!)
 * in derivatives of the outage F by t. Of the generalised Marcum function dQ_M/dt =
 * Q_(M+1) - Q_M = (b/a)^M exp(-t - b^2) I_M(2 a b) =: g_M, so that F' = -g_1, and each
 * further derivative is the difference g_(M+1) - g_M of the one before.
 *
 * The variance of the travel in a class over a way L is L times the sum over the degrees of
 * coefficient squared times the length of their correlation, L times the mean of the
 * correlation with weight 2 (1 - u/L). Readings some way apart don't see it any shorter.
 */
#include "analyse/expected_blocks.h"

#include <gsl/gsl_errno.h>
#include <gsl/gsl_math.h>
#include <gsl/gsl_sf_bessel.h>
#include <gsl/gsl_sf_gamma.h>
#include <math.h>
#include <stdbool.h>
#include <stddef.h>

#include "routefade/model.h"
#include "routefade/stretch.h"

/* Degrees p >= q, 1 <= p + q <= DEGREE_MAX. */
enum { DEGREE_MAX = 6, PAIRS = 15, CLASSES = RFADE_COARSE_BINS };
static const int DEGREES[PAIRS][2] = {{1, 0}, {1, 1}, {2, 0}, {2, 1}, {3, 0},
                                      {2, 2}, {3, 1}, {4, 0}, {3, 2}, {4, 1},
                                      {5, 0}, {3, 3}, {4, 2}, {5, 1}, {6, 0}};
/* The first three of them are correlated over long ways. */
enum { LONG_PAIRS = 3 };

/* Beyond the larger one differences of g cancel; below the smaller one a ray changes nothing.
 */
static const double K_RANGE[2] = {1e-3, 300.0};

/* The blocks' own weights of lags, 1, 2/3, 1/3: what their mean costs (estimate). */
static const double MEAN_COST = 3.0;
/* ... and the sum of their squares, over all lags. */
static const double SQUARES = 19.0 / 9.0;

/* Theory's variances are good to about 15 percent: 2 over its square. */
static const double THEORY_FREEDOM = 90.0;
enum { BLOCKS_MIN = 6 };

/* Length of the correlation J0^2 cos(2 phase) with the ray along the road: the convolution of
 * Clarke's spectrum with itself at its edge, 1/(2 pi). */
static const double TURNED_LENGTH = 0.5 / M_PI;

/* Lengths of the correlations of the other pairs, integrals of J0(2 pi u)^(p + q)
 * cos((p - q) 2 pi u c) over all u, with the ray across the road and along it: sums over
 * 4e7 points up to u = 200 with scipy 1.10's j0. */
static const double SHORT_LENGTH[PAIRS - LONG_PAIRS][2] = {
    {0.28534, 0.28698}, {0.28534, 0.00081}, {0.28731, 0.28731}, {0.28731, 0.11375},
    {0.28731, 0.0},     {0.23988, 0.20783}, {0.23988, 0.04399}, {0.23988, 0.0},
    {0.22486, 0.22486}, {0.22486, 0.12236}, {0.22486, 0.01570}, {0.22486, 0.0}};

/* Three points across a step [AMS 55, table 25.4]. */
static const double STEP_PLACE[3] = {-0.3872983346207417, 0.0, 0.3872983346207417};
static const double STEP_WEIGHT[3] = {5.0 / 18.0, 8.0 / 18.0, 5.0 / 18.0};

/* Being below a level, or in a class. */
struct coefficients {
    double probability;
    double density;   /* of the level, per neper of power */
    double crossings; /* from outside, a wavelength; ray across the road */
    double pair[PAIRS];
};

/* Derivatives 1 .. DEGREE_MAX of the outage by the ray's power, at [1] .. [DEGREE_MAX]. */
static bool derivatives(double a, double b, double result[DEGREE_MAX + 1])
{
    double bessel[DEGREE_MAX + 1];
    double scale = exp(-(a - b) * (a - b));
    if (gsl_sf_bessel_In_scaled_array(0, DEGREE_MAX, 2.0 * a * b, bessel) != GSL_SUCCESS)
        return false;
    double g[DEGREE_MAX + 1];
    for (int i = 1; i <= DEGREE_MAX; i++)
        g[i] = -scale * pow(b / a, i) * bessel[i];
    for (int n = 1; n <= DEGREE_MAX; n++) {
        result[n] = g[1];
        for (int i = 1; i < DEGREE_MAX; i++)
            g[i] = g[i + 1] - g[i];
    }
    return true;
}

static double coefficient(double a, const double by_power[DEGREE_MAX + 1], int p, int q)
{
    double sum = 0.0;
    for (int j = 0; j <= q; j++) {
        double ways = gsl_sf_fact((unsigned)p) * gsl_sf_fact((unsigned)q) /
                      (gsl_sf_fact((unsigned)(p - j)) * gsl_sf_fact((unsigned)(q - j)) *
                       gsl_sf_fact((unsigned)j));
        sum += ways * pow(a, p + q - 2 * j) * by_power[p + q - j];
    }
    return sum / sqrt(gsl_sf_fact((unsigned)p) * gsl_sf_fact((unsigned)q));
}

static bool add_level(double k, double x_db, double weight, struct coefficients *sum)
{
    double a = sqrt(k);
    double b = sqrt((1.0 + k) * pow(10.0, x_db / 10.0));
    double by_power[DEGREE_MAX + 1];
    struct rfade_tails tails;
    struct rfade_log_gradient density;
    double rate = NAN;
    const struct rfade_model *rice = rfade_model(RFADE_RICE);
    if (rice->tails(k, x_db, &tails) != RFADE_OK ||
        rice->log_density(k, x_db, &density) != RFADE_OK ||
        rfade_crossings_per_wavelength(rice, k, x_db, &rate) != RFADE_OK ||
        !derivatives(a, b, by_power))
        return false;
    sum->probability += weight * tails.lower;
    sum->density += weight * exp(density.value) * RFADE_DB_PER_NEPER_OF_POWER;
    sum->crossings += weight * rate;
    for (int i = 0; i < PAIRS; i++)
        sum->pair[i] += weight * coefficient(a, by_power, DEGREES[i][0], DEGREES[i][1]);
    return true;
}

/* Being logged below the upper edge of each class: a level is rounded to a step. */
static bool find_edges(const struct rfade_expected_fading *fading, double k,
                       struct coefficients edges[CLASSES])
{
    for (int i = 0; i < CLASSES - 1; i++) {
        edges[i] = (struct coefficients){0};
        for (int j = 0; j < 3; j++) {
            double x_db = rfade_coarse_edges_db[i] + STEP_PLACE[j] * fading->step_db;
            if (!add_level(k, x_db, STEP_WEIGHT[j], &edges[i]))
                return false;
        }
    }
    edges[CLASSES - 1] = (struct coefficients){.probability = 1.0};
    return true;
}

static void add_times(struct coefficients *sum, double factor, const struct coefficients *other)
{
    sum->probability += factor * other->probability;
    sum->density += factor * other->density;
    sum->crossings += fabs(factor) * other->crossings;
    for (int i = 0; i < PAIRS; i++)
        sum->pair[i] += factor * other->pair[i];
}

/* Share of the travel whose bound lies in each class: censored readings are the share below
 * the bound of all that have it. */
static enum rfade_status find_bounds(const struct rfade_expected_fading *fading,
                                     const struct coefficients edges[CLASSES],
                                     double share[CLASSES])
{
    const struct rfade_tally_cell *cells = NULL;
    size_t count = 0;
    double total = 0.0, bounded = 0.0;
    enum rfade_status status = rfade_tally_cells(fading->levels, &cells, &count);
    for (int i = 0; i < CLASSES; i++)
        share[i] = 0.0;
    for (size_t i = 0; i < count && status == RFADE_OK; i++) {
        int class_of = rfade_coarse_bin(cells[i].key.centre_cdb / 100.0);
        total += (double)cells[i].weight;
        if (cells[i].key.kind == RFADE_BELOW)
            share[class_of] += (double)cells[i].weight / edges[class_of].probability;
    }
    for (int i = 0; i < CLASSES; i++) {
        share[i] = total > 0.0 ? share[i] / total : 0.0;
        bounded += share[i];
    }
    for (int i = 0; i < CLASSES && bounded > 1.0; i++)
        share[i] /= bounded;
    return status;
}

/* Classes from edges. All that is below a bound is counted in the lowest class, and the
 * bound's own class with it. */
static void find_classes(const struct coefficients edges[CLASSES], const double share[CLASSES],
                         struct coefficients classes[CLASSES])
{
    double open = 1.0; /* share of the travel without a bound in this class or above */
    for (int i = 0; i < CLASSES; i++) {
        classes[i] = (struct coefficients){0};
        open -= share[i];
    }
    for (int i = 0; i < CLASSES; i++) {
        add_times(&classes[0], share[i], &edges[i]);
        add_times(&classes[i], open, &edges[i]);
        if (i > 0)
            add_times(&classes[i], -open, &edges[i - 1]);
        open += share[i];
    }
}

/*
 * Dividing by the local mean moves all levels against the power: what the power itself
 * fluctuates by over long ways leaves the classes alone. The power's own coefficients about
 * its mean 1 + K are a for the first degree and 1 for (1, 1).
 */
static void divide_by_mean(double k, struct coefficients classes[CLASSES])
{
    for (int i = 0; i < CLASSES; i++) {
        classes[i].pair[0] += classes[i].density * sqrt(k) / (1.0 + k);
        classes[i].pair[1] += classes[i].density / (1.0 + k);
    }
}

/* Lengths of correlation by pair of degrees, and of what is left of each class, wavelengths. */
struct lengths {
    double pair[PAIRS];
    double rest[CLASSES];
};

static void long_lengths(const struct rfade_lag_means *means, const struct rfade_ray *ray,
                         double length[LONG_PAIRS])
{
    double across = ray->weight[RFADE_RAY_DIRECTIONS - 1];
    double l = means->length_wavelengths;
    length[0] = 0.0;
    for (int i = 0; i < RFADE_RAY_DIRECTIONS; i++)
        length[0] += l * ray->weight[i] * means->falling_ray[i];
    length[1] = l * means->falling_scatter;
    length[2] = across * length[1] + (1.0 - across) * TURNED_LENGTH;
}

static double ways(int pair)
{
    return DEGREES[pair][0] == DEGREES[pair][1] ? 1.0 : 2.0;
}

/* What the pairs leave of being in one class and in another, at one place. */
static double rest_of(const struct coefficients *first, const struct coefficients *second,
                      bool same)
{
    double rest = (same ? first->probability : 0.0) - first->probability * second->probability;
    for (int i = 0; i < PAIRS; i++)
        rest -= ways(i) * first->pair[i] * second->pair[i];
    return rest;
}

/*
 * What is left are visits to the class by themselves: as long as what is left over their rate,
 * with lengths of Rayleigh's distribution, whose mean square is 4/pi of the mean squared.
 */
static struct lengths find_lengths(const struct rfade_expected_fading *fading,
                                   const struct coefficients classes[CLASSES])
{
    struct lengths lengths;
    double along = 1.0 - fading->ray.weight[RFADE_RAY_DIRECTIONS - 1];
    long_lengths(&fading->pass, &fading->ray, lengths.pair);
    for (int i = LONG_PAIRS; i < PAIRS; i++) {
        double length = SHORT_LENGTH[i - LONG_PAIRS][0] * (1.0 - along) +
                        SHORT_LENGTH[i - LONG_PAIRS][1] * along;
        lengths.pair[i] = fmax(length, fading->spacing_wavelengths);
    }
    for (int i = 0; i < CLASSES; i++) {
        double rest = fmax(rest_of(&classes[i], &classes[i], true), 0.0);
        double visit = rest > 0.0 ? 4.0 / M_PI * rest / classes[i].crossings : 0.0;
        lengths.rest[i] = fmax(visit, fading->spacing_wavelengths);
    }
    return lengths;
}

/* Covariance of two classes' shares times the way, wavelengths: over all lags, ... */
static double covariance(const struct coefficients classes[CLASSES],
                         const struct lengths *lengths, int first, int second)
{
    double sum = rest_of(&classes[first], &classes[second], first == second) *
                 sqrt(lengths->rest[first] * lengths->rest[second]);
    for (int i = 0; i < PAIRS; i++)
        sum += ways(i) * classes[first].pair[i] * classes[second].pair[i] * lengths->pair[i];
    return sum;
}

/* ... and over those beyond the ones that blocks follow. */
static double beyond(const struct coefficients *first, const struct coefficients *second,
                     const double length[LONG_PAIRS])
{
    double sum = 0.0;
    for (int i = 0; i < LONG_PAIRS; i++)
        sum += ways(i) * first->pair[i] * second->pair[i] * length[i];
    return sum;
}

/* What the estimate's own correction for the mean of the blocks multiplies by. */
static double unbiased(double blocks)
{
    return blocks / (blocks - MEAN_COST);
}

/*
 * As many blocks as know a variance as well as the blend does: measured ones by their degrees
 * of freedom [Priestley 1981, section 6.2.4], theory by what its lengths may be off, and both
 * by the square of their share.
 */
static double equivalent_blocks(double trusted, double expected)
{
    double share = trusted / (trusted + expected);
    double measured = trusted > 1.0 ? share * share * SQUARES / (trusted - 1.0) : 0.0;
    double theory = (1.0 - share) * (1.0 - share) / THEORY_FREEDOM;
    return 1.0 + SQUARES / (measured + theory);
}

static bool rounded(double value, int64_t *result)
{
    if (!(fabs(value) < 9e18))
        return false;
    *result = (int64_t)llround(value);
    return true;
}

static enum rfade_status blend(const struct rfade_expected_fading *fading,
                               const struct coefficients classes[CLASSES],
                               struct rfade_blocks *blocks)
{
    struct rfade_blocks sum = *blocks;
    struct lengths lengths = find_lengths(fading, classes);
    double missed[LONG_PAIRS];
    double weight_mm = 0.0, measured = (double)blocks->blocks;
    double trusted = blocks->blocks >= BLOCKS_MIN ? measured : 0.0;
    double all = trusted + RFADE_EXPECTED_BLOCKS;
    double blended = round(equivalent_blocks(trusted, RFADE_EXPECTED_BLOCKS));
    long_lengths(&fading->followed, &fading->ray, missed);
    for (int i = 0; i < LONG_PAIRS; i++)
        missed[i] = fmax(lengths.pair[i] - missed[i], 0.0);
    for (int i = 0; i < CLASSES; i++)
        weight_mm += (double)blocks->total[i];
    /* All is brought to as many blocks as were measured; the totals stay. */
    double share = measured / all / unbiased(blended);
    double known = trusted > 0.0 ? share * unbiased(trusted) : 0.0;
    double square = weight_mm * weight_mm / measured / fading->travel_wavelengths;
    for (int i = 0; i < CLASSES; i++) {
        for (int j = 0; j < CLASSES; j++) {
            double expected = square * covariance(classes, &lengths, i, j);
            double more = square * beyond(&classes[i], &classes[j], missed);
            if (!rounded(known * (double)blocks->same[i][j] +
                             share * (RFADE_EXPECTED_BLOCKS * expected + trusted * more),
                         &sum.same[i][j]) ||
                !rounded(known * (double)blocks->next[i][j], &sum.next[i][j]) ||
                !rounded(known * (double)blocks->second[i][j], &sum.second[i][j]))
                return RFADE_OVERFLOW;
        }
    }
    sum.blocks = (int64_t)blended;
    *blocks = sum;
    return RFADE_OK;
}

enum rfade_status rfade_expect_blocks(const struct rfade_expected_fading *fading,
                                      struct rfade_blocks *blocks)
{
    struct coefficients edges[CLASSES], classes[CLASSES];
    double share[CLASSES];
    double k = fmax(fading->k, K_RANGE[0]);
    if (!(k <= K_RANGE[1]) || !(fading->travel_wavelengths > 0.0) || blocks->blocks <= 0 ||
        !find_edges(fading, k, edges))
        return RFADE_DOMAIN;
    enum rfade_status status = find_bounds(fading, edges, share);
    if (status != RFADE_OK)
        return status;
    find_classes(edges, share, classes);
    divide_by_mean(k, classes);
    return blend(fading, classes, blocks);
}
