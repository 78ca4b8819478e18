/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The traversals of a pass: what each run of readings in one segment adds to the tallies. */
#include "routefade/separate.h"

#include <math.h>
#include <stdlib.h>

#include "separate/pass.h"

/* Fading and absolute level of one reading, as tallies know them. */
struct reading_keys {
    struct rfade_tally_key fading;
    struct rfade_tally_key level;
};

/* A censored reading keeps its own bound about its own local mean. */
static struct reading_keys reading_keys(const struct rfade_pass *pass, size_t i)
{
    const struct rfade_receiver *receiver = &pass->receiver;
    int32_t level_cdb = pass->readings[i].level_cdb;
    struct reading_keys keys = {.level = {.step_cdb = receiver->step_cdb,
                                          .kind = RFADE_INTERVAL,
                                          .centre_cdb = level_cdb}};
    double centre_cdb = level_cdb;

    if (level_cdb <= receiver->floor_cdb || level_cdb >= receiver->ceiling_cdb) {
        bool below = level_cdb <= receiver->floor_cdb;

        centre_cdb = below ? receiver->floor_cdb + 0.5 * receiver->step_cdb
                           : receiver->ceiling_cdb - 0.5 * receiver->step_cdb;
        keys.level = (struct rfade_tally_key){.kind = below ? RFADE_BELOW : RFADE_ABOVE,
                                              .centre_cdb = (int32_t)floor(centre_cdb)};
    }
    keys.fading = keys.level;
    keys.fading.centre_cdb = rfade_pass_fading_cdb(pass, i, centre_cdb);
    return keys;
}

/* Censored readings go to the outermost bins, wherever their bounds lie: what the fading's
 * scores make of them is nearly the same, but differs from those of readings beside it. */
static int block_bin(const struct rfade_tally_key *fading)
{
    if (fading->kind == RFADE_BELOW) {
        return 0;
    }
    return fading->kind == RFADE_ABOVE ? RFADE_COARSE_BINS - 1
                                       : rfade_coarse_bin(fading->centre_cdb / 100.0);
}

/* Independent readings a window, by powers of two: half a wavelength of travel makes one. */
static int32_t window_class(const struct rfade_pass *pass, struct rfade_range window)
{
    int64_t independent = pass->kept_sum[window.to] - pass->kept_sum[window.from];
    int64_t half_waves =
        (pass->weight_sum[window.to] - pass->weight_sum[window.from]) / pass->half_wave_mm;
    int32_t class = 0;

    if (half_waves < independent) {
        independent = half_waves;
    }
    while (independent > 1) {
        independent /= 2;
        class ++;
    }
    return class;
}

static enum rfade_status add_reading(const struct rfade_pass *pass, size_t i,
                                     struct rfade_range window,
                                     struct rfade_traversal_tally *traversal,
                                     int64_t block[RFADE_COARSE_BINS])
{
    int64_t weight_mm = pass->weight_mm[i];
    struct reading_keys keys = reading_keys(pass, i);
    struct rfade_tally_key mean = {.step_cdb = 10,
                                   .kind = RFADE_INTERVAL,
                                   .centre_cdb =
                                       (int32_t)(10.0 * round(pass->local_mean_cdb[i] / 10.0))};
    int bin = block_bin(&keys.fading);
    enum rfade_status status;

    keys.fading.window_class = window_class(pass, window);
    status = rfade_tally_add(traversal->fading, &keys.fading, weight_mm, 1);
    if (status == RFADE_OK) {
        status = rfade_tally_add(traversal->level, &keys.level, weight_mm, 1);
    }
    if (status == RFADE_OK) {
        status = rfade_tally_add(traversal->local_mean, &mean, weight_mm, 1);
    }
    if (status == RFADE_OK) {
        status = rfade_blocks_add_reading(&traversal->blocks, bin, weight_mm);
    }
    block[bin] += weight_mm;
    return status;
}

/*
 * The block of each step of travel. Empty blocks keep the distance between full ones, up to
 * the three that put two blocks beyond the longest lag in use.
 */
static size_t next_block(const struct rfade_pass *pass, size_t first, size_t previous, size_t i,
                         size_t block)
{
    int64_t start_mm = pass->readings[first].travel_mm;
    int64_t moved = (pass->readings[i].travel_mm - start_mm) / pass->block_mm -
                    (pass->readings[previous].travel_mm - start_mm) / pass->block_mm;

    return block + (size_t)(moved < 3 ? moved : 3);
}

static enum rfade_status fill_traversal(const struct rfade_pass *pass, struct rfade_range run,
                                        struct rfade_traversal_tally *traversal)
{
    enum rfade_status status = RFADE_OK;
    struct rfade_range window = {0, 0};
    int64_t(*blocks)[RFADE_COARSE_BINS];
    size_t last_block = 0;
    size_t block = 0;

    for (size_t i = run.from + 1; i < run.to; i++) {
        last_block = next_block(pass, run.from, i - 1, i, last_block);
    }
    blocks = calloc(last_block + 1, sizeof *blocks);
    if (blocks == NULL) {
        return RFADE_NO_MEMORY;
    }
    for (size_t i = run.from; i < run.to && status == RFADE_OK; i++) {
        block = i > run.from ? next_block(pass, run.from, i - 1, i, block) : 0;
        if (pass->weight_mm[i] > 0) {
            rfade_pass_window(pass, i, &window);
            status = add_reading(pass, i, window, traversal, blocks[block]);
            if (status == RFADE_OK) {
                status = rfade_pass_add_snr(pass, i, traversal);
            }
        }
    }
    if (status == RFADE_OK) {
        status = rfade_blocks_add(&traversal->blocks,
                                  (const int64_t(*)[RFADE_COARSE_BINS])blocks, last_block + 1);
    }
    free(blocks);
    return status;
}

static enum rfade_status make_traversal(const struct rfade_pass *pass, struct rfade_range run,
                                        struct rfade_traversal_tally *traversal)
{
    enum rfade_status status;

    traversal->segment = pass->readings[run.from].segment;
    traversal->first_time_us = pass->readings[run.from].time_us;
    traversal->last_time_us = pass->readings[run.to - 1].time_us;
    status = rfade_tally_create(&traversal->fading);
    if (status == RFADE_OK) {
        status = rfade_tally_create(&traversal->level);
    }
    if (status == RFADE_OK) {
        status = rfade_tally_create(&traversal->local_mean);
    }
    if (status == RFADE_OK) {
        status = rfade_tally_create(&traversal->snr);
    }
    if (status == RFADE_OK) {
        status = rfade_tally_create(&traversal->noise);
    }
    if (status == RFADE_OK) {
        status = fill_traversal(pass, run, traversal);
    }
    if (status == RFADE_OK) {
        rfade_pass_sampling(pass, run, &traversal->sampling);
        rfade_pass_crossings(pass, run, &traversal->crossings);
    }
    return status;
}

static struct rfade_range next_run(const struct rfade_pass *pass, size_t from)
{
    struct rfade_range run = {from, from + 1};

    while (run.to < pass->count &&
           pass->readings[run.to].segment == pass->readings[from].segment) {
        run.to++;
    }
    return run;
}

static enum rfade_status make_traversals(const struct rfade_pass *pass,
                                         struct rfade_separation *result)
{
    enum rfade_status status = RFADE_OK;
    size_t runs = 1;

    for (size_t from = next_run(pass, 0).to; from < pass->count;
         from = next_run(pass, from).to) {
        runs++;
    }
    result->traversals = calloc(runs, sizeof *result->traversals);
    if (result->traversals == NULL) {
        return RFADE_NO_MEMORY;
    }
    result->count = runs;
    for (size_t i = 0, from = 0; i < runs && status == RFADE_OK; i++) {
        struct rfade_range run = next_run(pass, from);

        status = make_traversal(pass, run, &result->traversals[i]);
        from = run.to;
    }
    return status;
}

enum rfade_status rfade_separate(const struct rfade_track_reading *readings, size_t count,
                                 const struct rfade_receiver *receiver,
                                 const struct rfade_separate_settings *settings,
                                 struct rfade_separation *result)
{
    struct rfade_pass pass;
    enum rfade_status status;

    *result = (struct rfade_separation){NULL, 0};
    if (count == 0) {
        return RFADE_NO_DATA;
    }
    status = rfade_pass_create(&pass, readings, count, receiver, settings);
    if (status != RFADE_OK) {
        return status;
    }
    status = make_traversals(&pass, result);
    if (status != RFADE_OK) {
        rfade_separation_clear(result);
    }
    rfade_pass_destroy(&pass);
    return status;
}

void rfade_separation_clear(struct rfade_separation *separation)
{
    for (size_t i = 0; i < separation->count; i++) {
        rfade_tally_destroy(separation->traversals[i].fading);
        rfade_tally_destroy(separation->traversals[i].level);
        rfade_tally_destroy(separation->traversals[i].local_mean);
        rfade_tally_destroy(separation->traversals[i].snr);
        rfade_tally_destroy(separation->traversals[i].noise);
    }
    free(separation->traversals);
    *separation = (struct rfade_separation){NULL, 0};
}
