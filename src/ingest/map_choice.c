/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/map_choice.h"

#include <stdlib.h>
#include <string.h>

#include "ingest/built_in_map.h"
#include "ingest/file_name.h"
#include "ingest/json.h"
#include "ingest/map_of_file.h"

/* A file's first bytes. */
struct head {
    const char *name; /* the file's, without folders */
    enum rfade_log_format format;
    const char *bytes;
    size_t size;
    bool whole;
};

void rfade_map_choice_clear(struct rfade_map_choice *choice)
{
    rfade_column_map_destroy(choice->own);
    free(choice->layout);
    *choice = (struct rfade_map_choice){0};
}

/* Lays the choice's map over the first bytes: how many of its columns are there. */
static enum rfade_status fit(const struct head *head, struct rfade_map_choice *choice,
                             size_t *columns, struct rfade_error *error)
{
    *columns = 0;
    if (rfade_format_is_positions(head->format))
        return RFADE_OK;
    if (head->format == RFADE_FORMAT_JSON)
        return rfade_json_fit(choice->map, head->bytes, head->size, columns, error);
    enum rfade_status status = rfade_layout_create(choice->map, head->bytes, head->size,
                                                   head->whole, &choice->layout, error);
    if (status == RFADE_OK)
        *columns = choice->layout->column_count;
    return status;
}

/* A map by itself, with what the file's name says. Clear the choice either way. */
static enum rfade_status try_map(const struct rfade_column_map *map, const struct head *head,
                                 struct rfade_map_choice *choice, size_t *columns,
                                 struct rfade_error *error)
{
    struct rfade_name_parts parts;
    const char *pattern = map->file.name;
    enum rfade_status status = RFADE_OK;
    *choice = (struct rfade_map_choice){.map = map};
    if (pattern[0] && !rfade_name_match(pattern, head->name, &parts))
        return rfade_error_set(error, RFADE_INPUT, "check `name` in the map's [file] section",
                               "the file's name is not like '%.100s' of %s", pattern,
                               map->name);
    if (pattern[0])
        status = rfade_map_of_file(map, &parts, &choice->own, error);
    if (choice->own)
        choice->map = choice->own;
    return status == RFADE_OK ? fit(head, choice, columns, error) : status;
}

/* Of the maps that fit, the one with most columns. RFADE_OK without a map if none fits: the
 * error is that of the first then. */
static enum rfade_status choose_given(const struct rfade_column_map *const *maps,
                                      size_t map_count, const struct head *head,
                                      struct rfade_map_choice *choice, bool *any,
                                      struct rfade_error *error)
{
    const struct rfade_column_map *best = NULL;
    const char *rival = NULL;
    size_t most = 0;
    size_t columns = 0;
    for (size_t i = 0; i < map_count; i++) {
        struct rfade_map_choice tried;
        struct rfade_error misfit;
        if (maps[i]->file.format != head->format)
            continue;
        enum rfade_status status = try_map(maps[i], head, &tried, &columns, &misfit);
        rfade_map_choice_clear(&tried);
        if (status != RFADE_OK && !*any)
            rfade_error_set(error, status, misfit.remedy, "%s%s",
                            map_count > 1 ? "none of the column maps fits: " : "", misfit.what);
        *any = true;
        if (status != RFADE_OK && status != RFADE_INPUT)
            return status;
        if (status != RFADE_OK || (best && columns < most))
            continue;
        rival = best && columns == most ? maps[i]->name : NULL;
        best = rival ? best : maps[i];
        most = columns;
    }
    if (rival)
        return rfade_error_set(error, RFADE_INPUT, "import the file with one of them alone",
                               "two column maps fit equally well: %s and %s", best->name,
                               rival);
    return best ? try_map(best, head, choice, &columns, error) : RFADE_OK;
}

static enum rfade_status choose_built_in(const struct head *head,
                                         struct rfade_map_choice *choice,
                                         struct rfade_error *error)
{
    size_t columns = 0;
    if (rfade_format_is_positions(head->format)) {
        choice->map = choice->own = rfade_column_map_create("no column map");
        if (!choice->own)
            return rfade_error_no_memory(error);
        choice->own->file.format = head->format;
        return RFADE_OK;
    }
    enum rfade_status status =
        head->format == RFADE_FORMAT_JSON
            ? rfade_json_built_in(head->bytes, head->size, &choice->own, error)
            : rfade_built_in_map(head->bytes, head->size, &choice->own, error);
    choice->map = choice->own;
    if (status == RFADE_OK)
        status = fit(head, choice, &columns, error);
    return status;
}

enum rfade_status rfade_map_choose(const struct rfade_column_map *const *maps, size_t map_count,
                                   const char *path, enum rfade_log_format format,
                                   const char *bytes, size_t size, bool whole,
                                   struct rfade_map_choice *choice, struct rfade_error *error)
{
    const char *slash = strrchr(path, '/');
    const struct head head = {slash ? slash + 1 : path, format, bytes, size, whole};
    bool any = false; /* of the maps is for this format */
    enum rfade_status status = choose_given(maps, map_count, &head, choice, &any, error);
    if (status != RFADE_OK || choice->map)
        return status;
    struct rfade_error unsaid;
    status = choose_built_in(&head, choice, &unsaid);
    /* A map that was given explains more than the one that was only tried. */
    if (status != RFADE_OK && error && (!any || status == RFADE_NO_MEMORY))
        *error = unsaid;
    return status;
}
