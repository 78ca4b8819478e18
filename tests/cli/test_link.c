/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Error rates and margins by segment, through the program alone. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <jansson.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "fixture.h"
#include "program.h"

/* Rayleigh fading, then a strong ray: noise at -118 dBm, twice the symbol rate as bandwidth. */
static int setup(void **state)
{
    if (fixture_setup(state) != 0)
        return -1;
    const struct fixture *fixture = *state;
    char log[128];
    (void)snprintf(log, sizeof log, "%s/drive.csv", fixture->folder);
    DONE("simulate", "--length-m", "420", "--k", "0,6", "--stretch-m", "200",
         "--mean-level-dbm", "-95", "--shadowing-db", "2", "--seed", "6", "--vehicle",
         "plough-2", "--channel", "telemetry", "--output", log);
    DONE("import", log, "--survey", fixture->survey);
    DONE("channel", "telemetry", "--carrier-hz", "457e6", "--noise-floor-dbm", "-118",
         "--bandwidth-hz", "10000", "--symbol-rate-hz", "5000", "--survey", fixture->survey);
    DONE("route", "fen", "--from-vehicle", "plough-2", "--survey", fixture->survey);
    DONE("fit", "--survey", fixture->survey);
    return 0;
}

/* Es/N0 is level less noise, times bandwidth over symbol rate, here 3.0103 dB. */
static void each_modulation_has_a_row_on_each_segment(void **state)
{
    const struct fixture *fixture = *state;
    json_t *rows = JSON_OF("error-rate", "--modulation", "ncfsk2", "--modulation", "dbpsk",
                           "--survey", fixture->survey);
    size_t count = json_array_size(rows);
    assert_true(count >= 8);
    for (size_t i = 0; i < count; i++) {
        assert_string_equal(text_at(rows, i, "modulation"), i % 2 ? "dbpsk" : "ncfsk2");
        assert_true(number_at(rows, i, "segment") == 1.0 + (double)(i / 2));
        double esn0_db = number_at(rows, i, "mean_esn0_db");
        assert_true(fabs(esn0_db - (number_at(rows, i, "mean_power_dbm") + 121.0103)) < 1e-4);
        /* Unfaded [Proakis]: exp(-g/2)/2 and exp(-g)/2. */
        double snr = pow(10.0, esn0_db / 10.0);
        double unfaded = 0.5 * exp(i % 2 ? -snr : -0.5 * snr);
        assert_true(fabs(number_at(rows, i, "bit_unfaded") - unfaded) <= 1e-9 * unfaded);
        double bit = number_at(rows, i, "bit");
        assert_true(bit > unfaded && bit < 0.5);
        assert_true(number_at(rows, i, "bit_low") < bit);
        assert_true(number_at(rows, i, "bit_high") > bit);
        assert_true(number_at(rows, i, "symbol") == bit); /* one bit a symbol */
        assert_true(number_at(rows, i, "bit_observed") > 0.0);
    }
    /* Segment 1 fades by Rayleigh: 1/(2 + g) for ncfsk2 [Proakis], shadowing aside. */
    double snr = pow(10.0, number_at(rows, 0, "mean_esn0_db") / 10.0);
    assert_true(fabs(number_at(rows, 0, "bit") * (2.0 + snr) - 1.0) < 0.4);
    json_decref(rows);
}

static void diversity_and_the_other_direction_help(void **state)
{
    const struct fixture *fixture = *state;
    json_t *one = JSON_OF("error-rate", "--modulation", "qpsk", "--survey", fixture->survey);
    json_t *two = JSON_OF("error-rate", "--modulation", "qpsk", "--branches", "2",
                          "--combining", "selection", "--survey", fixture->survey);
    json_t *up = JSON_OF("error-rate", "--modulation", "qpsk", "--other-direction-db", "5",
                         "--survey", fixture->survey);
    for (size_t i = 0; i < json_array_size(one); i++) {
        assert_true(number_at(two, i, "bit") < number_at(one, i, "bit"));
        assert_true(isnan(number_at(two, i, "bit_observed"))); /* nobody saw two branches */
        assert_true(number_at(up, i, "bit") < number_at(one, i, "bit"));
        assert_true(fabs(number_at(up, i, "mean_esn0_db") - number_at(one, i, "mean_esn0_db") -
                         5.0) < 1e-9);
    }
    json_decref(one);
    json_decref(two);
    json_decref(up);
}

/* Lowering the level by the margin gives the target: asked of `outage`, at a threshold that is
 * higher by it. */
static void margin_is_what_the_level_can_fall_by(void **state)
{
    const struct fixture *fixture = *state;
    json_t *rows = JSON_OF("margin", "--target-outage", "0.02", "--threshold-dbm", "-110",
                           "--survey", fixture->survey);
    size_t count = json_array_size(rows);
    assert_true(count >= 4);
    for (size_t i = 0; i < count; i++) {
        char segment[24], threshold_dbm[32];
        double margin_db = number_at(rows, i, "margin_db");
        (void)snprintf(segment, sizeof segment, "%.0f", number_at(rows, i, "segment"));
        (void)snprintf(threshold_dbm, sizeof threshold_dbm, "%.12f", -110.0 + margin_db);
        json_t *outage = JSON_OF("outage", "--threshold-dbm", threshold_dbm, "--segment",
                                 segment, "--survey", fixture->survey);
        assert_true(fabs(number_at(outage, 0, "outage") / 0.02 - 1.0) < 1e-4);
        json_decref(outage);
        assert_true(number_at(rows, i, "margin_low_db") < margin_db);
        assert_true(number_at(rows, i, "margin_high_db") > margin_db);
        if (i > 0)
            assert_true(number_at(rows, i - 1, "margin_high_db") <=
                        number_at(rows, i, "margin_high_db"));
    }
    json_decref(rows);
}

/* A row tells what it is held against; noise only where the target counts from it. */
static void margin_rows_name_their_target(void **state)
{
    const struct fixture *fixture = *state;
    json_t *level = JSON_OF("margin", "--target-outage", "0.02", "--threshold-dbm", "-110",
                            "--survey", fixture->survey);
    json_t *packet =
        JSON_OF("margin", "--target-per", "0.1", "--packet-bits", "64", "--block-fading",
                "--modulation", "dbpsk", "--branches", "2", "--combining", "selection",
                "--other-direction-db", "-3", "--survey", fixture->survey);
    assert_string_equal(text_at(level, 0, "target"), "outage");
    assert_true(number_at(level, 0, "target_value") == 0.02);
    assert_true(number_at(level, 0, "threshold_dbm") == -110.0);
    assert_true(isnan(number_at(level, 0, "noise_dbm")));
    assert_string_equal(text_at(level, 0, "noise"), "");
    assert_string_equal(text_at(level, 0, "modulation"), "");
    assert_string_equal(text_at(level, 0, "combining"), "none");
    assert_true(number_at(level, 0, "passes") == 1.0);

    assert_string_equal(text_at(packet, 0, "target"), "packet_block");
    assert_true(number_at(packet, 0, "target_value") == 0.1);
    assert_true(number_at(packet, 0, "packet_bits") == 64.0);
    assert_string_equal(text_at(packet, 0, "modulation"), "dbpsk");
    assert_true(number_at(packet, 0, "noise_dbm") == -118.0);
    assert_string_equal(text_at(packet, 0, "noise"), "channel");
    assert_true(number_at(packet, 0, "branches") == 2.0);
    assert_string_equal(text_at(packet, 0, "combining"), "selection");
    assert_true(number_at(packet, 0, "other_direction_db") == -3.0);
    json_decref(level);
    json_decref(packet);
}

/* Noise has no part in a received level. */
static void outage_names_noise_where_it_counts(void **state)
{
    const struct fixture *fixture = *state;
    json_t *level = JSON_OF("outage", "--threshold-dbm", "-110", "--survey", fixture->survey);
    json_t *snr = JSON_OF("outage", "--threshold-db", "8", "--survey", fixture->survey);
    assert_true(isnan(number_at(level, 0, "noise_dbm")));
    assert_string_equal(text_at(level, 0, "noise"), "");
    assert_true(number_at(snr, 0, "noise_dbm") == -118.0);
    assert_true(number_at(snr, 0, "passes") == 1.0);
    json_decref(level);
    json_decref(snr);
}

/* One pass knows nothing of how passes differ: said unless --quiet. */
static void one_pass_is_said(void **state)
{
    const struct fixture *fixture = *state;
    const char *const commands[][6] = {
        {"outage", "--threshold-dbm", "-110", "--survey", fixture->survey, NULL},
        {"error-rate", "--modulation", "bpsk", "--survey", fixture->survey, NULL},
    };
    for (size_t i = 0; i < 2; i++) {
        struct program program = {0};
        program_run(&program, commands[i]);
        assert_int_equal(program.status, 0);
        assert_non_null(strstr(program.errors, " segments had one pass: "));
        program_clear(&program);
    }
    DONE("outage", "--threshold-dbm", "-110", "--quiet", "--survey", fixture->survey);
}

/* Without --quiet a note says how many metres fall short: with a target that none meets, all.
 */
static void metres_that_fall_short_are_told(void **state)
{
    const struct fixture *fixture = *state;
    struct program program = {0};
    program_run(&program,
                (const char *const[]){"margin", "--target-ber", "1e-9", "--modulation",
                                      "256qam", "--survey", fixture->survey, NULL});
    assert_int_equal(program.status, 0);
    assert_non_null(strstr(program.errors, "fall short of the target"));
    json_t *rows = JSON_OF("margin", "--target-ber", "1e-9", "--modulation", "256qam",
                           "--survey", fixture->survey);
    double short_m = 0.0;
    for (size_t i = 0; i < json_array_size(rows); i++)
        if (number_at(rows, i, "margin_db") < 0.0)
            short_m += number_at(rows, i, "to_m") - number_at(rows, i, "from_m");
    char said[32];
    (void)snprintf(said, sizeof said, " %.0f m fall short", short_m);
    assert_true(short_m > 0.0);
    assert_non_null(strstr(program.errors, said));
    program_clear(&program);
    json_decref(rows);
}

static void what_makes_no_sense_is_refused(void **state)
{
    const struct fixture *fixture = *state;
    const char *survey = fixture->survey;
    REFUSED(2, "modulations", "error-rate", "--survey", survey);
    REFUSED(2, "there is no modulation '9psk'", "error-rate", "--modulation", "9psk",
            "--survey", survey);
    REFUSED(2, "exactly one of", "margin", "--survey", survey);
    REFUSED(2, "exactly one of", "margin", "--target-ber", "1e-3", "--target-outage", "0.1",
            "--modulation", "bpsk", "--threshold-db", "3", "--survey", survey);
    REFUSED(2, "needs --modulation", "margin", "--target-ber", "1e-3", "--survey", survey);
    REFUSED(2, "needs --packet-bits", "margin", "--target-per", "1e-3", "--modulation", "bpsk",
            "--survey", survey);
    REFUSED(2, "exactly one of", "margin", "--target-outage", "0.1", "--survey", survey);
    REFUSED(2, "combining", "error-rate", "--modulation", "bpsk", "--combining", "hope",
            "--survey", survey);
}

static void a_channel_that_tells_too_little_is_refused(void **state)
{
    const struct fixture *fixture = *state;
    char log[128], survey[128];
    (void)snprintf(log, sizeof log, "%s/drive.csv", fixture->folder);
    (void)snprintf(survey, sizeof survey, "%s/other.routefade", fixture->folder);
    DONE("import", log, "--survey", survey);
    DONE("channel", "telemetry", "--carrier-hz", "457e6", "--survey", survey);
    DONE("route", "fen", "--from-vehicle", "plough-2", "--survey", survey);
    DONE("fit", "--survey", survey);
    REFUSED(1, "has no noise floor", "error-rate", "--modulation", "bpsk", "--survey", survey);
    DONE("channel", "telemetry", "--noise-floor-dbm", "-118", "--survey", survey);
    DONE("fit", "--survey", survey);
    REFUSED(1, "lacks a bandwidth or a symbol rate", "margin", "--target-ber", "1e-3",
            "--modulation", "bpsk", "--survey", survey);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(each_modulation_has_a_row_on_each_segment),
        cmocka_unit_test(diversity_and_the_other_direction_help),
        cmocka_unit_test(margin_is_what_the_level_can_fall_by),
        cmocka_unit_test(margin_rows_name_their_target),
        cmocka_unit_test(outage_names_noise_where_it_counts),
        cmocka_unit_test(one_pass_is_said),
        cmocka_unit_test(metres_that_fall_short_are_told),
        cmocka_unit_test(what_makes_no_sense_is_refused),
        cmocka_unit_test(a_channel_that_tells_too_little_is_refused),
    };
    return cmocka_run_group_tests(tests, setup, fixture_teardown);
}
