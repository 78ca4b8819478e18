/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How often a level is crossed, how long fades last, and what readings see of them. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <gsl/gsl_errno.h>
#include <math.h>
#include <string.h>

#include "routefade/fade_timing.h"
#include "routefade/predict.h"
#include "support/reference_table.h"

static struct rfade_fade_timing timing(enum rfade_model_id id, double parameter,
                                       double shadowing_db, double x_db)
{
    struct rfade_fade_timing result;
    assert_int_equal(rfade_fade_timing(rfade_model(id), parameter, shadowing_db, x_db, &result),
                     RFADE_OK);
    return result;
}

static void open_table_is_met(void **state)
{
    (void)state;
    struct reference_table table;
    reference_open(&table, "lcr_afd.tsv");
    while (reference_next(&table)) {
        const bool is_rice = strcmp(reference_text(&table, "fading"), "Rice") == 0;
        const struct rfade_fade_timing result =
            timing(is_rice ? RFADE_RICE : RFADE_NAKAGAMI, reference_number(&table, "par"), 0.0,
                   reference_number(&table, "level_dB"));
        reference_assert_column(&table, "N_over_fd", result.crossings_per_wavelength, 1e-12);
        reference_assert_column(&table, "duration_times_fd", result.mean_fade_wavelengths,
                                1e-12);
    }
    assert_int_equal(table.row_count, 72);
}

/* Levels from -40 dB up, K to 1e5, m to 1e4, with and without a lognormal local mean. */
static void definition_is_met(void **state)
{
    (void)state;
    struct reference_table table;
    reference_open(&table, "fade_timing.tsv");
    while (reference_next(&table)) {
        const double shadowing_db = reference_number(&table, "shadowing_db");
        const double relative = shadowing_db > 0.0 ? 1e-10 : 1e-12;
        const struct rfade_model *model = rfade_model_by_name(reference_text(&table, "model"));
        const struct rfade_fade_timing result =
            timing(model->id, reference_number(&table, "parameter"), shadowing_db,
                   reference_number(&table, "x_db"));
        const double log_crossings = reference_number(&table, "log_crossings");
        assert_true(fabs(result.log_crossings - log_crossings) <=
                    relative * fmax(1.0, fabs(log_crossings)));
        if (isnan(reference_number(&table, "mean_fade")))
            continue;
        reference_assert_column(&table, "mean_fade", result.mean_fade_wavelengths, relative);
        reference_assert_column(&table, "mean_gap", result.mean_gap_wavelengths, relative);
    }
    assert_int_equal(table.row_count, 56);
}

/* A fade and the gap after it make up the way from one crossing to the next. */
static void fade_and_gap_make_one_cycle(void **state)
{
    (void)state;
    const struct {
        enum rfade_model_id id;
        double parameter;
    } cases[] = {{RFADE_RAYLEIGH, NAN},
                 {RFADE_RICE, 5.0},
                 {RFADE_RICE, 300.0},
                 {RFADE_NAKAGAMI, 0.5},
                 {RFADE_NAKAGAMI, 60.0}};
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++)
        for (int sigma_db = 0; sigma_db <= 30; sigma_db += 10)
            for (int x_db = -40; x_db <= 10; x_db += 5) {
                const struct rfade_fade_timing result =
                    timing(cases[i].id, cases[i].parameter, sigma_db, x_db);
                if (result.crossings_per_wavelength < 1e-290)
                    continue;
                assert_true(
                    fabs(result.crossings_per_wavelength *
                             (result.mean_fade_wavelengths + result.mean_gap_wavelengths) -
                         1.0) < 1e-11);
            }
}

/* Deep in the fades of a steady signal the rate is 0 in doubles, but a fade has its length. */
static void steady_signals_do_not_overflow(void **state)
{
    (void)state;
    const struct rfade_fade_timing rice = timing(RFADE_RICE, 1e5, 0.0, -40.0);
    assert_true(rice.crossings_per_wavelength == 0.0);
    assert_true(rice.log_crossings < -9e4 && isfinite(rice.log_crossings));
    assert_true(rice.mean_fade_wavelengths > 0.0 && rice.mean_fade_wavelengths < 1.0);
    assert_true(rice.mean_gap_wavelengths > 1e300);
    const struct rfade_fade_timing nakagami = timing(RFADE_NAKAGAMI, 1e4, 0.0, -40.0);
    assert_true(isfinite(nakagami.log_crossings));
    assert_true(nakagami.mean_fade_wavelengths > 0.0 && nakagami.mean_fade_wavelengths < 1.0);
    const struct rfade_fade_timing shadowed = timing(RFADE_RICE, 1e5, 8.0, -40.0);
    assert_true(shadowed.crossings_per_wavelength > 0.0);
}

static void timing_refuses_what_it_can_not_say(void **state)
{
    (void)state;
    const struct {
        enum rfade_model_id id;
        double parameter, shadowing_db, x_db;
    } cases[] = {{RFADE_LOGNORMAL, 4.0, 0.0, 0.0}, {RFADE_RICE, -1.0, 0.0, 0.0},
                 {RFADE_RICE, 2e5, 3.0, 0.0},      {RFADE_RICE, 1.0, -1.0, 0.0},
                 {RFADE_RICE, 1.0, 31.0, 0.0},     {RFADE_RICE, 1.0, 0.0, 1001.0},
                 {RFADE_RICE, 1.0, 0.0, NAN},      {RFADE_NAKAGAMI, NAN, 2.0, 0.0}};
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        struct rfade_fade_timing result;
        assert_int_equal(rfade_fade_timing(rfade_model(cases[i].id), cases[i].parameter,
                                           cases[i].shadowing_db, cases[i].x_db, &result),
                         RFADE_DOMAIN);
        assert_true(isnan(result.crossings_per_wavelength) && isnan(result.log_crossings) &&
                    isnan(result.mean_fade_wavelengths) && isnan(result.mean_gap_wavelengths));
    }
    struct rfade_fade_timing result;
    assert_int_equal(rfade_fade_timing(NULL, 1.0, 0.0, 0.0, &result), RFADE_DOMAIN);
}

static void ray_factor_is_that_of_the_joint_law(void **state)
{
    (void)state;
    struct reference_table table;
    reference_open(&table, "fade_ray.tsv");
    while (reference_next(&table)) {
        double factor = NAN;
        assert_int_equal(rfade_ray_crossing_factor(reference_number(&table, "k"),
                                                   reference_number(&table, "ray_cosine"),
                                                   reference_number(&table, "x_db"), &factor),
                         RFADE_OK);
        reference_assert_column(&table, "factor", factor, 1e-12);
    }
    assert_int_equal(table.row_count, 90);
}

static void ray_factor_has_its_bounds(void **state)
{
    (void)state;
    double factor = NAN;
    for (int x_db = -40; x_db <= 10; x_db += 10) {
        double before = 1.0;
        assert_int_equal(rfade_ray_crossing_factor(1e5, 0.0, x_db, &factor), RFADE_OK);
        assert_true(factor == 1.0);
        for (int tenth = 1; tenth <= 10; tenth++) {
            assert_int_equal(rfade_ray_crossing_factor(1e5, -0.1 * tenth, x_db, &factor),
                             RFADE_OK);
            assert_true(factor > before);
            before = factor;
        }
    }
    assert_int_equal(rfade_ray_crossing_factor(1.0, 1.1, 0.0, &factor), RFADE_DOMAIN);
    assert_true(isnan(factor));
    assert_int_equal(rfade_ray_crossing_factor(-1.0, 1.0, 0.0, &factor), RFADE_DOMAIN);
    assert_int_equal(rfade_ray_crossing_factor(1.0, NAN, 0.0, &factor), RFADE_DOMAIN);
    assert_int_equal(rfade_ray_crossing_factor(1.0, 1.0, 1e4, &factor), RFADE_DOMAIN);
}

static void seen_share_is_that_of_the_laws(void **state)
{
    (void)state;
    struct reference_table table;
    reference_open(&table, "fade_seen.tsv");
    while (reference_next(&table))
        reference_assert_column(&table, "share",
                                rfade_fades_seen_share(reference_number(&table, "spacing"),
                                                       reference_number(&table, "mean_fade"),
                                                       reference_number(&table, "mean_gap")),
                                1e-12);
    assert_int_equal(table.row_count, 6);
    assert_true(fabs(rfade_fades_seen_share(1e-9, 1.0, INFINITY) - 1.0) < 1e-14);
    assert_true(isnan(rfade_fades_seen_share(0.0, 1.0, 1.0)));
    assert_true(isnan(rfade_fades_seen_share(1.0, NAN, 1.0)));
    assert_true(isnan(rfade_fades_seen_share(INFINITY, 1.0, 1.0)));
}

/* exp(x db ln(10)/20) near the bottom of Rayleigh fading: its mean over a step is known. */
static void rounding_raises_what_bends_upward(void **state)
{
    (void)state;
    const struct rfade_model *rayleigh = rfade_model(RFADE_RAYLEIGH);
    double factor = NAN;
    assert_int_equal(rfade_step_crossing_factor(rayleigh, NAN, -40.0, 2.0, &factor), RFADE_OK);
    const double a = 2.0 * log(10.0) / 40.0;
    assert_true(fabs(factor - sinh(a) / a) < 1e-5);
    assert_int_equal(rfade_step_crossing_factor(rayleigh, NAN, -10.0, 0.0, &factor), RFADE_OK);
    assert_true(factor == 1.0);
    assert_int_equal(
        rfade_step_crossing_factor(rfade_model(RFADE_RICE), 400.0, 0.0, 1.0, &factor),
        RFADE_OK);
    assert_true(factor < 0.8);
    assert_int_equal(rfade_step_crossing_factor(rayleigh, NAN, 0.0, -1.0, &factor),
                     RFADE_DOMAIN);
    assert_true(isnan(factor));
    assert_int_equal(
        rfade_step_crossing_factor(rfade_model(RFADE_LOGNORMAL), 3.0, 0.0, 1.0, &factor),
        RFADE_DOMAIN);
}

/* A vehicle at 80 km/h and 457 MHz: 22.2 m/s over 0.656 m. */
static void doppler_is_speed_over_wavelength(void **state)
{
    (void)state;
    assert_true(fabs(rfade_doppler_hz(80.0 / 3.6, 457e6) - 33.8752) < 1e-3);
    assert_true(rfade_doppler_hz(0.0, 457e6) == 0.0);
    assert_true(isnan(rfade_doppler_hz(-1.0, 457e6)) && isnan(rfade_doppler_hz(1.0, 0.0)));
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(open_table_is_met),
        cmocka_unit_test(definition_is_met),
        cmocka_unit_test(fade_and_gap_make_one_cycle),
        cmocka_unit_test(steady_signals_do_not_overflow),
        cmocka_unit_test(timing_refuses_what_it_can_not_say),
        cmocka_unit_test(ray_factor_is_that_of_the_joint_law),
        cmocka_unit_test(ray_factor_has_its_bounds),
        cmocka_unit_test(seen_share_is_that_of_the_laws),
        cmocka_unit_test(rounding_raises_what_bends_upward),
        cmocka_unit_test(doppler_is_speed_over_wavelength),
    };
    (void)gsl_set_error_handler_off();
    return cmocka_run_group_tests(tests, NULL, NULL);
}
