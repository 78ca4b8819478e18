/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Errors that no SNR takes away. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <gsl/gsl_errno.h>
#include <math.h>

#include "routefade/validity.h"
#include "support/reference_table.h"

static void floor_is_the_probability_of_a_turn(void **state)
{
    (void)state;
    struct reference_table table;
    reference_open(&table, "fade_floor.tsv");
    while (reference_next(&table)) {
        const double turns = reference_number(&table, "doppler_symbols");
        reference_assert_column(&table, "floor",
                                rfade_dbpsk_error_floor(reference_number(&table, "k"),
                                                        reference_number(&table, "ray_cosine"),
                                                        1000.0 * turns, 1e-3),
                                turns < 0.15 ? 1e-12 : 1e-9);
    }
    assert_int_equal(table.row_count, 60);
}

/* J0(2 pi 0.1) = 0.903712642..., AMS 55 table 9.1 interpolated: x = 0.628319. */
static void rayleigh_floor_is_half_the_loss_of_correlation(void **state)
{
    (void)state;
    assert_true(fabs(rfade_dbpsk_error_floor(0.0, 0.0, 100.0, 1e-3) - 0.048144) < 1e-6);
    /* small turns: (pi f T)^2 / 2 */
    assert_true(
        fabs(rfade_dbpsk_error_floor(0.0, 0.0, 1.0, 1e-6) / (0.5e-12 * 9.869604401089358) -
             1.0) < 1e-11);
    assert_true(rfade_dbpsk_error_floor(0.0, 0.0, 0.0, 1e-3) == 0.0);
}

static void floor_has_no_step_where_its_method_changes(void **state)
{
    (void)state;
    const double k[] = {0.0, 0.3, 3.0, 30.0};
    for (size_t i = 0; i < sizeof k / sizeof k[0]; i++) {
        const double turns[] = {1.0, 0.9};
        for (size_t j = 0; j < 2; j++) {
            const double f = turns[j] / (2.0 * 3.14159265358979323846);
            const double below = rfade_dbpsk_error_floor(k[i], 1.0, f * (1.0 - 1e-13), 1.0);
            const double above = rfade_dbpsk_error_floor(k[i], 1.0, f * (1.0 + 1e-13), 1.0);
            assert_true(fabs(above - below) < 1e-11);
        }
    }
}

static void floor_refuses_what_is_out_of_range(void **state)
{
    (void)state;
    assert_true(isnan(rfade_dbpsk_error_floor(-1.0, 0.0, 1.0, 1.0)));
    assert_true(isnan(rfade_dbpsk_error_floor(1.0, 2.0, 1.0, 1.0)));
    assert_true(isnan(rfade_dbpsk_error_floor(1.0, 0.0, -1.0, 1.0)));
    assert_true(isnan(rfade_dbpsk_error_floor(1.0, 0.0, 1.0, 0.0)));
    assert_true(isnan(rfade_dbpsk_error_floor(NAN, 0.0, 1.0, 1.0)));
    assert_true(rfade_dbpsk_error_floor(1e5, 1.0, 10.0, 1e-3) >= 0.0);
    assert_true(rfade_dbpsk_error_floor(1e5, 1.0, 400.0, 1e-3) <= 1.0);
}

static void delay_spread_has_three_words(void **state)
{
    (void)state;
    assert_int_equal(rfade_delay_validity(1e-6, 1e-3), RFADE_DELAY_FLAT);
    assert_int_equal(rfade_delay_validity(0.0, 1e-3), RFADE_DELAY_FLAT);
    assert_int_equal(rfade_delay_validity(20e-6, 1e-3), RFADE_DELAY_MARGINAL);
    assert_int_equal(rfade_delay_validity(200e-6, 1e-3), RFADE_DELAY_SELECTIVE);
    assert_int_equal(rfade_delay_validity(NAN, 1e-3), RFADE_DELAY_UNKNOWN);
    assert_int_equal(rfade_delay_validity(1e-6, NAN), RFADE_DELAY_UNKNOWN);
    assert_int_equal(rfade_delay_validity(-1e-6, 1e-3), RFADE_DELAY_UNKNOWN);
    assert_string_equal(rfade_delay_validity_name(RFADE_DELAY_FLAT), "flat");
    assert_string_equal(rfade_delay_validity_name(RFADE_DELAY_MARGINAL), "marginal");
    assert_string_equal(rfade_delay_validity_name(RFADE_DELAY_SELECTIVE), "selective");
    assert_string_equal(rfade_delay_validity_name(RFADE_DELAY_UNKNOWN), "unknown");
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(floor_is_the_probability_of_a_turn),
        cmocka_unit_test(rayleigh_floor_is_half_the_loss_of_correlation),
        cmocka_unit_test(floor_has_no_step_where_its_method_changes),
        cmocka_unit_test(floor_refuses_what_is_out_of_range),
        cmocka_unit_test(delay_spread_has_three_words),
    };
    (void)gsl_set_error_handler_off();
    return cmocka_run_group_tests(tests, NULL, NULL);
}
