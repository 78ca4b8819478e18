/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Filter and backward smoother: R. E. Kalman 1960; H. E. Rauch, F. Tung and C. T. Striebel,
 * AIAA J. 3 (1965) 1445-1450. Pool adjacent violators: M. Ayer et al., Ann. Math. Stat. 26
 * (1955) 641-647. Slopes of a monotone cubic: F. N. Fritsch and R. E. Carlson, SIAM J. Numer.
 * Anal. 17 (1980) 238-246. */
#include "route/smooth.h"

#include <math.h>
#include <stdlib.h>

/* How fast a road vehicle's speed wanders: white acceleration of 1 m/s^2 over 1 s. */
static const double acceleration_m2_s3 = 1;
static const double speed_error_m_s = 0.5; /* of the speed column */
static const double first_speed_m_s = 30;  /* unknown by that at the start */
static const double standing_speed_m_s = 1e-3;

/* Mean and covariance of (travel, speed). */
struct estimate {
    double travel, speed;
    double tt, tv, vv;
};

static void measure_travel(struct estimate *e, double travel_m, double error_m)
{
    double variance = e->tt + error_m * error_m;
    double gain_t = e->tt / variance;
    double gain_v = e->tv / variance;
    double surprise = travel_m - e->travel;
    e->travel += gain_t * surprise;
    e->speed += gain_v * surprise;
    e->vv -= gain_v * e->tv;
    e->tv -= gain_t * e->tv;
    e->tt -= gain_t * e->tt;
}

static void measure_speed(struct estimate *e, double speed_m_s, double error_m_s)
{
    double variance = e->vv + error_m_s * error_m_s;
    double gain_t = e->tv / variance;
    double gain_v = e->vv / variance;
    double surprise = speed_m_s - e->speed;
    e->travel += gain_t * surprise;
    e->speed += gain_v * surprise;
    e->tt -= gain_t * e->tv;
    e->tv -= gain_v * e->tv;
    e->vv -= gain_v * e->vv;
}

static void measure(struct estimate *e, const struct rfade_node *node, double scatter_m)
{
    measure_travel(e, node->travel_m, scatter_m);
    if (node->standing)
        measure_speed(e, 0, standing_speed_m_s);
    else if (!isnan(node->speed_m_s))
        measure_speed(e, node->speed_m_s, speed_error_m_s);
}

/* Over `s` seconds; a vehicle that stands before and after has not moved in between. */
static struct estimate predict(const struct estimate *e, double s, bool stood)
{
    double q = stood ? 0 : acceleration_m2_s3;
    return (struct estimate){
        .travel = e->travel + s * e->speed,
        .speed = e->speed,
        .tt = e->tt + 2 * s * e->tv + s * s * e->vv + q * s * s * s / 3,
        .tv = e->tv + s * e->vv + q * s * s / 2,
        .vv = e->vv + q * s,
    };
}

static bool stood_between(const struct rfade_node *node)
{
    return node->standing && node[-1].standing && !node->after_gap;
}

/* One step of the backward smoother: `e` as filtered, `ahead` as predicted from it for the
 * next node, `next` as smoothed there. */
static void smooth_back(struct estimate *e, const struct estimate *ahead,
                        const struct estimate *next, double s)
{
    double determinant = ahead->tt * ahead->vv - ahead->tv * ahead->tv;
    if (!(determinant > 0))
        return;
    /* Gain C = P F' A^-1, with F = [1 s; 0 1]. */
    double pt = e->tt + s * e->tv;
    double pv = e->tv + s * e->vv;
    double c_tt = (pt * ahead->vv - e->tv * ahead->tv) / determinant;
    double c_tv = (e->tv * ahead->tt - pt * ahead->tv) / determinant;
    double c_vt = (pv * ahead->vv - e->vv * ahead->tv) / determinant;
    double c_vv = (e->vv * ahead->tt - pv * ahead->tv) / determinant;
    double travel = next->travel - ahead->travel;
    double speed = next->speed - ahead->speed;
    e->travel += c_tt * travel + c_tv * speed;
    e->speed += c_vt * travel + c_vv * speed;
}

bool rfade_smooth(struct rfade_node *nodes, size_t count, double scatter_m)
{
    struct estimate *filtered = malloc(2 * count * sizeof *filtered);
    if (!filtered)
        return false;
    struct estimate *ahead = filtered + count; /* predicted for a node from the one before */
    for (size_t i = 0; i < count; i++) {
        filtered[i] = (struct estimate){.travel = nodes[i].travel_m,
                                        .tt = 1e4 * scatter_m * scatter_m,
                                        .vv = first_speed_m_s * first_speed_m_s};
        if (i > 0) {
            double s = nodes[i].time_s - nodes[i - 1].time_s;
            filtered[i] = predict(&filtered[i - 1], s, stood_between(&nodes[i]));
            ahead[i] = filtered[i];
        }
        measure(&filtered[i], &nodes[i], scatter_m);
    }
    for (size_t i = count - 1; i-- > 0;)
        smooth_back(&filtered[i], &ahead[i + 1], &filtered[i + 1],
                    nodes[i + 1].time_s - nodes[i].time_s);
    for (size_t i = 0; i < count; i++) {
        nodes[i].travel_m = filtered[i].travel;
        nodes[i].speed_m_s = filtered[i].speed;
    }
    free(filtered);
    return true;
}

/* Gives every standstill the mean of its nodes. */
static void level_standstills(struct rfade_node *nodes, size_t count)
{
    for (size_t first = 0, last; first < count; first = last + 1) {
        last = first;
        double sum = nodes[first].travel_m;
        while (last + 1 < count && nodes[first].standing && nodes[last + 1].standing &&
               !nodes[last + 1].after_gap)
            sum += nodes[++last].travel_m;
        for (size_t i = first; i <= last; i++)
            nodes[i].travel_m = sum / (double)(last - first + 1);
    }
}

struct block {
    double mean;
    size_t count;
};

static bool pool_violators(struct rfade_node *nodes, size_t count)
{
    struct block *blocks = malloc(count * sizeof *blocks);
    if (!blocks)
        return false;
    size_t used = 0;
    for (size_t i = 0; i < count; i++) {
        blocks[used++] = (struct block){nodes[i].travel_m, 1};
        while (used > 1 && blocks[used - 2].mean >= blocks[used - 1].mean) {
            struct block *low = &blocks[used - 2];
            const struct block *high = &blocks[used - 1];
            size_t together = low->count + high->count;
            if (low->mean > high->mean)
                low->mean =
                    (low->mean * (double)low->count + high->mean * (double)high->count) /
                    (double)together;
            low->count = together;
            used--;
        }
    }
    size_t node = 0;
    for (size_t b = 0; b < used; b++)
        for (size_t i = 0; i < blocks[b].count; i++)
            nodes[node++].travel_m = blocks[b].mean;
    free(blocks);
    return true;
}

/* The cubic between two nodes is monotone if neither slope is above three times the chord's. */
static void limit_speeds(struct rfade_node *nodes, size_t count)
{
    for (size_t i = 0; i < count; i++)
        nodes[i].speed_m_s = nodes[i].standing ? 0 : fmax(0, nodes[i].speed_m_s);
    for (size_t i = 1; i < count; i++) {
        double chord = (nodes[i].travel_m - nodes[i - 1].travel_m) /
                       (nodes[i].time_s - nodes[i - 1].time_s);
        nodes[i - 1].speed_m_s = fmin(nodes[i - 1].speed_m_s, 3 * chord);
        nodes[i].speed_m_s = fmin(nodes[i].speed_m_s, 3 * chord);
    }
}

bool rfade_make_monotone(struct rfade_node *nodes, size_t count)
{
    level_standstills(nodes, count);
    if (!pool_violators(nodes, count))
        return false;
    limit_speeds(nodes, count);
    return true;
}
