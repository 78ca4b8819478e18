/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "routefade/tally.h"

#include <stdbool.h>

#include "tally/blocks_private.h"
#include "tally/checked.h"

/*
 * About 1 dB where most readings of a fading signal lie and scores bend most; wider in the
 * deep fades, where a score is nearly a function of the level in dB and readings are few.
 */
const double rfade_coarse_edges_db[RFADE_COARSE_BINS - 1] = {
    -30, -24, -20, -17, -14, -12, -10, -8, -7, -6,  -5, -4,
    -3,  -2,  -1,  0,   1,   2,   3,   4,  5,  6.5, 8};

int rfade_coarse_bin(double level_db)
{
    int bin = 0;
    while (bin < RFADE_COARSE_BINS - 1 && level_db > rfade_coarse_edges_db[bin]) {
        bin++;
    }
    return bin;
}

int64_t *rfade_blocks_number(struct rfade_blocks *blocks, size_t index)
{
    if (index == 0) {
        return &blocks->blocks;
    }
    index--;
    int64_t *vectors[] = {blocks->total, blocks->square};
    for (size_t i = 0; i < sizeof vectors / sizeof *vectors; i++) {
        if (index < RFADE_COARSE_BINS) {
            return &vectors[i][index];
        }
        index -= RFADE_COARSE_BINS;
    }
    int64_t(*tables[])[RFADE_COARSE_BINS] = {blocks->same, blocks->next, blocks->second};
    size_t cells = (size_t)RFADE_COARSE_BINS * RFADE_COARSE_BINS;
    size_t cell = index % cells;
    return &tables[index / cells][cell / RFADE_COARSE_BINS][cell % RFADE_COARSE_BINS];
}

enum rfade_status rfade_blocks_merge(struct rfade_blocks *blocks,
                                     const struct rfade_blocks *other, int sign)
{
    if (sign != 1 && sign != -1) {
        return RFADE_DOMAIN;
    }
    struct rfade_blocks sum = *blocks;
    struct rfade_blocks more = *other;
    for (size_t i = 0; i < RFADE_BLOCKS_NUMBERS; i++) {
        int64_t *number = rfade_blocks_number(&sum, i);
        int64_t part = 0;
        if (!rfade_checked_multiply(*rfade_blocks_number(&more, i), sign, &part) ||
            !rfade_checked_add(*number, part, number)) {
            return RFADE_OVERFLOW;
        }
    }
    *blocks = sum;
    return RFADE_OK;
}

/* Adds the products of two blocks' weights to a table. */
static bool add_products(int64_t table[RFADE_COARSE_BINS][RFADE_COARSE_BINS],
                         const int64_t first[RFADE_COARSE_BINS],
                         const int64_t later[RFADE_COARSE_BINS])
{
    for (int i = 0; i < RFADE_COARSE_BINS; i++) {
        for (int j = 0; first[i] != 0 && j < RFADE_COARSE_BINS; j++) {
            int64_t product = 0;
            if (!rfade_checked_multiply(first[i], later[j], &product) ||
                !rfade_checked_add(table[i][j], product, &table[i][j])) {
                return false;
            }
        }
    }
    return true;
}

static bool add_total(struct rfade_blocks *blocks, const int64_t weights[RFADE_COARSE_BINS])
{
    bool any = false;
    for (int i = 0; i < RFADE_COARSE_BINS; i++) {
        any = any || weights[i] != 0;
        if (!rfade_checked_add(blocks->total[i], weights[i], &blocks->total[i])) {
            return false;
        }
    }
    return rfade_checked_add(blocks->blocks, any ? 1 : 0, &blocks->blocks);
}

enum rfade_status rfade_blocks_add(struct rfade_blocks *blocks,
                                   const int64_t (*weights)[RFADE_COARSE_BINS],
                                   size_t block_count)
{
    struct rfade_blocks sum = *blocks;
    for (size_t b = 0; b < block_count; b++) {
        if (!add_total(&sum, weights[b]) || !add_products(sum.same, weights[b], weights[b]) ||
            (b + 1 < block_count && !add_products(sum.next, weights[b], weights[b + 1])) ||
            (b + 2 < block_count && !add_products(sum.second, weights[b], weights[b + 2]))) {
            return RFADE_OVERFLOW;
        }
    }
    *blocks = sum;
    return RFADE_OK;
}

enum rfade_status rfade_blocks_add_reading(struct rfade_blocks *blocks, int bin, int64_t weight)
{
    int64_t square = 0;
    if (bin < 0 || bin >= RFADE_COARSE_BINS) {
        return RFADE_DOMAIN;
    }
    if (!rfade_checked_multiply(weight, weight, &square) ||
        !rfade_checked_add(blocks->square[bin], square, &blocks->square[bin])) {
        return RFADE_OVERFLOW;
    }
    return RFADE_OK;
}
