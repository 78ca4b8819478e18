/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file test_tally.c  Tallies add, merge and come back from bytes exactly. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdlib.h>
#include <string.h>

#include <cmocka.h>

#include "routefade/tally.h"

enum { READINGS = 500 };

/* A key that wanders over all kinds, with repeats; the multiplier is coprime to the modulus. */
static struct rfade_tally_key key_of(int i)
{
    int n = (i * 7919) % 331;
    struct rfade_tally_key key = {.kind = n % 3 == 2 ? RFADE_BELOW : RFADE_INTERVAL,
                                  .centre_cdb = 10 * (n % 97) - 400,
                                  .window_class = n % 4};
    key.step_cdb = key.kind == RFADE_INTERVAL ? 10 + 90 * (n % 2) : 0;
    return key;
}

static void add(struct rfade_tally *tally, int i, int sign)
{
    struct rfade_tally_key key = key_of(i);
    assert_int_equal(rfade_tally_add(tally, &key, sign * (1 + i % 13), sign), RFADE_OK);
}

static struct rfade_tally *tally_of(int first, int last, int step)
{
    struct rfade_tally *tally = NULL;
    assert_int_equal(rfade_tally_create(&tally), RFADE_OK);
    for (int i = first; i != last; i += step) {
        add(tally, i, 1);
    }
    return tally;
}

static void assert_same(const struct rfade_tally *a, const struct rfade_tally *b)
{
    uint8_t *bytes_a = NULL;
    uint8_t *bytes_b = NULL;
    size_t size_a = 0;
    size_t size_b = 0;
    assert_int_equal(rfade_tally_encode(a, &bytes_a, &size_a), RFADE_OK);
    assert_int_equal(rfade_tally_encode(b, &bytes_b, &size_b), RFADE_OK);
    assert_int_equal(size_a, size_b);
    assert_memory_equal(bytes_a, bytes_b, size_a);
    assert_int_equal(rfade_tally_weight(a), rfade_tally_weight(b));
    assert_int_equal(rfade_tally_readings(a), rfade_tally_readings(b));
    free(bytes_a);
    free(bytes_b);
}

static void order_does_not_matter(void **state)
{
    (void)state;
    struct rfade_tally *forward = tally_of(0, READINGS, 1);
    struct rfade_tally *backward = tally_of(READINGS - 1, -1, -1);
    assert_same(forward, backward);
    assert_int_equal(rfade_tally_readings(forward), READINGS);
    rfade_tally_destroy(forward);
    rfade_tally_destroy(backward);
}

static void merging_is_adding(void **state)
{
    (void)state;
    struct rfade_tally *whole = tally_of(0, READINGS, 1);
    struct rfade_tally *head = tally_of(0, 200, 1);
    struct rfade_tally *tail = tally_of(200, READINGS, 1);
    assert_int_equal(rfade_tally_merge(tail, head, 1), RFADE_OK);
    assert_same(whole, tail);
    rfade_tally_destroy(whole);
    rfade_tally_destroy(head);
    rfade_tally_destroy(tail);
}

static void taking_away_leaves_nothing_behind(void **state)
{
    (void)state;
    struct rfade_tally *head = tally_of(0, 200, 1);
    struct rfade_tally *tail = tally_of(200, READINGS, 1);
    struct rfade_tally *whole = tally_of(0, READINGS, 1);
    const struct rfade_tally_cell *cells = NULL;
    size_t count = 1;

    assert_int_equal(rfade_tally_merge(whole, head, -1), RFADE_OK);
    assert_same(whole, tail);
    for (int i = 200; i < READINGS; i++) {
        add(whole, i, -1);
    }
    assert_int_equal(rfade_tally_cells(whole, &cells, &count), RFADE_OK);
    assert_int_equal(count, 0);
    assert_int_equal(rfade_tally_weight(whole), 0);
    assert_int_equal(rfade_tally_merge(tail, tail, -1), RFADE_OK);
    assert_same(whole, tail);
    rfade_tally_destroy(whole);
    rfade_tally_destroy(head);
    rfade_tally_destroy(tail);
}

static void cells_come_in_key_order_with_their_sums(void **state)
{
    (void)state;
    struct rfade_tally *tally = NULL;
    const struct rfade_tally_cell *cells = NULL;
    size_t count = 0;
    const struct rfade_tally_key keys[] = {
        {100, RFADE_INTERVAL, -300, 2}, {0, RFADE_ABOVE, 900, 0},
        {0, RFADE_BELOW, -1200, 1},     {100, RFADE_INTERVAL, -400, 3},
        {10, RFADE_INTERVAL, 500, 0},   {0, RFADE_BELOW, -1200, 0}};
    const int expected[] = {5, 2, 1, 4, 3, 0}; /* by step, kind, centre, class */

    assert_int_equal(rfade_tally_create(&tally), RFADE_OK);
    for (int i = 0; i < 6; i++) {
        assert_int_equal(rfade_tally_add(tally, &keys[i], 10 + i, 1), RFADE_OK);
        assert_int_equal(rfade_tally_add(tally, &keys[i], 100, 2), RFADE_OK);
    }
    assert_int_equal(rfade_tally_cells(tally, &cells, &count), RFADE_OK);
    assert_int_equal(count, 6);
    for (int i = 0; i < 6; i++) {
        assert_memory_equal(&cells[i].key, &keys[expected[i]], sizeof keys[0]);
        assert_int_equal(cells[i].weight, 110 + expected[i]);
        assert_int_equal(cells[i].readings, 3);
    }
    rfade_tally_destroy(tally);
}

static void keys_without_meaning_are_refused(void **state)
{
    (void)state;
    struct rfade_tally *tally = tally_of(0, 10, 1);
    struct rfade_tally *before = tally_of(0, 10, 1);
    const struct rfade_tally_key wrong[] = {{-1, RFADE_INTERVAL, 0, 0},
                                            {10, RFADE_INTERVAL, 0, -1},
                                            {10, RFADE_BELOW, 0, 0},
                                            {10, RFADE_ABOVE, 0, 0},
                                            {0, 3, 0, 0},
                                            {0, -1, 0, 0}};
    for (size_t i = 0; i < sizeof wrong / sizeof *wrong; i++) {
        assert_int_equal(rfade_tally_add(tally, &wrong[i], 1, 1), RFADE_DOMAIN);
    }
    assert_int_equal(rfade_tally_merge(tally, before, 2), RFADE_DOMAIN);
    assert_same(tally, before);
    rfade_tally_destroy(tally);
    rfade_tally_destroy(before);
}

static void overflow_is_refused_and_changes_nothing(void **state)
{
    (void)state;
    const struct rfade_tally_key a = {10, RFADE_INTERVAL, 0, 0};
    const struct rfade_tally_key b = {10, RFADE_INTERVAL, 10, 0};
    struct rfade_tally *tally = NULL;
    struct rfade_tally *other = NULL;
    assert_int_equal(rfade_tally_create(&tally), RFADE_OK);
    assert_int_equal(rfade_tally_create(&other), RFADE_OK);
    assert_int_equal(rfade_tally_add(tally, &a, INT64_MAX - 5, 1), RFADE_OK);
    assert_int_equal(rfade_tally_add(other, &b, 6, 1), RFADE_OK);

    assert_int_equal(rfade_tally_add(tally, &a, 6, 1), RFADE_OVERFLOW);
    assert_int_equal(rfade_tally_add(tally, &b, 6, 1), RFADE_OVERFLOW); /* the sum of cells */
    assert_int_equal(rfade_tally_merge(tally, other, 1), RFADE_OVERFLOW);
    assert_int_equal(rfade_tally_weight(tally), INT64_MAX - 5);
    assert_int_equal(rfade_tally_readings(tally), 1);
    assert_int_equal(rfade_tally_add(tally, &a, 5, 1), RFADE_OK);
    assert_int_equal(rfade_tally_weight(tally), INT64_MAX);

    /* Minus the lowest integer has no place in 64 bits. */
    assert_int_equal(rfade_tally_add(other, &b, -6, -1), RFADE_OK);
    assert_int_equal(rfade_tally_add(other, &b, INT64_MIN, 0), RFADE_OK);
    assert_int_equal(rfade_tally_merge(tally, other, -1), RFADE_OVERFLOW);
    assert_int_equal(rfade_tally_weight(tally), INT64_MAX);
    rfade_tally_destroy(tally);
    rfade_tally_destroy(other);
}

static void bytes_give_the_same_tally(void **state)
{
    (void)state;
    struct rfade_tally *tally = tally_of(0, READINGS, 1);
    const struct rfade_tally_key far = {INT32_MAX, RFADE_INTERVAL, INT32_MIN, INT32_MAX};
    uint8_t *bytes = NULL;
    size_t size = 0;
    struct rfade_tally *read = NULL;
    assert_int_equal(rfade_tally_add(tally, &far, INT64_MIN, -3), RFADE_OK);
    assert_int_equal(rfade_tally_encode(tally, &bytes, &size), RFADE_OK);
    assert_int_equal(rfade_tally_decode(bytes, size, &read), RFADE_OK);
    assert_same(tally, read);
    rfade_tally_destroy(read);
    free(bytes);
    rfade_tally_destroy(tally);
}

/* One cell: step 10, kind 0, centre -3, class 0, weight 7, readings 1, written by hand. */
static const uint8_t ONE_CELL[] = {'T', 1, 1, 20, 0, 5, 0, 14, 2};

static void known_bytes_are_read(void **state)
{
    (void)state;
    struct rfade_tally *tally = NULL;
    const struct rfade_tally_cell *cells = NULL;
    size_t count = 0;
    assert_int_equal(rfade_tally_decode(ONE_CELL, sizeof ONE_CELL, &tally), RFADE_OK);
    assert_int_equal(rfade_tally_cells(tally, &cells, &count), RFADE_OK);
    assert_int_equal(count, 1);
    assert_int_equal(cells[0].key.step_cdb, 10);
    assert_int_equal(cells[0].key.centre_cdb, -3);
    assert_int_equal(cells[0].weight, 7);
    rfade_tally_destroy(tally);
}

static void malformed_bytes_are_refused(void **state)
{
    (void)state;
    static const struct {
        const char *what;
        size_t size;
        uint8_t bytes[24];
    } wrong[] = {
        {"nothing", 0, {0}},
        {"another mark", 9, {'B', 1, 1, 20, 0, 5, 0, 14, 2}},
        {"another version", 9, {'T', 2, 1, 20, 0, 5, 0, 14, 2}},
        {"cut short", 8, {'T', 1, 1, 20, 0, 5, 0, 14}},
        {"a byte too many", 10, {'T', 1, 1, 20, 0, 5, 0, 14, 2, 0}},
        {"count beyond the bytes", 9, {'T', 1, 2, 20, 0, 5, 0, 14, 2}},
        {"a number in a longer form", 10, {'T', 1, 1, 20, 0, 5, 0, 0x8e, 0, 2}},
        {"a number of 65 bits",
         18,
         {'T', 1, 1, 20, 0, 5, 0, 0xff, 0xff, 0xff, 0xff, 0xff, 0xff, 0xff, 0xff, 0xff, 2, 2}},
        {"a number that never ends", 20, {'T',  1,    1,    20,   0,    5,    0,
                                          0xff, 0xff, 0xff, 0xff, 0xff, 0xff, 0xff,
                                          0xff, 0xff, 0xff, 0xff, 0xff, 0xff}},
        {"a centre of more than 32 bits",
         13,
         {'T', 1, 1, 20, 0, 0xfe, 0xff, 0xff, 0xff, 0x7f, 0, 14, 2}},
        {"kind 3", 9, {'T', 1, 1, 0, 6, 5, 0, 14, 2}},
        {"a negative step", 9, {'T', 1, 1, 19, 0, 5, 0, 14, 2}},
        {"an empty cell", 9, {'T', 1, 1, 20, 0, 5, 0, 0, 0}},
        {"cells out of order", 15, {'T', 1, 2, 20, 0, 5, 0, 14, 2, 0, 0, 1, 0, 14, 2}},
        {"the same key twice", 15, {'T', 1, 2, 20, 0, 5, 0, 14, 2, 0, 0, 0, 0, 14, 2}},
    };
    for (size_t i = 0; i < sizeof wrong / sizeof *wrong; i++) {
        struct rfade_tally *tally = NULL;
        enum rfade_status status = rfade_tally_decode(wrong[i].bytes, wrong[i].size, &tally);
        if (status != RFADE_INPUT || tally != NULL) {
            fail_msg("%s: status %d", wrong[i].what, (int)status);
        }
    }
}

/* Any change of any one byte is either refused or gives bytes that come back the same. */
static void every_changed_byte_is_noticed_or_canonical(void **state)
{
    (void)state;
    struct rfade_tally *tally = tally_of(0, 60, 1);
    uint8_t *bytes = NULL;
    size_t size = 0;
    assert_int_equal(rfade_tally_encode(tally, &bytes, &size), RFADE_OK);
    for (size_t i = 0; i < size; i++) {
        uint8_t kept = bytes[i];
        for (int change = 1; change < 256; change++) {
            struct rfade_tally *read = NULL;
            bytes[i] = (uint8_t)(kept ^ change);
            if (rfade_tally_decode(bytes, size, &read) == RFADE_OK) {
                uint8_t *again = NULL;
                size_t again_size = 0;
                assert_int_equal(rfade_tally_encode(read, &again, &again_size), RFADE_OK);
                assert_int_equal(again_size, size);
                assert_memory_equal(again, bytes, size);
                free(again);
            }
            rfade_tally_destroy(read);
        }
        bytes[i] = kept;
    }
    free(bytes);
    rfade_tally_destroy(tally);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(order_does_not_matter),
        cmocka_unit_test(merging_is_adding),
        cmocka_unit_test(taking_away_leaves_nothing_behind),
        cmocka_unit_test(cells_come_in_key_order_with_their_sums),
        cmocka_unit_test(keys_without_meaning_are_refused),
        cmocka_unit_test(overflow_is_refused_and_changes_nothing),
        cmocka_unit_test(bytes_give_the_same_tally),
        cmocka_unit_test(known_bytes_are_read),
        cmocka_unit_test(malformed_bytes_are_refused),
        cmocka_unit_test(every_changed_byte_is_noticed_or_canonical),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
