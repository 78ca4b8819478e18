/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "routefade/paired.h"

#include <math.h>
#include <stdlib.h>

#include "separate/pass.h"

/* A pair's two places lie no farther apart: J0(2 pi/20)^2 = 0.95 of the correlation is left. */
static const double most_apart_wavelengths = 0.05;

/* A reading of a pair, as the tallies know it. */
struct sight {
    struct rfade_tally_key key;
    double centre_cdb; /* shifted */
};

struct pairing_work {
    const struct rfade_branch *branches;
    struct rfade_pass pass[2];
    int32_t threshold_cdb;
    int64_t most_apart_mm;
    size_t near; /* where in the second branch the search goes on */
};

static struct sight sight_of(const struct rfade_branch *branch, size_t i)
{
    const struct rfade_track_reading *reading = &branch->readings[i];
    const struct rfade_receiver *receiver = &branch->receiver;
    int32_t shift_cdb = branch->shift_cdb != NULL ? branch->shift_cdb[reading->segment] : 0;
    struct sight sight = {.key = {.step_cdb = receiver->step_cdb, .kind = RFADE_INTERVAL},
                          .centre_cdb = reading->level_cdb};

    if (reading->level_cdb <= receiver->floor_cdb) {
        sight.key = (struct rfade_tally_key){.kind = RFADE_BELOW};
        sight.centre_cdb = receiver->floor_cdb + 0.5 * receiver->step_cdb;
    } else if (reading->level_cdb >= receiver->ceiling_cdb) {
        sight.key = (struct rfade_tally_key){.kind = RFADE_ABOVE};
        sight.centre_cdb = receiver->ceiling_cdb - 0.5 * receiver->step_cdb;
    }
    sight.centre_cdb += shift_cdb;
    sight.key.centre_cdb = (int32_t)floor(sight.centre_cdb);
    return sight;
}

/* 1 below, 0 above, -1 not known. */
static int is_below(const struct sight *sight, double threshold_cdb)
{
    if (sight->key.kind == RFADE_BELOW) {
        return sight->centre_cdb <= threshold_cdb ? 1 : -1;
    }
    if (sight->key.kind == RFADE_ABOVE) {
        return sight->centre_cdb >= threshold_cdb ? 0 : -1;
    }
    return sight->centre_cdb < threshold_cdb;
}

/* The stronger reading. One at its floor is weaker than another above that bound; else all
 * that is known is that both lie below the higher of the two. */
static struct rfade_tally_key best_of(const struct sight sights[2])
{
    int stronger = sights[1].centre_cdb > sights[0].centre_cdb ? 1 : 0;

    if (sights[stronger].key.kind != RFADE_ABOVE && sights[!stronger].key.kind == RFADE_ABOVE) {
        stronger = !stronger;
    }
    return sights[stronger].key;
}

static void sum_pair(const struct pairing_work *work, size_t i, size_t j,
                     const struct sight sights[2], struct rfade_paired_sums *sums)
{
    const size_t at[2] = {i, j};
    int64_t weight_mm = work->pass[0].weight_mm[i];
    int below[2];
    int64_t power[2];
    int64_t amplitude[2];

    for (int b = 0; b < 2; b++) {
        below[b] = is_below(&sights[b], work->threshold_cdb);
        power[b] = work->pass[b].fading[at[b]];
        amplitude[b] = llround(1000.0 * (sqrt(fmax(0.0, 1.0 + 1e-3 * (double)power[b])) - 1.0));
        sums->power[b] += weight_mm * power[b];
        sums->power_square[b] += weight_mm * power[b] * power[b];
        sums->amplitude[b] += weight_mm * amplitude[b];
        sums->amplitude_square[b] += weight_mm * amplitude[b] * amplitude[b];
        const struct rfade_branch *branch = &work->branches[b];
        int32_t shift_cdb =
            branch->shift_cdb != NULL ? branch->shift_cdb[branch->readings[at[b]].segment] : 0;
        sums->mean_cdb[b] +=
            weight_mm * (llround(work->pass[b].local_mean_cdb[at[b]]) + shift_cdb);
    }
    sums->power_product += weight_mm * power[0] * power[1];
    sums->amplitude_product += weight_mm * amplitude[0] * amplitude[1];
    sums->pairs++;
    sums->weight_mm += weight_mm;
    if (below[0] >= 0 && below[1] >= 0) {
        sums->known_mm += weight_mm;
        sums->below_mm[0] += below[0] == 1 ? weight_mm : 0;
        sums->below_mm[1] += below[1] == 1 ? weight_mm : 0;
        sums->both_below_mm += below[0] == 1 && below[1] == 1 ? weight_mm : 0;
    }
}

static int64_t apart_us(const struct pairing_work *work, size_t i, size_t j)
{
    return llabs(work->branches[0].readings[i].time_us - work->branches[1].readings[j].time_us);
}

/* Half the time to the nearer neighbour. */
static int64_t tolerance_us(const struct rfade_branch *branch, size_t i)
{
    int64_t interval_us = INT64_MAX;

    if (i > 0) {
        interval_us = branch->readings[i].time_us - branch->readings[i - 1].time_us;
    }
    if (i + 1 < branch->count) {
        int64_t after_us = branch->readings[i + 1].time_us - branch->readings[i].time_us;

        interval_us = after_us < interval_us ? after_us : interval_us;
    }
    return interval_us == INT64_MAX ? 0 : interval_us / 2;
}

/* The second branch's reading that belongs to one of the first; its count if none does. */
static size_t partner(struct pairing_work *work, size_t i)
{
    const struct rfade_branch *second = &work->branches[1];
    size_t j = work->near;

    while (j + 1 < second->count && apart_us(work, i, j + 1) <= apart_us(work, i, j)) {
        j++;
    }
    work->near = j;
    if (apart_us(work, i, j) > tolerance_us(&work->branches[0], i) ||
        work->pass[1].weight_mm[j] == 0 ||
        llabs(second->readings[j].travel_mm - work->branches[0].readings[i].travel_mm) >
            work->most_apart_mm) {
        return second->count;
    }
    return j;
}

static enum rfade_status add_pair(const struct pairing_work *work, size_t i, size_t j,
                                  struct rfade_paired_run *run)
{
    const struct sight sights[2] = {sight_of(&work->branches[0], i),
                                    sight_of(&work->branches[1], j)};
    struct rfade_tally_key best = best_of(sights);
    int64_t weight_mm = work->pass[0].weight_mm[i];
    enum rfade_status status = rfade_tally_add(run->level[0], &sights[0].key, weight_mm, 1);

    if (status == RFADE_OK) {
        status = rfade_tally_add(run->level[1], &sights[1].key, weight_mm, 1);
    }
    if (status == RFADE_OK) {
        status = rfade_tally_add(run->best, &best, weight_mm, 1);
    }
    if (status == RFADE_OK) {
        sum_pair(work, i, j, sights, &run->blocks[run->block_count - 1]);
    }
    return status;
}

static enum rfade_status create_run(struct rfade_paired_run *run, int32_t segment,
                                    size_t blocks_max)
{
    *run = (struct rfade_paired_run){.segment = segment};
    run->blocks = calloc(blocks_max, sizeof *run->blocks);
    enum rfade_status status =
        run->blocks != NULL ? rfade_tally_create(&run->best) : RFADE_NO_MEMORY;

    for (int b = 0; b < 2 && status == RFADE_OK; b++) {
        status = rfade_tally_create(&run->level[b]);
    }
    return status;
}

/* The readings [from, to) of the first branch, all in one segment. */
static enum rfade_status fill_run(struct pairing_work *work, size_t from, size_t to,
                                  struct rfade_paired_run *run)
{
    const struct rfade_pass *first = &work->pass[0];
    int64_t start_mm = first->readings[from].travel_mm;
    int64_t block = -1;
    enum rfade_status status = RFADE_OK;

    for (size_t i = from; i < to && status == RFADE_OK; i++) {
        size_t j = first->weight_mm[i] > 0 ? partner(work, i) : work->branches[1].count;

        if (j == work->branches[1].count) {
            continue;
        }
        int64_t here = (first->readings[i].travel_mm - start_mm) / first->block_mm;

        if (here != block) {
            run->block_count++;
            block = here;
        }
        status = add_pair(work, i, j, run);
    }
    return status;
}

static enum rfade_status fill_runs(struct pairing_work *work, struct rfade_pairing *result)
{
    const struct rfade_branch *first = &work->branches[0];
    enum rfade_status status = RFADE_OK;
    size_t runs = 0;

    for (size_t i = 0; i < first->count; i++) {
        runs += i == 0 || first->readings[i].segment != first->readings[i - 1].segment;
    }
    result->runs = calloc(runs + 1, sizeof *result->runs);
    if (result->runs == NULL) {
        return RFADE_NO_MEMORY;
    }
    for (size_t from = 0, to = 0; from < first->count && status == RFADE_OK; from = to) {
        struct rfade_paired_run *run = &result->runs[result->count++];

        while (to < first->count &&
               first->readings[to].segment == first->readings[from].segment) {
            to++;
        }
        status = create_run(run, first->readings[from].segment, to - from);
        if (status == RFADE_OK) {
            status = fill_run(work, from, to, run);
        }
    }
    return status;
}

enum rfade_status rfade_pair_branches(const struct rfade_branch branches[2],
                                      int32_t threshold_cdb, struct rfade_pairing *result)
{
    struct pairing_work work = {.branches = branches, .threshold_cdb = threshold_cdb};
    enum rfade_status status = RFADE_OK;
    int made = 0;

    *result = (struct rfade_pairing){NULL, 0};
    if (branches[0].count == 0 || branches[1].count == 0) {
        return RFADE_NO_DATA;
    }
    while (made < 2 && status == RFADE_OK) {
        const struct rfade_branch *branch = &branches[made];

        status = rfade_pass_create(&work.pass[made], branch->readings, branch->count,
                                   &branch->receiver, &branch->settings);
        made += status == RFADE_OK;
    }
    if (status == RFADE_OK) {
        work.most_apart_mm =
            llround(1000.0 * most_apart_wavelengths * branches[0].settings.wavelength_m);
        status = fill_runs(&work, result);
    }
    while (made > 0) {
        rfade_pass_destroy(&work.pass[--made]);
    }
    if (status != RFADE_OK) {
        rfade_pairing_clear(result);
    }
    return status;
}

void rfade_pairing_clear(struct rfade_pairing *pairing)
{
    for (size_t i = 0; i < pairing->count; i++) {
        rfade_tally_destroy(pairing->runs[i].level[0]);
        rfade_tally_destroy(pairing->runs[i].level[1]);
        rfade_tally_destroy(pairing->runs[i].best);
        free(pairing->runs[i].blocks);
    }
    free(pairing->runs);
    *pairing = (struct rfade_pairing){NULL, 0};
}
