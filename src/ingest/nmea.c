/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/nmea.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#include "ingest/emit.h"
#include "ingest/nmea_sentence.h"
#include "ingest/time.h"

enum { KEPT_TEXT = 200, LOOKED_AT_LINES = 10 };

static const int64_t day_us = INT64_C(86400000000);

/* What the sentences of one time of day say together. */
struct epoch {
    bool any;
    bool is_void; /* RMC says so */
    struct rfade_nmea_sentence said;
    size_t line;
    size_t text_size;
    char text[KEPT_TEXT]; /* of its first sentence's line */
};

struct nmea {
    const struct rfade_column_map *map;
    const char *vehicle;
    struct rfade_ingest_summary *summary;
    struct rfade_emitter *emitter;
    struct epoch epoch;
    bool has_date;
    int64_t days; /* of the epoch before */
    int64_t of_day_us;
};

bool rfade_nmea_is_log(const char *head, size_t size)
{
    const char *end = head + size;
    int lines = 0;
    int sentences = 0;
    while (head < end && lines < LOOKED_AT_LINES) {
        const char *newline = memchr(head, '\n', (size_t)(end - head));
        const char *stop = newline ? newline : end;
        const char *dollar = memchr(head, '$', (size_t)(stop - head));
        lines += stop - head > 1;
        sentences += dollar && rfade_nmea_is_address(dollar, (size_t)(stop - dollar));
        head = newline ? newline + 1 : end;
    }
    return sentences > 0 && 2 * sentences >= lines;
}

/* The date of an epoch: its own, or one that a later RMC will not contradict. */
static bool settle_date(struct nmea *nmea)
{
    const struct rfade_nmea_sentence *said = &nmea->epoch.said;
    if (said->has_date)
        nmea->days = said->days;
    else if (nmea->has_date && said->of_day_us < nmea->of_day_us - day_us / 2)
        nmea->days++;
    nmea->has_date = nmea->has_date || said->has_date;
    nmea->of_day_us = said->of_day_us;
    return nmea->has_date;
}

/* Tells what an epoch says, and begins the next. */
static enum rfade_status end_epoch(struct nmea *nmea, struct rfade_error *error)
{
    struct epoch *epoch = &nmea->epoch;
    const struct rfade_line line = {
        .text = epoch->text, .size = epoch->text_size, .number = epoch->line, .ended = true};
    struct rfade_row row;
    rfade_row_begin(&row);
    if (!epoch->any)
        return RFADE_OK;
    epoch->any = false;
    if (!epoch->said.has_time)
        return rfade_emitter_row(nmea->emitter, &row, false, &line, error);
    if (!settle_date(nmea))
        return rfade_emitter_refuse(nmea->emitter, &line,
                                    "the position has no date: no RMC sentence came before it",
                                    error);
    row.time_us = nmea->days * day_us + epoch->said.of_day_us;
    if (row.time_us < RFADE_EARLIEST_US)
        return rfade_emitter_refuse(nmea->emitter, &line, "the receiver's date was not set",
                                    error);
    row.vehicle = nmea->vehicle;
    row.has_place = epoch->said.has_place && !epoch->is_void;
    row.no_place = !row.has_place;
    row.latitude_deg = epoch->said.latitude_deg;
    row.longitude_deg = epoch->said.longitude_deg;
    if (epoch->said.speed_m_s <= RFADE_MOST_SPEED_M_S)
        row.speed_m_s = epoch->said.speed_m_s;
    return rfade_emitter_row(nmea->emitter, &row, true, &line, error);
}

static void begin_epoch(struct nmea *nmea, const struct rfade_line *line,
                        const struct rfade_nmea_sentence *sentence)
{
    struct epoch *epoch = &nmea->epoch;
    epoch->any = true;
    epoch->is_void = sentence->type == RFADE_NMEA_RMC && !sentence->has_place;
    epoch->said = *sentence;
    epoch->line = line->number;
    epoch->text_size = line->size < KEPT_TEXT ? line->size : KEPT_TEXT;
    memcpy(epoch->text, line->text, epoch->text_size);
}

/* Adds what another sentence of the same time of day says. */
static void join_epoch(struct epoch *epoch, const struct rfade_nmea_sentence *sentence)
{
    struct rfade_nmea_sentence *said = &epoch->said;
    bool is_rmc = sentence->type == RFADE_NMEA_RMC;
    if (sentence->has_date) {
        said->has_date = true;
        said->days = sentence->days;
    }
    if (sentence->has_place && !said->has_place) {
        said->has_place = true;
        said->latitude_deg = sentence->latitude_deg;
        said->longitude_deg = sentence->longitude_deg;
    }
    epoch->is_void = epoch->is_void || (is_rmc && !sentence->has_place);
    if (!isnan(sentence->speed_m_s) && (is_rmc || isnan(said->speed_m_s)))
        said->speed_m_s = sentence->speed_m_s;
}

static enum rfade_status take_sentence(struct nmea *nmea, const struct rfade_line *line,
                                       const struct rfade_nmea_sentence *sentence,
                                       struct rfade_error *error)
{
    struct epoch *epoch = &nmea->epoch;
    if (sentence->type == RFADE_NMEA_VTG) { /* it has no time: it goes with those before it */
        if (epoch->any)
            join_epoch(epoch, sentence);
        return RFADE_OK;
    }
    if (epoch->any && sentence->has_time == epoch->said.has_time &&
        sentence->of_day_us == epoch->said.of_day_us) {
        join_epoch(epoch, sentence);
        return RFADE_OK;
    }
    enum rfade_status status = end_epoch(nmea, error);
    begin_epoch(nmea, line, sentence);
    return status;
}

/* The last $ of a line; what stands before it is the logger's, or a sentence broken off. */
static const char *find_sentence(const struct rfade_line *line)
{
    size_t i = line->size;
    while (i > 0 && line->text[i - 1] != '$')
        i--;
    return i > 0 ? line->text + i - 1 : NULL;
}

static enum rfade_status take_line(struct nmea *nmea, const struct rfade_line *line,
                                   struct rfade_error *error)
{
    struct rfade_nmea_sentence sentence;
    size_t blanks = 0;
    while (blanks < line->size && (line->text[blanks] == ' ' || line->text[blanks] == '\t'))
        blanks++;
    if (blanks == line->size || line->text[blanks] == '#' || line->text[blanks] == '!')
        return RFADE_OK;
    const char *start = find_sentence(line);
    if (!start || line->too_long)
        return rfade_emitter_refuse(nmea->emitter, line, "the line is no NMEA sentence", error);
    const char *reason =
        rfade_nmea_read(start, line->size - (size_t)(start - line->text), &sentence);
    bool broken_off = memchr(line->text, '$', (size_t)(start - line->text)) != NULL;
    enum rfade_status status = RFADE_OK;
    if (reason || broken_off) {
        char text[128];
        (void)snprintf(text, sizeof text, "the sentence %s",
                       reason ? reason : "breaks off, and another begins");
        status = rfade_emitter_refuse(nmea->emitter, line, text, error);
    }
    if (status == RFADE_OK && !reason && sentence.type != RFADE_NMEA_OTHER)
        status = take_sentence(nmea, line, &sentence, error);
    return status;
}

static enum rfade_status read_lines(struct nmea *nmea, struct rfade_line_reader *lines,
                                    struct rfade_error *error)
{
    for (;;) {
        struct rfade_line line;
        bool more = false;
        enum rfade_status status = rfade_line_next(lines, &line, &more, error);
        if (status != RFADE_OK)
            return status;
        if (!more)
            return end_epoch(nmea, error);
        nmea->summary->lines++;
        status = take_line(nmea, &line, error);
        if (status != RFADE_OK)
            return status;
    }
}

enum rfade_status
rfade_nmea_read_log(struct rfade_line_reader *lines, const struct rfade_column_map *map,
                    const struct rfade_ingest_names *names, const struct rfade_sink *sink,
                    struct rfade_ingest_summary *summary, struct rfade_error *error)
{
    struct nmea nmea = {.map = map,
                        .summary = summary,
                        .has_date = map->time.has_date,
                        .days = map->time.date_days};
    enum rfade_status status = rfade_row_vehicle(map, names, &nmea.vehicle, error);
    if (status == RFADE_OK)
        status = rfade_emitter_create(map, sink, summary, &nmea.emitter, error);
    if (status == RFADE_OK)
        status = read_lines(&nmea, lines, error);
    if (status == RFADE_OK)
        status = rfade_emitter_finish(nmea.emitter, error);
    rfade_emitter_destroy(nmea.emitter);
    return status;
}
