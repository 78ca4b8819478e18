/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "survey/channel.h"

#include <math.h>
#include <stddef.h>
#include <stdio.h>

#include "survey/rows.h"

/* A field that can be told: its range stands here once, for the check and its message. */
struct field {
    const char *what;
    const char *unit;
    size_t offset;
    double low;
    double high;
};

static const struct field fields[] = {
    {"carrier", "Hz", offsetof(struct rfade_channel, carrier_hz), 1e5, 3e11},
    {"bandwidth", "Hz", offsetof(struct rfade_channel, bandwidth_hz), 1e-3, 1e11},
    {"symbol rate", "Hz", offsetof(struct rfade_channel, symbol_rate_hz), 1e-3, 1e11},
    {"noise figure", "dB", offsetof(struct rfade_channel, noise_figure_db), 0, 100},
    {"noise floor", "dBm", offsetof(struct rfade_channel, noise_floor_dbm), -250, 100},
    {"level step", "dB", offsetof(struct rfade_channel, step_db), 0.01, 20},
    {"receiver floor", "dBm", offsetof(struct rfade_channel, floor_dbm), -250, 100},
    {"receiver ceiling", "dBm", offsetof(struct rfade_channel, ceiling_dbm), -250, 100},
};
enum { FIELD_COUNT = sizeof fields / sizeof fields[0] };

/* Boltzmann's constant (SI, exact) times 290 K, in mW/Hz. */
static const double THERMAL_MW_PER_HZ = 1.380649e-23 * 290.0 * 1e3;

double rfade_noise_floor_dbm(double told_dbm, double bandwidth_hz, double noise_figure_db)
{
    if (!isnan(told_dbm))
        return told_dbm;
    return 10.0 * log10(THERMAL_MW_PER_HZ * bandwidth_hz) + noise_figure_db;
}

static double field_get(const struct rfade_channel *channel, const struct field *field)
{
    return *(const double *)((const char *)channel + field->offset);
}

static void field_set(struct rfade_channel *channel, const struct field *field, double value)
{
    *(double *)((char *)channel + field->offset) = value;
}

struct rfade_channel rfade_channel_undescribed(void)
{
    struct rfade_channel channel = {0};
    for (size_t i = 0; i < FIELD_COUNT; i++)
        field_set(&channel, &fields[i], NAN);
    return channel;
}

static void read_channel(sqlite3_stmt *statement, void *row)
{
    struct rfade_channel *channel = row;
    *channel = rfade_channel_undescribed();
    channel->channel_id = sqlite3_column_int64(statement, 0);
    rfade_name_copy(channel->name, statement, 1);
    for (size_t i = 0; i < FIELD_COUNT; i++)
        field_set(channel, &fields[i], rfade_column_real(statement, (int)i + 2));
}

#define SELECT_CHANNEL                                                                         \
    "SELECT channel_id, name, carrier_hz, bandwidth_hz, symbol_rate_hz, noise_figure_db, "     \
    "noise_floor_dbm, step_db, floor_dbm, ceiling_dbm FROM channel "

enum rfade_status rfade_survey_channels(struct rfade_survey *survey,
                                        struct rfade_channel **channels, size_t *count,
                                        struct rfade_error *error)
{
    void *rows = NULL;
    enum rfade_status status =
        rfade_rows_query(survey, sizeof **channels, read_channel, &rows, count, error,
                         SELECT_CHANNEL "ORDER BY name", "");
    *channels = rows;
    return status;
}

enum rfade_status rfade_survey_channel(struct rfade_survey *survey, const char *name,
                                       struct rfade_channel *channel, struct rfade_error *error)
{
    *channel = rfade_channel_undescribed();
    int64_t id = 0;
    sqlite3_stmt *statement = NULL;
    bool row = false;
    enum rfade_status status =
        rfade_name_require(survey, RFADE_NAMED_CHANNEL, name, &id, error);
    if (status == RFADE_OK)
        status = rfade_survey_prepare(survey, &statement, error,
                                      SELECT_CHANNEL "WHERE channel_id = ?1", "i", id);
    if (status == RFADE_OK)
        status = rfade_survey_step(survey, statement, &row, error);
    if (status == RFADE_OK && row)
        read_channel(statement, channel);
    sqlite3_finalize(statement);
    return status;
}

static enum rfade_status check(const struct rfade_channel *channel, const char *name,
                               struct rfade_error *error)
{
    for (size_t i = 0; i < FIELD_COUNT; i++) {
        double value = field_get(channel, &fields[i]);
        if (isnan(value) || (value >= fields[i].low && value <= fields[i].high))
            continue;
        char remedy[128];
        (void)snprintf(remedy, sizeof remedy, "give it in %s, from %g to %g", fields[i].unit,
                       fields[i].low, fields[i].high);
        return rfade_error_set(error, RFADE_INPUT, remedy, "channel %s: %s %g %s is impossible",
                               name, fields[i].what, value, fields[i].unit);
    }
    if (channel->ceiling_dbm <= channel->floor_dbm) /* false where either isn't told */
        return rfade_error_set(error, RFADE_INPUT, "give a ceiling above the floor",
                               "channel %s: the ceiling %g dBm is not above the floor %g dBm",
                               name, channel->ceiling_dbm, channel->floor_dbm);
    return RFADE_OK;
}

/* Adds what is told to what is known; true if that changes something. */
static bool merge(struct rfade_channel *known, const struct rfade_channel *told)
{
    bool changed = false;
    for (size_t i = 0; i < FIELD_COUNT; i++) {
        double value = field_get(told, &fields[i]);
        if (isnan(value) || value == field_get(known, &fields[i]))
            continue;
        field_set(known, &fields[i], value);
        changed = true;
    }
    return changed;
}

static enum rfade_status set_inside(struct rfade_survey *survey, const char *name,
                                    const struct rfade_channel *told, struct rfade_error *error)
{
    int64_t id = 0;
    bool found = false;
    struct rfade_channel channel = rfade_channel_undescribed();
    enum rfade_status status =
        rfade_name_find(survey, RFADE_NAMED_CHANNEL, name, &id, &found, error);
    if (status == RFADE_OK && found)
        status = rfade_survey_channel(survey, name, &channel, error);
    else if (status == RFADE_OK)
        status = rfade_name_check(RFADE_NAMED_CHANNEL, name, error);
    if (status != RFADE_OK)
        return status;
    bool changed = merge(&channel, told);
    status = check(&channel, name, error);
    if (status == RFADE_OK && !found)
        status = rfade_name_add(survey, RFADE_NAMED_CHANNEL, name, &id, error);
    if (status != RFADE_OK || !changed)
        return status;
    status = rfade_survey_run(
        survey, error,
        "UPDATE channel SET carrier_hz = ?2, bandwidth_hz = ?3, symbol_rate_hz = ?4, "
        "noise_figure_db = ?5, noise_floor_dbm = ?6, step_db = ?7, floor_dbm = ?8, "
        "ceiling_dbm = ?9 WHERE channel_id = ?1",
        "idddddddd", id, channel.carrier_hz, channel.bandwidth_hz, channel.symbol_rate_hz,
        channel.noise_figure_db, channel.noise_floor_dbm, channel.step_db, channel.floor_dbm,
        channel.ceiling_dbm);
    return status == RFADE_OK ? rfade_survey_changed(survey, error) : status;
}

enum rfade_status rfade_survey_channel_set(struct rfade_survey *survey, const char *name,
                                           const struct rfade_channel *told,
                                           struct rfade_error *error)
{
    enum rfade_status status = rfade_survey_begin(survey, error);
    if (status == RFADE_OK)
        status = set_inside(survey, name, told, error);
    if (status == RFADE_OK)
        status = rfade_survey_commit(survey, error);
    rfade_survey_rollback(survey);
    return status;
}
