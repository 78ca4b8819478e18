/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "statistics/efficiency.h"

#include <gsl/gsl_integration.h>
#include <gsl/gsl_math.h>
#include <gsl/gsl_sf_bessel.h>
#include <gsl/gsl_sf_gamma.h>
#include <gsl/gsl_sf_psi.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "estimate/generate.h"
#include "routefade/estimate.h"

/* The law's mass beyond these is below 1e-13 for every m from 0.6 and K from 0. */
enum { LOWEST_DB = -250, HIGHEST_DB = 20, NODES = 12 };

/* Location (nepers of mean power) and parameter. */
enum { LOCATION, PARAMETER };

static const double db_per_neper = 10.0 / M_LN10;

struct point {
    double density; /* per neper of power */
    double score[2];
};

/* f(y) = (1 + K) exp(-K - (1 + K) y) I0(z), z = 2 sqrt(K (1 + K) y) [Rice 1945]. */
static struct point rice_at(double log_power, double k)
{
    double power = exp(log_power);
    double z = 2.0 * sqrt(k * (1.0 + k) * power);
    double bessel = gsl_sf_bessel_I0_scaled(z);
    double ratio = gsl_sf_bessel_I1_scaled(z) / bessel;
    double density = (1.0 + k) * power * bessel * exp(z - k - (1.0 + k) * power);
    double along_k = (1.0 + 2.0 * k) * sqrt(power / (k * (1.0 + k)));
    return (struct point){density,
                          {(1.0 + k) * power - 1.0 - 0.5 * z * ratio,
                           1.0 / (1.0 + k) - 1.0 - power + ratio * along_k}};
}

/* f(y) = m^m y^(m-1) exp(-m y)/Gamma(m) [Nakagami 1960]. */
static struct point nakagami_at(double log_power, double m)
{
    double power = exp(log_power);
    double density = exp(m * (log(m) + log_power - power) - gsl_sf_lngamma(m));
    return (struct point){
        density, {m * (power - 1.0), log(m) + 1.0 - gsl_sf_psi(m) + log_power - power}};
}

static struct point point_at(enum rfade_model_id model, double log_power, double parameter)
{
    return model == RFADE_RICE ? rice_at(log_power, parameter)
                               : nakagami_at(log_power, parameter);
}

/* The probability of a level, with first and second derivatives. */
struct share {
    double value;
    double first[2];
    double second[2][2];
};

/* Second derivatives of the log density are central differences of the scores. */
static void add_node(enum rfade_model_id model, double parameter, double log_power,
                     double weight, struct share *share)
{
    const double apart = 1e-4;
    struct point here = point_at(model, log_power, parameter);
    struct point near[2][2] = {
        {point_at(model, log_power - apart, parameter),
         point_at(model, log_power + apart, parameter)},
        {point_at(model, log_power, parameter + apart * parameter),
         point_at(model, log_power, parameter - apart * parameter)},
    };
    double scale[2] = {2.0 * apart, 2.0 * apart * parameter};
    share->value += weight * here.density;
    for (int t = 0; t < 2; t++) {
        share->first[t] += weight * here.density * here.score[t];
        for (int u = 0; u < 2; u++) {
            double bend = (near[t][0].score[u] - near[t][1].score[u]) / scale[t];
            share->second[t][u] +=
                weight * here.density * (bend + here.score[t] * here.score[u]);
        }
    }
}

/* One reading's law, summed over its levels; first[r]/value is the score of a level. */
struct law {
    double information[2][2];
    double inverse[2][2];
    double third[2][2][2];                            /* first[r] second[t][u] / value */
    double step_score[HIGHEST_DB - LOWEST_DB + 1][2]; /* scores of the steps */
};

static void add_level(const struct share *share, struct law *law, double score[2])
{
    if (!(share->value > 1e-280)) {
        return;
    }
    for (int r = 0; r < 2; r++) {
        score[r] = share->first[r] / share->value;
        for (int t = 0; t < 2; t++) {
            law->information[r][t] += score[r] * share->first[t];
            for (int u = 0; u < 2; u++) {
                law->third[r][t][u] += score[r] * share->second[t][u];
            }
        }
    }
}

/* Every dB by Gauss-Legendre; a level is a whole dB of it, or one of its nodes. */
static void sum_levels(const struct efficiency_cell *cell,
                       const gsl_integration_glfixed_table *table, struct law *law)
{
    const struct share nothing = {0.0, {0.0, 0.0}, {{0.0, 0.0}, {0.0, 0.0}}};
    for (int centre_db = LOWEST_DB; centre_db <= HIGHEST_DB; centre_db++) {
        struct share whole = nothing;
        double *score = law->step_score[centre_db - LOWEST_DB];
        for (size_t i = 0; i < NODES; i++) {
            struct share node = nothing;
            double place_db = NAN, weight = NAN;
            gsl_integration_glfixed_point(centre_db - 0.5, centre_db + 0.5, i, &place_db,
                                          &weight, table);
            add_node(cell->model, cell->parameter, place_db / db_per_neper,
                     weight / db_per_neper, cell->step_db > 0.0 ? &whole : &node);
            add_level(&node, law, score);
        }
        add_level(&whole, law, score);
    }
}

static bool make_law(const struct efficiency_cell *cell, struct law *law)
{
    gsl_integration_glfixed_table *table = gsl_integration_glfixed_table_alloc(NODES);
    memset(law, 0, sizeof *law);
    if (table == NULL) {
        return false;
    }
    sum_levels(cell, table, law);
    gsl_integration_glfixed_table_free(table);
    double(*i)[2] = law->information;
    double determinant = i[0][0] * i[1][1] - i[0][1] * i[1][0];
    law->inverse[0][0] = i[1][1] / determinant;
    law->inverse[1][1] = i[0][0] / determinant;
    law->inverse[0][1] = law->inverse[1][0] = -i[0][1] / determinant;
    return true;
}

/*
 * In the bias sum_rtu i^rs i^tu (E[l_rtu]/2 + E[l_t l_ru])/n [Cox and Snell 1968, eq. 20] the
 * third derivatives cancel when written with the probabilities p: what is left is
 * -1/2 sum_rtu i^rs i^tu sum p_r p_tu/p.
 */
static struct efficiency_bound bound_of(const struct law *law, int readings)
{
    const double(*inverse)[2] = law->inverse;
    double bias = 0.0;
    for (int r = 0; r < 2; r++) {
        for (int t = 0; t < 2; t++) {
            for (int u = 0; u < 2; u++) {
                bias -= 0.5 * inverse[PARAMETER][r] * inverse[t][u] * law->third[r][t][u];
            }
        }
    }
    return (struct efficiency_bound){sqrt(inverse[PARAMETER][PARAMETER] / readings),
                                     bias / readings};
}

bool efficiency_bound(const struct efficiency_cell *cell, struct efficiency_bound *bound)
{
    struct law law;
    bool done = make_law(cell, &law);
    *bound = done ? bound_of(&law, cell->readings) : (struct efficiency_bound){NAN, NAN};
    return done;
}

/* Draws a reading and adds its share of the efficient score to `linear`. */
static double draw_db(gsl_rng *generator, const struct efficiency_cell *cell,
                      const struct law *law, double *linear)
{
    double level_db = cell->model == RFADE_RICE ? draw_rice_db(generator, cell->parameter)
                                                : draw_nakagami_db(generator, cell->parameter);
    struct point point;
    const double *score = point.score;
    if (cell->step_db > 0.0) {
        level_db = quantise_db(level_db, cell->step_db);
        score = law->step_score[(int)lround(level_db) - LOWEST_DB];
    } else {
        point = point_at(cell->model, level_db / db_per_neper, cell->parameter);
    }
    *linear += law->inverse[PARAMETER][LOCATION] * score[LOCATION] +
               law->inverse[PARAMETER][PARAMETER] * score[PARAMETER];
    return level_db;
}

static const struct rfade_fit *fit_of(const struct rfade_estimate *estimate,
                                      enum rfade_model_id model)
{
    for (size_t i = 0; i < estimate->fit_count; i++) {
        if (estimate->fits[i].model == model) {
            return &estimate->fits[i];
        }
    }
    return NULL;
}

/* A mean and its own standard error, of sums of values and their squares. */
static struct efficiency_mean mean_of(const double sums[2], double count)
{
    double mean = sums[0] / count;
    double variance = sums[1] / count - mean * mean;
    return (struct efficiency_mean){mean, sqrt(fmax(variance, 0.0) / (count - 1.0))};
}

static void add(double value, double sums[2])
{
    sums[0] += value;
    sums[1] += value * value;
}

/* Of a mean square, less or plus what is known. */
static struct efficiency_mean root_of(struct efficiency_mean square, double known)
{
    double root = sqrt(square.value + known);
    return (struct efficiency_mean){root, 0.5 * square.error / root};
}

struct sums {
    double plain[2];      /* squares of the errors */
    double bias[2];       /* errors less what is linear in the readings' scores */
    double controlled[2]; /* squares of the errors less those of their linear part */
    double moment[2];     /* squares of the moment estimate's errors */
};

static bool run_draw(const struct efficiency_cell *cell, const struct law *law,
                     double deviation, gsl_rng *generator, double *levels_db, struct sums *sums)
{
    const struct rfade_column_settings settings = {cell->step_db, NAN, NAN, true, 0.95};
    struct rfade_column_estimate column;
    double linear = 0.0;
    for (int i = 0; i < cell->readings; i++) {
        levels_db[i] = draw_db(generator, cell, law, &linear);
    }
    enum rfade_status status =
        rfade_estimate_column(levels_db, (size_t)cell->readings, &settings, &column);
    const struct rfade_fit *fit = fit_of(&column.estimate, cell->model);
    if (status != RFADE_OK || fit == NULL) {
        return false;
    }
    double moment =
        cell->model == RFADE_RICE ? column.estimate.moment_k : column.estimate.moment_m;
    double error = (fit->parameter - cell->parameter) / deviation;
    linear /= cell->readings * deviation;
    add(error * error, sums->plain);
    add(error - linear, sums->bias);
    add(error * error - linear * linear, sums->controlled);
    add(gsl_pow_2((moment - cell->parameter) / deviation), sums->moment);
    return true;
}

bool efficiency_run(const struct efficiency_cell *cell, unsigned long seed, int draws,
                    struct efficiency *result)
{
    struct law law;
    struct sums sums;
    gsl_rng *generator = generator_create(seed);
    double *levels_db = malloc((size_t)cell->readings * sizeof *levels_db);
    bool done = levels_db != NULL && make_law(cell, &law);
    memset(&sums, 0, sizeof sums);
    memset(result, 0, sizeof *result);
    if (done) {
        result->bound = bound_of(&law, cell->readings);
    }
    for (int draw = 0; draw < draws && done; draw++) {
        bool fitted =
            run_draw(cell, &law, result->bound.deviation, generator, levels_db, &sums);
        result->failed += fitted ? 0 : 1;
    }
    double count = draws - result->failed;
    result->plain = root_of(mean_of(sums.plain, count), 0.0);
    result->ratio = root_of(mean_of(sums.controlled, count), 1.0);
    result->bias = mean_of(sums.bias, count);
    result->moment = root_of(mean_of(sums.moment, count), 0.0);
    free(levels_db);
    gsl_rng_free(generator);
    return done;
}
