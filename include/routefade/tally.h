/* SPDX-License-Identifier: GPL-3.0-or-later */
/**
 * @file tally.h  Counts of level intervals: what every fit runs on.
 *
 * Everything in a tally is an integer, so adding, merging and taking away are exact and do
 * not depend on order. A weight is travel in millimetres in the survey (a vehicle that
 * stands still adds nothing) and 1 a reading for a plain column.
 */
#ifndef ROUTEFADE_TALLY_H
#define ROUTEFADE_TALLY_H

#include <stddef.h>
#include <stdint.h>

#include "routefade/status.h"

#ifdef __cplusplus
extern "C" {
#endif

enum rfade_tally_kind {
    RFADE_INTERVAL = 0, /**< level within step/2 of the centre */
    RFADE_BELOW = 1,    /**< level below the centre (censored at the receiver's floor) */
    RFADE_ABOVE = 2     /**< level above the centre (censored at its ceiling) */
};

/** One kind of reading. Levels in centi-dB: 100 is 1 dB. */
struct rfade_tally_key {
    int32_t step_cdb;     /**< width of the interval; 0 for kinds below and above */
    int32_t kind;         /**< enum rfade_tally_kind */
    int32_t centre_cdb;   /**< centre, or the bound of a censored reading */
    int32_t window_class; /**< log2 class of independent readings in the window, 0: no window */
};

struct rfade_tally_cell {
    struct rfade_tally_key key;
    int64_t weight;
    int64_t readings;
};

struct rfade_tally; /* opaque */

RFADE_API enum rfade_status rfade_tally_create(struct rfade_tally **tally);
RFADE_API void rfade_tally_destroy(struct rfade_tally *tally); /* NULL is harmless */

/**
 * Adds (or, with negative numbers, takes away). RFADE_OVERFLOW and RFADE_DOMAIN (a key with a
 * negative step or class, an unknown kind, or a censored one with a step) leave the tally as
 * it was.
 */
RFADE_API enum rfade_status rfade_tally_add(struct rfade_tally *tally,
                                            const struct rfade_tally_key *key, int64_t weight,
                                            int64_t readings);

/** Adds sign (1 or -1) times `other`. RFADE_OVERFLOW leaves the tally as it was. */
RFADE_API enum rfade_status rfade_tally_merge(struct rfade_tally *tally,
                                              const struct rfade_tally *other, int sign);

RFADE_API int64_t rfade_tally_weight(const struct rfade_tally *tally);
RFADE_API int64_t rfade_tally_readings(const struct rfade_tally *tally);

/**
 * Cells in key order (step, kind, centre, class), zero cells left out.
 * @param[out] cells borrowed: valid until the tally is next changed or destroyed.
 */
RFADE_API enum rfade_status rfade_tally_cells(const struct rfade_tally *tally,
                                              const struct rfade_tally_cell **cells,
                                              size_t *count);

/**
 * A compact byte form (documented in tally_codec.c), independent of the machine's byte order;
 * equal tallies give equal bytes. free() it.
 */
RFADE_API enum rfade_status rfade_tally_encode(const struct rfade_tally *tally, uint8_t **bytes,
                                               size_t *size);

/** RFADE_INPUT for any bytes that encoding doesn't give; *tally is NULL on failure. */
RFADE_API enum rfade_status rfade_tally_decode(const uint8_t *bytes, size_t size,
                                               struct rfade_tally **tally);

/**
 * Products of coarse-bin weights by block of travel: from them follows the variance of any
 * score that is a function of the fast fading, whatever the correlation. For bins i, j:
 * same[i][j] = sum over blocks b of w_b(i) w_b(j); next[i][j] = sum of w_b(i) w_{b+1}(j);
 * second[i][j] = sum of w_b(i) w_{b+2}(j). Sums of integers: blocks add over traversals.
 */
enum { RFADE_COARSE_BINS = 24 };

/** Upper edges of all but the last coarse bin, dB about the local mean, ascending. */
RFADE_API extern const double rfade_coarse_edges_db[RFADE_COARSE_BINS - 1];

/**
 * The coarse bin that holds a level (dB about the local mean): bin i is (edge[i-1], edge[i]].
 * Censored readings are counted in the first bin, or the last.
 */
RFADE_API int rfade_coarse_bin(double level_db);

struct rfade_blocks {
    int64_t blocks;                    /**< blocks with any weight */
    int64_t total[RFADE_COARSE_BINS];  /**< weight by coarse bin */
    int64_t square[RFADE_COARSE_BINS]; /**< sum over readings of weight squared */
    int64_t same[RFADE_COARSE_BINS][RFADE_COARSE_BINS];
    int64_t next[RFADE_COARSE_BINS][RFADE_COARSE_BINS];
    int64_t second[RFADE_COARSE_BINS][RFADE_COARSE_BINS];
};

/** Adds sign times `other`; RFADE_OVERFLOW leaves `blocks` as it was. */
RFADE_API enum rfade_status rfade_blocks_merge(struct rfade_blocks *blocks,
                                               const struct rfade_blocks *other, int sign);

/**
 * Adds consecutive blocks of travel of one traversal; `square` is left alone (it needs the
 * single readings: rfade_blocks_add_reading). RFADE_OVERFLOW leaves `blocks` as it was.
 * @param weights  [block_count][RFADE_COARSE_BINS], in order of travel; a block without any
 *                 reading stays in its place with weights of 0
 */
RFADE_API enum rfade_status rfade_blocks_add(struct rfade_blocks *blocks,
                                             const int64_t (*weights)[RFADE_COARSE_BINS],
                                             size_t block_count);

/** Adds the square of one reading's weight to its coarse bin. */
RFADE_API enum rfade_status rfade_blocks_add_reading(struct rfade_blocks *blocks, int bin,
                                                     int64_t weight);

/** As for a tally; documented in blocks_codec.c. */
RFADE_API enum rfade_status rfade_blocks_encode(const struct rfade_blocks *blocks,
                                                uint8_t **bytes, size_t *size);

/** RFADE_INPUT, and blocks all 0, for any bytes that encoding doesn't give. */
RFADE_API enum rfade_status rfade_blocks_decode(const uint8_t *bytes, size_t size,
                                                struct rfade_blocks *blocks);

#ifdef __cplusplus
}
#endif
#endif
