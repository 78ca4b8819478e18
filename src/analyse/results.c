/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analyse/results.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "survey/channel.h"
#include "survey/noise.h"
#include "survey/rows.h"

static const char *const ROWS_SQL =
    "SELECT fading.fading_id, route.name, channel.name, campaign.name, sampling,"
    " segment.number, from_m, to_m, pass_count, reading_count, travel_m, wavelength_m,"
    " effective_count, mean_power_dbm, local_mean_dbm, local_sigma_db, local_sigma_low_db,"
    " local_sigma_high_db, window_noise_db, level_uncertainty_db, channel.noise_floor_dbm,"
    " channel.bandwidth_hz, channel.noise_figure_db, channel.symbol_rate_hz,"
    " fading.noise_dbm, fading.level_tally, fading.local_mean_tally, fading.snr_tally,"
    " pass_deviation_db, calibration_db"
    " FROM fading JOIN segment USING (segment_id) JOIN route USING (route_id)"
    " JOIN channel USING (channel_id) JOIN campaign USING (campaign_id)"
    " WHERE (?1 IS NULL OR route.name = ?1) AND (?2 IS NULL OR channel.name = ?2)"
    " AND (?3 IS NULL OR campaign.name = ?3) AND (?4 = 0 OR segment.number = ?4)"
    " AND (?5 IS NULL OR to_m > ?5) AND (?6 IS NULL OR from_m < ?6)"
    " ORDER BY route.name, segment.number, channel.name, campaign.name";

static const char *const SPANS_SQL =
    "SELECT route.name, count(*), sum(to_m - from_m) FROM segment JOIN route USING (route_id)"
    " WHERE (?1 IS NULL OR route.name = ?1) AND (?2 = 0 OR segment.number = ?2)"
    " AND (?3 IS NULL OR to_m > ?3) AND (?4 IS NULL OR from_m < ?4)"
    " GROUP BY route.name ORDER BY route.name";

static const char *const FITS_SQL =
    "SELECT model, preferred, offset_db, parameter, parameter_low, parameter_high, weight,"
    " goodness_p FROM fit WHERE fading_id = ?1 ORDER BY model";

static char *column_text(sqlite3_stmt *statement, int column)
{
    const unsigned char *text = sqlite3_column_text(statement, column);
    return text ? strdup((const char *)text) : NULL;
}

/* NULL if the bytes are no tally. */
static struct rfade_tally *column_tally(sqlite3_stmt *statement, int column)
{
    struct rfade_tally *tally = NULL;
    const void *bytes = sqlite3_column_blob(statement, column);
    size_t size = (size_t)sqlite3_column_bytes(statement, column);
    return rfade_tally_decode(bytes, size, &tally) == RFADE_OK ? tally : NULL;
}

const char *rfade_noise_source_name(enum rfade_noise_source source)
{
    static const char *const names[] = {NULL, "listed", "logged", "channel", "thermal"};
    return names[source];
}

/* Noise that was measured on the way beats what is told of the channel, and that kTB. A list,
 * which beats them all, is looked at later. */
static void read_noise(sqlite3_stmt *statement, struct rfade_segment_result *row)
{
    double logged_dbm = rfade_column_real(statement, 24);
    double told_dbm = rfade_column_real(statement, 20);
    double thermal_dbm = rfade_noise_floor_dbm(NAN, rfade_column_real(statement, 21),
                                               rfade_column_real(statement, 22));
    const struct {
        enum rfade_noise_source source;
        double noise_dbm;
    } known[] = {{RFADE_NOISE_LOGGED, logged_dbm},
                 {RFADE_NOISE_CHANNEL, told_dbm},
                 {RFADE_NOISE_THERMAL, thermal_dbm}};
    row->noise_source = RFADE_NOISE_UNKNOWN;
    row->noise_floor_dbm = NAN;
    for (size_t i = sizeof known / sizeof known[0]; i-- > 0;) {
        if (isnan(known[i].noise_dbm))
            continue;
        row->noise_source = known[i].source;
        row->noise_floor_dbm = known[i].noise_dbm;
    }
}

/* Members that could not be had stay NULL; check_row tells. */
static void read_row(sqlite3_stmt *statement, void *row)
{
    *(struct rfade_segment_result *)row = (struct rfade_segment_result){
        .fading_id = sqlite3_column_int64(statement, 0),
        .route = column_text(statement, 1),
        .channel = column_text(statement, 2),
        .campaign = column_text(statement, 3),
        .sampling = column_text(statement, 4),
        .segment = sqlite3_column_int64(statement, 5),
        .from_m = rfade_column_real(statement, 6),
        .to_m = rfade_column_real(statement, 7),
        .passes = sqlite3_column_int64(statement, 8),
        .readings = sqlite3_column_int64(statement, 9),
        .travel_m = rfade_column_real(statement, 10),
        .wavelength_m = rfade_column_real(statement, 11),
        .effective_count = rfade_column_real(statement, 12),
        .mean_power_dbm = rfade_column_real(statement, 13),
        .local_mean_dbm = rfade_column_real(statement, 14),
        .local_sigma_db = rfade_column_real(statement, 15),
        .local_sigma_low_db = rfade_column_real(statement, 16),
        .local_sigma_high_db = rfade_column_real(statement, 17),
        .window_noise_db = rfade_column_real(statement, 18),
        .level_uncertainty_db = rfade_column_real(statement, 19),
        .bandwidth_hz = rfade_column_real(statement, 21),
        .symbol_rate_hz = rfade_column_real(statement, 23),
        .level = column_tally(statement, 25),
        .local_mean = column_tally(statement, 26),
        .snr = column_tally(statement, 27),
        .pass_deviation_db = rfade_column_real(statement, 28),
        .calibration_db = rfade_column_real(statement, 29),
    };
    read_noise(statement, row);
}

/* Mean power of the listed noise over the part of the segment that the list covers: at least
 * half of it, else the list does not speak for the segment. */
static void take_listed_noise(const struct rfade_noise *list, size_t count,
                              struct rfade_segment_result *row)
{
    double covered_m = 0.0, power = 0.0;
    for (size_t i = 0; i < count; i++) {
        double from_m = fmax(list[i].from_m, row->from_m);
        double to_m = fmin(list[i].to_m, row->to_m);
        if (to_m <= from_m || strcmp(list[i].channel, row->channel) != 0 ||
            strcmp(list[i].route, row->route) != 0)
            continue;
        covered_m += to_m - from_m;
        power += (to_m - from_m) * pow(10.0, list[i].noise_dbm / 10.0);
    }
    if (covered_m < 0.5 * (row->to_m - row->from_m))
        return;
    row->noise_source = RFADE_NOISE_LISTED;
    row->noise_floor_dbm = 10.0 * log10(power / covered_m);
}

static enum rfade_status check_row(const struct rfade_segment_result *row,
                                   struct rfade_error *error)
{
    if (!row->route || !row->channel || !row->campaign || !row->sampling)
        return rfade_error_no_memory(error);
    if (!row->level || !row->local_mean || !row->snr)
        return rfade_error_set(error, RFADE_STORAGE, "run `routefade fit --all`",
                               "a stored tally of route %s, segment %lld can't be read",
                               row->route, (long long)row->segment);
    return RFADE_OK;
}

static void read_fit(sqlite3_stmt *statement, void *fit)
{
    const char *name = (const char *)sqlite3_column_text(statement, 0);
    *(struct rfade_stored_fit *)fit = (struct rfade_stored_fit){
        .model = rfade_model_by_name(name ? name : ""),
        .preferred = sqlite3_column_int(statement, 1) != 0,
        .offset_db = rfade_column_real(statement, 2),
        .parameter = rfade_column_real(statement, 3),
        .parameter_low = rfade_column_real(statement, 4),
        .parameter_high = rfade_column_real(statement, 5),
        .weight = rfade_column_real(statement, 6),
        .goodness_p = rfade_column_real(statement, 7),
    };
}

static enum rfade_status read_fits(struct rfade_survey *survey,
                                   struct rfade_segment_result *row, struct rfade_error *error)
{
    void *rows = NULL;
    enum rfade_status status =
        rfade_rows_query(survey, sizeof *row->fits, read_fit, &rows, &row->fit_count, error,
                         FITS_SQL, "i", row->fading_id);
    row->fits = rows;
    return status;
}

static void clear_row(struct rfade_segment_result *row)
{
    free(row->route);
    free(row->channel);
    free(row->campaign);
    free(row->sampling);
    free(row->fits);
    rfade_tally_destroy(row->level);
    rfade_tally_destroy(row->local_mean);
    rfade_tally_destroy(row->snr);
}

void rfade_results_clear(struct rfade_segment_results *results)
{
    for (size_t i = 0; results->rows && i < results->count; i++)
        clear_row(&results->rows[i]);
    free(results->rows);
    free(results->spans);
    *results = (struct rfade_segment_results){NULL, 0, NULL, 0};
}

/* Refuses a name that the survey does not hold. */
static enum rfade_status check_name(struct rfade_survey *survey, const char *kind,
                                    const char *sql, const char *name,
                                    struct rfade_error *error)
{
    if (!name)
        return RFADE_OK;
    int64_t ignored = 0;
    bool found = false;
    enum rfade_status status =
        rfade_survey_integer(survey, &ignored, &found, error, sql, "t", name);
    if (status == RFADE_OK && !found)
        return rfade_error_set(error, RFADE_INPUT, "see `routefade status` for what it holds",
                               "the survey holds no %s '%s'", kind, name);
    return status;
}

static enum rfade_status check_names(struct rfade_survey *survey,
                                     const struct rfade_segment_filter *filter,
                                     struct rfade_error *error)
{
    enum rfade_status status = check_name(
        survey, "route", "SELECT 1 FROM route WHERE name = ?1", filter->route, error);
    if (status == RFADE_OK)
        status = check_name(survey, "channel", "SELECT 1 FROM channel WHERE name = ?1",
                            filter->channel, error);
    if (status == RFADE_OK)
        status = check_name(survey, "campaign", "SELECT 1 FROM campaign WHERE name = ?1",
                            filter->campaign, error);
    return status;
}

/* Refuses a number that no segment of the route, or of any route, has. */
static enum rfade_status check_segment(struct rfade_survey *survey,
                                       const struct rfade_segment_filter *filter,
                                       struct rfade_error *error)
{
    if (filter->segment == 0)
        return RFADE_OK;
    int64_t ignored = 0;
    bool found = false;
    enum rfade_status status = rfade_survey_integer(
        survey, &ignored, &found, error,
        "SELECT 1 FROM segment JOIN route USING (route_id)"
        " WHERE segment.number = ?1 AND (?2 IS NULL OR route.name = ?2) LIMIT 1",
        "it", filter->segment, filter->route);
    if (status == RFADE_OK && !found)
        return rfade_error_set(
            error, RFADE_INPUT, "see `routefade route` for how many segments a route has",
            "there is no segment %lld on %s%s", (long long)filter->segment,
            filter->route ? "route " : "any route", filter->route ? filter->route : "");
    return status;
}

enum rfade_status rfade_results_current(struct rfade_survey *survey, bool *current,
                                        struct rfade_error *error)
{
    int64_t same = 0;
    bool fitted = false;
    *current = false;
    enum rfade_status status =
        rfade_survey_integer(survey, &same, &fitted, error,
                             "SELECT analysed.generation = generation.current"
                             " FROM analysed JOIN generation USING (only)",
                             "");
    if (status == RFADE_OK && !fitted)
        return rfade_error_set(error, RFADE_NO_DATA, "run `routefade fit`",
                               "nothing in the survey has been fitted yet");
    *current = same != 0;
    return status;
}

enum rfade_status rfade_readings_without_level(struct rfade_survey *survey, int64_t *count,
                                               struct rfade_error *error)
{
    bool found = false;
    *count = 0;
    return rfade_survey_integer(survey, count, &found, error,
                                "SELECT count(*) FROM reading WHERE level_cdb IS NULL", "");
}

static void read_span(sqlite3_stmt *statement, void *row)
{
    struct rfade_route_span *span = row;
    rfade_name_copy(span->route, statement, 0);
    span->segments = sqlite3_column_int64(statement, 1);
    span->length_m = sqlite3_column_double(statement, 2);
}

static enum rfade_status read_spans(struct rfade_survey *survey,
                                    const struct rfade_segment_filter *filter,
                                    struct rfade_segment_results *results,
                                    struct rfade_error *error)
{
    void *rows = NULL;
    enum rfade_status status = rfade_rows_query(
        survey, sizeof *results->spans, read_span, &rows, &results->span_count, error,
        SPANS_SQL, "tidd", filter->route, filter->segment, filter->from_m, filter->to_m);
    results->spans = rows;
    return status;
}

enum rfade_status rfade_results_read(struct rfade_survey *survey,
                                     const struct rfade_segment_filter *filter,
                                     struct rfade_segment_results *results,
                                     struct rfade_error *error)
{
    *results = (struct rfade_segment_results){NULL, 0, NULL, 0};
    struct rfade_noise *noise = NULL;
    size_t noise_count = 0;
    void *rows = NULL;
    enum rfade_status status = check_names(survey, filter, error);
    if (status == RFADE_OK)
        status = check_segment(survey, filter, error);
    if (status == RFADE_OK)
        status =
            rfade_rows_query(survey, sizeof *results->rows, read_row, &rows, &results->count,
                             error, ROWS_SQL, "tttidd", filter->route, filter->channel,
                             filter->campaign, filter->segment, filter->from_m, filter->to_m);
    results->rows = rows;
    if (status == RFADE_OK)
        status = rfade_survey_noise(survey, &noise, &noise_count, error);
    for (size_t i = 0; i < results->count && status == RFADE_OK; i++) {
        status = check_row(&results->rows[i], error);
        if (status == RFADE_OK)
            take_listed_noise(noise, noise_count, &results->rows[i]);
        if (status == RFADE_OK)
            status = read_fits(survey, &results->rows[i], error);
    }
    free(noise);
    if (status == RFADE_OK)
        status = read_spans(survey, filter, results, error);
    if (status != RFADE_OK)
        rfade_results_clear(results);
    return status;
}

const struct rfade_stored_fit *rfade_result_preferred(const struct rfade_segment_result *row)
{
    for (size_t i = 0; i < row->fit_count; i++)
        if (row->fits[i].preferred)
            return &row->fits[i];
    return NULL;
}

const struct rfade_stored_fit *rfade_result_fit(const struct rfade_segment_result *row,
                                                enum rfade_model_id model)
{
    for (size_t i = 0; i < row->fit_count; i++)
        if (row->fits[i].model && row->fits[i].model->id == model)
            return &row->fits[i];
    return NULL;
}

bool rfade_result_resolved(const struct rfade_segment_result *row)
{
    return strcmp(row->sampling, "resolved") == 0;
}
