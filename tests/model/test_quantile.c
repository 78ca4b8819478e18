/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Quantiles, against a published table and forward through the tails. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <float.h>
#include <gsl/gsl_errno.h>
#include <math.h>

#include "routefade/model.h"
#include "support/reference_table.h"

static double quantile(enum rfade_model_id id, double parameter, double lower, double upper)
{
    double x_db = NAN;
    assert_int_equal(rfade_model(id)->quantile(parameter, lower, upper, &x_db), RFADE_OK);
    return x_db;
}

/*
 * Rec. ITU-R P.528: attenuation relative to the median, exceeded for the rest of the time.
 * Printed to 1e-4 dB. Its K is scattered over steady power in dB.
 */
static void p528_nakagami_rice_table(void **state)
{
    (void)state;
    struct reference_table table;
    reference_open(&table, "p528_nakagami_rice.tsv");
    while (reference_next(&table)) {
        const double k = pow(10.0, -0.1 * reference_number(&table, "K_dB"));
        const double upper = reference_number(&table, "percent") / 100.0;
        const double printed_db = reference_number(&table, "Y_dB");
        const double median_db = quantile(RFADE_RICE, k, 0.5, 0.5);
        const double x_db = quantile(RFADE_RICE, k, 1.0 - upper, upper);
        assert_true(fabs(median_db - x_db - printed_db) < 0.5001e-4);
        /* and back: the printed level's probability, as far as its rounding carries */
        struct rfade_tails tails;
        struct rfade_log_gradient density;
        const double printed_x_db = median_db - printed_db;
        assert_int_equal(rfade_model(RFADE_RICE)->tails(k, printed_x_db, &tails), RFADE_OK);
        assert_int_equal(rfade_model(RFADE_RICE)->log_density(k, printed_x_db, &density),
                         RFADE_OK);
        assert_true(fabs(tails.upper - upper) < 0.51e-4 * exp(density.value) + 1e-12);
        /* the exact quantile, to the figures that the table has of it */
        assert_true(fabs(median_db - x_db - reference_number(&table, "computed_dB")) < 0.51e-6);
    }
    assert_int_equal(table.row_count, 289);
}

/* -10 log10 of -ln(1-p): the exponential distribution in closed form. */
static void rayleigh_quantile_is_closed(void **state)
{
    (void)state;
    for (int p_step = 0; 1e-300 * pow(10.0, p_step) < 0.5; p_step++) {
        const double p = 1e-300 * pow(10.0, p_step);
        const double low = quantile(RFADE_RAYLEIGH, 0.0, p, 1.0 - p);
        const double high = quantile(RFADE_RAYLEIGH, 0.0, 1.0 - p, p);
        assert_true(fabs(low - 10.0 * log10(-log1p(-p))) < 1e-12 * fabs(low));
        assert_true(fabs(high - 10.0 * log10(-log(p))) < 1e-13 * (1.0 + fabs(high)));
    }
}

static void quantiles_come_back_through_the_tails(void **state)
{
    (void)state;
    const struct {
        enum rfade_model_id id;
        double parameter;
    } cases[] = {{RFADE_RAYLEIGH, 0.0},  {RFADE_RICE, 0.0},      {RFADE_RICE, 0.4},
                 {RFADE_RICE, 30.0},     {RFADE_RICE, 1e5},      {RFADE_NAKAGAMI, 0.5},
                 {RFADE_NAKAGAMI, 3.3},  {RFADE_NAKAGAMI, 50.0}, {RFADE_NAKAGAMI, 1e4},
                 {RFADE_LOGNORMAL, 0.1}, {RFADE_LOGNORMAL, 8.0}};
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        const struct rfade_model *model = rfade_model(cases[i].id);
        for (int p_step = 0; 0.5 * pow(0.37, p_step) > 1e-145; p_step++) {
            const double p = 0.5 * pow(0.37, p_step);
            struct rfade_tails tails;
            const double low = quantile(cases[i].id, cases[i].parameter, p, 1.0 - p);
            assert_int_equal(model->tails(cases[i].parameter, low, &tails), RFADE_OK);
            assert_true(fabs(tails.lower / p - 1.0) < 1e-11);
            const double high = quantile(cases[i].id, cases[i].parameter, 1.0 - p, p);
            assert_int_equal(model->tails(cases[i].parameter, high, &tails), RFADE_OK);
            assert_true(fabs(tails.upper / p - 1.0) < 1e-11);
        }
    }
}

static void certainty_is_infinitely_far(void **state)
{
    (void)state;
    for (int id = 0; id < RFADE_MODEL_COUNT; id++) {
        assert_true(quantile((enum rfade_model_id)id, 1.0, 0.0, 1.0) == -INFINITY);
        assert_true(quantile((enum rfade_model_id)id, 1.0, 1.0, 0.0) == INFINITY);
    }
}

static void assert_refused(enum rfade_model_id id, double parameter, double lower, double upper)
{
    double x_db = 0.0;
    assert_int_equal(rfade_model(id)->quantile(parameter, lower, upper, &x_db), RFADE_DOMAIN);
    assert_true(isnan(x_db));
}

static void outside_the_domain_is_refused(void **state)
{
    (void)state;
    for (int id = 0; id < RFADE_MODEL_COUNT; id++) {
        const enum rfade_model_id model = (enum rfade_model_id)id;
        assert_refused(model, 1.0, -0.1, 1.1);
        assert_refused(model, 1.0, 1.1, -0.1);
        assert_refused(model, 1.0, 0.3, 0.3);
        assert_refused(model, 1.0, NAN, 0.5);
        assert_refused(model, 1.0, 0.5, NAN);
    }
    assert_refused(RFADE_RICE, -1.0, 0.5, 0.5);
    assert_refused(RFADE_NAKAGAMI, 0.0, 0.5, 0.5);
    assert_refused(RFADE_LOGNORMAL, 0.0, 0.5, 0.5);
    /* 1e-300 at m = 0.5 lies near -6000 dB, beyond the levels that are taken */
    assert_refused(RFADE_NAKAGAMI, 0.5, 1e-300, 1.0);
}

int main(void)
{
    gsl_set_error_handler_off();
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(p528_nakagami_rice_table),
        cmocka_unit_test(rayleigh_quantile_is_closed),
        cmocka_unit_test(quantiles_come_back_through_the_tails),
        cmocka_unit_test(certainty_is_infinitely_far),
        cmocka_unit_test(outside_the_domain_is_refused),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
