/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * Chebyshev points of the second kind and barycentric interpolation: J.-P. Berrut and L. N.
 * Trefethen, "Barycentric Lagrange interpolation", SIAM Review 46 (2004). Its error falls as
 * rho^-n, rho the sum of the half axes of the largest ellipse about the interval without a
 * singularity, for an interval of half length 1 [Trefethen, Approximation Theory and
 * Approximation Practice, 2013, theorem 8.2]. The SNR's axis is cut into panels. Averages over
 * fading are singular where 1 + SNR = 0, in dB at 10/ln 10 times pi off the real axis; ln erfc
 * where erfc is zero, at 8 dB; in ln K averages are singular where 1 + K + SNR = 0, at pi.
 */
#include "routefade/rate_surface.h"

#include <gsl/gsl_math.h>
#include <math.h>
#include <stdlib.h>

#include "model/model.h"

static const double RANGE_MAX_DB = 400.0;

/* Panels of the SNR, and their nodes: with singularities 8 dB off, rho is 4.2 or more. */
static const double PANEL_DB = 3.0;
enum { PANEL_NODES = 16 };

static const double SPREAD_SINGULARITY = M_PI;
static const double SPREAD_ERROR = 1e-12;
enum { SPREAD_NODES_EXTRA = 6 };

/* The axis of the SNR: panels side by side. */
struct snr_axis {
    double low_db;
    double panel_db;
    size_t panels;
    double nodes_db[PANEL_NODES]; /* from the panel's low end */
};

/* The axis of the parameter, on the scale of spread_of. */
struct spread_axis {
    double parameter_low; /* the ends as they were given: the scale's inverse rounds */
    double parameter_high;
    double low;
    double high;
    size_t count;
    double *nodes;
};

struct rfade_rate_surface {
    const struct rfade_model *model;
    struct snr_axis snr;
    struct spread_axis spread;
    size_t target_count;
    double *log_values; /* [spread.count][snr.panels][target_count][PANEL_NODES] */
};

struct rfade_rate_curve {
    struct snr_axis snr;
    size_t target_count;
    double *log_values; /* [snr.panels][target_count][PANEL_NODES] */
};

/* A scale on which the rates vary evenly. */
static double spread_of(const struct rfade_model *model, double parameter)
{
    if (!model || !model->parameter_name)
        return 0.0;
    return model->id == RFADE_RICE ? log1p(parameter) : log(parameter);
}

static double parameter_of(const struct rfade_model *model, double spread)
{
    if (!model || !model->parameter_name)
        return NAN;
    return model->id == RFADE_RICE ? expm1(spread) : exp(spread);
}

/* Node number i of `count` between two ends. */
static double node_at(double low, double high, size_t i, size_t count)
{
    if (count == 1)
        return 0.5 * (low + high);
    double turn = M_PI * (double)i / (double)(count - 1);
    return 0.5 * (low + high) - 0.5 * (high - low) * cos(turn);
}

static struct snr_axis make_snr_axis(double low_db, double high_db)
{
    double panels = fmax(1.0, ceil((high_db - low_db) / PANEL_DB));
    struct snr_axis axis = {low_db, (high_db - low_db) / panels, (size_t)panels, {0.0}};
    for (size_t i = 0; i < PANEL_NODES; i++)
        axis.nodes_db[i] = node_at(0.0, axis.panel_db, i, PANEL_NODES);
    return axis;
}

/* As many nodes as keep the error of interpolation; one where the parameter does not vary. */
static size_t spread_nodes(double low, double high)
{
    if (!(high > low))
        return 1;
    double ratio = SPREAD_SINGULARITY / (0.5 * (high - low));
    double rho = ratio + sqrt(1.0 + ratio * ratio);
    return (size_t)ceil(-log(SPREAD_ERROR) / log(rho)) + SPREAD_NODES_EXTRA;
}

static enum rfade_status make_spread_axis(const struct rfade_model *model,
                                          const struct rfade_rate_domain *domain,
                                          struct spread_axis *axis)
{
    double low = spread_of(model, domain->parameter_low);
    double high = spread_of(model, domain->parameter_high);
    *axis = (struct spread_axis){.parameter_low = domain->parameter_low,
                                 .parameter_high = domain->parameter_high,
                                 .low = low,
                                 .high = high,
                                 .count = spread_nodes(low, high)};
    axis->nodes = calloc(axis->count, sizeof *axis->nodes);
    for (size_t i = 0; axis->nodes && i < axis->count; i++)
        axis->nodes[i] = node_at(low, high, i, axis->count);
    return axis->nodes ? RFADE_OK : RFADE_NO_MEMORY;
}

static size_t block_size(size_t target_count, const struct snr_axis *snr)
{
    return target_count * snr->panels * PANEL_NODES;
}

/* Weights of the nodes' values at a place between the ends; they sum to 1. */
static void interpolate(const double *nodes, size_t count, double place, double *weights)
{
    double sum = 0.0;
    for (size_t i = 0; i < count; i++) {
        double off = place - nodes[i];
        if (off == 0.0 || count == 1) {
            for (size_t j = 0; j < count; j++)
                weights[j] = j == i ? 1.0 : 0.0;
            return;
        }
        bool end = i == 0 || i + 1 == count;
        weights[i] = (i % 2 ? -1.0 : 1.0) * (end ? 0.5 : 1.0) / off;
        sum += weights[i];
    }
    for (size_t i = 0; i < count; i++)
        weights[i] /= sum;
}

/* The modulations that the targets name, each once, and where each target's stands. */
enum { MODULATIONS_MAX = RFADE_MODULATION_COUNT };
struct asked {
    const struct rfade_modulation *modulations[MODULATIONS_MAX];
    size_t count;
};

static size_t place_of(struct asked *asked, const struct rfade_modulation *modulation)
{
    size_t place = 0;
    while (place < asked->count && asked->modulations[place] != modulation)
        place++;
    if (place == asked->count && asked->count < MODULATIONS_MAX)
        asked->modulations[asked->count++] = modulation;
    return place;
}

static struct asked modulations_of(const struct rfade_target *targets, size_t count)
{
    struct asked asked = {{NULL}, 0};
    for (size_t i = 0; i < count; i++)
        if (targets[i].kind != RFADE_TARGET_OUTAGE)
            (void)place_of(&asked, targets[i].modulation);
    return asked;
}

/* Where a packet's error rate underflows it is that of a bit, as often as there are bits. */
static enum rfade_status log_packet(const struct rfade_link *link,
                                    const struct rfade_target *target,
                                    const struct rfade_error_rate *rate, double *log_value)
{
    struct rfade_packet_error packet;
    enum rfade_status status =
        rfade_packet_error(link, target->modulation, target->packet_bits, &packet);
    double value =
        target->kind == RFADE_TARGET_PACKET_BLOCK ? packet.block : packet.independent;
    *log_value = value > 1e-290 ? log(value) : log(target->packet_bits) + rate->log_bit;
    return status;
}

static enum rfade_status log_value(const struct rfade_link *link,
                                   const struct rfade_target *target,
                                   const struct rfade_error_rate *rate, double *result)
{
    struct rfade_tails tails;
    enum rfade_status status = RFADE_OK;
    switch (target->kind) {
    case RFADE_TARGET_OUTAGE:
        status = rfade_link_outage(link, target->threshold_db, &tails);
        *result = tails.log_lower;
        break;
    case RFADE_TARGET_BIT:
        *result = rate->log_bit;
        break;
    case RFADE_TARGET_SYMBOL:
        *result = rate->log_symbol;
        break;
    case RFADE_TARGET_PACKET_INDEPENDENT:
    case RFADE_TARGET_PACKET_BLOCK:
        status = log_packet(link, target, rate, result);
        break;
    }
    return status;
}

/* All targets at one node; their values lie PANEL_NODES apart. */
static enum rfade_status fill_node(const struct rfade_link *link,
                                   const struct rfade_target *targets, size_t count,
                                   struct asked *asked, double *log_values)
{
    struct rfade_error_rate rates[MODULATIONS_MAX];
    enum rfade_status status = RFADE_OK;
    if (asked->count > 0)
        status = rfade_error_rates(link, asked->modulations, asked->count, rates);
    for (size_t i = 0; i < count && status == RFADE_OK; i++) {
        bool outage = targets[i].kind == RFADE_TARGET_OUTAGE;
        const struct rfade_error_rate *rate =
            outage ? NULL : &rates[place_of(asked, targets[i].modulation)];
        status = log_value(link, &targets[i], rate, &log_values[i * PANEL_NODES]);
    }
    return status;
}

/* One parameter, all SNRs. */
static enum rfade_status fill_curve(const struct snr_axis *snr, struct rfade_link link,
                                    const struct rfade_target *targets, size_t count,
                                    double *log_values)
{
    struct asked asked = modulations_of(targets, count);
    enum rfade_status status = RFADE_OK;
    for (size_t i = 0; i < snr->panels * PANEL_NODES && status == RFADE_OK; i++) {
        size_t panel = i / PANEL_NODES, node = i % PANEL_NODES;
        link.mean_snr_db = snr->low_db + (double)panel * snr->panel_db + snr->nodes_db[node];
        status = fill_node(&link, targets, count, &asked,
                           &log_values[panel * count * PANEL_NODES + node]);
    }
    return status;
}

static enum rfade_status fill(struct rfade_rate_surface *surface, struct rfade_link link,
                              const struct rfade_target *targets)
{
    const struct spread_axis *spread = &surface->spread;
    size_t block = block_size(surface->target_count, &surface->snr);
    enum rfade_status status = RFADE_OK;
    for (size_t i = 0; i < spread->count && status == RFADE_OK; i++) {
        double parameter = parameter_of(surface->model, spread->nodes[i]);
        link.parameter = fmin(fmax(parameter, spread->parameter_low), spread->parameter_high);
        status = fill_curve(&surface->snr, link, targets, surface->target_count,
                            &surface->log_values[i * block]);
    }
    return status;
}

static bool valid_domain(const struct rfade_link *link, const struct rfade_rate_domain *domain)
{
    bool parameter = link->model && link->model->parameter_name;
    return domain->snr_low_db <= domain->snr_high_db &&
           domain->snr_high_db - domain->snr_low_db <= RANGE_MAX_DB &&
           (!parameter || domain->parameter_low <= domain->parameter_high);
}

static bool valid_targets(const struct rfade_target *targets, size_t count)
{
    for (size_t i = 0; i < count; i++)
        if (targets[i].kind != RFADE_TARGET_OUTAGE && !targets[i].modulation)
            return false;
    return count > 0;
}

enum rfade_status rfade_rate_surface_create(const struct rfade_link *link,
                                            const struct rfade_target *targets, size_t count,
                                            const struct rfade_rate_domain *domain,
                                            struct rfade_rate_surface **surface)
{
    *surface = NULL;
    if (!valid_domain(link, domain) || !valid_targets(targets, count))
        return RFADE_DOMAIN;
    struct rfade_rate_surface *made = calloc(1, sizeof *made);
    if (!made)
        return RFADE_NO_MEMORY;
    made->model = link->model;
    made->target_count = count;
    made->snr = make_snr_axis(domain->snr_low_db, domain->snr_high_db);
    enum rfade_status status = make_spread_axis(link->model, domain, &made->spread);
    if (status == RFADE_OK) {
        size_t values = made->spread.count * block_size(count, &made->snr);
        made->log_values = malloc(values * sizeof *made->log_values);
        status = made->log_values ? fill(made, *link, targets) : RFADE_NO_MEMORY;
    }
    if (status != RFADE_OK) {
        rfade_rate_surface_destroy(made);
        return status;
    }
    *surface = made;
    return RFADE_OK;
}

void rfade_rate_surface_destroy(struct rfade_rate_surface *surface)
{
    if (!surface)
        return;
    free(surface->spread.nodes);
    free(surface->log_values);
    free(surface);
}

/* The panels that hold a stretch of SNR. */
static struct snr_axis narrow(const struct snr_axis *snr, double low_db, double high_db,
                              size_t *first)
{
    struct snr_axis some = *snr;
    double last = (double)(snr->panels - 1);
    double from = floor((low_db - snr->low_db) / snr->panel_db);
    double to = floor((high_db - snr->low_db) / snr->panel_db);
    from = fmin(fmax(from, 0.0), last); /* a panel of no width gives NaN: the first */
    to = fmin(fmax(to, from), last);
    *first = (size_t)from;
    some.low_db += from * snr->panel_db;
    some.panels = (size_t)(to - from) + 1;
    return some;
}

/* The first targets' values from a panel on, with the nodes of the parameter weighted. */
static void cut(const struct rfade_rate_surface *surface, const double *weights, size_t first,
                const struct rfade_rate_curve *curve)
{
    size_t panel_size = surface->target_count * PANEL_NODES;
    size_t cut_size = curve->target_count * PANEL_NODES;
    for (size_t panel = 0; panel < curve->snr.panels; panel++) {
        double *to = &curve->log_values[panel * cut_size];
        for (size_t j = 0; j < cut_size; j++)
            to[j] = 0.0;
        for (size_t i = 0; i < surface->spread.count; i++) {
            size_t block = (i * surface->snr.panels + first + panel) * panel_size;
            for (size_t j = 0; j < cut_size && weights[i] != 0.0; j++)
                to[j] += weights[i] * surface->log_values[block + j];
        }
    }
}

enum rfade_status rfade_rate_surface_cut(const struct rfade_rate_surface *surface,
                                         double parameter, size_t targets, double low_db,
                                         double high_db, struct rfade_rate_curve **curve)
{
    const struct spread_axis *spread = &surface->spread;
    size_t first = 0;
    struct snr_axis snr = narrow(&surface->snr, low_db, high_db, &first);
    *curve = NULL;
    if (targets < 1 || targets > surface->target_count)
        return RFADE_DOMAIN;
    struct rfade_rate_curve *made = calloc(1, sizeof *made);
    double *weights = malloc(spread->count * sizeof *weights);
    double *log_values = malloc(block_size(targets, &snr) * sizeof *log_values);
    if (!made || !weights || !log_values) {
        free(made);
        free(weights);
        free(log_values);
        return RFADE_NO_MEMORY;
    }
    double place = fmin(fmax(spread_of(surface->model, parameter), spread->low), spread->high);
    interpolate(spread->nodes, spread->count, place, weights);
    *made = (struct rfade_rate_curve){snr, targets, log_values};
    cut(surface, weights, first, made);
    free(weights);
    *curve = made;
    return RFADE_OK;
}

void rfade_rate_curve_destroy(struct rfade_rate_curve *curve)
{
    if (!curve)
        return;
    free(curve->log_values);
    free(curve);
}

/* Adds the probabilities at one SNR, weighted. */
static void add_place(const struct rfade_rate_curve *curve, double snr_db, double weight,
                      double *sums)
{
    double weights[PANEL_NODES];
    const struct snr_axis *snr = &curve->snr;
    double range_db = (double)snr->panels * snr->panel_db;
    double over_db = fmin(fmax(snr_db - snr->low_db, 0.0), range_db);
    double panel = snr->panel_db > 0.0 ? floor(over_db / snr->panel_db) : 0.0;
    panel = fmin(panel, (double)(snr->panels - 1));
    interpolate(snr->nodes_db, PANEL_NODES, over_db - panel * snr->panel_db, weights);
    const double *values =
        &curve->log_values[(size_t)panel * curve->target_count * PANEL_NODES];
    for (size_t i = 0; i < curve->target_count; i++) {
        double log_value = 0.0;
        for (size_t j = 0; j < PANEL_NODES; j++)
            log_value += weights[j] * values[i * PANEL_NODES + j];
        sums[i] += weight * exp(fmin(log_value, 0.0));
    }
}

enum rfade_status rfade_rate_curve_mean(const struct rfade_rate_curve *curve,
                                        const struct rfade_snr_place *way, size_t place_count,
                                        double shift_db, double *probabilities)
{
    double total = 0.0;
    for (size_t i = 0; i < curve->target_count; i++)
        probabilities[i] = 0.0;
    for (size_t place = 0; place < place_count; place++) {
        add_place(curve, way[place].snr_db + shift_db, way[place].weight, probabilities);
        total += way[place].weight;
    }
    for (size_t i = 0; i < curve->target_count; i++)
        probabilities[i] = total > 0.0 ? probabilities[i] / total : NAN;
    return total > 0.0 ? RFADE_OK : RFADE_NO_DATA;
}
