/* SPDX-License-Identifier: GPL-3.0-or-later */
/* From a drive to fading and outage by segment, through the program alone. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <jansson.h>
#include <math.h>
#include <sqlite3.h>
#include <stdbool.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "fixture.h"
#include "program.h"

static void assert_said(const char *errors, const char *const *arguments)
{
    struct program program = {0};
    program_run(&program, arguments);
    assert_string_equal(program.errors, errors);
    assert_int_equal(program.status, 0);
    program_clear(&program);
}

#define SAID(errors, ...) assert_said((errors), (const char *const[]){__VA_ARGS__, NULL})

/* Five segments of 100 m, deep fading on the first two, and a rest of 20 m. */
static void import_drive(const struct fixture *fixture)
{
    char log[128];
    (void)snprintf(log, sizeof log, "%s/drive.csv", fixture->folder);
    DONE("simulate", "--length-m", "520", "--rate-hz", "100", "--speed-kmh", "36",
         "--carrier-hz", "457e6", "--k", "0,6,0", "--stretch-m", "200", "--mean-level-dbm",
         "-95", "--shadowing-db", "0", "--step-db", "1", "--seed", "6", "--vehicle", "plough-2",
         "--channel", "telemetry", "--output", log);
    DONE("import", log, "--survey", fixture->survey);
}

static int setup(void **state)
{
    (void)fixture_setup(state);
    const struct fixture *fixture = *state;
    import_drive(fixture);
    DONE("channel", "telemetry", "--carrier-hz", "457e6", "--survey", fixture->survey);
    DONE("route", "fen", "--from-vehicle", "plough-2", "--survey", fixture->survey);
    DONE("fit", "--survey", fixture->survey);
    return 0;
}

static void second_fit_has_nothing_to_do(void **state)
{
    const struct fixture *fixture = *state;
    SAID("nothing new since the last fit\n", "fit", "--survey", fixture->survey);
    DONE("fit", "--quiet", "--survey", fixture->survey);
    json_t *rows = JSON_OF("fit", "--survey", fixture->survey);
    assert_true(number_at(rows, 0, "streams_made") == 0);
    assert_true(number_at(rows, 0, "segments_fitted") == 0);
    json_decref(rows);
}

static void fit_of_all_gives_the_same(void **state)
{
    const struct fixture *fixture = *state;
    char *fading = OUTPUT_OF("fading", "--format", "json", "--survey", fixture->survey);
    char *outage = OUTPUT_OF("outage", "--threshold-dbm", "-105", "--quiet", "--format", "json",
                             "--survey", fixture->survey);
    json_t *made = JSON_OF("fit", "--all", "--survey", fixture->survey);
    assert_true(number_at(made, 0, "streams_made") == 1);
    assert_true(number_at(made, 0, "segments_fitted") == 6);
    json_decref(made);
    char *fading_again = OUTPUT_OF("fading", "--format", "json", "--survey", fixture->survey);
    char *outage_again = OUTPUT_OF("outage", "--threshold-dbm", "-105", "--quiet", "--format",
                                   "json", "--survey", fixture->survey);
    assert_string_equal(fading, fading_again);
    assert_string_equal(outage, outage_again);
    free(fading);
    free(outage);
    free(fading_again);
    free(outage_again);
}

/* The CSV header is this, and so are the names in each JSON object, in this order. */
static void assert_columns(const char *expected, char *csv, json_t *rows)
{
    char names[1024] = "";
    const char *name;
    json_t *value;
    assert_int_equal(strncmp(csv, expected, strlen(expected)), 0);
    assert_int_equal(strncmp(csv + strlen(expected), "\r\n", 2), 0);
    json_object_foreach(json_array_get(rows, 0), name, value)
    {
        size_t used = strlen(names);
        (void)snprintf(names + used, sizeof names - used, "%s%s", used ? "," : "", name);
    }
    assert_string_equal(names, expected);
    free(csv);
    json_decref(rows);
}

#define ASSERT_COLUMNS(expected, ...)                                                          \
    assert_columns((expected), OUTPUT_OF(__VA_ARGS__, "--quiet", "--format", "csv"),           \
                   JSON_OF(__VA_ARGS__))

#define FIRST_COLUMNS                                                                          \
    "route,segment,from_m,to_m,channel,campaign,readings,effective_count,mean_power_dbm,"      \
    "model,"
#define OUTAGE_COLUMNS                                                                         \
    ",outage,outage_low,outage_high,next_low,next_high,observed,observed_low,observed_high,"   \
    "noise_dbm,noise,sampling,passes"

static void columns_are_those_of_the_contract(void **state)
{
    const struct fixture *fixture = *state;
    DONE("channel", "telemetry", "--noise-floor-dbm", "-118", "--bandwidth-hz", "12500",
         "--symbol-rate-hz", "4800", "--survey", fixture->survey);
    DONE("fit", "--survey", fixture->survey);
    ASSERT_COLUMNS(FIRST_COLUMNS "sampling,passes,k,k_low,k_high,m,m_low,m_high,local_mean_dbm,"
                                 "local_sigma_db,local_sigma_low_db,local_sigma_high_db,weight,"
                                 "goodness_p",
                   "fading", "--survey", fixture->survey);
    ASSERT_COLUMNS(FIRST_COLUMNS "threshold_db" OUTAGE_COLUMNS, "outage", "--threshold-db",
                   "10", "--survey", fixture->survey);
    ASSERT_COLUMNS(FIRST_COLUMNS "threshold_esn0_db" OUTAGE_COLUMNS, "outage",
                   "--threshold-esn0-db", "10", "--survey", fixture->survey);
    ASSERT_COLUMNS(FIRST_COLUMNS "threshold_dbm" OUTAGE_COLUMNS, "outage", "--threshold-dbm",
                   "-105", "--survey", fixture->survey);
}

/* Both ways to tell one threshold give the same outage everywhere. */
static void assert_same_threshold(const struct fixture *fixture, const char *option,
                                  const char *value, const char *level_dbm)
{
    json_t *rows = JSON_OF("outage", option, value, "--survey", fixture->survey);
    json_t *expected =
        JSON_OF("outage", "--threshold-dbm", level_dbm, "--survey", fixture->survey);
    assert_int_equal(json_array_size(rows), 6);
    for (size_t i = 0; i < 6; i++) {
        double outage = number_at(expected, i, "outage");
        assert_true(outage > 0 && outage < 1);
        assert_true(fabs(number_at(rows, i, "outage") / outage - 1) < 1e-3);
    }
    json_decref(rows);
    json_decref(expected);
}

/* A threshold in SNR is that in level on segment 1. */
static void assert_same_first_segment(const struct fixture *fixture, const char *snr_db,
                                      const char *level_dbm)
{
    json_t *rows = JSON_OF("outage", "--threshold-db", snr_db, "--segment", "1", "--survey",
                           fixture->survey);
    json_t *levels = JSON_OF("outage", "--threshold-dbm", level_dbm, "--segment", "1",
                             "--survey", fixture->survey);
    assert_true(number_at(rows, 0, "outage") > 0.0);
    assert_true(fabs(number_at(rows, 0, "outage") - number_at(levels, 0, "outage")) < 1e-12);
    json_decref(rows);
    json_decref(levels);
}

/* By hand: thermal noise at 290 K is -173.975 dBm/Hz (Boltzmann's constant of the SI, 2019);
 * with 12.5 kHz (40.969 dB) and 6 dB of noise figure the floor is -127.006 dBm. At 4800 Bd
 * the SNR in 12.5 kHz is Es/N0 less 4.157 dB. */
static void thresholds_in_three_units_agree(void **state)
{
    const struct fixture *fixture = *state;
    DONE("channel", "telemetry", "--bandwidth-hz", "12500", "--symbol-rate-hz", "4800",
         "--noise-figure-db", "6", "--survey", fixture->survey);
    assert_same_threshold(fixture, "--threshold-db", "20", "-107.006");
    assert_same_threshold(fixture, "--threshold-esn0-db", "20", "-111.163");
    DONE("channel", "telemetry", "--noise-floor-dbm", "-118", "--survey", fixture->survey);
    assert_same_threshold(fixture, "--threshold-db", "10", "-108");
    assert_same_threshold(fixture, "--threshold-esn0-db", "10", "-112.157");
}

/* The log says SNR over noise at -112 dBm: 7 dB of it is a level of -105 dBm, and the noise
 * that is told of the channel, and kTB, stand back. */
static void logged_snr_tells_the_noise(void **state)
{
    const struct fixture *fixture = *state;
    char log[128];
    (void)snprintf(log, sizeof log, "%s/snr.csv", fixture->folder);
    DONE("simulate", "--length-m", "520", "--k", "0,6,0", "--stretch-m", "200",
         "--mean-level-dbm", "-95", "--shadowing-db", "0", "--seed", "6", "--noise-dbm", "-112",
         "--vehicle", "plough-3", "--channel", "telemetry", "--output", log);
    DONE("import", log, "--survey", fixture->survey);
    DONE("channel", "telemetry", "--carrier-hz", "457e6", "--bandwidth-hz", "12500",
         "--noise-floor-dbm", "-118", "--survey", fixture->survey);
    DONE("route", "valley", "--from-vehicle", "plough-3", "--survey", fixture->survey);
    DONE("fit", "--survey", fixture->survey);
    json_t *rows = JSON_OF("outage", "--threshold-db", "7", "--survey", fixture->survey);
    json_t *levels = JSON_OF("outage", "--threshold-dbm", "-105", "--survey", fixture->survey);
    assert_true(json_array_size(rows) >= 5);
    for (size_t i = 0; i < json_array_size(rows); i++) {
        assert_true(fabs(number_at(rows, i, "noise_dbm") + 112.0) < 0.05);
        assert_string_equal(text_at(rows, i, "noise"), "logged");
        assert_true(fabs(number_at(rows, i, "outage") - number_at(levels, i, "outage")) <
                    1e-2 * number_at(levels, i, "outage"));
        assert_true(fabs(number_at(rows, i, "observed") - number_at(levels, i, "observed")) <
                    1e-9);
    }
    json_decref(rows);
    json_decref(levels);
}

#define ASSERT_NOISE_REFUSED(what) REFUSED(1, what, "noise", list, "--survey", fixture->survey)

/* The list covers the first segment whole at -110 dBm; of the second 60 m, of which 20 m are
 * at -110 and 40 m at -107 dBm: 10 log10(mean power) is -107.79 dBm; of the third 40 m. */
static void listed_noise_beats_all_other(void **state)
{
    const struct fixture *fixture = *state;
    DONE("channel", "telemetry", "--noise-floor-dbm", "-118", "--survey", fixture->survey);
    const char *list = file_create(fixture->folder, "noise.csv",
                                   "# measured by night\nchannel,route,noise_dbm,from_m,to_m\n"
                                   "telemetry,fen,-110,0,120\ntelemetry,fen,-107,120,160\n"
                                   "telemetry,fen,-90,260,300\n");
    DONE("noise", list, "--survey", fixture->survey);
    json_t *rows = JSON_OF("outage", "--threshold-db", "5", "--survey", fixture->survey);
    assert_true(fabs(number_at(rows, 0, "noise_dbm") + 110.0) < 1e-9);
    assert_true(fabs(number_at(rows, 1, "noise_dbm") + 107.79) < 5e-3);
    assert_true(fabs(number_at(rows, 2, "noise_dbm") + 118.0) < 1e-9);
    json_decref(rows);
    assert_same_first_segment(fixture, "5", "-105");

    list = file_create(fixture->folder, "noise.csv",
                       "route,channel,from_m,to_m,noise_dbm\nfen,telemetry,0,120,-110\n"
                       "fen,telemetry,100,130,-109\n");
    ASSERT_NOISE_REFUSED("noise.csv:3: 100 to 130 m overlaps");
    list = file_create(fixture->folder, "noise.csv",
                       "route,channel,from_m,to_m,noise_dbm\nfen,telemetry,0,x,-110\n");
    ASSERT_NOISE_REFUSED("noise.csv:2: not a number: 'x'");
    list = file_create(fixture->folder, "noise.csv",
                       "route,channel,from_m,to_m\nfen,telemetry,0,100\n");
    ASSERT_NOISE_REFUSED("noise.csv:1: the header has no column 'noise_dbm'");
    list = file_create(fixture->folder, "noise.csv",
                       "route,channel,from_m,to_m,noise_dbm\nmoor,telemetry,0,100,-110\n");
    ASSERT_NOISE_REFUSED("noise.csv:2: ");
    rows = JSON_OF("noise", "--survey", fixture->survey); /* as before */
    assert_int_equal(json_array_size(rows), 3);
    assert_true(number_at(rows, 1, "from_m") == 120.0);
    json_decref(rows);
}

/* Rayleigh: 1 - exp(-10^(-1)) = 0.0952 at 10 dB below the mean; the drive's mean is -95. */
static void outage_is_that_of_the_simulated_fading(void **state)
{
    const struct fixture *fixture = *state;
    json_t *rows = JSON_OF("outage", "--threshold-dbm", "-105", "--segment", "1", "--survey",
                           fixture->survey);
    assert_int_equal(json_array_size(rows), 1);
    assert_true(fabs(number_at(rows, 0, "outage") - 0.0952) < 0.05);
    assert_true(number_at(rows, 0, "outage_low") < number_at(rows, 0, "outage"));
    assert_true(number_at(rows, 0, "outage_high") > number_at(rows, 0, "outage"));
    assert_true(number_at(rows, 0, "observed_low") <= number_at(rows, 0, "observed"));
    json_decref(rows);
}

/*
 * A reading a second at 80 km/h, 34 wavelengths: no local mean, but a law of the levels. Under
 * Rayleigh fading their mean in dB lies 2.51 dB under the mean power, here at -100 dBm, and
 * half of them below that, about; how sure that is, is not said.
 */
static void undersampled_levels_have_a_lognormal_law(void **state)
{
    const struct fixture *fixture = *state;
    char log[128];
    (void)snprintf(log, sizeof log, "%s/sparse.csv", fixture->folder);
    DONE("simulate", "--length-m", "20000", "--rate-hz", "1", "--speed-kmh", "80",
         "--mean-level-dbm", "-100", "--shadowing-db", "0", "--vehicle", "plough-2",
         "--channel", "telemetry", "--output", log);
    DONE("import", log, "--survey", fixture->survey);
    DONE("channel", "telemetry", "--carrier-hz", "457e6", "--survey", fixture->survey);
    DONE("route", "fen", "--from-vehicle", "plough-2", "--segment-m", "20000", "--survey",
         fixture->survey);
    DONE("fit", "--survey", fixture->survey);
    json_t *rows = JSON_OF("outage", "--threshold-dbm", "-102.51", "--survey", fixture->survey);
    const json_t *row = json_array_get(rows, 0);
    assert_string_equal(text_of(row, "model"), "lognormal");
    assert_string_equal(text_of(row, "sampling"), "undersampled");
    assert_true(fabs(number_at(rows, 0, "outage") - 0.5) < 0.06);
    assert_true(isnan(number_at(rows, 0, "outage_low")));
    json_decref(rows);
    /* 5.57 dB, the spread of dB under Rayleigh fading, below that mean: 16 % of a normal law.
     */
    rows = JSON_OF("outage", "--threshold-dbm", "-108.08", "--survey", fixture->survey);
    assert_true(fabs(number_at(rows, 0, "outage") - 0.1587) < 0.04);
    json_decref(rows);
    rows = JSON_OF("outage", "--threshold-dbm", "-108.08", "--whole-route", "--survey",
                   fixture->survey);
    assert_true(number_at(rows, 0, "predicted_m") == 0.0);
    json_decref(rows);
}

/* Rows come so that `name` falls, and none is left out. */
static void assert_falls(const json_t *rows, const char *name)
{
    assert_int_equal(json_array_size(rows), 6);
    for (size_t i = 1; i < 6; i++)
        assert_true(number_at(rows, i - 1, name) >= number_at(rows, i, name));
}

#define WORST(fixture, ...)                                                                    \
    JSON_OF("outage", "--threshold-dbm", "-105", "--survey", (fixture)->survey, __VA_ARGS__)

static void worst_is_ranked_by_the_better_end_or_the_estimate(void **state)
{
    const struct fixture *fixture = *state;
    json_t *rows = WORST(fixture, "--worst", "6");
    json_t *by_estimate = WORST(fixture, "--worst", "6", "--by-estimate");
    assert_falls(rows, "outage_low");
    assert_falls(by_estimate, "outage");
    assert_false(json_equal(rows, by_estimate)); /* the drive is such that the orders differ */
    json_t *one = WORST(fixture, "--worst", "1");
    assert_int_equal(json_array_size(one), 1);
    assert_true(json_equal(json_array_get(one, 0), json_array_get(rows, 0)));
    json_decref(rows);
    json_decref(by_estimate);
    json_decref(one);
    rows = JSON_OF("fading", "--worst", "6", "--survey", fixture->survey);
    assert_true(number_at(rows, 0, "k_high") < number_at(rows, 5, "k_high") ||
                isnan(number_at(rows, 5, "k_high")));
    json_decref(rows);
}

/* Segment 2 loses its fits: it is ranked by what was observed. */
static void worst_keeps_what_could_not_be_predicted(void **state)
{
    const struct fixture *fixture = *state;
    sqlite3 *database = NULL;
    assert_int_equal(sqlite3_open(fixture->survey, &database), SQLITE_OK);
    assert_int_equal(sqlite3_exec(database,
                                  "DELETE FROM fit WHERE fading_id IN (SELECT fading_id FROM "
                                  "fading JOIN segment USING (segment_id) WHERE number = 2)",
                                  NULL, NULL, NULL),
                     SQLITE_OK);
    assert_int_equal(sqlite3_close(database), SQLITE_OK);
    json_t *rows = WORST(fixture, "--worst", "6");
    for (size_t i = 0; i < 6; i++) {
        bool unpredicted = number_at(rows, i, "segment") == 2;
        assert_int_equal(unpredicted, isnan(number_at(rows, i, "outage_low")));
        if (!unpredicted)
            continue;
        /* Rayleigh fading is worse than the Rice fading of segments 3 and 4. */
        double low = number_at(rows, i, "observed_low");
        assert_true(i < 4);
        assert_true(i == 0 || number_at(rows, i - 1, "outage_low") >= low);
        assert_true(number_at(rows, i + 1, "outage_low") <= low);
    }
    json_decref(rows);
}

static void narrowing_keeps_what_was_asked_for(void **state)
{
    const struct fixture *fixture = *state;
    json_t *rows = JSON_OF("fading", "--from-m", "150", "--to-m", "250", "--route", "fen",
                           "--channel", "telemetry", "--survey", fixture->survey);
    assert_int_equal(json_array_size(rows), 2);
    assert_true(number_at(rows, 0, "segment") == 2 && number_at(rows, 1, "segment") == 3);
    json_decref(rows);
}

static void what_can_not_be_answered_is_refused(void **state)
{
    const struct fixture *fixture = *state;
    const char *survey = fixture->survey;
    REFUSED(2, "exactly one of --threshold-db", "outage", "--survey", survey);
    REFUSED(2, "exactly one of --threshold-db", "outage", "--threshold-db", "10",
            "--threshold-dbm", "-105", "--survey", survey);
    REFUSED(1, "channel telemetry has no noise floor", "outage", "--threshold-db", "10",
            "--survey", survey);
    REFUSED(1, "channel telemetry lacks a bandwidth or a symbol rate", "outage",
            "--threshold-esn0-db", "10", "--survey", survey);
    REFUSED(1, "no route 'moor'", "fading", "--route", "moor", "--survey", survey);
    REFUSED(1, "no channel 'voice'", "fading", "--channel", "voice", "--survey", survey);
    REFUSED(1, "no campaign 'june'", "outage", "--threshold-dbm", "-105", "--campaign", "june",
            "--survey", survey);
    REFUSED(1, "no segment 999 on any route", "fading", "--segment", "999", "--survey", survey);
    REFUSED(1, "no segment 7 on route fen", "outage", "--threshold-dbm", "-105", "--segment",
            "7", "--route", "fen", "--survey", survey);
    REFUSED(2, "--from-m must lie below --to-m", "fading", "--from-m", "200", "--to-m", "200",
            "--survey", survey);
    REFUSED(2, "--by-estimate needs --worst", "outage", "--threshold-dbm", "-105",
            "--by-estimate", "--survey", survey);
}

static void before_a_fit_there_is_no_answer(void **state)
{
    const struct fixture *fixture = *state;
    const char *survey = fixture->survey;
    REFUSED(1, "there is no such survey", "fit", "--survey", survey);
    DONE("channel", "telemetry", "--carrier-hz", "457e6", "--survey", survey);
    REFUSED(1, "the survey holds no readings", "fit", "--survey", survey);
    import_drive(fixture);
    REFUSED(1, "the survey holds no route", "fit", "--survey", survey);
    REFUSED(1, "nothing in the survey has been fitted yet; run `routefade fit`", "fading",
            "--survey", survey);
    REFUSED(1, "nothing in the survey has been fitted yet; run `routefade fit`", "outage",
            "--threshold-dbm", "-105", "--survey", survey);
}

static void a_channel_without_carrier_is_refused(void **state)
{
    const struct fixture *fixture = *state;
    import_drive(fixture);
    DONE("route", "fen", "--from-vehicle", "plough-2", "--survey", fixture->survey);
    REFUSED(1, "the carrier of channel 'telemetry' is not known", "fit", "--survey",
            fixture->survey);
}

static void results_older_than_the_survey_are_told(void **state)
{
    const struct fixture *fixture = *state;
    static const char note[] = "the survey changed since the last fit: run `routefade fit`\n";
    DONE("fading", "--survey", fixture->survey);
    DONE("vehicle", "plough-2", "--offset-db", "1.5", "--survey", fixture->survey);
    SAID(note, "fading", "--survey", fixture->survey);
    SAID("the survey changed since the last fit: run `routefade fit`\n"
         "6 of 6 segments had one pass: intervals there hold for the conditions of that pass "
         "alone\n",
         "outage", "--threshold-dbm", "-105", "--survey", fixture->survey);
    DONE("fading", "--quiet", "--survey", fixture->survey);
    REFUSED(1, "no route 'moor'", "fading", "--route", "moor", "--survey", fixture->survey);
    DONE("fit", "--survey", fixture->survey);
    DONE("fading", "--survey", fixture->survey);
}

static void readings_of_snr_alone_are_told(void **state)
{
    const struct fixture *fixture = *state;
    const char *log = file_create(fixture->folder, "snr.csv",
                                  "time,latitude,longitude,vehicle,channel,snr_db\n"
                                  "2027-01-13T20:00:00Z,60.5,-24.5,spreader-1,telemetry,21\n"
                                  "2027-01-13T20:00:01Z,60.5,-24.5,spreader-1,telemetry,20\n"
                                  "2027-01-13T20:00:02Z,60.5,-24.5,spreader-1,telemetry,22\n");
    DONE("import", log, "--survey", fixture->survey);
    DONE("fit", "--all", "--quiet", "--survey", fixture->survey);
    SAID("3 readings carry SNR alone and were not used\n", "fit", "--all", "--survey",
         fixture->survey);
}

#define FITTED(test) cmocka_unit_test_setup_teardown(test, setup, fixture_teardown)
#define EMPTY(test) cmocka_unit_test_setup_teardown(test, fixture_setup, fixture_teardown)

int main(void)
{
    const struct CMUnitTest tests[] = {
        FITTED(second_fit_has_nothing_to_do),
        FITTED(fit_of_all_gives_the_same),
        FITTED(columns_are_those_of_the_contract),
        FITTED(thresholds_in_three_units_agree),
        EMPTY(logged_snr_tells_the_noise),
        FITTED(listed_noise_beats_all_other),
        FITTED(outage_is_that_of_the_simulated_fading),
        FITTED(worst_is_ranked_by_the_better_end_or_the_estimate),
        FITTED(worst_keeps_what_could_not_be_predicted),
        FITTED(narrowing_keeps_what_was_asked_for),
        FITTED(what_can_not_be_answered_is_refused),
        EMPTY(undersampled_levels_have_a_lognormal_law),
        EMPTY(before_a_fit_there_is_no_answer),
        EMPTY(a_channel_without_carrier_is_refused),
        FITTED(results_older_than_the_survey_are_told),
        FITTED(readings_of_snr_alone_are_told),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
