/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "route/track.h"

#include <math.h>
#include <stdlib.h>

#include "route/smooth.h"

/* Fixes closer in time are averaged: receivers that give more are interpolating. */
static const double node_spacing_s = 0.2;

struct rfade_track {
    struct rfade_node *nodes; /* smooth; times strictly rising */
    size_t count;
    int64_t origin_us;
    double origin_m; /* chainage at travel 0 of the nodes */
    int direction;
    double before_s; /* extrapolation at the ends */
    double after_s;
    int64_t start_mm; /* chainage at the track's start */
};

struct rfade_track_settings rfade_track_defaults(void)
{
    return (struct rfade_track_settings){
        .gap_s = 30, .off_route_s = 5, .extrapolate_s = 2, .standing_m_s = 0.5};
}

void rfade_track_destroy(struct rfade_track *track)
{
    if (!track)
        return;
    free(track->nodes);
    free(track);
}

/* Sums of fixes that become one node. */
struct gathered {
    size_t fixes;
    size_t speeds;
    double time_s, travel_m, speed_m_s;
    double first_s;
    bool after_gap;
};

static void close_node(struct rfade_track *track, struct gathered *gathered)
{
    if (gathered->fixes == 0)
        return;
    double n = (double)gathered->fixes;
    track->nodes[track->count++] = (struct rfade_node){
        .time_s = gathered->time_s / n,
        .travel_m = gathered->travel_m / n,
        .speed_m_s =
            gathered->speeds > 0 ? gathered->speed_m_s / (double)gathered->speeds : NAN,
        .after_gap = gathered->after_gap,
    };
    *gathered = (struct gathered){0};
}

/* Matched fixes become nodes. A position that repeats the one before while the vehicle drives
 * is an old one, but that shows only against the speed; it is left to the smoother. */
static void make_nodes(struct rfade_track *track, const struct rfade_position *positions,
                       const struct rfade_match *matches, const struct rfade_pass *pass,
                       const struct rfade_track_settings *settings)
{
    struct gathered gathered = {0};
    bool unmatched = false;
    double last_s = -INFINITY;
    for (size_t i = pass->first; i <= pass->last; i++) {
        if (!matches[i].matched) {
            unmatched = true;
            continue;
        }
        double time_s = (double)(positions[i].time_us - track->origin_us) * 1e-6;
        double gap_s = unmatched ? settings->off_route_s : settings->gap_s;
        bool after_gap = time_s - last_s > gap_s;
        if (gathered.fixes > 0 && (after_gap || time_s - gathered.first_s >= node_spacing_s))
            close_node(track, &gathered);
        if (gathered.fixes == 0) {
            gathered.first_s = time_s;
            gathered.after_gap = after_gap;
        }
        gathered.fixes++;
        gathered.time_s += time_s;
        gathered.travel_m += track->direction * (matches[i].chainage_m - track->origin_m);
        if (!isnan(positions[i].speed_m_s)) {
            gathered.speeds++;
            gathered.speed_m_s += fabs(positions[i].speed_m_s);
        }
        unmatched = false;
        last_s = time_s;
    }
    close_node(track, &gathered);
}

/* Beyond the pass's ends a place may be given only where no other fix says where it was. */
static void allow_ends(struct rfade_track *track, const struct rfade_position *positions,
                       size_t count, const struct rfade_pass *pass, double extrapolate_s)
{
    int64_t limit_us = (int64_t)(extrapolate_s * 1e6);
    bool free_before =
        pass->first == 0 ||
        positions[pass->first].time_us - positions[pass->first - 1].time_us > limit_us;
    bool free_after =
        pass->last + 1 == count ||
        positions[pass->last + 1].time_us - positions[pass->last].time_us > limit_us;
    track->before_s = free_before ? extrapolate_s : 0;
    track->after_s = free_after ? extrapolate_s : 0;
    /* A node is the mean of its fixes: the pass itself reaches to the first and last fix. */
    track->before_s += track->nodes[0].time_s;
    track->after_s += (double)(positions[pass->last].time_us - track->origin_us) * 1e-6 -
                      track->nodes[track->count - 1].time_s;
}

static double travel_at(const struct rfade_track *track, size_t after, double time_s)
{
    const struct rfade_node *last = &track->nodes[track->count - 1];
    if (after == 0)
        return track->nodes[0].travel_m +
               (time_s - track->nodes[0].time_s) * track->nodes[0].speed_m_s;
    if (after == track->count)
        return last->travel_m + (time_s - last->time_s) * last->speed_m_s;
    const struct rfade_node *a = &track->nodes[after - 1];
    const struct rfade_node *b = &track->nodes[after];
    double whole_s = b->time_s - a->time_s;
    double x = (time_s - a->time_s) / whole_s;
    double rise_m = b->travel_m - a->travel_m;
    /* Cubic with the nodes' slopes, written so that no rise gives exactly none. */
    double cubic_m = rise_m * x * x * (3 - 2 * x) +
                     whole_s * x * (1 - x) * (a->speed_m_s * (1 - x) - b->speed_m_s * x);
    return a->travel_m + fmin(fmax(cubic_m, 0), rise_m);
}

/* The first node later than a time. */
static size_t node_after(const struct rfade_track *track, double time_s)
{
    size_t low = 0;
    size_t high = track->count;
    while (low < high) {
        size_t middle = (low + high) / 2;
        if (track->nodes[middle].time_s <= time_s)
            low = middle + 1;
        else
            high = middle;
    }
    return low;
}

static int64_t chainage_mm_at(const struct rfade_track *track, size_t after, double time_s)
{
    return llround(1000 *
                   (track->origin_m + track->direction * travel_at(track, after, time_s)));
}

enum rfade_status rfade_track_create(const struct rfade_position *positions,
                                     const struct rfade_match *matches, size_t count,
                                     const struct rfade_pass *pass,
                                     const struct rfade_track_settings *settings,
                                     struct rfade_track **track, struct rfade_error *error)
{
    *track = NULL;
    struct rfade_track *made = calloc(1, sizeof *made);
    if (!made || !(made->nodes = calloc(pass->last - pass->first + 1, sizeof *made->nodes)))
        goto no_memory;
    made->origin_us = positions[pass->first].time_us;
    made->origin_m = matches[pass->first].chainage_m;
    made->direction = pass->direction;
    make_nodes(made, positions, matches, pass, settings);
    double scatter_m = rfade_scatter_m(made->nodes, made->count);
    if (!rfade_find_standing(made->nodes, made->count, scatter_m, settings->standing_m_s) ||
        !rfade_smooth(made->nodes, made->count, scatter_m) ||
        !rfade_make_monotone(made->nodes, made->count))
        goto no_memory;
    allow_ends(made, positions, count, pass, settings->extrapolate_s);
    double start_s = made->nodes[0].time_s - made->before_s;
    made->start_mm = chainage_mm_at(made, 0, start_s);
    *track = made;
    return RFADE_OK;

no_memory:
    rfade_track_destroy(made);
    return rfade_error_no_memory(error);
}

int64_t rfade_track_start_us(const struct rfade_track *track)
{
    return track->origin_us + llround((track->nodes[0].time_s - track->before_s) * 1e6);
}

int64_t rfade_track_end_us(const struct rfade_track *track)
{
    return track->origin_us +
           llround((track->nodes[track->count - 1].time_s + track->after_s) * 1e6);
}

bool rfade_track_at(const struct rfade_track *track, int64_t time_us, int64_t *chainage_mm,
                    int64_t *travel_mm)
{
    *chainage_mm = 0;
    *travel_mm = 0;
    if (time_us < rfade_track_start_us(track) || time_us > rfade_track_end_us(track))
        return false;
    double time_s = (double)(time_us - track->origin_us) * 1e-6;
    size_t after = node_after(track, time_s);
    if (after > 0 && after < track->count && track->nodes[after].after_gap &&
        time_s > track->nodes[after - 1].time_s)
        return false;
    *chainage_mm = chainage_mm_at(track, after, time_s);
    *travel_mm = track->direction * (*chainage_mm - track->start_mm);
    return true;
}
