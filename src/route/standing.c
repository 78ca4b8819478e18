/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>
#include <stdlib.h>

#include "route/smooth.h"

enum { SCATTER_SAMPLES_MAX = 4096, EDGE_NODES = 3 };

static const double least_scatter_m = 0.5;
static const double most_scatter_m = 30;
static const double neighbour_s = 5;       /* nodes further apart say nothing about scatter */
static const double shortest_stand_s = 10; /* found from positions alone */
static const double drift_m_s = 0.3;       /* positions wander at rest, too */
static const double significant = 2.5;     /* standard errors */

static int by_value(const void *left, const void *right)
{
    double a = *(const double *)left;
    double b = *(const double *)right;
    return (a > b) - (a < b);
}

double rfade_scatter_m(const struct rfade_node *nodes, size_t count)
{
    double samples[SCATTER_SAMPLES_MAX];
    size_t sampled = 0;
    size_t stride = count / SCATTER_SAMPLES_MAX + 1;
    for (size_t i = 1; i + 1 < count; i += stride) {
        const struct rfade_node *node = &nodes[i];
        double whole_s = node[1].time_s - node[-1].time_s;
        if (node->after_gap || node[1].after_gap ||
            !(whole_s > 0 && whole_s <= 2 * neighbour_s))
            continue;
        double share = (node->time_s - node[-1].time_s) / whole_s;
        double between_m = node[-1].travel_m + share * (node[1].travel_m - node[-1].travel_m);
        double rest = 1 - share;
        samples[sampled++] =
            fabs(node->travel_m - between_m) / sqrt(1 + share * share + rest * rest);
    }
    if (sampled == 0)
        return 5;
    qsort(samples, sampled, sizeof *samples, by_value);
    /* 1.4826: median absolute deviation to standard deviation of a normal distribution. */
    return fmin(fmax(1.4826 * samples[sampled / 2], least_scatter_m), most_scatter_m);
}

/* Sums of a run of nodes about its first one. */
struct run_sums {
    double n, time, travel, time2, time_travel;
};

static void add_node(struct run_sums *sums, const struct rfade_node *origin,
                     const struct rfade_node *node)
{
    double time_s = node->time_s - origin->time_s;
    double travel_m = node->travel_m - origin->travel_m;
    sums->n += 1;
    sums->time += time_s;
    sums->travel += travel_m;
    sums->time2 += time_s * time_s;
    sums->time_travel += time_s * travel_m;
}

/* No travel to speak of: the slope of the run is neither fast nor more than its own error. */
static bool is_level(const struct run_sums *sums, double scatter_m)
{
    double time_square = sums->time2 - sums->time * sums->time / sums->n;
    if (!(time_square > 0))
        return true;
    double slope = (sums->time_travel - sums->time * sums->travel / sums->n) / time_square;
    return fabs(slope) <= fmax(drift_m_s, significant * scatter_m / sqrt(time_square));
}

static double median_travel(const struct rfade_node *nodes, size_t first, size_t last,
                            double *scratch)
{
    size_t count = 0;
    for (size_t i = first; i <= last; i++)
        scratch[count++] = nodes[i].travel_m;
    qsort(scratch, count, sizeof *scratch, by_value);
    return scratch[count / 2];
}

static double mean_travel(const struct rfade_node *nodes, size_t first, size_t last)
{
    double sum = 0;
    for (size_t i = first; i <= last; i++)
        sum += nodes[i].travel_m;
    return sum / (double)(last - first + 1);
}

/* A run grows a little into the driving before and after it: its ends are cut back to where
 * the mean of three nodes is near its median again, and one node more. */
static void mark_run(struct rfade_node *nodes, size_t first, size_t last, double scatter_m,
                     double *scratch)
{
    double middle_m = median_travel(nodes, first, last, scratch);
    double near_m = scatter_m / sqrt(EDGE_NODES);
    while (last >= first + EDGE_NODES &&
           fabs(mean_travel(nodes, last + 1 - EDGE_NODES, last) - middle_m) > near_m)
        last--;
    while (last >= first + EDGE_NODES &&
           fabs(mean_travel(nodes, first, first + EDGE_NODES - 1) - middle_m) > near_m)
        first++;
    if (last < first + EDGE_NODES ||
        nodes[last].time_s - nodes[first].time_s < shortest_stand_s / 2)
        return;
    for (size_t i = first + 1; i < last; i++)
        nodes[i].standing = true;
}

static void find_by_travel(struct rfade_node *nodes, size_t count, double scatter_m,
                           double *scratch)
{
    for (size_t first = 0; first < count;) {
        struct run_sums sums = {0};
        size_t last = first;
        add_node(&sums, &nodes[first], &nodes[first]);
        while (last + 1 < count && !nodes[last + 1].after_gap &&
               nodes[last].time_s - nodes[first].time_s < shortest_stand_s)
            add_node(&sums, &nodes[first], &nodes[++last]);
        bool level = nodes[last].time_s - nodes[first].time_s >= shortest_stand_s &&
                     is_level(&sums, scatter_m);
        if (!level) {
            first++;
            continue;
        }
        while (last + 1 < count && !nodes[last + 1].after_gap) {
            struct run_sums longer = sums;
            add_node(&longer, &nodes[first], &nodes[last + 1]);
            if (!is_level(&longer, scatter_m))
                break;
            sums = longer;
            last++;
        }
        mark_run(nodes, first, last, scatter_m, scratch);
        first = last + 1;
    }
}

/* Speeds are believed if most nodes have one and their sum is about the travel. */
static bool speeds_hold(const struct rfade_node *nodes, size_t count)
{
    size_t known = 0;
    double by_speed_m = 0;
    double by_travel_m = 0;
    for (size_t i = 0; i < count; i++) {
        known += isnan(nodes[i].speed_m_s) ? 0 : 1;
        if (i == 0 || nodes[i].after_gap || isnan(nodes[i].speed_m_s) ||
            isnan(nodes[i - 1].speed_m_s))
            continue;
        by_speed_m += (nodes[i].speed_m_s + nodes[i - 1].speed_m_s) / 2 *
                      (nodes[i].time_s - nodes[i - 1].time_s);
        by_travel_m += nodes[i].travel_m - nodes[i - 1].travel_m;
    }
    const double enough_m = 100; /* scatter alone doesn't make such a difference */
    return 2 * known >= count && fabs(by_speed_m - by_travel_m) <=
                                     fmax(enough_m, 0.3 * fmax(by_speed_m, by_travel_m));
}

bool rfade_find_standing(struct rfade_node *nodes, size_t count, double scatter_m,
                         double standing_m_s)
{
    if (speeds_hold(nodes, count)) {
        for (size_t i = 0; i < count; i++)
            nodes[i].standing = nodes[i].speed_m_s < standing_m_s;
        return true;
    }
    for (size_t i = 0; i < count; i++)
        nodes[i].speed_m_s = NAN;
    if (count == 0)
        return true;
    double *scratch = malloc(count * sizeof *scratch);
    if (!scratch)
        return false;
    find_by_travel(nodes, count, scatter_m, scratch);
    free(scratch);
    return true;
}
