/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "output/drive_log.h"

#include <errno.h>
#include <gsl/gsl_randist.h>
#include <gsl/gsl_rng.h>
#include <inttypes.h>
#include <math.h>
#include <stdbool.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>

#include "output/rows.h"

enum { ROW_SIZE = 256, LEVEL_DECIMALS_WITHOUT_STEP = 6 };

struct writer {
    const struct rfade_drive_log *log;
    FILE *stream;
    gsl_rng *generator;
    int level_decimals;
    bool whole_ms; /* every time is a whole millisecond */
    bool new_fix;  /* the row brings a new position */
    double next_fix_s;
    struct rfade_place fix;
};

/* Decimals that a multiple of the step needs, at most three. */
static int decimals_of_step(double step_db)
{
    if (step_db == 0)
        return LEVEL_DECIMALS_WITHOUT_STEP;
    int decimals = 0;
    for (double scaled = step_db; decimals < 3; scaled *= 10, decimals++)
        if (fabs(scaled - round(scaled)) < 1e-6)
            break;
    return decimals;
}

static int64_t time_us(const struct rfade_drive_log *log, size_t index)
{
    return log->start_us + llround(log->readings[index].time_s * 1e6);
}

static bool all_whole_ms(const struct rfade_drive_log *log)
{
    for (size_t i = 0; i < log->count; i++)
        if (time_us(log, i) % 1000 != 0)
            return false;
    return true;
}

/* A fix is where the vehicle is, scattered north and east. */
static void take_fix(struct writer *writer, const struct rfade_drive_reading *reading)
{
    const struct rfade_drive_log *log = writer->log;
    writer->new_fix = reading->time_s >= writer->next_fix_s;
    if (!writer->new_fix)
        return;
    writer->next_fix_s += log->fix_interval_s;
    struct rfade_place place = log->line.locate(log->line.context, reading->distance_m);
    double north_m = gsl_ran_gaussian(writer->generator, log->position_scatter_m);
    double east_m = gsl_ran_gaussian(writer->generator, log->position_scatter_m);
    writer->fix = rfade_geodesic_direct(&place, atan2(east_m, north_m) * 180 / acos(-1.0),
                                        hypot(north_m, east_m));
}

/* Calendar time with its fraction: "2027-01-12", "20:00:00", "250" or "250000". */
static void calendar(const struct writer *writer, int64_t us, const char *date_format,
                     char date[16], char clock[16], char fraction[8])
{
    int64_t second = us / 1000000 - (us % 1000000 < 0);
    int64_t rest_us = us - second * 1000000;
    time_t seconds = (time_t)second;
    struct tm parts;
    if (!gmtime_r(&seconds, &parts))
        memset(&parts, 0, sizeof parts);
    (void)strftime(date, 16, date_format, &parts);
    (void)strftime(clock, 16, "%H:%M:%S", &parts);
    if (writer->whole_ms)
        (void)snprintf(fraction, 8, "%03d", (int)(rest_us / 1000));
    else
        (void)snprintf(fraction, 8, "%06d", (int)rest_us);
}

static void comma_row(struct writer *writer, size_t index, char row[ROW_SIZE])
{
    const struct rfade_drive_log *log = writer->log;
    char date[16], clock[16], fraction[8], position[48] = ",", snr[24] = "";
    double level_dbm = log->readings[index].level_dbm;
    calendar(writer, time_us(log, index), "%Y-%m-%d", date, clock, fraction);
    if (writer->new_fix)
        (void)snprintf(position, sizeof position, "%.7f,%.7f", writer->fix.latitude_deg,
                       writer->fix.longitude_deg);
    if (!isnan(log->noise_dbm))
        (void)snprintf(snr, sizeof snr, ",%.1f", level_dbm - log->noise_dbm);
    (void)snprintf(row, ROW_SIZE, "%sT%s.%sZ,%s,%.2f,%.64s,%.64s,%.*f%s\n", date, clock,
                   fraction, position, log->readings[index].speed_m_s * 3.6, log->vehicle,
                   log->channel, writer->level_decimals, level_dbm, snr);
}

static void semicolon_row(struct writer *writer, size_t index, char row[ROW_SIZE])
{
    const struct rfade_drive_log *log = writer->log;
    char date[16], clock[16], fraction[8];
    int zone = abs(log->zone_minutes);
    calendar(writer, time_us(log, index) + (int64_t)log->zone_minutes * 60000000, "%d.%m.%Y",
             date, clock, fraction);
    (void)snprintf(row, ROW_SIZE, "%s %s,%s %c%02d%02d;%.7f;%.7f;%.1f;%.*f\n", date, clock,
                   fraction, log->zone_minutes < 0 ? '-' : '+', zone / 60, zone % 60,
                   writer->fix.latitude_deg, writer->fix.longitude_deg,
                   log->readings[index].speed_m_s * 3.6, writer->level_decimals,
                   log->readings[index].level_dbm);
    for (char *at = row; *at; at++)
        if (*at == '.' && at >= row + strlen(date)) /* the date keeps its points */
            *at = ',';
}

static void blanks_row(struct writer *writer, size_t index, char row[ROW_SIZE])
{
    const struct rfade_drive_log *log = writer->log;
    int64_t us = time_us(log, index);
    char second[32] = "";
    if (log->second_readings)
        (void)snprintf(second, sizeof second, " %8.*f", writer->level_decimals,
                       log->second_readings[index].level_dbm);
    (void)snprintf(row, ROW_SIZE, "%.*f  %.7f  %.7f  %5.1f  %8.*f%s\n",
                   writer->whole_ms ? 0 : 3, (double)us / 1e3, writer->fix.latitude_deg,
                   writer->fix.longitude_deg, log->readings[index].speed_m_s * 3.6,
                   writer->level_decimals, log->readings[index].level_dbm, second);
}

static void write_head(const struct writer *writer)
{
    const struct rfade_drive_log *log = writer->log;
    switch (log->layout) {
    case RFADE_LAYOUT_COMMA:
        (void)fprintf(writer->stream,
                      "time,latitude,longitude,speed_kmh,vehicle,channel,rssi_dbm%s\n",
                      isnan(log->noise_dbm) ? "" : ",snr_db");
        break;
    case RFADE_LAYOUT_SEMICOLON:
        (void)fputs("local time;lat;lon;speed [km/h];rssi [dBm]\n", writer->stream);
        break;
    case RFADE_LAYOUT_BLANKS:
        (void)fprintf(writer->stream, "# epoch_ms latitude longitude speed_kmh %s%s%s\n",
                      log->channel, log->second_readings ? " " : "",
                      log->second_readings ? log->second_channel : "");
        break;
    }
}

static void write_row(struct writer *writer, size_t index)
{
    char row[ROW_SIZE];
    take_fix(writer, &writer->log->readings[index]);
    switch (writer->log->layout) {
    case RFADE_LAYOUT_COMMA:
        comma_row(writer, index, row);
        break;
    case RFADE_LAYOUT_SEMICOLON:
        semicolon_row(writer, index, row);
        break;
    case RFADE_LAYOUT_BLANKS:
        blanks_row(writer, index, row);
        break;
    }
    (void)fputs(row, writer->stream);
}

enum rfade_status rfade_drive_log_write(FILE *stream, const char *stream_name,
                                        const struct rfade_drive_log *log,
                                        struct rfade_error *error)
{
    struct writer writer = {.log = log,
                            .stream = stream,
                            .level_decimals = decimals_of_step(log->step_db),
                            .whole_ms = all_whole_ms(log)};
    writer.generator = gsl_rng_alloc(gsl_rng_mt19937);
    if (!writer.generator)
        return rfade_error_no_memory(error);
    gsl_rng_set(writer.generator, (unsigned long)(log->seed & 0xFFFFFFFFu));
    write_head(&writer);
    for (size_t i = 0; i < log->count && !ferror(stream); i++)
        write_row(&writer, i);
    gsl_rng_free(writer.generator);
    return rfade_stream_flush(stream, stream_name, error);
}

enum rfade_status rfade_drive_truth_write(FILE *stream, const char *stream_name,
                                          const struct rfade_drive_reading *readings,
                                          size_t count, struct rfade_error *error)
{
    static const struct rfade_column columns[] = {
        {"time_s", RFADE_COLUMN_NUMBER, 3, false, false},
        {"distance_m", RFADE_COLUMN_NUMBER, 3, false, false},
        {"level_dbm", RFADE_COLUMN_NUMBER, 2, false, false},
        {"power_dbm", RFADE_COLUMN_NUMBER, 2, false, false},
        {"local_mean_dbm", RFADE_COLUMN_NUMBER, 2, false, false},
        {"k", RFADE_COLUMN_NUMBER, 3, false, false},
    };
    enum { COLUMNS = sizeof columns / sizeof columns[0] };
    struct rfade_rows *rows = NULL;
    enum rfade_status status =
        rfade_rows_begin(&rfade_rows_csv, stream, stream_name, columns, COLUMNS, &rows, error);
    for (size_t i = 0; status == RFADE_OK && i < count; i++) {
        const struct rfade_value values[COLUMNS] = {
            rfade_value_number(readings[i].time_s),
            rfade_value_number(readings[i].distance_m),
            rfade_value_number(readings[i].level_dbm),
            rfade_value_number(readings[i].power_dbm),
            rfade_value_number(readings[i].local_mean_dbm),
            rfade_value_number(readings[i].k)};
        status = rfade_rows_row(rows, values, error);
    }
    if (status == RFADE_OK)
        status = rfade_rows_end(rows, error);
    rfade_rows_destroy(rows);
    return status;
}
