/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The cheapest way through the candidates: A. J. Viterbi, Error bounds for convolutional codes
 * ..., IEEE Trans. Inf. Theory 13 (1967) 260-269. Costs as for map matching in P. Newson and
 * J. Krumm, Hidden Markov map matching through noise and sparseness, ACM GIS 2009, with
 * Gaussian instead of exponential differences. */
#include "route/match.h"

#include <math.h>
#include <stdlib.h>

#include "route/candidate.h"

/* Standard deviations that costs are measured in: of a position across the road, and of the
 * difference between chainage and the straight distance of two positions, which grows where
 * the road winds between them. */
static const double offset_scale_m = 10;
static const double travel_scale_m = 5;
static const double travel_scale_share = 0.2;
/* A step that costs more is no drive along the line: the vehicle came back to it elsewhere. */
static const double restart_cost = 30;
/* Makes driving with the chainage cheaper where nothing else decides. */
static const double backward_cost_per_m = 0.02;
/* Scatter that a speed between two positions close in time is allowed. */
static const double spike_scatter_m = 50;

struct rfade_matcher {
    struct rfade_leg_index *index;
    struct rfade_match_settings settings;
};

/* One candidate of one position with the cheapest way to it. */
struct state {
    struct rfade_candidate candidate;
    double cost;
    size_t back;  /* state before on that way; SIZE_MAX: none */
    bool restart; /* the step from there is no drive along the line */
};

struct states {
    struct state *all;
    size_t count;
    size_t capacity;
};

/* The states of the position before. */
struct step {
    size_t position;
    size_t first_state;
    size_t state_count;
};

struct rfade_match_settings rfade_match_defaults(void)
{
    return (struct rfade_match_settings){
        .corridor_m = 30, .away_s = 60, .turn_m = 50, .fastest_m_s = 100};
}

enum rfade_status rfade_matcher_create(const struct rfade_route *route,
                                       const struct rfade_match_settings *settings,
                                       struct rfade_matcher **matcher,
                                       struct rfade_error *error)
{
    *matcher = NULL;
    if (!(settings->corridor_m > 0 && settings->away_s > 0 && settings->turn_m > 0 &&
          settings->fastest_m_s > 0))
        return rfade_error_set(error, RFADE_DOMAIN, "give numbers above 0",
                               "a setting of matching is not above 0");
    struct rfade_matcher *made = calloc(1, sizeof *made);
    if (!made)
        return rfade_error_no_memory(error);
    made->settings = *settings;
    made->index = rfade_leg_index_create(route, settings->corridor_m);
    if (!made->index) {
        rfade_matcher_destroy(made);
        return rfade_error_no_memory(error);
    }
    *matcher = made;
    return RFADE_OK;
}

void rfade_matcher_destroy(struct rfade_matcher *matcher)
{
    if (!matcher)
        return;
    rfade_leg_index_destroy(matcher->index);
    free(matcher);
}

static double distance_m(const struct rfade_position *a, const struct rfade_position *b)
{
    const struct rfade_place from = {a->latitude_deg, a->longitude_deg};
    const struct rfade_place to = {b->latitude_deg, b->longitude_deg};
    struct rfade_plane plane = rfade_plane_at(&from);
    struct rfade_offset offset = rfade_plane_offset(&plane, &to);
    return hypot(offset.east_m, offset.north_m);
}

static double seconds_between(const struct rfade_position *a, const struct rfade_position *b)
{
    return (double)(b->time_us - a->time_us) * 1e-6;
}

static bool reachable(const struct rfade_matcher *matcher, const struct rfade_position *a,
                      const struct rfade_position *b)
{
    return distance_m(a, b) <=
           spike_scatter_m + matcher->settings.fastest_m_s * seconds_between(a, b);
}

/* A position that can't be reached from the last good one is wrong, unless the next one
 * agrees with it and not with the last good one. */
static bool is_spike(const struct rfade_matcher *matcher, const struct rfade_position *good,
                     const struct rfade_position *positions, size_t at, size_t count)
{
    if (!good || reachable(matcher, good, &positions[at]))
        return false;
    if (at + 1 == count)
        return true;
    const struct rfade_position *next = &positions[at + 1];
    return !reachable(matcher, &positions[at], next) || reachable(matcher, good, next);
}

static double step_cost(const struct state *from, const struct rfade_candidate *to,
                        double travel_m, bool *restart)
{
    double along_m = to->chainage_m - from->candidate.chainage_m;
    double scale_m = travel_scale_m + travel_scale_share * travel_m;
    double excess = (fabs(along_m) - travel_m) / scale_m;
    double cost = excess * excess / 2;
    *restart = cost > restart_cost;
    return *restart ? restart_cost : cost + backward_cost_per_m * fmax(0, -along_m);
}

static bool add_state(struct states *states, const struct state *state)
{
    if (states->count == states->capacity) {
        size_t capacity = states->capacity ? states->capacity * 2 : 1024;
        struct state *grown = realloc(states->all, capacity * sizeof *grown);
        if (!grown)
            return false;
        states->all = grown;
        states->capacity = capacity;
    }
    states->all[states->count++] = *state;
    return true;
}

/* The cheapest way to a candidate from the states of the position before. */
static struct state reach(const struct states *states, const struct step *before,
                          const struct rfade_candidate *candidate, double travel_m, bool away)
{
    double offset = candidate->offset_m / offset_scale_m;
    struct state best = {.candidate = *candidate, .cost = INFINITY, .back = SIZE_MAX};
    for (size_t i = 0; i < before->state_count; i++) {
        const struct state *from = &states->all[before->first_state + i];
        bool restart = true;
        double cost = away ? 0 : step_cost(from, candidate, travel_m, &restart);
        double total = from->cost + cost;
        if (total >= best.cost)
            continue;
        best.cost = total;
        best.back = before->first_state + i;
        best.restart = restart;
    }
    if (best.back == SIZE_MAX) {
        best.cost = 0;
        best.restart = true;
    }
    best.cost += offset * offset / 2;
    return best;
}

/* Adds the states of one position; false if memory ran out. */
static bool take_position(const struct rfade_matcher *matcher,
                          const struct rfade_position *positions, size_t at,
                          struct states *states, struct step *before)
{
    const struct rfade_place place = {positions[at].latitude_deg, positions[at].longitude_deg};
    struct rfade_candidate candidates[RFADE_CANDIDATES_MAX];
    size_t count = rfade_candidates(matcher->index, &place, candidates);
    if (count == 0)
        return true;
    double travel_m = 0;
    bool away = false;
    if (before->state_count > 0) {
        travel_m = distance_m(&positions[before->position], &positions[at]);
        away = seconds_between(&positions[before->position], &positions[at]) >
               matcher->settings.away_s;
    }
    size_t first = states->count;
    for (size_t i = 0; i < count; i++) {
        struct state state = reach(states, before, &candidates[i], travel_m, away);
        if (!add_state(states, &state))
            return false;
    }
    *before = (struct step){at, first, count};
    return true;
}

/* Walks back along the cheapest way; position_states tells whose each state is. */
static void trace_back(const struct states *states, const size_t *position_states,
                       const struct step *last, size_t count, struct rfade_match *matches,
                       bool *restarts)
{
    size_t best = SIZE_MAX;
    for (size_t i = 0; i < last->state_count; i++)
        if (best == SIZE_MAX ||
            states->all[last->first_state + i].cost < states->all[best].cost)
            best = last->first_state + i;
    for (size_t at = count; at-- > 0 && best != SIZE_MAX;) {
        if (best < position_states[at])
            continue; /* has no state on it */
        const struct state *state = &states->all[best];
        matches[at] = (struct rfade_match){.matched = true,
                                           .chainage_m = state->candidate.chainage_m,
                                           .offset_m = state->candidate.offset_m};
        restarts[at] = state->restart;
        best = state->back;
    }
}

struct pass_list {
    struct rfade_pass *all;
    size_t count;
    size_t capacity;
};

static bool add_pass(struct pass_list *list, const struct rfade_match *matches, size_t first,
                     size_t last)
{
    if (list->count == list->capacity) {
        size_t capacity = list->capacity ? list->capacity * 2 : 16;
        struct rfade_pass *grown = realloc(list->all, capacity * sizeof *grown);
        if (!grown)
            return false;
        list->all = grown;
        list->capacity = capacity;
    }
    list->all[list->count++] = (struct rfade_pass){
        .first = first,
        .last = last,
        .direction = matches[last].chainage_m < matches[first].chainage_m ? -1 : 1};
    return true;
}

/* Cuts a run of matched positions where the vehicle turned round: where it has come back by
 * more than turn_m from the furthest position. */
static bool cut_turns(const struct rfade_match *matches, size_t first, size_t last,
                      double turn_m, struct pass_list *list)
{
    size_t highest = first;
    size_t lowest = first;
    int direction = 0; /* not known yet */
    for (size_t i = first; i <= last; i++) {
        if (!matches[i].matched)
            continue;
        double at_m = matches[i].chainage_m;
        if (at_m > matches[highest].chainage_m)
            highest = i;
        if (at_m < matches[lowest].chainage_m)
            lowest = i;
        bool fell = matches[highest].chainage_m - at_m > turn_m;
        bool rose = at_m - matches[lowest].chainage_m > turn_m;
        size_t turn = direction < 0 ? lowest : highest;
        bool turned = direction < 0 ? rose : fell;
        if (direction == 0) {
            direction = rose ? 1 : fell ? -1 : 0;
            /* What went the other way before by less than turn_m is scatter. */
            continue;
        }
        if (!turned)
            continue;
        if (!add_pass(list, matches, first, turn))
            return false;
        first = turn;
        direction = -direction;
        highest = lowest = i;
    }
    return add_pass(list, matches, first, last);
}

static enum rfade_status find_passes(const struct rfade_matcher *matcher,
                                     const struct rfade_match *matches, const bool *restarts,
                                     size_t count, struct pass_list *list,
                                     struct rfade_error *error)
{
    size_t first = SIZE_MAX;
    size_t last = SIZE_MAX;
    for (size_t i = 0; i < count; i++) {
        if (!matches[i].matched)
            continue;
        if (first != SIZE_MAX && restarts[i]) {
            if (!cut_turns(matches, first, last, matcher->settings.turn_m, list))
                return rfade_error_no_memory(error);
            first = SIZE_MAX;
        }
        if (first == SIZE_MAX)
            first = i;
        last = i;
    }
    if (first != SIZE_MAX && !cut_turns(matches, first, last, matcher->settings.turn_m, list))
        return rfade_error_no_memory(error);
    return RFADE_OK;
}

/* position_states[i] .. position_states[i + 1] are the states of position i. */
static bool find_states(const struct rfade_matcher *matcher,
                        const struct rfade_position *positions, size_t count,
                        struct states *states, size_t *position_states, struct step *last)
{
    const struct rfade_position *good = NULL;
    for (size_t i = 0; i < count; i++) {
        position_states[i] = states->count;
        if (is_spike(matcher, good, positions, i, count))
            continue;
        good = &positions[i];
        if (!take_position(matcher, positions, i, states, last))
            return false;
    }
    position_states[count] = states->count;
    return true;
}

enum rfade_status rfade_match_positions(const struct rfade_matcher *matcher,
                                        const struct rfade_position *positions, size_t count,
                                        struct rfade_match *matches, struct rfade_pass **passes,
                                        size_t *pass_count, struct rfade_error *error)
{
    *passes = NULL;
    *pass_count = 0;
    for (size_t i = 0; i < count; i++)
        matches[i] = (struct rfade_match){false, NAN, NAN};
    struct states states = {0};
    struct step last = {0};
    struct pass_list list = {0};
    enum rfade_status status = RFADE_OK;
    size_t *position_states = calloc(count + 1, sizeof *position_states);
    bool *restarts = calloc(count + 1, sizeof *restarts);
    if (!position_states || !restarts ||
        !find_states(matcher, positions, count, &states, position_states, &last)) {
        status = rfade_error_no_memory(error);
        goto out;
    }
    trace_back(&states, position_states, &last, count, matches, restarts);
    status = find_passes(matcher, matches, restarts, count, &list, error);
    if (status != RFADE_OK)
        goto out;
    *passes = list.all;
    *pass_count = list.count;
    list.all = NULL;
out:
    free(list.all);
    free(states.all);
    free(position_states);
    free(restarts);
    return status;
}
