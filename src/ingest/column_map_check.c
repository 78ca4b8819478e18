/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/column_map_check.h"

#include <math.h>

#include "ingest/file_name.h"
#include "ingest/json_values.h"
#include "ingest/layout.h"

/* What is wrong and how to mend it; what is NULL if nothing is. */
struct finding {
    size_t line;
    const char *what;
    const char *remedy;
};

static const struct finding fine;

static struct finding check_file(struct rfade_column_map *map)
{
    const struct rfade_file_map *file = &map->file;
    if (file->separator == file->decimal_sign)
        return (struct finding){0, "the comma can't be both separator and decimal sign",
                                "set `separator` to what stands between the columns, for "
                                "instance semicolon"};
    if (file->comment && file->comment == file->separator)
        return (struct finding){0, "comments and columns can't begin with the same character",
                                "set `comment = none`, or another separator"};
    if (file->header == RFADE_HEADER_LINE && file->header_line <= file->skip)
        return (struct finding){0, "the header line is among those skipped",
                                "give `header` as a line number of the whole file, or lower "
                                "`skip`"};
    return fine;
}

static struct finding check_time(struct rfade_column_map *map)
{
    size_t line = map->time_line;
    if (!rfade_column_given(&map->time_column))
        return (struct finding){line, "the map names no column for the time",
                                "add `column = ...` to its [time] section"};
    bool epoch = map->time.form == RFADE_TIME_EPOCH;
    bool date_column = rfade_column_given(&map->date_column);
    if (map->time.has_date && date_column)
        return (struct finding){line, "the date is given twice",
                                "keep one of `date` and `date_column`"};
    if (epoch && (map->time.has_date || date_column))
        return (struct finding){line, "an epoch holds the date already",
                                "leave out `date` and `date_column`, or give another format"};
    if (!epoch && map->time.origin_us != 0)
        return (struct finding){line, "an origin is for epoch formats only",
                                "set `format` to epoch_s, epoch_ms, epoch_us or epoch_ns"};
    if (rfade_column_given(&map->subsecond_column) != (map->subsecond_digits != 0))
        return (struct finding){line,
                                "a column of subseconds needs its unit, and a unit its "
                                "column",
                                "give both `subsecond_column` and `subsecond_unit`"};
    return fine;
}

static const char position_remedy[] =
    "give latitude_column and longitude_column; or x_column, y_column and epsg; or x_column, "
    "y_column, origin_latitude and origin_longitude; or latitude and longitude";

/* A place in the files' names: by degrees, a grid or an origin. */
static struct finding check_named_place(struct rfade_column_map *map)
{
    const char *pattern = map->file.name;
    struct rfade_position_map *position = &map->position;
    bool degrees = rfade_name_pattern_has(pattern, RFADE_PART_LATITUDE);
    bool metres = rfade_name_pattern_has(pattern, RFADE_PART_X);
    bool origin = !isnan(position->latitude_deg) && !isnan(position->longitude_deg);
    bool fits = degrees == rfade_name_pattern_has(pattern, RFADE_PART_LONGITUDE) &&
                metres == rfade_name_pattern_has(pattern, RFADE_PART_Y) && degrees != metres &&
                position->form == RFADE_POSITION_NONE &&
                (metres ? origin != (position->epsg != 0) : !origin && position->epsg == 0);
    position->form = RFADE_POSITION_FIXED;
    if (fits)
        return fine;
    return (struct finding){
        0, "the position's keys and the name's parts don't fit together",
        "give {latitude} and {longitude}; or {x} and {y}, and in [position] "
        "epsg, or origin_latitude and origin_longitude"};
}

static bool has_named_place(const struct rfade_column_map *map)
{
    for (int part = RFADE_PART_LATITUDE; part <= RFADE_PART_Y; part++)
        if (rfade_name_pattern_has(map->file.name, (enum rfade_name_part)part))
            return true;
    return false;
}

/* Sets the form that the reader could not know from one key alone. */
static struct finding check_position(struct rfade_column_map *map)
{
    struct rfade_position_map *position = &map->position;
    if (has_named_place(map))
        return check_named_place(map);
    bool columns =
        rfade_column_given(&position->first) || rfade_column_given(&position->second);
    bool both = rfade_column_given(&position->first) && rfade_column_given(&position->second);
    bool place = !isnan(position->latitude_deg) && !isnan(position->longitude_deg);
    bool part = isnan(position->latitude_deg) != isnan(position->longitude_deg);
    if (columns != both || part)
        return (struct finding){position->line, "half of a position is missing",
                                position_remedy};
    bool fits = true;
    switch (position->form) {
    case RFADE_POSITION_NONE:
        fits = !columns && !place && position->epsg == 0 && position->line == 0;
        break;
    case RFADE_POSITION_DEGREES:
        fits = both && !place && position->epsg == 0;
        break;
    case RFADE_POSITION_GRID:
    case RFADE_POSITION_LOCAL:
        fits = both && place != (position->epsg != 0);
        position->form = place ? RFADE_POSITION_LOCAL : RFADE_POSITION_GRID;
        break;
    case RFADE_POSITION_FIXED:
        fits = !columns && place && position->epsg == 0;
        break;
    }
    if (!fits)
        return (struct finding){position->line, "the position's keys don't fit together",
                                position_remedy};
    return fine;
}

static struct finding check_speed(struct rfade_column_map *map)
{
    if (map->speed_line == 0)
        return fine;
    if (!rfade_column_given(&map->speed_column) || isnan(map->speed_m_s_per_unit))
        return (struct finding){map->speed_line, "the speed needs a column and a unit",
                                "give `column` and `unit` (km/h, m/s, mph, knots) in [speed]"};
    return fine;
}

static struct finding check_sequence(struct rfade_column_map *map)
{
    if (map->sequence_line > 0 && !rfade_column_given(&map->sequence_column))
        return (struct finding){map->sequence_line, "the sequence number needs a column",
                                "add `column = ...` to its [sequence] section"};
    return fine;
}

static struct finding check_named(const struct rfade_named *named)
{
    bool name = named->name[0] != '\0';
    if (named->line > 0 && name == rfade_column_given(&named->column))
        return (struct finding){named->line, "the section needs a name or a column, not both",
                                "give either `name = ...` or `column = ...`"};
    return fine;
}

/* Nothing may be said twice: by the files' names and by a section. */
static struct finding check_name_parts(struct rfade_column_map *map)
{
    const char *pattern = map->file.name;
    bool level_named = map->level_count > 0 && map->levels[0].channel[0];
    bool twice =
        (rfade_name_pattern_has(pattern, RFADE_PART_VEHICLE) && map->vehicle.line > 0) ||
        (rfade_name_pattern_has(pattern, RFADE_PART_CAMPAIGN) && map->campaign.line > 0) ||
        (rfade_name_pattern_has(pattern, RFADE_PART_CHANNEL) &&
         (map->channel.line > 0 || level_named)) ||
        (rfade_name_pattern_has(pattern, RFADE_PART_DATE) &&
         (map->time.has_date || rfade_column_given(&map->date_column) ||
          map->time.form == RFADE_TIME_EPOCH));
    if (twice)
        return (struct finding){
            0, "the files' names say what another key says, too",
            "leave the part out of `name`, with * in its place, or the key"};
    return fine;
}

static struct finding check_names(struct rfade_column_map *map)
{
    const struct rfade_named *all[3] = {&map->vehicle, &map->channel, &map->campaign};
    struct finding found = fine;
    for (size_t i = 0; i < 3 && !found.what; i++)
        found = check_named(all[i]);
    return found;
}

/* A noise column is read in the place of SNR, in the range of levels. */
static struct finding check_noise(struct rfade_level_map *level)
{
    if (!rfade_column_given(&level->noise_column))
        return fine;
    if (rfade_column_given(&level->snr.column))
        return (struct finding){level->line, "a level has both SNR and noise",
                                "leave one of snr_column and noise_column out"};
    if (!rfade_column_given(&level->level.column))
        return (struct finding){level->line, "noise without a level tells no SNR",
                                "add `column = ...`"};
    level->snr.column = level->noise_column;
    level->snr.low_cdb = RFADE_LOWEST_NOISE_CDB;
    level->snr.high_cdb = level->level.high_cdb;
    level->snr_is_noise = true;
    return fine;
}

/* After check_position, which finds the position's form. */
static struct finding check_levels(struct rfade_column_map *map)
{
    for (size_t i = 0; i < map->level_count; i++) {
        struct rfade_level_map *level = &map->levels[i];
        struct finding noise = check_noise(level);
        if (noise.what)
            return noise;
        if (!rfade_column_given(&level->level.column) &&
            !rfade_column_given(&level->snr.column))
            return (struct finding){level->line, "a level section names no column",
                                    "add `column = ...` or `snr_column = ...`"};
        if (map->level_count > 1 && level->channel[0] == '\0')
            return (struct finding){level->line, "one of several levels has no channel",
                                    "name it in the section: [level NAME]"};
        if (map->channel.line > 0 && level->channel[0] != '\0')
            return (struct finding){level->line, "the channel is given twice",
                                    "write [level] without a name, or leave out [channel]"};
    }
    if (map->level_count == 0 && map->position.form == RFADE_POSITION_NONE)
        return (struct finding){0, "the map names neither a level nor a position",
                                "add a [level] section, or [position]"};
    return fine;
}

static bool is_name(const struct rfade_column *column)
{
    return rfade_column_given(column) && column->number == 0;
}

static struct finding check_header(struct rfade_column_map *map)
{
    if (map->file.header != RFADE_HEADER_NONE)
        return fine;
    for (size_t role = 0; role < RFADE_ROLE_LEVELS + 2 * map->level_count; role++)
        if (is_name(rfade_map_column(map, role)))
            return (struct finding){0, "a column is given by name, and the file has no header",
                                    "give every column by its number, the first being 1"};
    return fine;
}

static struct finding check_json(struct rfade_column_map *map)
{
    bool json = map->file.format == RFADE_FORMAT_JSON;
    if (!json && map->file.records[0])
        return (struct finding){0, "`records` is for JSON files", "add `format = json`"};
    for (size_t role = 0; json && role < RFADE_ROLE_LEVELS + 2 * map->level_count; role++) {
        const struct rfade_column *column = rfade_map_column(map, role);
        if (rfade_column_given(column) &&
            (column->number > 0 || !rfade_json_column_valid(column->name)))
            return (struct finding){0, "a column of a JSON file is given by no path",
                                    "give paths such as time, rx.rssi, $.rx.\"a b\" or $[0]"};
    }
    return fine;
}

/* A map for files that hold positions alone. */
static struct finding check_no_columns(struct rfade_column_map *map)
{
    bool any = has_named_place(map) || map->time_spread || map->level_count > 0 ||
               map->channel.line > 0 || map->campaign.line > 0 ||
               map->position.form != RFADE_POSITION_NONE ||
               !isnan(map->position.latitude_deg) || map->position.epsg != 0;
    for (size_t role = 0; role < RFADE_ROLE_LEVELS; role++)
        any = any || rfade_column_given(rfade_map_column(map, role));
    if (any)
        return (struct finding){0, "NMEA and GPX files hold positions and have no columns",
                                "give [vehicle] name, and of [position] held_s and max_speed "
                                "alone"};
    return fine;
}

enum rfade_status rfade_column_map_check(struct rfade_column_map *map,
                                         struct rfade_error *error)
{
    static struct finding (*const checks[])(struct rfade_column_map *) = {
        check_file,  check_time,       check_position, check_speed,  check_sequence,
        check_names, check_name_parts, check_levels,   check_header, check_json,
        NULL};
    static struct finding (*const positions_checks[])(struct rfade_column_map *) = {
        check_no_columns, check_names, check_name_parts, NULL};
    struct finding (*const *check)(struct rfade_column_map *) =
        rfade_format_is_positions(map->file.format) ? positions_checks : checks;
    for (; *check; check++) {
        struct finding found = (*check)(map);
        if (!found.what)
            continue;
        enum rfade_status status =
            rfade_error_set(error, RFADE_INPUT, found.remedy, "%s", found.what);
        rfade_error_at(error, map->name, found.line);
        return status;
    }
    return RFADE_OK;
}
