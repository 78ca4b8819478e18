/* SPDX-License-Identifier: GPL-3.0-or-later */
/* GPX tracks as positions. The files are made up after the GPX 1.1 schema. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "ingest/collect.h"

/* 2026-01-15T20:15:00Z, by Python 3.11 datetime. */
static const int64_t start_us = INT64_C(1768508100000000);

static struct collected got;

#define HEAD                                                                                   \
    "<?xml version=\"1.0\" encoding=\"UTF-8\"?>\n"                                             \
    "<gpx version=\"1.1\" creator=\"made up\" xmlns=\"http://www.topografix.com/GPX/1/1\">\n"
#define POINT_0 "<trkpt lat=\"54.1\" lon=\"-2.3\"><time>2026-01-15T20:15:00Z</time></trkpt>\n"
#define POINT_1                                                                                \
    "<trkpt lat='54.1001' lon='-2.3'><ele>12</ele><time> 2026-01-15T21:15:01.5+01:00 </time>"  \
    "<extensions><t:speed xmlns:t='x'>10.25</t:speed></extensions></trkpt>\n"
#define POINT_2                                                                                \
    "<trkpt lat=\"54.1002\" lon=\"-2.3\"><time>2026-01-15T20:15:02Z</time></trkpt>\n"
#define TAIL "</trkseg></trk></gpx>\n"

static void the_points_of_tracks_are_positions(void **state)
{
    (void)state;
    collect_text(&got, NULL,
                 HEAD "<metadata><time>2020-01-01T00:00:00Z</time></metadata>"
                      "<wpt lat=\"1\" lon=\"2\"><time>2026-01-15T20:14:00Z</time></wpt>"
                      "<rte><rtept lat=\"1\" lon=\"2\"/></rte>"
                      "<trk><name>'); DROP TABLE fix; --</name><trkseg>" POINT_0
                      "</trkseg><trkseg>" POINT_1 TAIL);
    assert_int_equal(got.status, RFADE_OK);
    assert_int_equal(got.refusal_count, 0);
    assert_int_equal(got.reading_count, 0);
    assert_int_equal(got.fix_count, 2);
    assert_int_equal(got.fixes[0].time_us, start_us);
    assert_true(got.fixes[0].latitude_deg == 54.1 && got.fixes[0].longitude_deg == -2.3);
    assert_true(isnan(got.fixes[0].speed_m_s));
    assert_int_equal(got.fixes[1].time_us, start_us + 1500000);
    assert_true(got.fixes[1].latitude_deg == 54.1001);
    assert_true(got.fixes[1].speed_m_s == 10.25);
    assert_int_equal(got.summary.lines, 5);
}

static void points_of_no_use_are_refused_alone(void **state)
{
    (void)state;
    static const struct {
        const char *point;
        const char *reason;
    } cases[] = {
        {"<trkpt lat=\"54.1\" lon=\"-2.3\"></trkpt>", "time '' is empty"},
        {"<trkpt lat=\"54.1\" lon=\"-2.3\"><time>noon</time></trkpt>", "time 'noon'"},
        {"<trkpt lat=\"91\" lon=\"-2.3\"><time>2026-01-15T20:15:00Z</time></trkpt>",
         "no place"},
        {"<trkpt lat=\"54,1\" lon=\"-2.3\"><time>2026-01-15T20:15:00Z</time></trkpt>",
         "no place"},
        {"<trkpt lat=\"54.1\"><time>2026-01-15T20:15:00Z</time></trkpt>", "no place"},
        {"<trkpt lat=\"5.1\" lon=\"-2.3\"><time>2026-01-15T20:15:01.6Z</time></trkpt>",
         "can't be reached"},
    };
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        char text[1024];
        (void)snprintf(text, sizeof text,
                       HEAD "<trk><trkseg>\n" POINT_0 POINT_1 "%s\n" POINT_2 TAIL,
                       cases[i].point);
        collect_text(&got, NULL, text);
        assert_one_refusal(&got, 6, cases[i].reason);
        assert_memory_equal(got.refusals[0].text, cases[i].point, 12);
        assert_int_equal(got.fix_count, 3);
    }
}

static void a_zero_position_is_none(void **state)
{
    (void)state;
    collect_text(&got, NULL,
                 HEAD
                 "<trk><trkseg>" POINT_0
                 "<trkpt lat=\"0\" lon=\"0.0\"><time>2026-01-15T20:15:01Z</time></trkpt>" TAIL);
    assert_int_equal(got.refusal_count, 0);
    assert_int_equal(got.fix_count, 1);
    assert_int_equal(got.summary.no_position, 1);
}

static void a_file_cut_short_keeps_what_it_has(void **state)
{
    (void)state;
    static const char *const rests[] = {"", "</trkseg>", "<trkpt lat=\"5",
                                        "<trkpt lat='54.1' lon='-2.3'><time>2026-01-15"};
    for (size_t i = 0; i < sizeof rests / sizeof rests[0]; i++) {
        char text[1024];
        (void)snprintf(text, sizeof text, HEAD "<trk><trkseg>" POINT_0 "%s", rests[i]);
        collect_text(&got, NULL, text);
        assert_int_equal(got.status, RFADE_OK);
        assert_int_equal(got.refusal_count, 1);
        assert_non_null(strstr(got.refusals[0].reason, "stops before"));
        assert_int_equal(got.fix_count, 1);
    }
}

/* Entities that grow to gigabytes, files read from elsewhere: none of it is looked at. */
static void files_that_are_no_gpx_are_refused(void **state)
{
    (void)state;
    static const struct {
        const char *text;
        const char *what;
    } cases[] = {
        {"<?xml version=\"1.0\"?><!DOCTYPE gpx [<!ENTITY a \"aaaaaaaa\"><!ENTITY b "
         "\"&a;&a;&a;&a;\"><!ENTITY c \"&b;&b;&b;&b;\">]><gpx ><trk><name>&c;</name></trk>"
         "</gpx>",
         "document type declaration"},
        {"<!DOCTYPE gpx SYSTEM \"file:///etc/passwd\"><gpx ></gpx>",
         "document type declaration"},
        {"<kml><gpx ></gpx></kml>", "no GPX"},
        {HEAD "<trk><trkseg>" POINT_0 "</trk></trkseg></gpx>", "damaged"},
        {HEAD "<trk><trkseg>" POINT_0 "&copy;" TAIL, "damaged"},
        {HEAD "<trk></trk></gpx>", "no row of data"},
    };
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        collect_text(&got, NULL, cases[i].text);
        assert_int_equal(got.status, RFADE_INPUT);
        if (!strstr(got.error.what, cases[i].what))
            fail_msg("case %zu: %s", i, got.error.what);
        assert_true(got.error.remedy[0] != '\0');
    }
    enum { DEPTH = 100000 };
    char *text = malloc(16 + 3 * DEPTH);
    assert_non_null(text);
    size_t used = (size_t)sprintf(text, "<gpx >");
    for (int i = 0; i < DEPTH; i++)
        used += (size_t)sprintf(text + used, "<a>");
    collect_text(&got, NULL, text);
    free(text);
    assert_int_equal(got.status, RFADE_INPUT);
    assert_non_null(strstr(got.error.what, "nested"));
}

static void points_over_block_borders_are_whole(void **state)
{
    (void)state;
    enum { POINTS = 5000, SIZE = 128 };
    char *text = malloc((size_t)SIZE * (POINTS + 2));
    assert_non_null(text);
    size_t used = (size_t)sprintf(text, "%s<trk><trkseg>", HEAD);
    for (int i = 0; i < POINTS; i++)
        used += (size_t)snprintf(text + used, SIZE,
                                 "<trkpt lat=\"%.6f\" lon=\"-2.3\"><time>2026-01-15T%02d:%02d:"
                                 "%02dZ</time></trkpt>",
                                 54 + 1e-4 * i, i / 3600, i / 60 % 60, i % 60);
    (void)sprintf(text + used, TAIL);
    collect_text(&got, NULL, text);
    free(text);
    assert_int_equal(got.status, RFADE_OK);
    assert_int_equal(got.refusal_count, 0);
    assert_int_equal(got.fix_count, POINTS);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(the_points_of_tracks_are_positions),
        cmocka_unit_test(points_of_no_use_are_refused_alone),
        cmocka_unit_test(a_zero_position_is_none),
        cmocka_unit_test(a_file_cut_short_keeps_what_it_has),
        cmocka_unit_test(files_that_are_no_gpx_are_refused),
        cmocka_unit_test(points_over_block_borders_are_whole),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
