/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file test_blocks.c  Block products against sums worked out from their definition. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include <cmocka.h>

#include "routefade/tally.h"

enum { BLOCKS = 7 };

/* Few bins a block, one block empty, as along a road. */
static void make_weights(int64_t weights[BLOCKS][RFADE_COARSE_BINS], int seed)
{
    for (int b = 0; b < BLOCKS; b++) {
        for (int i = 0; i < RFADE_COARSE_BINS; i++) {
            int n = (37 * b + 11 * i + seed) % 23;
            weights[b][i] = b == 3 || n > 9 ? 0 : n;
        }
    }
}

static void coarse_bins_cover_every_level(void **state)
{
    (void)state;
    assert_int_equal(rfade_coarse_bin(-1e300), 0);
    assert_int_equal(rfade_coarse_bin(1e300), RFADE_COARSE_BINS - 1);
    for (int i = 0; i < RFADE_COARSE_BINS - 1; i++) {
        double edge_db = rfade_coarse_edges_db[i];
        assert_int_equal(rfade_coarse_bin(edge_db), i);
        assert_int_equal(rfade_coarse_bin(edge_db + 1e-9), i + 1);
        assert_true(i == 0 || edge_db > rfade_coarse_edges_db[i - 1]);
    }
    assert_true(rfade_coarse_edges_db[0] == -30);
}

static void products_follow_their_definition(void **state)
{
    (void)state;
    int64_t weights[BLOCKS][RFADE_COARSE_BINS];
    struct rfade_blocks blocks;
    memset(&blocks, 0, sizeof blocks);
    make_weights(weights, 5);
    assert_int_equal(
        rfade_blocks_add(&blocks, (const int64_t(*)[RFADE_COARSE_BINS])weights, BLOCKS),
        RFADE_OK);
    assert_int_equal(blocks.blocks, BLOCKS - 1);
    for (int i = 0; i < RFADE_COARSE_BINS; i++) {
        int64_t total = 0;
        for (int b = 0; b < BLOCKS; b++) {
            total += weights[b][i];
        }
        assert_int_equal(blocks.total[i], total);
        for (int j = 0; j < RFADE_COARSE_BINS; j++) {
            int64_t lag[3] = {0, 0, 0};
            for (int b = 0; b < BLOCKS; b++) {
                for (int d = 0; d < 3 && b + d < BLOCKS; d++) {
                    lag[d] += weights[b][i] * weights[b + d][j];
                }
            }
            assert_int_equal(blocks.same[i][j], lag[0]);
            assert_int_equal(blocks.next[i][j], lag[1]);
            assert_int_equal(blocks.second[i][j], lag[2]);
        }
    }
}

static struct rfade_blocks blocks_of(int seed)
{
    int64_t weights[BLOCKS][RFADE_COARSE_BINS];
    struct rfade_blocks blocks;
    memset(&blocks, 0, sizeof blocks);
    make_weights(weights, seed);
    assert_int_equal(
        rfade_blocks_add(&blocks, (const int64_t(*)[RFADE_COARSE_BINS])weights, BLOCKS),
        RFADE_OK);
    assert_int_equal(rfade_blocks_add_reading(&blocks, seed, 3), RFADE_OK);
    return blocks;
}

static void merging_and_taking_away_are_exact(void **state)
{
    (void)state;
    const struct rfade_blocks first = blocks_of(1);
    const struct rfade_blocks second = blocks_of(2);
    struct rfade_blocks sum = first;
    struct rfade_blocks other = second;
    assert_int_equal(first.square[1], 9);
    assert_int_equal(rfade_blocks_merge(&sum, &second, 1), RFADE_OK);
    assert_int_equal(rfade_blocks_merge(&other, &first, 1), RFADE_OK);
    assert_memory_equal(&sum, &other, sizeof sum);
    assert_int_equal(rfade_blocks_merge(&sum, &second, -1), RFADE_OK);
    assert_memory_equal(&sum, &first, sizeof sum);
    assert_int_equal(rfade_blocks_merge(&sum, &second, 0), RFADE_DOMAIN);
}

static void overflow_is_refused_and_changes_nothing(void **state)
{
    (void)state;
    int64_t weights[1][RFADE_COARSE_BINS] = {{0}};
    struct rfade_blocks blocks = blocks_of(1);
    const struct rfade_blocks before = blocks;
    struct rfade_blocks large = blocks_of(2);
    weights[0][4] = INT64_C(1) << 32;
    assert_int_equal(rfade_blocks_add(&blocks, (const int64_t(*)[RFADE_COARSE_BINS])weights, 1),
                     RFADE_OVERFLOW);
    large.second[23][23] = INT64_MAX;
    blocks.second[23][23] = 1;
    assert_int_equal(rfade_blocks_merge(&blocks, &large, 1), RFADE_OVERFLOW);
    blocks.second[23][23] = before.second[23][23];
    assert_int_equal(rfade_blocks_add_reading(&blocks, 0, INT64_C(1) << 32), RFADE_OVERFLOW);
    assert_int_equal(rfade_blocks_add_reading(&blocks, RFADE_COARSE_BINS, 1), RFADE_DOMAIN);
    assert_int_equal(rfade_blocks_add_reading(&blocks, -1, 1), RFADE_DOMAIN);
    assert_memory_equal(&blocks, &before, sizeof blocks);
}

static void bytes_give_the_same_blocks(void **state)
{
    (void)state;
    struct rfade_blocks blocks = blocks_of(3);
    struct rfade_blocks read;
    uint8_t *bytes = NULL;
    size_t size = 0;
    blocks.next[0][0] = INT64_MIN;
    blocks.second[23][23] = INT64_MAX;
    assert_int_equal(rfade_blocks_encode(&blocks, &bytes, &size), RFADE_OK);
    assert_int_equal(rfade_blocks_decode(bytes, size, &read), RFADE_OK);
    assert_memory_equal(&read, &blocks, sizeof read);
    free(bytes);
}

static void malformed_bytes_are_refused(void **state)
{
    (void)state;
    /* All 1777 numbers are 0: one 0 and 1776 (0xf0 0x0d) more. */
    const uint8_t empty[] = {'B', 1, 0, 0xf0, 0x0d};
    const uint8_t one_too_many[] = {'B', 1, 0, 0xf1, 0x0d};
    const uint8_t one_too_few[] = {'B', 1, 0, 0xef, 0x0d};
    const uint8_t split_run[] = {'B', 1, 0, 0, 0, 0xef, 0x0d};
    const uint8_t trailing[] = {'B', 1, 0, 0xf0, 0x0d, 0};
    const uint8_t mark[] = {'T', 1, 0, 0xf0, 0x0d};
    const uint8_t version[] = {'B', 2, 0, 0xf0, 0x0d};
    /* same[0][1] = 1 without same[1][0]: 50 zeros, the 1, 1726 zeros. */
    const uint8_t lopsided[] = {'B', 1, 0, 49, 2, 0, 0xbd, 0x0d};
    const struct {
        const uint8_t *bytes;
        size_t size;
    } wrong[] = {{one_too_many, sizeof one_too_many},
                 {one_too_few, sizeof one_too_few},
                 {split_run, sizeof split_run},
                 {trailing, sizeof trailing},
                 {mark, sizeof mark},
                 {version, sizeof version},
                 {lopsided, sizeof lopsided},
                 {empty, 0},
                 {empty, sizeof empty - 1}};
    struct rfade_blocks blocks;
    struct rfade_blocks zero;
    memset(&zero, 0, sizeof zero);
    assert_int_equal(rfade_blocks_decode(empty, sizeof empty, &blocks), RFADE_OK);
    for (size_t i = 0; i < sizeof wrong / sizeof *wrong; i++) {
        blocks = blocks_of(1);
        assert_int_equal(rfade_blocks_decode(wrong[i].bytes, wrong[i].size, &blocks),
                         RFADE_INPUT);
        assert_memory_equal(&blocks, &zero, sizeof zero);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(coarse_bins_cover_every_level),
        cmocka_unit_test(products_follow_their_definition),
        cmocka_unit_test(merging_and_taking_away_are_exact),
        cmocka_unit_test(overflow_is_refused_and_changes_nothing),
        cmocka_unit_test(bytes_give_the_same_blocks),
        cmocka_unit_test(malformed_bytes_are_refused),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
