/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/column_map_keys.h"

#include <string.h>

#include "ingest/file_name.h"
#include "ingest/json_path.h"
#include "ingest/map_value.h"

static bool set_separator(void *target, const char *value)
{
    static const char *const words[] = {"comma", "semicolon", "tab", "pipe", "blanks", NULL};
    static const char separators[] = {',', ';', '\t', '|', RFADE_SEPARATOR_BLANKS};
    char *separator = target;
    int word = rfade_map_word(words, value);
    if (word >= 0)
        *separator = separators[word];
    else if (strlen(value) == 1 && value[0] > ' ' && value[0] < 0x7F &&
             !strchr("\"'", value[0]))
        *separator = value[0];
    else
        return false;
    return true;
}

static bool set_file_format(void *target, const char *value)
{
    static const char *const words[] = {"delimited", "json", "nmea", "gpx", NULL};
    int word = rfade_map_word(words, value);
    if (word >= 0)
        *(enum rfade_log_format *)target = (enum rfade_log_format)word;
    return word >= 0;
}

static bool set_records(void *target, const char *value)
{
    struct rfade_json_path path;
    return rfade_map_text(target, RFADE_NAME_SIZE, value) &&
           rfade_json_path_read(target, &path);
}

static bool set_file_name(void *target, const char *value)
{
    return rfade_map_text(target, RFADE_NAME_SIZE, value) && !rfade_name_pattern_check(value);
}

static bool set_decimal(void *target, const char *value)
{
    struct rfade_column_map *map = target;
    static const char *const words[] = {"point", "comma", NULL};
    int word = rfade_map_word(words, value);
    if (word < 0)
        return false;
    map->file.decimal_sign = word == 0 ? '.' : ',';
    map->time.decimal_sign = map->file.decimal_sign;
    return true;
}

static bool set_header(void *target, const char *value)
{
    struct rfade_file_map *file = target;
    static const char *const words[] = {"yes", "no", NULL};
    int word = rfade_map_word(words, value);
    file->header = word == 0   ? RFADE_HEADER_FIRST
                   : word == 1 ? RFADE_HEADER_NONE
                               : RFADE_HEADER_LINE;
    return word >= 0 || rfade_map_count(value, 1, 1000000, &file->header_line);
}

static bool set_skip(void *target, const char *value)
{
    return rfade_map_count(value, 0, 1000000, target);
}

static bool set_comment(void *target, const char *value)
{
    char *comment = target;
    if (strcmp(value, "none") == 0)
        *comment = '\0';
    else if (strlen(value) == 1 && value[0] > ' ' && value[0] < 0x7F)
        *comment = value[0];
    else
        return false;
    return true;
}

static bool set_quote(void *target, const char *value)
{
    static const char *const words[] = {"double", "single", "none", NULL};
    int word = rfade_map_word(words, value);
    if (word >= 0)
        *(char *)target = "\"'"[word];
    return word >= 0;
}

static bool set_rows(void *target, const char *value)
{
    static const char *const words[] = {"even", "ragged", NULL};
    int word = rfade_map_word(words, value);
    *(bool *)target = word == 1;
    return word >= 0;
}

#define MAP(part) offsetof(struct rfade_column_map, part)

static const struct rfade_map_key file_keys[] = {
    {"format", set_file_format, MAP(file.format), "delimited, json, nmea or gpx"},
    {"name", set_file_name, MAP(file.name),
     "a pattern such as log-{vehicle}-{date}.csv, without folders; parts are {vehicle}, "
     "{channel}, {campaign}, {date}, {latitude}, {longitude}, {x}, {y}, each once at most; * "
     "and "
     "? stand for anything"},
    {"records", set_records, MAP(file.records),
     "the path of the records, such as $[*], $.packets[*] or $"},
    {"separator", set_separator, MAP(file.separator),
     "comma, semicolon, tab, pipe, blanks, or one character"},
    {"decimal", set_decimal, 0, "point or comma"},
    {"header", set_header, MAP(file), "yes, no, or the line number of the header"},
    {"skip", set_skip, MAP(file.skip), "a number of lines"},
    {"comment", set_comment, MAP(file.comment), "one character, or none"},
    {"quote", set_quote, MAP(file.quote), "double, single or none"},
    {"rows", set_rows, MAP(file.ragged), "even or ragged"},
};

const struct rfade_map_section rfade_map_file_section = {
    "file", sizeof file_keys / sizeof file_keys[0], file_keys};
