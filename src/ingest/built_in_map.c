/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/built_in_map.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "ingest/fields.h"
#include "ingest/layout.h"
#include "ingest/number.h"

static const char remedy[] =
    "give a column map with --columns FILE.ini, or a header with time and rssi_dbm, or time, "
    "latitude and longitude";

static const char map_name[] = "the built-in column map";

/* Names as rfade_plain_name makes them. */
static const struct {
    const char *name;
    enum rfade_role role;
} known_names[] = {
    {"time", RFADE_ROLE_TIME},
    {"timestamp", RFADE_ROLE_TIME},
    {"utc", RFADE_ROLE_TIME},
    {"datetime", RFADE_ROLE_TIME},
    {"lat", RFADE_ROLE_FIRST},
    {"latitude", RFADE_ROLE_FIRST},
    {"latitudedeg", RFADE_ROLE_FIRST},
    {"lon", RFADE_ROLE_SECOND},
    {"lng", RFADE_ROLE_SECOND},
    {"longitude", RFADE_ROLE_SECOND},
    {"longitudedeg", RFADE_ROLE_SECOND},
    {"speedkmh", RFADE_ROLE_SPEED},
    {"speedms", RFADE_ROLE_SPEED},
    {"vehicle", RFADE_ROLE_VEHICLE},
    {"channel", RFADE_ROLE_CHANNEL},
    {"campaign", RFADE_ROLE_CAMPAIGN},
    {"rssi", RFADE_ROLE_LEVELS},
    {"rssidbm", RFADE_ROLE_LEVELS},
    {"leveldbm", RFADE_ROLE_LEVELS},
    {"level", RFADE_ROLE_LEVELS},
    {"snr", RFADE_ROLE_LEVELS + 1},
    {"snrdb", RFADE_ROLE_LEVELS + 1},
};

enum { ROLE_COUNT = RFADE_ROLE_LEVELS + 2 };

/* Columns by role, 0: none. */
struct roles {
    size_t columns[ROLE_COUNT];
    size_t count;
    char twice[RFADE_NAME_SIZE]; /* name of a role's second column; empty: none */
    bool other_unit;             /* the level's brackets don't say dBm */
    bool metres;                 /* the speed is in m/s */
};

/* Whether the unit in the name's brackets, if any, is dBm or dB. */
static bool says_dbm(const char *name)
{
    const char *bracket = strpbrk(name, "([");
    if (!bracket)
        return true;
    bracket += 1 + strspn(bracket + 1, " ");
    return rfade_lower(bracket[0]) == 'd' && rfade_lower(bracket[1]) == 'b' &&
           strchr("mM)] ", bracket[2]) != NULL;
}

static void take_name(struct roles *roles, const char *name, size_t column)
{
    char plain[RFADE_NAME_SIZE];
    rfade_plain_name(name, plain);
    for (size_t i = 0; i < sizeof known_names / sizeof known_names[0]; i++) {
        enum rfade_role role = known_names[i].role;
        if (strcmp(known_names[i].name, plain) != 0)
            continue;
        if (roles->columns[role] > 0)
            (void)snprintf(roles->twice, sizeof roles->twice, "%s", name);
        roles->columns[role] = column;
        roles->count++;
        if (role == RFADE_ROLE_LEVELS)
            roles->other_unit = !says_dbm(name);
        if (role == RFADE_ROLE_SPEED)
            roles->metres = strcmp(plain, "speedms") == 0;
        return;
    }
}

/* What a line says as a header with a separator. */
static enum rfade_status read_names(const struct rfade_line *line, char separator,
                                    struct rfade_header *header, struct roles *roles)
{
    struct rfade_file_map file = {.separator = separator, .quote = '"'};
    struct rfade_splitter *splitter = rfade_splitter_create(&file);
    *roles = (struct roles){0};
    if (!splitter)
        return RFADE_NO_MEMORY;
    if (!rfade_split_header(splitter, line, header))
        for (size_t i = 0; i < header->count; i++)
            take_name(roles, header->names[i], i + 1);
    rfade_splitter_destroy(splitter);
    return RFADE_OK;
}

/* The separator under which the line holds most known names. */
static enum rfade_status find_separator(const struct rfade_line *line, char *separator,
                                        struct roles *best)
{
    static const char separators[] = {',', ';', '\t', '|', RFADE_SEPARATOR_BLANKS};
    struct rfade_header *header = malloc(sizeof *header);
    enum rfade_status status = header ? RFADE_OK : RFADE_NO_MEMORY;
    *best = (struct roles){0};
    for (size_t i = 0; i < sizeof separators && status == RFADE_OK; i++) {
        struct roles roles;
        status = read_names(line, separators[i], header, &roles);
        if (roles.count <= best->count)
            continue;
        *best = roles;
        *separator = separators[i];
    }
    free(header);
    return status;
}

/* The first line that isn't empty, without a comment sign; `text` holds RFADE_LINE_SIZE + 1. */
static struct rfade_line first_line(const char *head, size_t size, char *text)
{
    struct rfade_line line = {.number = 0};
    const char *end = head + size;
    while (head < end) {
        const char *stop = memchr(head, '\n', (size_t)(end - head));
        if (!stop)
            stop = memchr(head, '\r', (size_t)(end - head));
        if (!stop)
            stop = end;
        line = (struct rfade_line){head, (size_t)(stop - head), line.number + 1, true, false};
        while (line.size > 0 && strchr("\r\n", line.text[line.size - 1]))
            line.size--;
        bool separator_line = rfade_is_separator_line(&line);
        while (line.size > 0 && strchr(" \t#", line.text[0])) {
            line.text++;
            line.size--;
        }
        if (line.size > 0 && !separator_line)
            break;
        head = stop < end ? stop + 1 : end;
        line.size = 0;
    }
    if (line.size > RFADE_LINE_SIZE)
        line.size = RFADE_LINE_SIZE;
    if (line.size > 0)
        memcpy(text, line.text, line.size);
    text[line.size] = '\n';
    line.text = text;
    return line;
}

static enum rfade_status check_roles(const struct roles *roles, struct rfade_error *error)
{
    bool place = roles->columns[RFADE_ROLE_FIRST] && roles->columns[RFADE_ROLE_SECOND];
    bool level = roles->columns[RFADE_ROLE_LEVELS] || roles->columns[RFADE_ROLE_LEVELS + 1];
    if (roles->twice[0])
        return rfade_error_set(
            error, RFADE_INPUT, "say with --columns FILE.ini which column is meant",
            "the header has two columns for what '%.80s' holds", roles->twice);
    if (roles->other_unit)
        return rfade_error_set(error, RFADE_INPUT,
                               "say with --columns FILE.ini what unit the level has",
                               "the header gives the level in another unit than dBm");
    if (!roles->columns[RFADE_ROLE_TIME] || (!place && !level))
        return rfade_error_set(error, RFADE_INPUT, remedy,
                               "the header does not say enough about its columns");
    return RFADE_OK;
}

/* A column by its number; by its path where the names are a JSON record's. */
static void set_column(struct rfade_column *column, size_t number,
                       const struct rfade_header *json)
{
    if (json && number > 0)
        (void)snprintf(column->name, sizeof column->name, "$.\"%.120s\"",
                       json->names[number - 1]);
    else
        column->number = number;
}

static void fill(struct rfade_column_map *map, const struct roles *roles,
                 const struct rfade_header *json)
{
    const size_t *columns = roles->columns;
    set_column(&map->time_column, columns[RFADE_ROLE_TIME], json);
    set_column(&map->vehicle.column, columns[RFADE_ROLE_VEHICLE], json);
    set_column(&map->channel.column, columns[RFADE_ROLE_CHANNEL], json);
    set_column(&map->campaign.column, columns[RFADE_ROLE_CAMPAIGN], json);
    if (columns[RFADE_ROLE_FIRST] && columns[RFADE_ROLE_SECOND]) {
        map->position.form = RFADE_POSITION_DEGREES;
        set_column(&map->position.first, columns[RFADE_ROLE_FIRST], json);
        set_column(&map->position.second, columns[RFADE_ROLE_SECOND], json);
    }
    set_column(&map->speed_column, columns[RFADE_ROLE_SPEED], json);
    map->speed_m_s_per_unit = roles->metres ? 1 : 1000.0 / 3600;
    if (columns[RFADE_ROLE_LEVELS] == 0 && columns[RFADE_ROLE_LEVELS + 1] == 0)
        return;
    struct rfade_level_map *level = rfade_column_map_add_level(map, "");
    set_column(&level->level.column, columns[RFADE_ROLE_LEVELS], json);
    set_column(&level->snr.column, columns[RFADE_ROLE_LEVELS + 1], json);
}

enum rfade_status rfade_built_in_map(const char *head, size_t head_size,
                                     struct rfade_column_map **map, struct rfade_error *error)
{
    *map = NULL;
    struct roles roles;
    char separator = ',';
    enum rfade_status status = RFADE_NO_MEMORY;
    char *text = malloc(RFADE_LINE_SIZE + 1);
    struct rfade_column_map *made = rfade_column_map_create(map_name);
    if (!text || !made)
        goto out;
    struct rfade_line line = first_line(head, head_size, text);
    status = find_separator(&line, &separator, &roles);
    if (status == RFADE_OK)
        status = check_roles(&roles, error);
    if (status != RFADE_OK)
        goto out;
    made->file.separator = separator;
    made->file.decimal_sign = separator == ',' ? '.' : RFADE_DECIMAL_EITHER;
    made->time.decimal_sign = made->file.decimal_sign;
    made->file.header = RFADE_HEADER_LINE;
    made->file.header_line = line.number;
    fill(made, &roles, NULL);
out:
    if (status == RFADE_NO_MEMORY)
        rfade_error_no_memory(error);
    if (status == RFADE_OK)
        *map = made;
    else
        rfade_column_map_destroy(made);
    free(text);
    return status;
}

enum rfade_status rfade_built_in_json_map(const struct rfade_header *header,
                                          struct rfade_column_map **map,
                                          struct rfade_error *error)
{
    struct roles roles = {0};
    *map = NULL;
    for (size_t i = 0; i < header->count; i++)
        take_name(&roles, header->names[i], i + 1);
    enum rfade_status status = check_roles(&roles, error);
    if (status != RFADE_OK)
        return status;
    struct rfade_column_map *made = rfade_column_map_create(map_name);
    if (!made)
        return rfade_error_no_memory(error);
    made->file.format = RFADE_FORMAT_JSON;
    fill(made, &roles, header);
    *map = made;
    return RFADE_OK;
}
