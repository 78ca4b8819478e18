/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Whole routes and their acceptance, through the program alone. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <jansson.h>
#include <math.h>
#include <stdbool.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "fixture.h"
#include "program.h"

/* Rayleigh fading on two segments of 100 m, K = 20 on two, and a rest of Rayleigh. */
static void import_drive(const struct fixture *fixture, const char *channel,
                         const char *rate_hz)
{
    char log[160];
    (void)snprintf(log, sizeof log, "%s/%s.csv", fixture->folder, channel);
    DONE("simulate", "--length-m", "520", "--rate-hz", rate_hz, "--speed-kmh", "36",
         "--carrier-hz", "457e6", "--k", "0,20,0", "--stretch-m", "200", "--mean-level-dbm",
         "-95", "--shadowing-db", "0", "--step-db", "1", "--seed", "6", "--vehicle", "plough-2",
         "--channel", channel, "--output", log);
    DONE("import", "--quiet", log, "--survey", fixture->survey);
    DONE("channel", channel, "--carrier-hz", "457e6", "--survey", fixture->survey);
}

static int setup(void **state)
{
    if (fixture_setup(state) != 0)
        return -1;
    const struct fixture *fixture = *state;
    import_drive(fixture, "telemetry", "100");
    DONE("route", "fen", "--from-vehicle", "plough-2", "--survey", fixture->survey);
    DONE("fit", "--quiet", "--survey", fixture->survey);
    return 0;
}

#define ACCEPTANCE(fixture, ...)                                                               \
    JSON_OF("acceptance", "--threshold-dbm", "-105", "--survey", (fixture)->survey, __VA_ARGS__)

/* At 10 dB below the mean: Rayleigh 1 - exp(-0.1) = 0.095, K = 20 next to nothing. */
static void lengths_say_how_much_meets_the_target(void **state)
{
    const struct fixture *fixture = *state;
    json_t *rows = ACCEPTANCE(fixture, "--target-outage", "0.02");
    assert_int_equal(json_array_size(rows), 1);
    assert_string_equal(text_at(rows, 0, "route"), "fen");
    double length_m = number_at(rows, 0, "length_m");
    assert_true(fabs(length_m - 520.0) < 2.0);
    assert_true(number_at(rows, 0, "meets_m") == 200.0);
    assert_true(number_at(rows, 0, "meets_together_m") == 200.0);
    assert_true(number_at(rows, 0, "fails_m") >= 200.0);
    assert_true(fabs(number_at(rows, 0, "meets_share") - 200.0 / length_m) < 1e-12);
    assert_true(number_at(rows, 0, "confidence") == 0.9);
    assert_true(number_at(rows, 0, "target_outage") == 0.02);
    assert_true(number_at(rows, 0, "threshold_dbm") == -105.0);
    static const char *const parts[] = {"meets_m", "fails_m", "undecided_m", "not_judged_m",
                                        "unseen_m"};
    double sum_m = 0.0;
    for (size_t i = 0; i < sizeof parts / sizeof parts[0]; i++)
        sum_m += number_at(rows, 0, parts[i]);
    assert_true(fabs(sum_m - length_m) < 1e-9);
    json_decref(rows);
}

/* More confidence leaves more undecided, and never turns a verdict round. */
static void confidence_only_takes_verdicts_away(void **state)
{
    const struct fixture *fixture = *state;
    json_t *some = ACCEPTANCE(fixture, "--target-outage", "0.09", "--segments");
    json_t *more =
        ACCEPTANCE(fixture, "--target-outage", "0.09", "--segments", "--confidence", "0.999");
    int undecided = 0;
    assert_int_equal(json_array_size(some), 6);
    for (size_t i = 0; i < 6; i++) {
        const char *verdict = text_at(more, i, "verdict");
        bool open = strcmp(verdict, "undecided") == 0;
        assert_true(open || strcmp(verdict, text_at(some, i, "verdict")) == 0);
        assert_true(number_at(more, i, "outage_high") > number_at(some, i, "outage_high"));
        assert_true(number_at(more, i, "outage_low") < number_at(some, i, "outage_low"));
        undecided += open;
        if (!open)
            assert_true(isnan(number_at(more, i, "more_m")));
        else
            assert_true(number_at(more, i, "more_m") > 0.0);
    }
    assert_true(undecided > 0);
    json_decref(some);
    json_decref(more);
}

static void sentences_say_the_same(void **state)
{
    const struct fixture *fixture = *state;
    char *text = OUTPUT_OF("acceptance", "--target-outage", "0.09", "--threshold-dbm", "-105",
                           "--confidence", "0.999", "--survey", fixture->survey);
    assert_non_null(strstr(text, "Route fen, channel telemetry, campaign "));
    assert_non_null(strstr(text, ": 38 % of the route meets the target (outage at most 0.09) "
                                 "with 99.9 % confidence; "));
    assert_non_null(
        strstr(text, "The confidence is that of each segment's own verdict; 38 % "));
    assert_non_null(strstr(text, " with 99.9 % confidence for all of it together.\n"));
    assert_non_null(strstr(text, " % of the route was driven once: verdicts there hold for the "
                                 "conditions of that pass alone.\n"));
    assert_non_null(strstr(text, "If the estimates stayed where they are:\n  segment 1 (0 to "
                                 "100 m) is undecided, outage "));
    assert_non_null(strstr(text, " m of travel more, or "));
    free(text);
}

/* With 10 dB of uncertainty no number of passes settles anything next to the target. */
static void calibration_sets_the_limit(void **state)
{
    const struct fixture *fixture = *state;
    DONE("vehicle", "plough-2", "--offset-db", "0", "--offset-uncertainty-db", "10", "--survey",
         fixture->survey);
    DONE("fit", "--quiet", "--survey", fixture->survey);
    json_t *rows = ACCEPTANCE(fixture, "--target-outage", "0.09", "--segments", "--worst", "6");
    assert_int_equal(json_array_size(rows), 6);
    for (size_t i = 0; i < 6; i++) {
        double needed_db = number_at(rows, i, "calibration_needed_db");
        assert_string_equal(text_at(rows, i, "verdict"), "undecided");
        assert_string_equal(text_at(rows, i, "meets_together"), "no");
        assert_true(isnan(number_at(rows, i, "more_m")));
        assert_true(fabs(number_at(rows, i, "calibration_db") - 10.0) < 1e-6);
        assert_true(needed_db > 0.0 && needed_db < 10.0);
        assert_true(i == 0 ||
                    number_at(rows, i, "outage_low") <= number_at(rows, i - 1, "outage_low"));
    }
    json_decref(rows);
    char *text = OUTPUT_OF("acceptance", "--target-outage", "0.09", "--threshold-dbm", "-105",
                           "--survey", fixture->survey);
    assert_non_null(strstr(text, "no number of passes settles it while the calibration is "
                                 "uncertain by 10 dB; less than "));
    free(text);
}

/* One reading in 10 m sees no fading: what was observed is all there is to say. */
static void undersampled_segments_are_not_judged(void **state)
{
    const struct fixture *fixture = *state;
    import_drive(fixture, "standby", "1");
    DONE("fit", "--quiet", "--survey", fixture->survey);
    json_t *rows = ACCEPTANCE(fixture, "--target-outage", "0.02", "--channel", "standby");
    double length_m = number_at(rows, 0, "length_m");
    assert_true(fabs(number_at(rows, 0, "not_judged_m") + number_at(rows, 0, "unseen_m") -
                     length_m) < 1e-9);
    assert_true(number_at(rows, 0, "not_judged_m") >= 500.0);
    json_decref(rows);
    char *text = OUTPUT_OF("acceptance", "--target-outage", "0.02", "--threshold-dbm", "-105",
                           "--channel", "standby", "--survey", fixture->survey);
    assert_non_null(strstr(text, " can't be judged from these logs"));
    assert_non_null(strstr(text, " is not judged (undersampled): below the threshold on "));
    free(text);
}

static void whole_route_is_between_its_segments(void **state)
{
    const struct fixture *fixture = *state;
    json_t *whole = JSON_OF("outage", "--threshold-dbm", "-105", "--whole-route", "--survey",
                            fixture->survey);
    json_t *rows = JSON_OF("outage", "--threshold-dbm", "-105", "--survey", fixture->survey);
    double sum = 0.0, observed = 0.0, length_m = 0.0;
    for (size_t i = 0; i < json_array_size(rows); i++) {
        double here_m = number_at(rows, i, "to_m") - number_at(rows, i, "from_m");
        sum += here_m * number_at(rows, i, "outage");
        observed += here_m * number_at(rows, i, "observed");
        length_m += here_m;
    }
    assert_int_equal(json_array_size(whole), 1);
    double outage = number_at(whole, 0, "outage");
    assert_true(fabs(outage / (sum / length_m) - 1.0) < 1e-12);
    assert_true(fabs(number_at(whole, 0, "observed") / (observed / length_m) - 1.0) < 1e-12);
    assert_true(number_at(whole, 0, "outage_low") < outage);
    assert_true(number_at(whole, 0, "outage_high") > outage);
    /* the drive has no shadowing: its local mean all but stands still */
    assert_true(number_at(whole, 0, "local_sigma_db") < 1.0);
    assert_true(fabs(number_at(whole, 0, "lognormal_outage") / outage - 1.0) < 0.1);
    assert_true(number_at(whole, 0, "unseen_m") == 0.0);
    json_decref(whole);
    json_decref(rows);
}

static void narrowing_narrows_the_route(void **state)
{
    const struct fixture *fixture = *state;
    json_t *rows =
        ACCEPTANCE(fixture, "--target-outage", "0.02", "--from-m", "200", "--to-m", "400");
    assert_true(number_at(rows, 0, "length_m") == 200.0);
    assert_true(number_at(rows, 0, "meets_share") == 1.0);
    json_decref(rows);
    char *text = OUTPUT_OF("acceptance", "--target-outage", "0.02", "--threshold-dbm", "-105",
                           "--segment", "3", "--survey", fixture->survey);
    assert_non_null(strstr(text, ": 100 % of the route meets the target"));
    free(text);
}

static void what_can_not_be_answered_is_refused(void **state)
{
    const struct fixture *fixture = *state;
    const char *survey = fixture->survey;
    REFUSED(2, "give a --target-outage", "acceptance", "--threshold-dbm", "-105", "--survey",
            survey);
    REFUSED(2, "exactly one of --threshold-db", "acceptance", "--target-outage", "0.1",
            "--survey", survey);
    REFUSED(2, "option --target-outage needs a number from", "acceptance", "--target-outage",
            "0", "--threshold-dbm", "-105", "--survey", survey);
    REFUSED(2, "option --confidence needs a number from 0.51", "acceptance", "--target-outage",
            "0.1", "--threshold-dbm", "-105", "--confidence", "0.5", "--survey", survey);
    REFUSED(2, "--worst ranks segments: it needs --segments", "acceptance", "--target-outage",
            "0.1", "--threshold-dbm", "-105", "--worst", "3", "--survey", survey);
    REFUSED(1, "channel telemetry has no noise floor", "acceptance", "--target-outage", "0.1",
            "--threshold-db", "10", "--survey", survey);
    REFUSED(1, "no route 'moor'", "acceptance", "--target-outage", "0.1", "--threshold-dbm",
            "-105", "--route", "moor", "--survey", survey);
    REFUSED(2, "--worst ranks segments: it can't go with --whole-route", "outage",
            "--threshold-dbm", "-105", "--whole-route", "--worst", "3", "--survey", survey);
    REFUSED(1, "channel telemetry has no noise floor", "outage", "--threshold-db", "10",
            "--whole-route", "--survey", survey);
}

static void help_carries_the_caution(void **state)
{
    (void)state;
    char *text = OUTPUT_OF("acceptance", "--help");
    assert_non_null(strstr(text, "no safety case"));
    assert_non_null(strstr(text, "each segment's own\nverdict"));
    free(text);
}

#define FITTED(test) cmocka_unit_test_setup_teardown(test, setup, fixture_teardown)

int main(void)
{
    const struct CMUnitTest tests[] = {
        FITTED(lengths_say_how_much_meets_the_target),
        FITTED(confidence_only_takes_verdicts_away),
        FITTED(sentences_say_the_same),
        FITTED(calibration_sets_the_limit),
        FITTED(undersampled_segments_are_not_judged),
        FITTED(whole_route_is_between_its_segments),
        FITTED(narrowing_narrows_the_route),
        FITTED(what_can_not_be_answered_is_refused),
        cmocka_unit_test(help_carries_the_caution),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
