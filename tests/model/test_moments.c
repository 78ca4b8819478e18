/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The table of models, and published facts about their moments. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <gsl/gsl_errno.h>
#include <math.h>

#include "routefade/model.h"

static void table_is_in_order_and_found_by_name(void **state)
{
    (void)state;
    const char *names[RFADE_MODEL_COUNT] = {"rayleigh", "rice", "nakagami", "lognormal"};
    for (int id = 0; id < RFADE_MODEL_COUNT; id++) {
        const struct rfade_model *model = rfade_model((enum rfade_model_id)id);
        assert_non_null(model);
        assert_int_equal(model->id, id);
        assert_string_equal(model->name, names[id]);
        assert_ptr_equal(rfade_model_by_name(names[id]), model);
        assert_true(model->fit_min <= model->parameter_min);
        assert_true((model->parameter_name == NULL) == (model->id == RFADE_RAYLEIGH));
        assert_true((model->from_normalised_variance == NULL) == (model->id == RFADE_RAYLEIGH));
    }
    assert_null(rfade_model((enum rfade_model_id)RFADE_MODEL_COUNT));
    assert_null(rfade_model_by_name("Rice"));
    assert_null(rfade_model_by_name(""));
    assert_null(rfade_model_by_name(NULL));
}

/* Moments of the level in dB, summed over bins of 0.25 dB by their own probabilities. */
static void level_moments(enum rfade_model_id id, double parameter, double *mean_db,
                          double *deviation_db)
{
    const double step_db = 0.25;
    double mean = 0.0;
    double square = 0.0;
    for (int x_step = 0; - 400.0 + x_step * step_db < 40.0; x_step++) {
        const double x_db = -400.0 + x_step * step_db;
        struct rfade_log_gradient bin;
        assert_int_equal(rfade_model(id)->log_interval(parameter, x_db - 0.5 * step_db,
                                                       x_db + 0.5 * step_db, &bin),
                         RFADE_OK);
        mean += x_db * exp(bin.value);
        square += x_db * x_db * exp(bin.value);
    }
    *mean_db = mean;
    /* Sheppard's correction: rounding to the bins adds step^2/12 */
    *deviation_db = sqrt(square - mean * mean - step_db * step_db / 12.0);
}

/*
 * Mean of dB less dB of mean, and standard deviation of dB. Rayleigh: -2.51 and 5.57 dB,
 * stated for an exponential population (read second-hand), exact by Euler's constant and
 * pi/sqrt(6); the others by quadrature of the density with 40 digits (computed).
 */
static void moments_of_the_level_in_db(void **state)
{
    (void)state;
    const struct {
        enum rfade_model_id id;
        double parameter;
        double mean_db;
        double deviation_db;
    } facts[] = {
        {RFADE_RAYLEIGH, 0.0, -2.506815781, 5.57004314},
        {RFADE_RICE, 1.0, -2.057527635, 5.094182164},
        {RFADE_RICE, 3.0, -1.192718967, 3.750494104},
        {RFADE_RICE, 10.0, -0.4139087981, 1.998572588},
        {RFADE_NAKAGAMI, 0.5, -5.517115738, 9.647597719},
        {RFADE_NAKAGAMI, 2.0, -1.174170919, 3.487722879},
        {RFADE_NAKAGAMI, 5.0, -0.4487141184, 2.043137251},
    };
    for (size_t i = 0; i < sizeof facts / sizeof facts[0]; i++) {
        double mean_db = NAN;
        double deviation_db = NAN;
        level_moments(facts[i].id, facts[i].parameter, &mean_db, &deviation_db);
        assert_true(fabs(mean_db - facts[i].mean_db) < 2e-9);
        assert_true(fabs(deviation_db - facts[i].deviation_db) < 2e-8);
    }
}

/* Textbook figures (memory): 10 dB a decade, 9.5 %, 1.0 % and 0.1 %; median -1.59 dB. */
static void rayleigh_textbook_figures(void **state)
{
    (void)state;
    const double depth_db[] = {10.0, 20.0, 30.0};
    const double expected[] = {0.09516258196, 0.009950166251, 0.0009995001666};
    for (size_t i = 0; i < 3; i++) {
        struct rfade_tails tails;
        assert_int_equal(rfade_model(RFADE_RAYLEIGH)->tails(0.0, -depth_db[i], &tails),
                         RFADE_OK);
        assert_true(fabs(tails.lower / expected[i] - 1.0) < 1e-9);
    }
    double median_db = NAN;
    assert_int_equal(rfade_model(RFADE_RAYLEIGH)->quantile(0.0, 0.5, 0.5, &median_db),
                     RFADE_OK);
    assert_true(fabs(median_db - -1.59174539) < 1e-8);
}

/* m = (1+K)^2/(1+2K) has the same power variance as K (memory): 4/3, 16/7, 121/21. */
static void rice_and_nakagami_of_equal_variance(void **state)
{
    (void)state;
    const double k[] = {1.0, 3.0, 10.0};
    const double m[] = {4.0 / 3.0, 16.0 / 7.0, 121.0 / 21.0};
    const struct rfade_model *rice = rfade_model(RFADE_RICE);
    const struct rfade_model *nakagami = rfade_model(RFADE_NAKAGAMI);
    for (size_t i = 0; i < 3; i++) {
        const double variance = rice->normalised_variance(k[i]);
        assert_true(fabs(nakagami->from_normalised_variance(variance) / m[i] - 1.0) < 1e-15);
        assert_true(fabs(nakagami->normalised_variance(m[i]) / variance - 1.0) < 1e-15);
    }
    assert_true(rfade_model(RFADE_RAYLEIGH)->normalised_variance(0.0) == 1.0);
}

static void moment_estimates_come_back_and_are_clamped(void **state)
{
    (void)state;
    for (int id = RFADE_RICE; id < RFADE_MODEL_COUNT; id++) {
        const struct rfade_model *model = rfade_model((enum rfade_model_id)id);
        for (int parameter_step = 0; 0.6 * pow(1.3, parameter_step) < 50.0; parameter_step++) {
            const double parameter = 0.6 * pow(1.3, parameter_step);
            const double variance = model->normalised_variance(parameter);
            const double back = model->from_normalised_variance(variance);
            assert_true(fabs(back / parameter - 1.0) < 1e-12 * (1.0 + parameter));
        }
        const double ends[] = {model->from_normalised_variance(0.0),
                               model->from_normalised_variance(1e300)};
        for (size_t i = 0; i < 2; i++) {
            assert_true(ends[i] >= model->fit_min && ends[i] <= model->parameter_max);
        }
    }
    /* no K fades more than Rayleigh */
    assert_true(rfade_model(RFADE_RICE)->from_normalised_variance(1.5) == 0.0);
}

int main(void)
{
    gsl_set_error_handler_off();
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(table_is_in_order_and_found_by_name),
        cmocka_unit_test(moments_of_the_level_in_db),
        cmocka_unit_test(rayleigh_textbook_figures),
        cmocka_unit_test(rice_and_nakagami_of_equal_variance),
        cmocka_unit_test(moment_estimates_come_back_and_are_clamped),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
