/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <jansson.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "output/json.h"
#include "output/rows.h"

static const struct rfade_column columns[] = {
    {"channel", RFADE_COLUMN_TEXT, 0, false, false},
    {"readings", RFADE_COLUMN_INTEGER, 0, false, false},
    {"k", RFADE_COLUMN_NUMBER, 2, true, false},
    {"k_low", RFADE_COLUMN_NUMBER, 2, false, false},
    {"k_high", RFADE_COLUMN_NUMBER, 2, false, false},
    {"outage", RFADE_COLUMN_PROBABILITY, 0, false, false},
};
enum { COLUMNS = sizeof columns / sizeof columns[0] };

struct sample {
    const char *channel;
    int64_t readings;
    double k, k_low, k_high, outage;
};

/* What the format makes of the samples; free() it. */
static char *written(const struct rfade_rows_format *format, const struct sample *samples,
                     size_t count)
{
    char *text = NULL;
    size_t size = 0;
    struct rfade_rows *rows = NULL;
    struct rfade_error error;
    FILE *stream = open_memstream(&text, &size);
    assert_non_null(stream);
    assert_int_equal(rfade_rows_begin(format, stream, NULL, columns, COLUMNS, &rows, &error),
                     RFADE_OK);
    for (size_t i = 0; i < count; i++) {
        const struct rfade_value values[COLUMNS] = {
            rfade_value_text(samples[i].channel),  rfade_value_integer(samples[i].readings),
            rfade_value_number(samples[i].k),      rfade_value_number(samples[i].k_low),
            rfade_value_number(samples[i].k_high), rfade_value_number(samples[i].outage)};
        assert_int_equal(rfade_rows_row(rows, values, &error), RFADE_OK);
    }
    assert_int_equal(rfade_rows_end(rows, &error), RFADE_OK);
    rfade_rows_destroy(rows);
    assert_int_equal(fclose(stream), 0);
    return text;
}

static void assert_written(const struct rfade_rows_format *format, const struct sample *samples,
                           size_t count, const char *expected)
{
    char *text = written(format, samples, count);
    assert_string_equal(text, expected);
    free(text);
}

static void table_aligns_and_rounds_to_the_interval(void **state)
{
    (void)state;
    const struct sample samples[] = {
        {"M\xC3\xA5rdal", 1016, 4.12345, 3.6, 4.8, 0.012345},
        {"b", 7, NAN, NAN, NAN, NAN},
        {NULL, 12, 1.5, NAN, NAN, 1.5e-9},
        {"d", 3, 1234.5, 700, 1900, 0},
    };
    assert_written(&rfade_rows_table, samples, 4,
                   "channel  readings     k  k_low  k_high    outage\n"
                   "M\xC3\xA5rdal       1016  4.12   3.60    4.80    0.0123\n"
                   "b               7     -      -       -         -\n"
                   "-              12  1.50      -       -  1.50e-09\n"
                   "d               3  1230    700    1900         0\n");
}

static void table_keeps_two_digits_of_each_end(void **state)
{
    (void)state;
    const struct sample samples[] = {
        {"wide", 9, 312.4, 250.49, 1e5, 0.5},
        {"open", 9, 0.514, 0, 512.3, 0.5},
        {"none", 9, -0.003, -1.23, 1.17, 0.5},
        {"near", 9, 0.52, 0.00012345, 3.1, 0.5},
    };
    assert_written(&rfade_rows_table, samples, 4,
                   "channel  readings     k    k_low  k_high  outage\n"
                   "wide            9   310      250  100000   0.500\n"
                   "open            9  0.51        0     510   0.500\n"
                   "none            9   0.0     -1.2     1.2   0.500\n"
                   "near            9  0.52  1.2e-04     3.1   0.500\n");
}

/* An end at a limit says so to people; programs get the number. */
static void only_the_table_marks_a_limit(void **state)
{
    (void)state;
    static const char *const expected[] = {
        "  k  k_low  k_high\n312    250    >1e5\n", "k,k_low,k_high\r\n312.4,250.49,100000\r\n",
        "[\n{\"k\": 312.4, \"k_low\": 250.49, \"k_high\": 100000.0}\n]\n"};
    const struct rfade_rows_format *const formats[] = {&rfade_rows_table, &rfade_rows_csv,
                                                       &rfade_rows_json};
    for (size_t i = 0; i < 3; i++) {
        char *text = NULL;
        size_t size = 0;
        struct rfade_rows *rows = NULL;
        struct rfade_error error;
        FILE *stream = open_memstream(&text, &size);
        const struct rfade_value values[] = {
            rfade_value_number(312.4), rfade_value_number(250.49), rfade_value_limit(1e5)};
        assert_int_equal(
            rfade_rows_begin(formats[i], stream, NULL, columns + 2, 3, &rows, &error),
            RFADE_OK);
        assert_int_equal(rfade_rows_row(rows, values, &error), RFADE_OK);
        assert_int_equal(rfade_rows_end(rows, &error), RFADE_OK);
        rfade_rows_destroy(rows);
        assert_int_equal(fclose(stream), 0);
        assert_string_equal(text, expected[i]);
        free(text);
    }
}

static void table_of_no_rows_has_its_header(void **state)
{
    (void)state;
    assert_written(&rfade_rows_table, NULL, 0, "channel  readings  k  k_low  k_high  outage\n");
}

static void table_says_once_what_all_rows_share_and_breaks_long_names(void **state)
{
    (void)state;
    static const struct rfade_column shared[] = {
        {"route", RFADE_COLUMN_TEXT, 0, false, true},
        {"modulation", RFADE_COLUMN_TEXT, 0, false, true}, /* missing: not named */
        {"passes", RFADE_COLUMN_INTEGER, 0, false, false},
        {"local_sigma_high_db", RFADE_COLUMN_NUMBER, 1, false, false},
        {"note", RFADE_COLUMN_TEXT, 0, false, false},
    };
    /* As wide as a screen, so that the names must be narrow. */
    static const char note[] = "0123456789012345678901234567890123456789012345678"
                               "9012345678901234567890123456789";
    char *text = NULL;
    size_t size = 0;
    struct rfade_rows *rows = NULL;
    struct rfade_error error;
    FILE *stream = open_memstream(&text, &size);
    assert_int_equal(
        rfade_rows_begin(&rfade_rows_table, stream, NULL, shared, 5, &rows, &error), RFADE_OK);
    for (int i = 0; i < 2; i++) {
        const struct rfade_value values[] = {
            rfade_value_text("valley-road"), rfade_value_text(NULL), rfade_value_integer(3),
            rfade_value_number(4.0 + i), rfade_value_text(note)};
        assert_int_equal(rfade_rows_row(rows, values, &error), RFADE_OK);
    }
    assert_int_equal(rfade_rows_end(rows, &error), RFADE_OK);
    rfade_rows_destroy(rows);
    assert_int_equal(fclose(stream), 0);
    assert_string_equal(text,
                        "route valley-road\n"
                        "passes   local_  note\n"
                        "         sigma_  \n"
                        "        high_db  \n"
                        "     3      4.0  0123456789012345678901234567890123456789012345678"
                        "9012345678901234567890123456789\n"
                        "     3      5.0  0123456789012345678901234567890123456789012345678"
                        "9012345678901234567890123456789\n");
    free(text);
}

/* More rows than a page holds: widths only grow, no row is lost. */
static void table_goes_on_past_its_page(void **state)
{
    (void)state;
    enum { ROWS = 4500 };
    struct sample *samples = calloc(ROWS, sizeof *samples);
    for (size_t i = 0; i < ROWS; i++)
        samples[i] =
            (struct sample){i == 4000 ? "a-long-channel" : "c", (int64_t)i, 1, 1, 1, 1};
    char *text = written(&rfade_rows_table, samples, ROWS);
    size_t lines = 0;
    for (const char *at = strchr(text, '\n'); at; at = strchr(at + 1, '\n'))
        lines++;
    assert_int_equal(lines, ROWS + 1);
    assert_int_equal(strncmp(text, "channel  readings", 17), 0);
    assert_non_null(strstr(text, "\na-long-channel      4000"));
    assert_non_null(strstr(text, "\nc                   4001"));
    free(text);
    free(samples);
}

/* RFC 4180, section 2, rules 1, 3, 5, 6 and 7. */
static void csv_follows_rfc_4180(void **state)
{
    (void)state;
    const struct sample samples[] = {
        {"a,b", 1, 0.1, 1.0 / 3, INFINITY, 1e-300},
        {"say \"hi\"", 2, NAN, NAN, NAN, NAN},
        {NULL, -3, -0.5, 0, 0, 1},
    };
    assert_written(&rfade_rows_csv, samples, 3,
                   "channel,readings,k,k_low,k_high,outage\r\n"
                   "\"a,b\",1,0.1,0.3333333333333333,inf,1e-300\r\n"
                   "\"say \"\"hi\"\"\",2,,,,\r\n"
                   ",-3,-0.5,0,0,1\r\n");
}

/* A spreadsheet must not compute a name out of a log; a number stays one. */
static void csv_keeps_formulas_from_spreadsheets(void **state)
{
    (void)state;
    const struct sample samples[] = {{"=1+1", 1, NAN, NAN, NAN, NAN},
                                     {"@SUM(A1,A2)", 2, NAN, NAN, NAN, NAN},
                                     {"+cmd", 3, NAN, NAN, NAN, NAN},
                                     {"-5", 4, NAN, NAN, NAN, NAN}};
    assert_written(&rfade_rows_csv, samples, 4,
                   "channel,readings,k,k_low,k_high,outage\r\n"
                   "'=1+1,1,,,,\r\n"
                   "\"'@SUM(A1,A2)\",2,,,,\r\n"
                   "'+cmd,3,,,,\r\n"
                   "-5,4,,,,\r\n");
}

static void json_is_an_array_of_objects(void **state)
{
    (void)state;
    const struct sample samples[] = {{"a\"b\\", 1, 0.1, 1.0 / 3, INFINITY, 1e-300},
                                     {NULL, 2, NAN, 5, 1e22, 0}};
    char *text = written(&rfade_rows_json, samples, 2);
    json_t *array = json_loads(text, 0, NULL);
    assert_non_null(array);
    assert_int_equal(json_array_size(array), 2);
    json_t *row = json_array_get(array, 0);
    assert_int_equal(json_object_size(row), COLUMNS);
    assert_string_equal(json_string_value(json_object_get(row, "channel")), "a\"b\\");
    assert_int_equal(json_integer_value(json_object_get(row, "readings")), 1);
    assert_true(json_real_value(json_object_get(row, "k")) == 0.1);
    assert_true(json_real_value(json_object_get(row, "k_low")) == 1.0 / 3);
    assert_true(json_is_null(json_object_get(row, "k_high")));
    assert_true(json_real_value(json_object_get(row, "outage")) == 1e-300);
    assert_true(json_is_null(json_object_get(json_array_get(array, 1), "channel")));
    assert_true(json_is_null(json_object_get(json_array_get(array, 1), "k")));
    assert_non_null(strstr(text, "\"k\": 0.1,")); /* the fewest digits, too */
    json_decref(array);
    free(text);
}

static void json_of_no_rows_is_an_empty_array(void **state)
{
    (void)state;
    assert_written(&rfade_rows_json, NULL, 0, "[]\n");
}

static void no_format_lets_an_escape_through(void **state)
{
    (void)state;
    const struct sample sample = {"\x1b[31m\xC2\x9B\xFF\n\x7f", 1, 1, 1, 1, 1};
    for (size_t i = 0; rfade_rows_format_name(i); i++) {
        char *text = written(rfade_rows_format(rfade_rows_format_name(i)), &sample, 1);
        assert_non_null(strstr(text, "?[31m????"));
        assert_null(strchr(text, '\x1b'));
        assert_null(strchr(text, '\x7f'));
        free(text);
    }
}

static void formats_are_found_by_name(void **state)
{
    (void)state;
    assert_ptr_equal(rfade_rows_format("table"), &rfade_rows_table);
    assert_ptr_equal(rfade_rows_format("csv"), &rfade_rows_csv);
    assert_ptr_equal(rfade_rows_format("json"), &rfade_rows_json);
    assert_null(rfade_rows_format("xml"));
    assert_null(rfade_rows_format(""));
}

static void a_value_of_the_wrong_type_is_refused(void **state)
{
    (void)state;
    struct rfade_rows *rows = NULL;
    struct rfade_error error;
    const struct rfade_value number = rfade_value_number(1), text = rfade_value_text("x");
    FILE *stream = fopen("/dev/null", "w");
    assert_int_equal(rfade_rows_begin(&rfade_rows_csv, stream, NULL, columns, 1, &rows, &error),
                     RFADE_OK);
    assert_int_equal(rfade_rows_row(rows, &number, &error), RFADE_DOMAIN);
    assert_non_null(strstr(error.what, "channel"));
    rfade_rows_destroy(rows);
    assert_int_equal(
        rfade_rows_begin(&rfade_rows_csv, stream, NULL, columns + 1, 1, &rows, &error),
        RFADE_OK);
    assert_int_equal(rfade_rows_row(rows, &text, &error), RFADE_DOMAIN);
    rfade_rows_destroy(rows);
    assert_int_equal(fclose(stream), 0);
    rfade_rows_destroy(NULL);
}

/* Every write to /dev/full fails with ENOSPC: it must be told, by every format. */
static void a_full_disk_is_an_error(void **state)
{
    (void)state;
    for (size_t i = 0; rfade_rows_format_name(i); i++) {
        struct rfade_rows *rows = NULL;
        struct rfade_error error = {.status = RFADE_OK};
        FILE *stream = fopen("/dev/full", "w");
        assert_non_null(stream);
        const struct rfade_rows_format *format = rfade_rows_format(rfade_rows_format_name(i));
        assert_int_equal(rfade_rows_begin(format, stream, "out.csv", columns, 1, &rows, &error),
                         RFADE_OK);
        assert_int_equal(rfade_rows_end(rows, &error), RFADE_STORAGE);
        assert_string_equal(error.file, "out.csv");
        assert_non_null(strstr(error.what, "No space left on device"));
        rfade_rows_destroy(rows);
        (void)fclose(stream);
    }
}

static void a_document_reads_back(void **state)
{
    (void)state;
    char *text = NULL;
    size_t size = 0;
    struct rfade_error error;
    FILE *stream = open_memstream(&text, &size);
    json_t *document = rfade_json_join(
        json_pack("{s:o, s:o}", "k", rfade_json_number(0.1), "m", rfade_json_number(NAN)),
        json_pack("{s:[o, i]}", "list", rfade_json_text("a\x1b"), 3));
    assert_int_equal(rfade_json_document(stream, NULL, document, &error), RFADE_OK);
    assert_int_equal(fclose(stream), 0);
    assert_string_equal(text, "{\"k\": 0.1, \"m\": null, \"list\": [\"a?\", 3]}\n");
    free(text);
    assert_int_equal(rfade_json_document(stdout, NULL, NULL, &error), RFADE_NO_MEMORY);
    assert_null(rfade_json_join(NULL, json_object()));
    assert_null(rfade_json_join(json_object(), NULL));
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(table_aligns_and_rounds_to_the_interval),
        cmocka_unit_test(table_keeps_two_digits_of_each_end),
        cmocka_unit_test(only_the_table_marks_a_limit),
        cmocka_unit_test(table_of_no_rows_has_its_header),
        cmocka_unit_test(table_says_once_what_all_rows_share_and_breaks_long_names),
        cmocka_unit_test(table_goes_on_past_its_page),
        cmocka_unit_test(csv_follows_rfc_4180),
        cmocka_unit_test(csv_keeps_formulas_from_spreadsheets),
        cmocka_unit_test(json_is_an_array_of_objects),
        cmocka_unit_test(json_of_no_rows_is_an_empty_array),
        cmocka_unit_test(no_format_lets_an_escape_through),
        cmocka_unit_test(formats_are_found_by_name),
        cmocka_unit_test(a_value_of_the_wrong_type_is_refused),
        cmocka_unit_test(a_full_disk_is_an_error),
        cmocka_unit_test(a_document_reads_back),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
