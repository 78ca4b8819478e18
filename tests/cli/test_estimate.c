/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Fits through the program, against maximum likelihood by scipy and mpmath. */
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

#include "program.h"
#include "support/reference_table.h"

static json_t *estimated(const char *input, const char *const *arguments)
{
    struct program program = {.input = input};
    program_run(&program, arguments);
    assert_string_equal(program.errors, "");
    assert_int_equal(program.status, 0);
    json_t *document = json_loads(program.output, 0, NULL);
    assert_non_null(document);
    program_clear(&program);
    return document;
}

#define ESTIMATED(input, ...)                                                                  \
    estimated((input), (const char *const[]){"estimate", "--format", "json", __VA_ARGS__, NULL})

static const json_t *model_of(const json_t *document, const char *name)
{
    size_t index;
    json_t *model;
    json_array_foreach(json_object_get(document, "models"), index,
                       model) if (strcmp(json_string_value(json_object_get(model, "model")),
                                         name) == 0) return model;
    fail_msg("no model %s", name);
    return NULL;
}

/* A file of samples, fitted with 1 dB steps: a reading of -101 stands for all below -100.5. */
static json_t *censored_sample(const char *file)
{
    char path[512];
    (void)snprintf(path, sizeof path, "%s/samples/%s.txt", ROUTEFADE_REFERENCE_DIR, file);
    return ESTIMATED(NULL, path, "--column", "1", "--step-db", "1", "--floor-dbm", "-101",
                     "--independent");
}

static void censored_fits_match_reference(void **state)
{
    (void)state;
    struct reference_table table;
    reference_open(&table, "mle_censored.tsv");
    while (reference_next(&table)) {
        json_t *document = censored_sample(reference_text(&table, "file"));
        const char *name = reference_text(&table, "model");
        const json_t *model = model_of(document, name);
        assert_true(number_of(document, "count") == reference_number(&table, "n"));
        assert_true(number_of(document, "below_floor") == reference_number(&table, "censored"));
        assert_true(number_of(document, "above_ceiling") == 0);
        assert_true(number_of(document, "step_db") == 1);
        reference_assert_close(&table, "log likelihood", number_of(model, "log_likelihood"),
                               reference_number(&table, "loglik"), 1e-6);
        reference_assert_close(&table, "mean power", number_of(model, "mean_power_dbm"),
                               reference_number(&table, "mean_dBm"), 1e-5);
        double parameter = reference_number(&table, "par");
        if (strcmp(name, "nakagami") == 0)
            reference_assert_close(&table, "m", number_of(model, "m"), parameter, 1e-5);
        if (strcmp(name, "rice") == 0 && parameter > 0)
            reference_assert_close(&table, "K", number_of(model, "k"), parameter, 1e-5);
        if (strcmp(name, "rice") == 0 && parameter == 0)
            assert_true(number_of(model, "k") < 1e-6);
        json_decref(document);
    }
}

static const char levels[] = "-80\n-85\n-82\n-91\n-79\n-84\n-88\n-81\n-83\n-80\n-86\n-90\n";

static void the_object_has_the_agreed_keys(void **state)
{
    (void)state;
    static const char *const keys[] = {
        "count",          "effective_count", "below_floor", "above_ceiling", "step_db",
        "mean_power_dbm", "mean_of_db_dbm",  "moments",     "models",        "preferred"};
    json_t *document = ESTIMATED(levels, "-", "--step-db", "1", "--independent");
    for (size_t i = 0; i < sizeof keys / sizeof keys[0]; i++)
        assert_non_null(json_object_get(document, keys[i]));
    assert_int_equal(json_object_size(document), sizeof keys / sizeof keys[0]);
    assert_non_null(json_object_get(json_object_get(document, "moments"), "k"));
    assert_non_null(json_object_get(json_object_get(document, "moments"), "m"));
    static const char *const model_keys[] = {"model",
                                             "mean_power_dbm",
                                             "mean_power_dbm_low",
                                             "mean_power_dbm_high",
                                             "log_likelihood",
                                             "aic",
                                             "weight",
                                             "goodness_p"};
    const json_t *rice = model_of(document, "rice");
    for (size_t i = 0; i < sizeof model_keys / sizeof model_keys[0]; i++)
        assert_non_null(json_object_get(rice, model_keys[i]));
    assert_non_null(json_object_get(rice, "k_low"));
    assert_non_null(json_object_get(rice, "k_high"));
    assert_non_null(json_object_get(model_of(document, "nakagami"), "m_high"));
    const char *preferred = json_string_value(json_object_get(document, "preferred"));
    assert_non_null(model_of(document, preferred));
    json_decref(document);
}

/* Means by hand: awk over the same twelve numbers. */
static void means_of_power_and_of_db_differ(void **state)
{
    (void)state;
    json_t *document = ESTIMATED("-80\n-90\n-80\n-90\n-80\n-90\n-80\n-90\n", "-", "--step-db",
                                 "1", "--independent");
    assert_true(fabs(number_of(document, "mean_of_db_dbm") + 85) < 1e-9);
    assert_true(fabs(number_of(document, "mean_power_dbm") - 10 * log10(5.5e-9)) < 1e-9);
    json_decref(document);
}

/* The same levels in every form that the command reads. */
static void forms_of_one_column_agree(void **state)
{
    (void)state;
    static const char *const inputs[] = {
        "-80\n-85\n-91\n-84\n-88\n-86\n-90\n-83\n",
        "rssi\r\n-80\r\n-85\r\n\r\n-91\r\n-84\r\n-88\r\n-86\r\n-90\r\n-83",
        "# a note\n-80\n-85\n# another\n-91\n-84\n-88\n-86\n-90\n-83\n",
        "\xEF\xBB\xBFlevel\n\"-80\"\n -85 \n-91\n-84\n-88\n-86\n-90\n-83\n",
    };
    static const char *const tables[] = {
        "time,rssi,snr\n1,-80,3\n2,-85,4\n3,-91,5\n4,-84,6\n5,-88,7\n6,-86,8\n7,-90,9\n8,-83,"
        "9\n",
        "time;rssi\n1;-80\n2;-85\n3;-91\n4;-84\n5;-88\n6;-86\n7;-90\n8;-83\n",
        "\"sep=;\"\r\ntime;rssi\r\n1;-80\r\n2;-85\r\n3;-91\r\n4;-84\r\n5;-88\r\n"
        "6;-86\r\n7;-90\r\n8;-83\r\n",
        "sep=,\ntime,rssi\n1,-80\n2,-85\n3,-91\n4,-84\n5,-88\n6,-86\n7,-90\n8,-83\n",
        "\"a,b\"\trssi\nx\t-80\nx\t-85\nx\t-91\nx\t-84\nx\t-88\nx\t-86\nx\t-90\nx\t-83\n",
    };
    json_t *first = ESTIMATED(inputs[0], "-", "--step-db", "1", "--independent");
    for (size_t i = 1; i < sizeof inputs / sizeof inputs[0]; i++) {
        json_t *again = ESTIMATED(inputs[i], "-", "--step-db", "1", "--independent");
        assert_true(json_equal(first, again));
        json_decref(again);
    }
    for (size_t i = 0; i < sizeof tables / sizeof tables[0]; i++) {
        json_t *by_name =
            ESTIMATED(tables[i], "-", "--column", "rssi", "--step-db", "1", "--independent");
        json_t *by_number =
            ESTIMATED(tables[i], "-", "--column", "2", "--step-db", "1", "--independent");
        assert_true(json_equal(first, by_name));
        assert_true(json_equal(first, by_number));
        json_decref(by_name);
        json_decref(by_number);
    }
    json_decref(first);
}

static void units_are_converted(void **state)
{
    (void)state;
    json_t *power = ESTIMATED("1\n10\n100\n1\n10\n1\n10\n100\n1\n10\n", "-", "--unit", "mw",
                              "--step-db", "0");
    json_t *level = ESTIMATED("0\n10\n20\n0\n10\n0\n10\n20\n0\n10\n", "-", "--step-db", "0");
    json_t *amplitude = ESTIMATED("1\n3.1622776601683795\n10\n1\n3.1622776601683795\n"
                                  "1\n3.1622776601683795\n10\n1\n3.1622776601683795\n",
                                  "-", "--unit", "amplitude", "--step-db", "0");
    double mean_dbm = number_of(level, "mean_power_dbm");
    assert_true(fabs(mean_dbm - 10 * log10(24.4)) < 1e-9);
    assert_true(fabs(number_of(power, "mean_power_dbm") - mean_dbm) < 1e-9);
    assert_true(fabs(number_of(amplitude, "mean_power_dbm") - mean_dbm) < 1e-9);
    json_decref(power);
    json_decref(level);
    json_decref(amplitude);
}

static void the_table_is_for_people(void **state)
{
    (void)state;
    struct program program = {.input = levels};
    RUN(&program, "estimate", "-", "--step-db", "1");
    assert_int_equal(program.status, 0);
    assert_non_null(strstr(program.output, "readings         12 (0 below the floor, 0 above"));
    assert_non_null(strstr(program.output, "step             1 dB (as given)"));
    assert_non_null(strstr(program.output, "\nrayleigh"));
    assert_non_null(strstr(program.output, "\nrice"));
    assert_non_null(strstr(program.output, "\nnakagami"));
    RUN(&program, "estimate", "-", "--format", "csv", "--step-db", "1");
    assert_int_equal(strncmp(program.output, "model,preferred,mean_power_dbm,", 31), 0);
    program_clear(&program);
}

static void what_can_not_be_read_is_refused_with_its_line(void **state)
{
    (void)state;
    INPUT_REFUSED("-80\n-85\nx\n-90\n", 1,
                  "standard input:3: not a number: 'x'; mend or remove the line", "estimate",
                  "-");
    INPUT_REFUSED("-80\n\n# note\n-8 5\n", 1, "standard input:4: not a number: '-8 5'",
                  "estimate", "-");
    INPUT_REFUSED("-8x0\n-85\n", 1, "standard input:1: not a number: '-8x0'", "estimate", "-");
    INPUT_REFUSED("nan\n-85\n", 1, "standard input:1: not a number: 'nan'", "estimate", "-");
    INPUT_REFUSED("level\n-85\n\"\"\n", 1, "standard input:3: not a number: ''", "estimate",
                  "-");
    INPUT_REFUSED("-80\n\x1b[31m\n", 1, "standard input:2: not a number: '?[31m'", "estimate",
                  "-");
    INPUT_REFUSED("-80\n-850\n", 1, "standard input:2: no level of a receiver: '-850'",
                  "estimate", "-");
    INPUT_REFUSED("1\n0\n", 1,
                  "standard input:2: no level of a receiver: '0'; check --unit; powers and "
                  "amplitudes are above 0",
                  "estimate", "-", "--unit", "mw");
    INPUT_REFUSED("1\n-1\n", 1, "standard input:2: no level of a receiver: '-1'", "estimate",
                  "-", "--unit", "amplitude");
    INPUT_REFUSED(
        "1,-80\n2,-85\n", 1,
        "standard input:1: the file has several columns; name the level's column with "
        "--column",
        "estimate", "-");
    INPUT_REFUSED("t,rssi\n1,-80\n2\n", 1, "standard input:3: the line has no such column",
                  "estimate", "-", "--column", "rssi");
    INPUT_REFUSED("t,rssi\n1,-80\n", 1, "standard input:1: the header has no column 'level'",
                  "estimate", "-", "--column", "level");
    INPUT_REFUSED("-80\n\"-85\n-90\n", 1, "standard input:2: a quote is not closed", "estimate",
                  "-");
    INPUT_REFUSED("", 1, "standard input: no levels in the file", "estimate", "-");
    INPUT_REFUSED("# only a note\n\n", 1, "standard input: no levels in the file", "estimate",
                  "-");
    INPUT_REFUSED("-80\nsep=,\n", 1, "standard input:2: not a number: 'sep='", "estimate", "-",
                  "--column", "1");
    INPUT_REFUSED("-80\n-85\n", 1,
                  "standard input: too few readings for a fit: 2 between floor and ceiling; "
                  "at least 8; give more levels",
                  "estimate", "-");
    INPUT_REFUSED("rssi\n", 1, "standard input: no levels in the file", "estimate", "-");
}

static void files_that_can_not_be_read_are_refused(void **state)
{
    (void)state;
    REFUSED(1, "/nonexistent.txt: can't open the file: No such file or directory; name a",
            "estimate", "/nonexistent.txt");
    REFUSED(1, "/: can't read the file: Is a directory", "estimate", "/");
    REFUSED(2, "'estimate' needs FILE", "estimate");
    REFUSED(2, "'estimate' takes no argument 'b'", "estimate", "a", "b");
    REFUSED(2, "option --unit needs one of dbm, mw, amplitude, not 'volt'", "estimate", "a",
            "--unit", "volt");
    REFUSED(2, "option --confidence needs a number from 0.5", "estimate", "a", "--confidence",
            "95");
    REFUSED(2, "option --step-db needs a number from 0 to 20", "estimate", "a", "--step-db",
            "-1");
    REFUSED(2, "--floor-dbm must lie below --ceiling-dbm", "estimate", "a", "--floor-dbm",
            "-80", "--ceiling-dbm", "-90");
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(censored_fits_match_reference),
        cmocka_unit_test(the_object_has_the_agreed_keys),
        cmocka_unit_test(means_of_power_and_of_db_differ),
        cmocka_unit_test(forms_of_one_column_agree),
        cmocka_unit_test(units_are_converted),
        cmocka_unit_test(the_table_is_for_people),
        cmocka_unit_test(what_can_not_be_read_is_refused_with_its_line),
        cmocka_unit_test(files_that_can_not_be_read_are_refused),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
