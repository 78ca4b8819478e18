/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <stdbool.h>
#include <stdlib.h>
#include <string.h>

#include "analyse/whole_route.h"

static int compare_names(const struct rfade_segment_result *a,
                         const struct rfade_segment_result *b)
{
    int order = strcmp(a->route, b->route);
    if (order == 0)
        order = strcmp(a->channel, b->channel);
    return order ? order : strcmp(a->campaign, b->campaign);
}

static int compare_rows(const void *left, const void *right)
{
    const struct rfade_segment_result *a = *(struct rfade_segment_result *const *)left;
    const struct rfade_segment_result *b = *(struct rfade_segment_result *const *)right;
    int order = compare_names(a, b);
    return order ? order : (a->segment > b->segment) - (a->segment < b->segment);
}

static const struct rfade_route_span *span_of(const struct rfade_segment_results *results,
                                              const char *route)
{
    for (size_t i = 0; i < results->span_count; i++)
        if (strcmp(results->spans[i].route, route) == 0)
            return &results->spans[i];
    return NULL;
}

enum rfade_status rfade_route_groups_make(struct rfade_segment_results *results,
                                          struct rfade_route_groups *groups)
{
    size_t count = results->count;
    /* NOLINTBEGIN(bugprone-sizeof-expression): an array of pointers is what is sorted */
    *groups = (struct rfade_route_groups){
        .groups = calloc(count + 1, sizeof *groups->groups),
        .rows = calloc(count + 1, sizeof *groups->rows),
    };
    if (!groups->groups || !groups->rows) {
        rfade_route_groups_clear(groups);
        return RFADE_NO_MEMORY;
    }
    for (size_t i = 0; i < count; i++)
        groups->rows[i] = &results->rows[i];
    qsort((void *)groups->rows, count, sizeof *groups->rows, compare_rows);
    /* NOLINTEND(bugprone-sizeof-expression) */
    for (size_t i = 0; i < count; i++) {
        bool same = i > 0 && compare_names(groups->rows[i - 1], groups->rows[i]) == 0;
        if (!same)
            groups->groups[groups->count++] = (struct rfade_route_group){
                &groups->rows[i], 0, span_of(results, groups->rows[i]->route)};
        groups->groups[groups->count - 1].count++;
    }
    return RFADE_OK;
}

void rfade_route_groups_clear(struct rfade_route_groups *groups)
{
    free(groups->groups);
    free((void *)groups->rows);
    *groups = (struct rfade_route_groups){NULL, 0, NULL};
}
