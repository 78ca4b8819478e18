/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "route/candidate.h"

#include <math.h>
#include <stdbool.h>
#include <stdint.h>
#include <stdlib.h>

struct square_leg {
    uint64_t square;
    uint32_t leg;
};

struct rfade_leg_index {
    const struct rfade_leg *legs;
    size_t leg_count;
    struct rfade_plane *planes; /* one a leg, touching at its start */
    struct rfade_plane grid;    /* squares are counted from here */
    double corridor_m;
    double square_m;
    struct square_leg *entries; /* by square, then leg */
    size_t entry_count;
    size_t entry_capacity;
};

void rfade_leg_index_destroy(struct rfade_leg_index *index)
{
    if (!index)
        return;
    free(index->planes);
    free(index->entries);
    free(index);
}

static uint64_t square_key(int64_t column, int64_t row)
{
    return ((uint64_t)(uint32_t)(int32_t)row << 32) | (uint32_t)(int32_t)column;
}

static int by_square_and_leg(const void *left, const void *right)
{
    const struct square_leg *a = left;
    const struct square_leg *b = right;
    if (a->square != b->square)
        return a->square < b->square ? -1 : 1;
    return a->leg < b->leg ? -1 : a->leg > b->leg;
}

static bool add_entry(struct rfade_leg_index *index, uint64_t square, uint32_t leg)
{
    if (index->entry_count == index->entry_capacity) {
        size_t capacity = index->entry_capacity ? index->entry_capacity * 2 : 256;
        struct square_leg *grown = realloc(index->entries, capacity * sizeof *grown);
        if (!grown)
            return false;
        index->entries = grown;
        index->entry_capacity = capacity;
    }
    index->entries[index->entry_count++] = (struct square_leg){square, leg};
    return true;
}

/* Enters a leg in every square that its box, widened by the corridor, touches. The grid's
 * scale from east to west is only right at its origin's latitude: the widening is doubled. */
static bool enter_leg(struct rfade_leg_index *index, uint32_t leg)
{
    struct rfade_offset from = rfade_plane_offset(&index->grid, &index->legs[leg].from);
    struct rfade_offset to = rfade_plane_offset(&index->grid, &index->legs[leg].to);
    double wide_m = 2 * index->corridor_m;
    int64_t columns[] = {
        (int64_t)floor((fmin(from.east_m, to.east_m) - wide_m) / index->square_m),
        (int64_t)floor((fmax(from.east_m, to.east_m) + wide_m) / index->square_m)};
    int64_t rows[] = {
        (int64_t)floor((fmin(from.north_m, to.north_m) - wide_m) / index->square_m),
        (int64_t)floor((fmax(from.north_m, to.north_m) + wide_m) / index->square_m)};
    for (int64_t row = rows[0]; row <= rows[1]; row++)
        for (int64_t column = columns[0]; column <= columns[1]; column++)
            if (!add_entry(index, square_key(column, row), leg))
                return false;
    return true;
}

struct rfade_leg_index *rfade_leg_index_create(const struct rfade_route *route,
                                               double corridor_m)
{
    size_t count = 0;
    struct rfade_leg_index *index = calloc(1, sizeof *index);
    if (!index)
        return NULL;
    index->legs = rfade_route_legs(route, &count);
    index->leg_count = count;
    index->corridor_m = corridor_m;
    index->square_m = fmax(250, 4 * corridor_m);
    index->grid = rfade_plane_at(&index->legs[count / 2].from);
    index->planes = calloc(count, sizeof *index->planes);
    bool complete = index->planes != NULL;
    for (size_t leg = 0; complete && leg < count; leg++) {
        index->planes[leg] = rfade_plane_at(&index->legs[leg].from);
        complete = enter_leg(index, (uint32_t)leg);
    }
    if (!complete) {
        rfade_leg_index_destroy(index);
        return NULL;
    }
    if (index->entry_count > 1)
        qsort(index->entries, index->entry_count, sizeof *index->entries, by_square_and_leg);
    return index;
}

/* The first entry of a square, or the place where it would stand. */
static size_t find_square(const struct rfade_leg_index *index, uint64_t square)
{
    size_t low = 0;
    size_t high = index->entry_count;
    while (low < high) {
        size_t middle = (low + high) / 2;
        if (index->entries[middle].square < square)
            low = middle + 1;
        else
            high = middle;
    }
    return low;
}

/* Where the point of a leg that is nearest to a place lies on it. */
enum foot { FOOT_START, FOOT_INSIDE, FOOT_END };

static enum foot project(const struct rfade_leg_index *index, uint32_t number,
                         const struct rfade_place *place, struct rfade_candidate *nearest)
{
    const struct rfade_leg *leg = &index->legs[number];
    struct rfade_offset end = rfade_plane_offset(&index->planes[number], &leg->to);
    struct rfade_offset at = rfade_plane_offset(&index->planes[number], place);
    double length2 = end.east_m * end.east_m + end.north_m * end.north_m;
    double along = (at.east_m * end.east_m + at.north_m * end.north_m) / length2;
    enum foot foot = along <= 0 ? FOOT_START : along >= 1 ? FOOT_END : FOOT_INSIDE;
    along = fmin(fmax(along, 0), 1);
    nearest->chainage_m = leg->from_m + along * (leg->to_m - leg->from_m);
    nearest->offset_m = hypot(at.east_m - along * end.east_m, at.north_m - along * end.north_m);
    return foot;
}

/* Room for one more: if there is none, the furthest off goes, if it is further off. */
static size_t keep_candidate(struct rfade_candidate *candidates, size_t count,
                             const struct rfade_candidate *candidate)
{
    if (count < RFADE_CANDIDATES_MAX) {
        candidates[count] = *candidate;
        return count + 1;
    }
    size_t furthest = 0;
    for (size_t i = 1; i < count; i++)
        if (candidates[i].offset_m > candidates[furthest].offset_m)
            furthest = i;
    if (candidates[furthest].offset_m <= candidate->offset_m)
        return count;
    for (size_t i = furthest; i + 1 < count; i++)
        candidates[i] = candidates[i + 1];
    candidates[count - 1] = *candidate;
    return count;
}

size_t rfade_candidates(const struct rfade_leg_index *index, const struct rfade_place *place,
                        struct rfade_candidate candidates[RFADE_CANDIDATES_MAX])
{
    struct rfade_offset at = rfade_plane_offset(&index->grid, place);
    uint64_t square = square_key((int64_t)floor(at.east_m / index->square_m),
                                 (int64_t)floor(at.north_m / index->square_m));
    size_t count = 0;
    uint32_t ended = UINT32_MAX; /* the leg whose end was the nearest of it */
    for (size_t i = find_square(index, square);
         i < index->entry_count && index->entries[i].square == square; i++) {
        uint32_t leg = index->entries[i].leg;
        struct rfade_candidate here;
        enum foot foot = project(index, leg, place, &here);
        if (!(here.offset_m <= index->corridor_m))
            continue;
        /* The end of a leg is nearest only if the next one's start is, too. */
        bool corner = foot == FOOT_START && (leg == 0 || ended == leg - 1);
        bool line_end = foot == FOOT_END && leg + 1 == index->leg_count;
        if (foot == FOOT_INSIDE || corner || line_end)
            count = keep_candidate(candidates, count, &here);
        ended = foot == FOOT_END ? leg : UINT32_MAX;
    }
    return count;
}
