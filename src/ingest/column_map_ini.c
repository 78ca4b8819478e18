/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/column_map.h"

#include <ini.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "ingest/column_map_check.h"
#include "ingest/column_map_keys.h"
#include "ingest/column_map_parts.h"

enum { MOST_MAP_SIZE = 1 << 20 };

/*
 * inih hands over keys without line numbers, drops sections without keys, cuts long names and
 * takes an indented line as part of the one before. So the lines pass through here first:
 * counted, without indentation, and with the sections looked at.
 */
struct reading {
    const char *at;
    const char *end;
    size_t line;
    struct rfade_column_map *map;
    char section[16];              /* empty before the first and after a refused one */
    struct rfade_level_map *level; /* of a [level] section */
    uint64_t level_keys;           /* that it had so far, one bit each */
    uint64_t map_keys;
    enum rfade_status status;
    struct rfade_error *error;
};

/* Keeps the first error. */
static void refuse(struct reading *reading, const char *remedy, const char *what,
                   const char *which)
{
    if (reading->status != RFADE_OK)
        return;
    reading->status =
        rfade_error_set(reading->error, RFADE_INPUT, remedy, "%s '%.80s'", what, which);
    rfade_error_at(reading->error, reading->map->name, reading->line);
}

static void begin_level(struct reading *reading, const char *channel)
{
    for (size_t i = 0; i < reading->map->level_count; i++)
        if (strcmp(reading->map->levels[i].channel, channel) == 0) {
            refuse(reading, "give each channel one [level NAME] section", "second section of",
                   channel);
            return;
        }
    reading->level = rfade_column_map_add_level(reading->map, channel);
    reading->level_keys = 0;
    if (reading->level)
        reading->level->line = reading->line;
    else
        refuse(reading, "use one map for at most 64 levels", "too many levels at", channel);
}

static void note_section_line(struct reading *reading)
{
    struct rfade_column_map *map = reading->map;
    const struct {
        const char *section;
        size_t *line;
    } lines[] = {{"time", &map->time_line},        {"position", &map->position.line},
                 {"speed", &map->speed_line},      {"sequence", &map->sequence_line},
                 {"vehicle", &map->vehicle.line},  {"channel", &map->channel.line},
                 {"campaign", &map->campaign.line}};
    for (size_t i = 0; i < sizeof lines / sizeof lines[0]; i++)
        if (strcmp(lines[i].section, reading->section) == 0)
            *lines[i].line = reading->line;
}

/* `name` is what stands between the brackets. */
static void begin_section(struct reading *reading, char *name)
{
    static const char remedy[] = "sections are file, time, position, speed, sequence, vehicle, "
                                 "channel, campaign, level NAME";
    reading->section[0] = '\0';
    reading->level = NULL;
    size_t length = strcspn(name, " \t");
    char *channel = name + length;
    channel += strspn(channel, " \t");
    name[length] = '\0';
    for (size_t i = strlen(channel); i > 0 && strchr(" \t", channel[i - 1]); i--)
        channel[i - 1] = '\0';
    char known[512];
    rfade_map_key_names(name, known, sizeof known);
    bool level = strcmp(name, "level") == 0;
    if (known[0] == '\0' || (channel[0] && !level)) {
        refuse(reading, remedy, "unknown section", name);
        return;
    }
    if (strlen(channel) >= RFADE_NAME_SIZE) {
        refuse(reading, "give a name of at most 127 bytes", "name too long", channel);
        return;
    }
    (void)snprintf(reading->section, sizeof reading->section, "%.15s", name);
    if (level)
        begin_level(reading, channel);
    else
        note_section_line(reading);
}

/* inih's reader: the next line, cut to `size`. */
static char *next_line(char *line, int size, void *context)
{
    struct reading *reading = context;
    if (reading->at == reading->end)
        return NULL;
    reading->line++;
    const char *newline = memchr(reading->at, '\n', (size_t)(reading->end - reading->at));
    const char *end = newline ? newline : reading->end;
    const char *start = reading->at;
    reading->at = newline ? newline + 1 : reading->end;
    if (reading->line == 1 && end - start >= 3 && memcmp(start, "\xEF\xBB\xBF", 3) == 0)
        start += 3;
    while (start < end && (*start == ' ' || *start == '\t'))
        start++;
    while (end > start && (end[-1] == ' ' || end[-1] == '\t' || end[-1] == '\r'))
        end--;
    size_t length = (size_t)(end - start);
    if (length + 2 > (size_t)size || memchr(start, '\0', length)) {
        refuse(reading, "keep lines below 198 characters, all of them text",
               "line too long, or a NUL in", reading->map->name);
        length = 0;
    }
    memcpy(line, start, length);
    line[length] = '\0';
    char *bracket = line[0] == '[' ? strchr(line, ']') : NULL;
    if (line[0] == '[' && !bracket)
        refuse(reading, "write `key = value`, [section], or a comment that starts with #",
               "a section without its closing bracket:", line);
    if (bracket) {
        char name[256];
        *bracket = '\0';
        (void)snprintf(name, sizeof name, "%s", line + 1);
        *bracket = ']';
        begin_section(reading, name);
    }
    return line;
}

static void set_key(struct reading *reading, const struct rfade_map_key *key, const char *value)
{
    uint64_t bit = UINT64_C(1) << rfade_map_key_index(reading->section, key);
    uint64_t *seen = reading->level ? &reading->level_keys : &reading->map_keys;
    if (*seen & bit) {
        refuse(reading, "keep one of them", "given twice in its section:", key->name);
        return;
    }
    *seen |= bit;
    char *base = reading->level ? (char *)reading->level : (char *)reading->map;
    if (!key->set(base + key->offset, value))
        refuse(reading, key->remedy, "a value that can't be used:", value);
}

static int take_key(void *context, const char *section, const char *name, const char *value)
{
    struct reading *reading = context;
    (void)section; /* cut to 49 bytes by inih */
    if (reading->status != RFADE_OK)
        return 0;
    if (reading->section[0] == '\0') {
        refuse(reading, "start with a section such as [time]", "before any section:", name);
        return 0;
    }
    const struct rfade_map_key *key = rfade_map_key(reading->section, name);
    if (key) {
        set_key(reading, key, value);
    } else {
        char known[512];
        char remedy[512];
        rfade_map_key_names(reading->section, known, sizeof known);
        (void)snprintf(remedy, sizeof remedy, "[%s] has the keys %.480s", reading->section,
                       known);
        refuse(reading, remedy, "unknown key", name);
    }
    return reading->status == RFADE_OK;
}

enum rfade_status rfade_column_map_parse(const char *text, size_t text_size, const char *name,
                                         struct rfade_column_map **map,
                                         struct rfade_error *error)
{
    *map = rfade_column_map_create(name);
    if (!*map)
        return rfade_error_no_memory(error);
    struct reading reading = {.at = text, .end = text + text_size, .map = *map, .error = error};
    int bad_line = ini_parse_stream(next_line, &reading, take_key, &reading);
    if (bad_line > 0 && reading.status == RFADE_OK) {
        reading.line = (size_t)bad_line;
        refuse(&reading, "write `key = value`, [section], or a comment that starts with #",
               "not a line of a column map, in", (*map)->name);
    }
    if (bad_line < 0 && reading.status == RFADE_OK)
        reading.status = rfade_error_no_memory(error);
    if (reading.status == RFADE_OK)
        reading.status = rfade_column_map_check(*map, error);
    if (reading.status != RFADE_OK) {
        rfade_column_map_destroy(*map);
        *map = NULL;
    }
    return reading.status;
}

enum rfade_status rfade_column_map_read(const char *path, struct rfade_column_map **map,
                                        struct rfade_error *error)
{
    *map = NULL;
    enum rfade_status status = RFADE_OK;
    char *text = NULL;
    FILE *file = fopen(path, "rb");
    if (!file) {
        status = rfade_error_set(error, RFADE_STORAGE, "check its name and permissions",
                                 "the column map can't be opened");
        goto out;
    }
    text = malloc(MOST_MAP_SIZE + 1);
    if (!text) {
        status = rfade_error_no_memory(error);
        goto out;
    }
    size_t size = fread(text, 1, MOST_MAP_SIZE + 1, file);
    if (ferror(file) || size > MOST_MAP_SIZE) {
        status = rfade_error_set(error, RFADE_INPUT, "give the INI file that describes the log",
                                 "the column map can't be read, or is no column map");
        goto out;
    }
    status = rfade_column_map_parse(text, size, path, map, error);
out:
    if (status != RFADE_OK && error && error->file[0] == '\0')
        rfade_error_at(error, path, 0);
    if (file)
        (void)fclose(file);
    free(text);
    return status;
}
