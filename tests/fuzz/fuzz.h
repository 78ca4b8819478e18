/* SPDX-License-Identifier: GPL-3.0-or-later */
/** @file fuzz.h  What every fuzz target is: one function that takes any bytes. */
#ifndef ROUTEFADE_TESTS_FUZZ_FUZZ_H
#define ROUTEFADE_TESTS_FUZZ_FUZZ_H

#include <stddef.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>

/** Name given by libFuzzer. */
int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size);

/** What must hold whatever the input is. */
#define FUZZ_REQUIRE(condition)                                                                \
    do {                                                                                       \
        if (!(condition)) {                                                                    \
            (void)fprintf(stderr, "%s:%d: %s does not hold\n", __FILE__, __LINE__,             \
                          #condition);                                                         \
            abort();                                                                           \
        }                                                                                      \
    } while (0)

#endif
