/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "ingest/map_choice.h"

#include <stdlib.h>

#include "ingest/built_in_map.h"
#include "ingest/json.h"

/* A file's first bytes. */
struct head {
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

/* Lays a map over the first bytes: how many of its columns are there. */
static enum rfade_status fit(const struct rfade_column_map *map, const struct head *head,
                             struct rfade_layout **layout, size_t *columns,
                             struct rfade_error *error)
{
    *layout = NULL;
    *columns = 0;
    if (rfade_format_is_positions(head->format))
        return RFADE_OK;
    if (head->format == RFADE_FORMAT_JSON)
        return rfade_json_fit(map, head->bytes, head->size, columns, error);
    enum rfade_status status =
        rfade_layout_create(map, head->bytes, head->size, head->whole, layout, error);
    if (status == RFADE_OK)
        *columns = (*layout)->column_count;
    return status;
}

/* Of the maps that fit, the one with most columns. RFADE_OK without a map if none fits: the
 * error is that of the first then. */
static enum rfade_status choose_given(const struct rfade_column_map *const *maps,
                                      size_t map_count, const struct head *head,
                                      struct rfade_map_choice *choice, bool *any,
                                      struct rfade_error *error)
{
    const struct rfade_column_map *rival = NULL;
    size_t most = 0;
    for (size_t i = 0; i < map_count; i++) {
        struct rfade_layout *layout = NULL;
        struct rfade_error misfit;
        size_t columns = 0;
        if (maps[i]->file.format != head->format)
            continue;
        enum rfade_status status = fit(maps[i], head, &layout, &columns, &misfit);
        if (status != RFADE_OK && !*any)
            rfade_error_set(error, status, misfit.remedy, "%s%s",
                            map_count > 1 ? "none of the column maps fits: " : "", misfit.what);
        *any = true;
        if (status != RFADE_OK && status != RFADE_INPUT)
            return status;
        if (status != RFADE_OK)
            continue;
        if (choice->map && columns == most)
            rival = maps[i];
        if (choice->map && columns <= most) {
            free(layout);
            continue;
        }
        free(choice->layout);
        choice->map = maps[i];
        choice->layout = layout;
        most = columns;
        rival = NULL;
    }
    if (rival)
        return rfade_error_set(error, RFADE_INPUT, "import the file with one of them alone",
                               "two column maps fit equally well: %s and %s", choice->map->name,
                               rival->name);
    return RFADE_OK;
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
        status = fit(choice->map, head, &choice->layout, &columns, error);
    return status;
}

enum rfade_status rfade_map_choose(const struct rfade_column_map *const *maps, size_t map_count,
                                   enum rfade_log_format format, const char *bytes, size_t size,
                                   bool whole, struct rfade_map_choice *choice,
                                   struct rfade_error *error)
{
    const struct head head = {format, bytes, size, whole};
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
