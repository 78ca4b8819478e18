/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Fades come as a Poisson number with exponential lengths. Readings at a regular spacing d
 * find a fade of mean length b at all with probability (b/d)(1 - q), q = exp(-d/b), and once
 * found, each further reading is in it with probability q: the number of readings below is
 * Poisson stopped geometric, the Polya-Aeppli distribution [Johnson, Kemp and Kotz, Univariate
 * Discrete Distributions, 3rd ed. 2005, section 9.7, and the recursion there].
 */
#include "predict/next_pass.h"

#include <gsl/gsl_cdf.h>
#include <math.h>
#include <stdbool.h>
#include <stddef.h>

#include "routefade/special.h"

/*
 * Uncertainty of the outage: places up to four deviations aside, so close that what the
 * numbers of readings spread by reaches from one to the next, but at least a quarter of a
 * deviation apart and at most one, at which the trapezoidal rule is right to 1e-8.
 */
enum { NODES_MAX = 33 };
static const double NODES_REACH = 4.0;
static const double CLOSEST = 0.25;

/* As many readings as continuous observation is taken for: at least this many, and so many
 * to a fade. */
static const double MANY_READINGS = 4096.0;
static const double READINGS_A_FADE = 16.0;
static const double MOST_READINGS = 65536.0;

/* From this many fades on their number is normal to better than the first-order statistics
 * that it rests on. */
static const double FADES_FOR_NORMAL = 200.0;

/* The distribution of the number of readings below, at one node, and how far it was summed. */
struct node {
    double weight;
    double fades;  /* Poisson mean of the fades that are found */
    double repeat; /* q */
    double mean;   /* of the number of readings, and its deviation */
    double deviation;
    double last; /* P(n - 1) and P(n - 2) */
    double before;
    double below; /* P(number <= n) */
};

static struct node make_node(double outage, double fade, double readings)
{
    double repeat = fade > 0.0 ? exp(-1.0 / (fade * readings)) : 0.0; /* of no outage */
    double fades = outage * readings * (1.0 - repeat);
    double variance = fades * (1.0 + repeat) / ((1.0 - repeat) * (1.0 - repeat));
    return (struct node){.fades = fades,
                         .repeat = repeat,
                         .mean = outage * readings,
                         .deviation = sqrt(variance)};
}

/* P(number <= n), for n = 0, 1, 2, ... in turn. */
static double next_below(struct node *node, double n)
{
    double here;
    if (node->fades > FADES_FOR_NORMAL)
        return gsl_cdf_gaussian_P(n + 0.5 - node->mean, node->deviation);
    if (n == 0.0) {
        here = exp(-node->fades);
    } else {
        double q = node->repeat;
        here = ((node->fades * (1.0 - q) + 2.0 * q * (n - 1.0)) * node->last -
                q * q * fmax(n - 2.0, 0.0) * node->before) /
               n;
    }
    node->before = node->last;
    node->last = fmax(here, 0.0);
    node->below = fmin(node->below + node->last, 1.0);
    return node->below;
}

/* Numbers of readings below at the two ends, for an outage of at most about one half. */
static void find_ends(const struct rfade_next_pass *next, double tail, double readings,
                      double *low, double *high)
{
    double centre = rfade_from_log_odds(next->log_odds);
    double fade = 0.5 * next->variance / centre;
    struct node nodes[NODES_MAX];
    bool low_found = false;
    double weights = 0.0;
    struct node middle = make_node(centre, fade, readings);
    double apart = fmax(next->deviation_below, next->deviation_above) * middle.mean;
    double step = apart > 0.0 ? fmin(fmax(middle.deviation / apart, CLOSEST), 1.0) : 1.0;
    int aside = (int)floor(NODES_REACH / step), count = 2 * aside + 1;
    for (int i = 0; i < count; i++) {
        double place = step * (i - aside);
        double deviation = place < 0 ? next->deviation_below : next->deviation_above;
        double outage = rfade_from_log_odds(next->log_odds + deviation * place);
        /* Shallow fades are longer as they are more: both as the root of the outage. */
        nodes[i] = make_node(outage, fade * sqrt(outage / centre), readings);
        nodes[i].weight = exp(-0.5 * place * place);
        weights += nodes[i].weight;
    }
    size_t last = (size_t)readings;
    for (size_t n = 0; n <= last; n++) {
        double sum = 0.0;
        for (int i = 0; i < count; i++)
            sum += nodes[i].weight / weights * next_below(&nodes[i], (double)n);
        if (!low_found && sum > tail) {
            *low = (double)n;
            low_found = true;
        }
        *high = (double)n;
        if (sum >= 1.0 - tail)
            return;
    }
}

void rfade_next_pass_interval(const struct rfade_next_pass *next, double confidence,
                              double *low, double *high)
{
    /* Far beyond one half it is the gaps between fades that are rare. */
    struct rfade_next_pass rare = *next;
    if (next->log_odds > 0) {
        rare.log_odds = -next->log_odds;
        rare.deviation_below = next->deviation_above;
        rare.deviation_above = next->deviation_below;
    }
    double fade = 0.5 * next->variance / rfade_from_log_odds(rare.log_odds);
    double enough = fmin(fmax(MANY_READINGS, ceil(READINGS_A_FADE / fade)), MOST_READINGS);
    double readings = next->readings > 0 ? fmin(round(next->readings), enough) : enough;
    double ends[2] = {0.0, 0.0};
    readings = fmax(readings, 1.0);
    find_ends(&rare, 0.5 * (1.0 - confidence), readings, &ends[0], &ends[1]);
    bool mirrored = next->log_odds > 0;
    *low = mirrored ? (readings - ends[1]) / readings : ends[0] / readings;
    *high = mirrored ? (readings - ends[0]) / readings : ends[1] / readings;
}
