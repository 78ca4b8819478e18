/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file survey_fixture.h  A survey in a folder of its own, and short ways to fill it. */
#ifndef ROUTEFADE_TESTS_SURVEY_FIXTURE_H
#define ROUTEFADE_TESTS_SURVEY_FIXTURE_H

#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
/* cmocka.h wants those first */
#include <cmocka.h>

#include <math.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#include "survey/import.h"
#include "survey/survey.h"

struct fixture {
    char folder[64];
    char path[128];
    struct rfade_survey *survey; /**< open for writing, or NULL */
};

static inline int fixture_setup(void **state)
{
    struct fixture *fixture = calloc(1, sizeof *fixture);
    if (!fixture)
        return -1;
    const char *base = getenv("TMPDIR"); // NOLINT(concurrency-mt-unsafe)
    (void)snprintf(fixture->folder, sizeof fixture->folder, "%.40s/rfade_XXXXXX",
                   base ? base : "/tmp");
    if (!mkdtemp(fixture->folder)) {
        free(fixture);
        return -1;
    }
    (void)snprintf(fixture->path, sizeof fixture->path, "%s/night.survey", fixture->folder);
    *state = fixture;
    return 0;
}

static inline int fixture_teardown(void **state)
{
    struct fixture *fixture = *state;
    static const char *const names[] = {"night.survey", "night.survey-journal",
                                        "other.survey", "other.survey-journal",
                                        "plain",        ":memory:"};
    rfade_survey_close(fixture->survey);
    for (size_t i = 0; i < sizeof names / sizeof names[0]; i++) {
        char path[160];
        (void)snprintf(path, sizeof path, "%s/%s", fixture->folder, names[i]);
        (void)unlink(path);
    }
    int failed = rmdir(fixture->folder);
    free(fixture);
    return failed;
}

static inline struct rfade_survey *open_new(const char *path)
{
    struct rfade_survey *survey = NULL;
    struct rfade_error error = {0};
    if (rfade_survey_open(path, RFADE_SURVEY_CREATE, &survey, &error) != RFADE_OK)
        fail_msg("%s: %s", path, error.what);
    return survey;
}

static inline int fixture_setup_open(void **state)
{
    if (fixture_setup(state) != 0)
        return -1;
    struct fixture *fixture = *state;
    fixture->survey = open_new(fixture->path);
    return 0;
}

static inline int64_t integer_of(struct rfade_survey *survey, const char *sql)
{
    int64_t value = 0;
    bool found = false;
    struct rfade_error error = {0};
    if (rfade_survey_integer(survey, &value, &found, &error, sql, "") != RFADE_OK || !found)
        fail_msg("%s: %s", sql, error.what);
    return value;
}

static inline void fill_sha256(unsigned char sha256[32], unsigned char byte)
{
    memset(sha256, byte, 32);
}

static inline struct rfade_import *begin_file(struct rfade_survey *survey, const char *name,
                                              unsigned char byte)
{
    unsigned char sha256[32];
    struct rfade_import *import = NULL;
    bool known = true;
    struct rfade_error error = {0};
    fill_sha256(sha256, byte);
    if (rfade_import_begin(survey, name, sha256, 1000, &import, &known, &error) != RFADE_OK)
        fail_msg("%s", error.what);
    assert_false(known);
    assert_non_null(import);
    return import;
}

static inline void put_reading(struct rfade_import *import, int64_t time_us,
                               const char *channel, int32_t level_cdb, int32_t snr_cdb)
{
    struct rfade_sink sink = rfade_import_sink(import);
    struct rfade_error error = {0};
    const struct rfade_ingest_reading reading = {.time_us = time_us,
                                                 .vehicle = "spreader 4",
                                                 .channel = channel,
                                                 .campaign = "first frost",
                                                 .level_cdb = level_cdb,
                                                 .snr_cdb = snr_cdb};
    if (sink.reading(sink.context, &reading, &error) != RFADE_OK)
        fail_msg("%s", error.what);
}

static inline void put_fix(struct rfade_import *import, int64_t time_us, double latitude_deg,
                           double longitude_deg)
{
    struct rfade_sink sink = rfade_import_sink(import);
    struct rfade_error error = {0};
    const struct rfade_ingest_fix fix = {.time_us = time_us,
                                         .vehicle = "spreader 4",
                                         .latitude_deg = latitude_deg,
                                         .longitude_deg = longitude_deg,
                                         .speed_m_s = NAN};
    if (sink.fix(sink.context, &fix, &error) != RFADE_OK)
        fail_msg("%s", error.what);
}

static inline struct rfade_import_counts finish_file(struct rfade_import *import)
{
    struct rfade_import_counts counts;
    struct rfade_error error = {0};
    if (rfade_import_finish(import, 10, &counts, &error) != RFADE_OK)
        fail_msg("%s", error.what);
    return counts;
}

#endif
