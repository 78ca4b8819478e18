/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * A tally is one array of cells in key order. A stretch of road has some hundred distinct
 * keys, so that a binary search and a short move cost less than hashing and sorting later,
 * and the order that every fit needs is always there.
 */
#include "routefade/tally.h"

#include <stdbool.h>
#include <stdlib.h>
#include <string.h>

#include "tally/checked.h"
#include "tally/tally_private.h"

enum { FIRST_CAPACITY = 64 };

enum rfade_status rfade_tally_create(struct rfade_tally **tally)
{
    *tally = calloc(1, sizeof **tally);
    return *tally == NULL ? RFADE_NO_MEMORY : RFADE_OK;
}

void rfade_tally_destroy(struct rfade_tally *tally)
{
    if (tally != NULL) {
        free(tally->cells);
        free(tally);
    }
}

static int compare_int32(int32_t a, int32_t b)
{
    return (a > b) - (a < b);
}

int rfade_tally_key_compare(const struct rfade_tally_key *a, const struct rfade_tally_key *b)
{
    int order = compare_int32(a->step_cdb, b->step_cdb);
    if (order == 0) {
        order = compare_int32(a->kind, b->kind);
    }
    if (order == 0) {
        order = compare_int32(a->centre_cdb, b->centre_cdb);
    }
    return order != 0 ? order : compare_int32(a->window_class, b->window_class);
}

bool rfade_tally_key_valid(const struct rfade_tally_key *key)
{
    if (key->step_cdb < 0 || key->window_class < 0) {
        return false;
    }
    if (key->kind == RFADE_INTERVAL) {
        return true;
    }
    return (key->kind == RFADE_BELOW || key->kind == RFADE_ABOVE) && key->step_cdb == 0;
}

/* Index of the first cell whose key is not below `key`. */
static size_t find(const struct rfade_tally *tally, const struct rfade_tally_key *key)
{
    size_t low = 0;
    size_t high = tally->count;
    while (low < high) {
        size_t middle = low + (high - low) / 2;
        if (rfade_tally_key_compare(&tally->cells[middle].key, key) < 0) {
            low = middle + 1;
        } else {
            high = middle;
        }
    }
    return low;
}

static enum rfade_status insert(struct rfade_tally *tally, size_t place,
                                const struct rfade_tally_cell *cell)
{
    if (tally->count == tally->capacity) {
        size_t capacity = tally->capacity == 0 ? FIRST_CAPACITY : 2 * tally->capacity;
        struct rfade_tally_cell *cells = realloc(tally->cells, capacity * sizeof *cells);
        if (cells == NULL) {
            return RFADE_NO_MEMORY;
        }
        tally->cells = cells;
        tally->capacity = capacity;
    }
    memmove(&tally->cells[place + 1], &tally->cells[place],
            (tally->count - place) * sizeof *tally->cells);
    tally->cells[place] = *cell;
    tally->count++;
    return RFADE_OK;
}

static void take_out(struct rfade_tally *tally, size_t place)
{
    tally->count--;
    memmove(&tally->cells[place], &tally->cells[place + 1],
            (tally->count - place) * sizeof *tally->cells);
}

enum rfade_status rfade_tally_add(struct rfade_tally *tally, const struct rfade_tally_key *key,
                                  int64_t weight, int64_t readings)
{
    if (!rfade_tally_key_valid(key)) {
        return RFADE_DOMAIN;
    }
    size_t place = find(tally, key);
    bool present =
        place < tally->count && rfade_tally_key_compare(&tally->cells[place].key, key) == 0;
    struct rfade_tally_cell cell = {*key, 0, 0};
    if (present) {
        cell = tally->cells[place];
    }
    int64_t total_weight = tally->weight;
    int64_t total_readings = tally->readings;
    if (!rfade_checked_add(cell.weight, weight, &cell.weight) ||
        !rfade_checked_add(cell.readings, readings, &cell.readings) ||
        !rfade_checked_add(total_weight, weight, &total_weight) ||
        !rfade_checked_add(total_readings, readings, &total_readings)) {
        return RFADE_OVERFLOW;
    }
    bool empty = cell.weight == 0 && cell.readings == 0;
    if (present && empty) {
        take_out(tally, place);
    } else if (present) {
        tally->cells[place] = cell;
    } else if (!empty) {
        enum rfade_status status = insert(tally, place, &cell);
        if (status != RFADE_OK) {
            return status;
        }
    }
    tally->weight = total_weight;
    tally->readings = total_readings;
    return RFADE_OK;
}

/* Adds sign times `from` to `into`; false on overflow. */
static bool add_cell(struct rfade_tally_cell *into, const struct rfade_tally_cell *from,
                     int sign)
{
    int64_t weight = 0;
    int64_t readings = 0;
    return rfade_checked_multiply(from->weight, sign, &weight) &&
           rfade_checked_multiply(from->readings, sign, &readings) &&
           rfade_checked_add(into->weight, weight, &into->weight) &&
           rfade_checked_add(into->readings, readings, &into->readings);
}

/* Both arrays merged in key order into `sum`, which has room for them all. */
static bool merge_cells(const struct rfade_tally *a, const struct rfade_tally *b, int sign,
                        struct rfade_tally *sum)
{
    size_t i = 0;
    size_t j = 0;
    while (i < a->count || j < b->count) {
        int order = i == a->count ? 1
                    : j == b->count
                        ? -1
                        : rfade_tally_key_compare(&a->cells[i].key, &b->cells[j].key);
        struct rfade_tally_cell cell = {order <= 0 ? a->cells[i].key : b->cells[j].key, 0, 0};
        if (order <= 0 && !add_cell(&cell, &a->cells[i++], 1)) {
            return false;
        }
        if (order >= 0 && !add_cell(&cell, &b->cells[j++], sign)) {
            return false;
        }
        if (cell.weight != 0 || cell.readings != 0) {
            sum->cells[sum->count++] = cell;
        }
    }
    return true;
}

enum rfade_status rfade_tally_merge(struct rfade_tally *tally, const struct rfade_tally *other,
                                    int sign)
{
    if (sign != 1 && sign != -1) {
        return RFADE_DOMAIN;
    }
    struct rfade_tally_cell total = {{0, 0, 0, 0}, tally->weight, tally->readings};
    const struct rfade_tally_cell more = {{0, 0, 0, 0}, other->weight, other->readings};
    if (!add_cell(&total, &more, sign)) {
        return RFADE_OVERFLOW;
    }
    struct rfade_tally sum = {.capacity = tally->count + other->count,
                              .weight = total.weight,
                              .readings = total.readings};
    if (sum.capacity == 0) {
        return RFADE_OK;
    }
    sum.cells = malloc(sum.capacity * sizeof *sum.cells);
    if (sum.cells == NULL) {
        return RFADE_NO_MEMORY;
    }
    if (!merge_cells(tally, other, sign, &sum)) {
        free(sum.cells);
        return RFADE_OVERFLOW;
    }
    free(tally->cells);
    *tally = sum;
    return RFADE_OK;
}

int64_t rfade_tally_weight(const struct rfade_tally *tally)
{
    return tally->weight;
}

int64_t rfade_tally_readings(const struct rfade_tally *tally)
{
    return tally->readings;
}

enum rfade_status rfade_tally_cells(const struct rfade_tally *tally,
                                    const struct rfade_tally_cell **cells, size_t *count)
{
    *cells = tally->cells;
    *count = tally->count;
    return RFADE_OK;
}
