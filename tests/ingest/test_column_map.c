/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "ingest/collect.h"
#include "ingest/column_map_parts.h"

static void every_key_reaches_its_part(void **state)
{
    (void)state;
    struct rfade_column_map *map = good_map("\xEF\xBB\xBF# a map with everything\r\n"
                                            "[file]\r\n"
                                            "separator = semicolon\n"
                                            "decimal = comma\n"
                                            "header = 3\n"
                                            "skip = 2\n"
                                            "comment = %\n"
                                            "quote = single\n"
                                            "rows = ragged\n"
                                            "; another comment\n"
                                            "[time]\n"
                                            "column = Zeit\n"
                                            "  date_column = Datum   ; indented, with a note\n"
                                            "format = pattern %d.%m.%Y %H:%M:%S\n"
                                            "zone = Europe/Berlin\n"
                                            "subsecond_column = 7\n"
                                            "subsecond_unit = ns\n"
                                            "offset_s = -3.25\n"
                                            "gnss_column = utc\n"
                                            "spread = yes\n"
                                            "backward = refuse\n"
                                            "[position]\n"
                                            "x_column = Rechtswert\n"
                                            "y_column = Hochwert\n"
                                            "epsg = 32632\n"
                                            "no_fix = -999, n.v.\n"
                                            "held_s = 5\n"
                                            "max_speed = 60\n"
                                            "[speed]\n"
                                            "column = Tempo\n"
                                            "unit = knots\n"
                                            "[vehicle]\n"
                                            "column = \"12\"\n"
                                            "[campaign]\n"
                                            "name = winter 2026\n"
                                            "[level 457 north]\n"
                                            "column = Pegel A\n"
                                            "unit = dbuv\n"
                                            "scale = 0.1\n"
                                            "offset = -5\n"
                                            "no_reading = 0, 127\n"
                                            "valid = -140 .. -20.5\n"
                                            "snr_column = 9\n"
                                            "[level 457 south]\n"
                                            "column = Pegel B\n");
    assert_int_equal(map->file.separator, ';');
    assert_int_equal(map->file.decimal_sign, ',');
    assert_int_equal(map->time.decimal_sign, ',');
    assert_int_equal(map->file.header, RFADE_HEADER_LINE);
    assert_int_equal(map->file.header_line, 3);
    assert_int_equal(map->file.skip, 2);
    assert_int_equal(map->file.comment, '%');
    assert_int_equal(map->file.quote, '\'');
    assert_true(map->file.ragged);
    assert_string_equal(map->time_column.name, "Zeit");
    assert_string_equal(map->date_column.name, "Datum");
    assert_int_equal(map->time.form, RFADE_TIME_PATTERN);
    assert_string_equal(map->time.pattern, "%d.%m.%Y %H:%M:%S");
    assert_non_null(map->time.zone);
    assert_int_equal(map->subsecond_column.number, 7);
    assert_int_equal(map->subsecond_digits, 9);
    assert_int_equal(map->time_offset_us, -3250000);
    assert_string_equal(map->gnss_column.name, "utc");
    assert_true(map->time_spread && map->backward_refused);
    assert_int_equal(map->position.form, RFADE_POSITION_GRID);
    assert_int_equal(map->position.epsg, 32632);
    assert_int_equal(map->position.no_fix.count, 2);
    assert_true(map->position.no_fix.values[0] == -999);
    assert_string_equal(map->position.no_fix.texts[1], "n.v.");
    assert_true(map->position.held_s == 5 && map->position.max_speed_m_s == 60);
    /* A nautical mile is 1852 m (International Hydrographic Conference, 1929). */
    assert_true(fabs(map->speed_m_s_per_unit - 1852.0 / 3600) < 1e-15);
    assert_string_equal(map->vehicle.column.name, "12");
    assert_int_equal(map->vehicle.column.number, 0);
    assert_string_equal(map->campaign.name, "winter 2026");
    assert_int_equal(map->level_count, 2);
    assert_string_equal(map->levels[0].channel, "457 north");
    assert_int_equal(map->levels[0].level.unit, RFADE_UNIT_DBUV);
    assert_true(map->levels[0].level.scale == 0.1 && map->levels[0].level.offset == -5);
    assert_int_equal(map->levels[0].level.sentinels.count, 2);
    assert_int_equal(map->levels[0].level.low_cdb, -14000);
    assert_int_equal(map->levels[0].level.high_cdb, -2050);
    assert_int_equal(map->levels[0].snr.column.number, 9);
    assert_string_equal(map->levels[1].level.column.name, "Pegel B");
    rfade_column_map_destroy(map);
}

static void the_forms_of_a_position_are_told_apart(void **state)
{
    (void)state;
    static const struct {
        const char *keys;
        enum rfade_position_form form;
    } cases[] = {
        {"latitude_column = a\nlongitude_column = b\n", RFADE_POSITION_DEGREES},
        {"epsg = 32632\nx_column = a\ny_column = b\n", RFADE_POSITION_GRID},
        {"origin_latitude = 54\nx_column = a\ny_column = b\norigin_longitude = -2\n",
         RFADE_POSITION_LOCAL},
        {"latitude = 54\nlongitude = -2\n", RFADE_POSITION_FIXED},
    };
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        char text[256];
        (void)snprintf(text, sizeof text, "[time]\ncolumn = t\n[position]\n%s", cases[i].keys);
        struct rfade_column_map *map = good_map(text);
        assert_int_equal(map->position.form, cases[i].form);
        rfade_column_map_destroy(map);
    }
}

#define LEVEL "[level]\ncolumn = b\n"
#define TIME "[time]\ncolumn = a\n"

/* Each with the line of the mistake and a word that the remedy must hold. */
static const struct {
    const char *text;
    size_t line;
    const char *remedy;
} bad_maps[] = {
    {"", 0, "column"},
    {"column = a\n", 1, "[time]"},
    {"[tim]\ncolumn = a\n", 1, "sections"},
    {"[tim]\n", 1, "sections"},
    {"[time x]\ncolumn = a\n", 1, "sections"},
    {"[time]\ncolum = a\n", 2, "column"},
    {"[time]\ncolumn = a\ncolumn = b\n", 3, "keep one"},
    {"[time\ncolumn = a\n", 1, "key = value"},
    {"[time]\njust words\n", 2, "key = value"},
    {"[time]\ncolumn =\n", 2, "number"},
    {"[time]\ncolumn = 0\n", 2, "number"},
    {"[time]\ncolumn = 99999\n", 2, "number"},
    {"[time]\ncolumn = \"\"\n", 2, "number"},
    {TIME "format = epoch\n", 3, "epoch_s"},
    {TIME "format = pattern %q\n", 3, "pattern"},
    {TIME "zone = Middle/Earth\n", 3, "IANA"},
    {TIME "date = 15.01.2026\n", 3, "2026-01-15"},
    {TIME "origin = yesterday\n", 3, "2026-01-15T20:00:00Z"},
    {TIME "subsecond_unit = s\n", 3, "ms"},
    {TIME "subsecond_unit = ns\n" LEVEL, 1, "subsecond_column"},
    {TIME "subsecond_column = c\n" LEVEL, 1, "subsecond_unit"},
    {TIME "date = 2026-01-15\ndate_column = c\n" LEVEL, 1, "date_column"},
    {TIME "date = 2026-01-15\nformat = epoch_s\n" LEVEL, 1, "format"},
    {TIME "origin = 2026-01-15T20:00:00Z\n" LEVEL, 1, "epoch_s"},
    {LEVEL, 0, "column"},
    {TIME, 0, "[level]"},
    {TIME "[file]\nseparator = :;\n" LEVEL, 4, "comma"},
    {TIME "[file]\nseparator = ;\n" LEVEL, 4, "comma"}, /* an INI comment */
    {TIME "[file]\ndecimal = dot\n" LEVEL, 4, "point"},
    {TIME "[file]\ndecimal = comma\n" LEVEL, 0, "separator"},
    {TIME "[file]\nseparator = #\n" LEVEL, 0, "comment"},
    {TIME "[file]\nheader = maybe\n" LEVEL, 4, "line number"},
    {TIME "[file]\nheader = no\n" LEVEL, 0, "number"},
    {TIME "[file]\nskip = 3\nheader = 2\n" LEVEL, 0, "skip"},
    {TIME "[file]\nskip = -1\n" LEVEL, 4, "lines"},
    {TIME "[file]\ncomment = //\n" LEVEL, 4, "none"},
    {TIME "[file]\nquote = \"\n" LEVEL, 4, "double"},
    {TIME "[file]\nrows = odd\n" LEVEL, 4, "ragged"},
    {TIME "[file]\nformat = xml\n", 4, "json"},
    {TIME "[file]\nformat = json\nrecords = $[x]\n", 5, "path"},
    {TIME "[file]\nrecords = $[*]\n" LEVEL, 0, "format = json"},
    {"[file]\nformat = json\n[time]\ncolumn = 1\n" LEVEL, 0, "paths"},
    {"[file]\nformat = json\n[time]\ncolumn = $.a[\n" LEVEL, 0, "paths"},
    {TIME "[file]\nname = {driver}.csv\n" LEVEL, 4, "{vehicle}"},
    {TIME "[file]\nname = {x}{x}{y}.csv\n" LEVEL, 4, "each once"},
    {TIME "[file]\nname = a/*.csv\n", 4, "folders"},
    {TIME "[file]\nname = {x}.csv\n" LEVEL, 0, "{y}"},
    {TIME "[file]\nname = {x}_{y}.csv\n" LEVEL, 0, "epsg"},
    {TIME "[file]\nname = {latitude}_{longitude}\n[position]\nepsg = 32630\n" LEVEL, 0, "epsg"},
    {TIME "[file]\nname = {vehicle}.csv\n[vehicle]\nname = a\n" LEVEL, 0, "leave the part"},
    {TIME "[file]\nname = {channel}.csv\n[level a]\ncolumn = b\n", 0, "leave the part"},
    {TIME "date = 2026-01-15\n[file]\nname = {date}.csv\n" LEVEL, 0, "leave the part"},
    {TIME "format = epoch_s\n[file]\nname = {date}.csv\n" LEVEL, 0, "leave the part"},
    {TIME "offset_s = soon\n" LEVEL, 3, "seconds"},
    {TIME "spread = maybe\n" LEVEL, 3, "yes"},
    {TIME "backward = no\n" LEVEL, 3, "sort"},
    {"[file]\nformat = nmea\n[time]\ncolumn = a\n", 0, "[vehicle]"},
    {"[file]\nformat = gpx\n" LEVEL, 0, "[vehicle]"},
    {TIME "[position]\n", 3, "latitude_column"},
    {TIME "[position]\nlatitude_column = a\n", 3, "longitude_column"},
    {TIME "[position]\nx_column = a\ny_column = b\n", 3, "epsg"},
    {TIME "[position]\nx_column = a\ny_column = b\nepsg = 32632\norigin_latitude = 1\n"
          "origin_longitude = 1\n",
     3, "epsg"},
    {TIME "[position]\nlatitude_column = a\nlongitude_column = b\nepsg = 32632\n", 3, "epsg"},
    {TIME "[position]\nlatitude_column = a\nx_column = b\n", 5, "one form"},
    {TIME "[position]\nlatitude = 91\n", 4, "degrees"},
    {TIME "[position]\nlongitude = 5,5\n", 4, "degrees"},
    {TIME "[position]\norigin_latitude = 5\norigin_longitude = 5\n" LEVEL, 3, "x_column"},
    {TIME "[position]\nepsg = 12\n", 4, "EPSG"},
    {TIME "[position]\nheld_s = -1\n", 4, "seconds"},
    {TIME "[position]\nmax_speed = fast\n", 4, "metres"},
    {TIME "[position]\nno_fix = ,\n", 4, "commas"},
    {TIME "[speed]\ncolumn = v\n" LEVEL, 3, "unit"},
    {TIME "[sequence]\nmodulus = 256\n" LEVEL, 3, "column"},
    {TIME "[sequence]\ncolumn = n\nmodulus = 1\n" LEVEL, 5, "65536"},
    {"[file]\nheader = no\n[time]\ncolumn = 1\n[sequence]\ncolumn = n\n[level]\ncolumn = 2\n",
     0, "number"},
    {TIME "[speed]\ncolumn = v\nunit = kph\n" LEVEL, 5, "km/h"},
    {TIME "[vehicle]\n" LEVEL, 3, "name"},
    {TIME "[vehicle]\nname = a\ncolumn = b\n" LEVEL, 3, "either"},
    {TIME "[vehicle]\nname =\n" LEVEL, 4, "name"},
    {TIME "[level]\n", 3, "snr_column"},
    {TIME "[level]\ncolumn = a\nunit = dB\n", 5, "dbm"},
    {TIME "[level]\ncolumn = a\nsnr_column = b\nnoise_column = c\n", 3, "noise_column out"},
    {TIME "[level]\nnoise_column = c\n", 3, "column = ..."},
    {TIME "[level]\ncolumn = a\nscale = 0\n", 5, "other than 0"},
    {TIME "[level]\ncolumn = a\noffset = x\n", 5, "number"},
    {TIME "[level]\ncolumn = a\nvalid = -20 .. -140\n", 5, "lowest"},
    {TIME "[level]\ncolumn = a\nvalid = -140\n", 5, "lowest"},
    {TIME "[level]\ncolumn = a\nno_reading = 1,2,3,4,5,6,7,8,9,10,11,12,13,14,15,16,17\n", 5,
     "16"},
    {TIME "[level A]\ncolumn = a\n[level A]\ncolumn = b\n", 5, "one [level"},
    {TIME "[level]\ncolumn = a\n[level A]\ncolumn = b\n", 3, "[level NAME]"},
    {TIME "[channel]\nname = x\n[level A]\ncolumn = b\n", 5, "leave out [channel]"},
};

static void bad_maps_are_refused_with_line_and_remedy(void **state)
{
    (void)state;
    for (size_t i = 0; i < sizeof bad_maps / sizeof bad_maps[0]; i++) {
        struct rfade_column_map *map = NULL;
        struct rfade_error error = {0};
        if (rfade_column_map_parse(bad_maps[i].text, strlen(bad_maps[i].text), "bad.ini", &map,
                                   &error) != RFADE_INPUT)
            fail_msg("was taken:\n%s", bad_maps[i].text);
        assert_null(map);
        assert_string_equal(error.file, "bad.ini");
        if (error.line != bad_maps[i].line || !strstr(error.remedy, bad_maps[i].remedy))
            fail_msg("line %zu, %s (%s) for:\n%s", error.line, error.what, error.remedy,
                     bad_maps[i].text);
    }
}

static void lines_that_are_too_long_are_refused(void **state)
{
    (void)state;
    char text[512] = "[time]\ncolumn = ";
    memset(text + strlen(text), 'a', 300);
    struct rfade_column_map *map = NULL;
    struct rfade_error error = {0};
    assert_int_equal(rfade_column_map_parse(text, strlen(text), "bad.ini", &map, &error),
                     RFADE_INPUT);
    assert_int_equal(error.line, 2);
    assert_int_equal(
        rfade_column_map_parse("[time]\nco\0lumn = a", 18, "bad.ini", &map, &error),
        RFADE_INPUT);
    assert_int_equal(error.line, 2);
}

static void a_missing_map_file_is_refused(void **state)
{
    (void)state;
    struct rfade_column_map *map = NULL;
    struct rfade_error error = {0};
    assert_int_equal(rfade_column_map_read("/nowhere/map.ini", &map, &error), RFADE_STORAGE);
    assert_string_equal(error.file, "/nowhere/map.ini");
    assert_int_equal(rfade_column_map_read("/", &map, &error), RFADE_INPUT);
    assert_null(map);
}

/* The documented examples must stay right. */
static void the_example_maps_are_right(void **state)
{
    (void)state;
    static const char *const names[] = {"no-header-local-metres", "blanks-utm-modem",
                                        "sep-line-bench",         "semicolon-local-time",
                                        "json-lost-packets",      "clock-in-file-name"};
    for (size_t i = 0; i < sizeof names / sizeof names[0]; i++) {
        char path[512];
        struct rfade_column_map *map = NULL;
        struct rfade_error error = {0};
        (void)snprintf(path, sizeof path,
                       ROUTEFADE_TEST_DIR "/../sample_logs/column_maps/%s.ini", names[i]);
        if (rfade_column_map_read(path, &map, &error) != RFADE_OK)
            fail_msg("%s, line %zu: %s", names[i], error.line, error.what);
        rfade_column_map_destroy(map);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(every_key_reaches_its_part),
        cmocka_unit_test(the_forms_of_a_position_are_told_apart),
        cmocka_unit_test(bad_maps_are_refused_with_line_and_remedy),
        cmocka_unit_test(lines_that_are_too_long_are_refused),
        cmocka_unit_test(a_missing_map_file_is_refused),
        cmocka_unit_test(the_example_maps_are_right),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
