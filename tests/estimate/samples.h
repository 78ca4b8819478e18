/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file samples.h  Reads the reference tables of maximum likelihood and their samples. */
#ifndef ROUTEFADE_TESTS_SAMPLES_H
#define ROUTEFADE_TESTS_SAMPLES_H

#include <stddef.h>

enum { SAMPLE_FIELD_LENGTH = 64, SAMPLE_FIELDS = 12 };

/** First column of tests/reference/samples/NAME.txt; free() it. Fails the test if absent. */
double *sample_read(const char *name, size_t *count);

/** One row of a tab separated table. */
struct reference_row {
    char field[SAMPLE_FIELDS][SAMPLE_FIELD_LENGTH];
};

/**
 * The rows of tests/reference/NAME after comments and the header line; free() them. Fails
 * the test if there is none.
 */
struct reference_row *reference_read(const char *name, size_t *count);

/** A field as a number; NaN for "-". */
double reference_number(const struct reference_row *row, int field);

#endif
