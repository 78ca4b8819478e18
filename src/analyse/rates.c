/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analyse/rates.h"

#include <gsl/gsl_cdf.h>
#include <math.h>
#include <stdlib.h>

#include "routefade/rate_surface.h"

/* Beyond these ends of K and m the level varies by less than 0.3 dB: less than the level's own
 * uncertainty; below the lower one of m the model ends. */
static const double K_MAX = 1e3;
static const double M_MIN = 0.5;
static const double M_MAX = 500.0;

/* Along a way that spreads over so many dB the required mean lies no further from that without
 * a spread than these, and this much beside. */
static const double WAY_REACH_DB = 6.0;

static const double MARGIN_ACCURACY_DB = 1e-9;
enum { SOLVE_STEPS_MAX = 200 };

/* One row made ready: where its SNR lies, and how its fading is known. */
struct work {
    const struct rfade_stored_fit *fit; /* NULL: nothing to predict from */
    struct rfade_snr_place *way;
    size_t place_count;
    double low_db; /* of the way */
    double high_db;
    double reach_db; /* of the level's uncertainty */
    double mean_db;  /* of the mean power along the way */
};

/* All rows, and a surface for each model that one of them prefers. */
struct rates {
    const struct rfade_reception *reception;
    const struct rfade_target *targets;
    size_t target_count;
    size_t interval_count; /* of the targets, the first ones */
    struct work *works;
    size_t count;
    struct rfade_rate_surface *surfaces[RFADE_MODEL_COUNT];
};

static double within(double value, double low, double high)
{
    return fmin(fmax(value, low), high);
}

/* The parameter as error rates know it. */
static double held_parameter(const struct rfade_model *model, double parameter)
{
    return model->id == RFADE_RICE ? within(parameter, 0.0, K_MAX)
                                   : within(parameter, M_MIN, M_MAX);
}

static enum rfade_status make_way(struct rfade_segment_result *row, double reference_dbm,
                                  struct work *work)
{
    struct rfade_local_mean *track = NULL;
    double power = 0.0, weights = 0.0;
    enum rfade_status status = rfade_result_track(row, &track, &work->place_count);
    if (status == RFADE_OK && work->place_count > 0) {
        work->way = malloc(work->place_count * sizeof *work->way);
        status = work->way ? RFADE_OK : RFADE_NO_MEMORY;
    }
    for (size_t i = 0; i < work->place_count && status == RFADE_OK; i++) {
        double over_db = track[i].level_dbm + work->fit->offset_db - reference_dbm;
        work->way[i] = (struct rfade_snr_place){over_db, track[i].weight};
        work->low_db = fmin(work->low_db, over_db);
        work->high_db = fmax(work->high_db, over_db);
        power += track[i].weight * pow(10.0, over_db / 10.0);
        weights += track[i].weight;
    }
    if (weights > 0.0)
        work->mean_db = 10.0 * log10(power / weights);
    free(track);
    return status;
}

static enum rfade_status make_work(struct rfade_segment_result *row, double reference_dbm,
                                   double quantile, struct work *work)
{
    const struct rfade_stored_fit *fit = rfade_result_preferred(row);
    *work = (struct work){.mean_db = NAN, .low_db = INFINITY, .high_db = -INFINITY};
    if (!fit || !fit->model || fit->model->id == RFADE_LOGNORMAL || isnan(reference_dbm))
        return RFADE_OK;
    work->fit = fit;
    work->reach_db =
        isnan(row->level_uncertainty_db) ? 0.0 : quantile * row->level_uncertainty_db;
    enum rfade_status status = make_way(row, reference_dbm, work);
    if (work->place_count == 0)
        work->fit = NULL;
    return status;
}

static enum rfade_status rates_create(struct rfade_segment_results *results,
                                      const struct rfade_reception *reception,
                                      const double *reference_dbm,
                                      const struct rfade_target *targets, size_t target_count,
                                      struct rates *rates)
{
    double quantile = gsl_cdf_ugaussian_Pinv(0.5 + 0.5 * reception->confidence);
    *rates = (struct rates){.reception = reception,
                            .targets = targets,
                            .target_count = target_count,
                            .interval_count = 1,
                            .count = results->count};
    rates->works = calloc(results->count + 1, sizeof *rates->works);
    enum rfade_status status = rates->works ? RFADE_OK : RFADE_NO_MEMORY;
    for (size_t i = 0; i < results->count && status == RFADE_OK; i++)
        status = make_work(&results->rows[i], reference_dbm[i], quantile, &rates->works[i]);
    return status;
}

static void rates_clear(struct rates *rates)
{
    for (size_t i = 0; rates->works && i < rates->count; i++)
        free(rates->works[i].way);
    free(rates->works);
    for (int model = 0; model < RFADE_MODEL_COUNT; model++)
        rfade_rate_surface_destroy(rates->surfaces[model]);
}

/* Widens a domain by what one row needs of it. */
static void reach_out(const struct work *work, struct rfade_rate_domain *domain)
{
    const struct rfade_stored_fit *fit = work->fit;
    const double parameters[] = {fit->parameter, fit->parameter_low, fit->parameter_high};
    domain->snr_low_db = fmin(domain->snr_low_db, work->low_db - work->reach_db);
    domain->snr_high_db = fmax(domain->snr_high_db, work->high_db + work->reach_db);
    for (size_t i = 0; i < sizeof parameters / sizeof parameters[0]; i++) {
        if (!fit->model->parameter_name || isnan(parameters[i]))
            continue;
        double held = held_parameter(fit->model, parameters[i]);
        domain->parameter_low = fmin(domain->parameter_low, held);
        domain->parameter_high = fmax(domain->parameter_high, held);
    }
}

/* What all rows of one model need together; false if there is none. */
static bool domain_of(const struct rates *rates, enum rfade_model_id model,
                      struct rfade_rate_domain *domain)
{
    *domain = (struct rfade_rate_domain){INFINITY, -INFINITY, INFINITY, -INFINITY};
    for (size_t i = 0; i < rates->count; i++)
        if (rates->works[i].fit && rates->works[i].fit->model->id == model)
            reach_out(&rates->works[i], domain);
    return domain->snr_low_db <= domain->snr_high_db;
}

static struct rfade_link link_of(const struct rates *rates, enum rfade_model_id model,
                                 double parameter)
{
    return (struct rfade_link){.model = rfade_model(model),
                               .parameter = parameter,
                               .branches = rates->reception->branches,
                               .combining = rates->reception->combining};
}

/* The widest way of a model's rows, from its lowest SNR to its highest. */
static double widest_way_db(const struct rates *rates, enum rfade_model_id model)
{
    double widest_db = 0.0;
    for (size_t i = 0; i < rates->count; i++) {
        const struct work *work = &rates->works[i];
        if (work->fit && work->fit->model->id == model)
            widest_db = fmax(widest_db, work->high_db - work->low_db);
    }
    return widest_db;
}

/* Where the target is met without any spread of the local mean, at either end of the
 * parameter, and as far about that as a way reaches. */
static enum rfade_status domain_about_target(const struct rates *rates,
                                             enum rfade_model_id model,
                                             struct rfade_rate_domain *domain)
{
    const double ends[] = {domain->parameter_low, domain->parameter_high};
    double reach_db = widest_way_db(rates, model) + WAY_REACH_DB;
    domain->snr_low_db = INFINITY;
    domain->snr_high_db = -INFINITY;
    for (size_t i = 0; i < 2; i++) {
        struct rfade_link link = link_of(rates, model, ends[i]);
        double required_db = NAN;
        enum rfade_status status = rfade_required_snr(&link, rates->targets, &required_db);
        if (status != RFADE_OK)
            return status;
        domain->snr_low_db = fmin(domain->snr_low_db, required_db - reach_db);
        domain->snr_high_db = fmax(domain->snr_high_db, required_db + reach_db);
    }
    return RFADE_OK;
}

static enum rfade_status make_surfaces(struct rates *rates, bool about_target)
{
    enum rfade_status status = RFADE_OK;
    for (int model = 0; model < RFADE_MODEL_COUNT && status == RFADE_OK; model++) {
        struct rfade_rate_domain domain;
        if (!domain_of(rates, (enum rfade_model_id)model, &domain))
            continue;
        if (about_target)
            status = domain_about_target(rates, (enum rfade_model_id)model, &domain);
        struct rfade_link link = link_of(rates, (enum rfade_model_id)model, NAN);
        if (status == RFADE_OK)
            status = rfade_rate_surface_create(&link, rates->targets, rates->target_count,
                                               &domain, &rates->surfaces[model]);
    }
    return status;
}

/* A row's surface cut at one parameter of its fit, as far as its SNR reaches either way. */
static enum rfade_status cut_at(const struct rates *rates, const struct work *work,
                                double parameter, size_t targets, double either_way_db,
                                struct rfade_rate_curve **curve)
{
    const struct rfade_model *model = work->fit->model;
    double held = model->parameter_name ? held_parameter(model, parameter) : NAN;
    return rfade_rate_surface_cut(rates->surfaces[model->id], held, targets,
                                  work->low_db - either_way_db, work->high_db + either_way_db,
                                  curve);
}

/* Squared distances in the logarithm, below and above, by target. */
struct distances {
    double *centre;
    double *below;
    double *above;
    double *moved;
};

static void add_distances(const struct rates *rates, struct distances *distances)
{
    for (size_t i = 0; i < rates->interval_count; i++) {
        double distance = log(distances->moved[i]) - log(distances->centre[i]);
        if (distance > 0.0)
            distances->above[i] += distance * distance;
        else if (isfinite(distance))
            distances->below[i] += distance * distance;
    }
}

/* The estimates of all targets. */
static enum rfade_status estimate(const struct rates *rates, const struct work *work,
                                  struct distances *distances)
{
    struct rfade_rate_curve *curve = NULL;
    enum rfade_status status =
        cut_at(rates, work, work->fit->parameter, rates->target_count, 0.0, &curve);
    if (status == RFADE_OK)
        status =
            rfade_rate_curve_mean(curve, work->way, work->place_count, 0.0, distances->centre);
    rfade_rate_curve_destroy(curve);
    return status;
}

/* How far the level's uncertainty moves them. */
static enum rfade_status move_level(const struct rates *rates, const struct work *work,
                                    struct distances *distances)
{
    struct rfade_rate_curve *curve = NULL;
    enum rfade_status status = cut_at(rates, work, work->fit->parameter, rates->interval_count,
                                      work->reach_db, &curve);
    const double shifts_db[] = {work->reach_db, -work->reach_db};
    for (size_t i = 0; i < 2 && status == RFADE_OK; i++) {
        status = rfade_rate_curve_mean(curve, work->way, work->place_count, shifts_db[i],
                                       distances->moved);
        if (status == RFADE_OK)
            add_distances(rates, distances);
    }
    rfade_rate_curve_destroy(curve);
    return status;
}

static enum rfade_status move_parameter(const struct rates *rates, const struct work *work,
                                        struct distances *distances)
{
    const double ends[] = {work->fit->parameter_low, work->fit->parameter_high};
    enum rfade_status status = RFADE_OK;
    for (size_t i = 0; i < 2 && status == RFADE_OK; i++) {
        struct rfade_rate_curve *curve = NULL;
        if (!work->fit->model->parameter_name || isnan(ends[i]))
            continue;
        status = cut_at(rates, work, ends[i], rates->interval_count, 0.0, &curve);
        if (status == RFADE_OK)
            status = rfade_rate_curve_mean(curve, work->way, work->place_count, 0.0,
                                           distances->moved);
        if (status == RFADE_OK)
            add_distances(rates, distances);
        rfade_rate_curve_destroy(curve);
    }
    return status;
}

static enum rfade_status rate_row(const struct rates *rates, const struct work *work,
                                  double *room, struct rfade_segment_rate *row)
{
    size_t count = rates->target_count;
    struct distances distances = {room, room + count, room + 2 * count, room + 3 * count};
    for (size_t i = 0; i < count; i++) {
        row[i] = (struct rfade_segment_rate){NAN, NAN, NAN};
        distances.below[i] = distances.above[i] = 0.0;
    }
    if (!work->fit)
        return RFADE_OK;
    enum rfade_status status = estimate(rates, work, &distances);
    if (status == RFADE_OK)
        status = move_level(rates, work, &distances);
    if (status == RFADE_OK)
        status = move_parameter(rates, work, &distances);
    for (size_t i = 0; i < count && status == RFADE_OK; i++) {
        double value = distances.centre[i];
        row[i].value = value;
        if (i >= rates->interval_count)
            continue;
        row[i].low = value * exp(-sqrt(distances.below[i]));
        row[i].high = fmin(value * exp(sqrt(distances.above[i])), 1.0);
    }
    return status;
}

static enum rfade_status failed(enum rfade_status status, struct rfade_error *error)
{
    if (status == RFADE_OK)
        return status;
    return rfade_error_set(error, status, "", "the link can't be computed: %s",
                           rfade_status_text(status));
}

enum rfade_status
rfade_results_rates(struct rfade_segment_results *results,
                    const struct rfade_reception *reception, const double *reference_dbm,
                    const struct rfade_target *targets, size_t count, size_t interval_count,
                    struct rfade_segment_rate *segment_rates, struct rfade_error *error)
{
    struct rates rates;
    double *room = malloc(4 * count * sizeof *room);
    enum rfade_status status =
        rates_create(results, reception, reference_dbm, targets, count, &rates);
    rates.interval_count = interval_count;
    if (status == RFADE_OK && !room)
        status = RFADE_NO_MEMORY;
    if (status == RFADE_OK)
        status = make_surfaces(&rates, false);
    for (size_t i = 0; i < results->count && status == RFADE_OK; i++)
        status = rate_row(&rates, &rates.works[i], room, &segment_rates[i * count]);
    rates_clear(&rates);
    free(room);
    return failed(status, error);
}

/*
 * The shift of the level at which the mean along the way is the target: the mean falls as the
 * level rises, so that halving finds it.
 */
static enum rfade_status solve_shift(const struct rates *rates, const struct work *work,
                                     double parameter, double *shift_db)
{
    struct rfade_rate_curve *curve = NULL;
    double low_db = -3.0 * RFADE_SNR_LIMIT_DB, high_db = 3.0 * RFADE_SNR_LIMIT_DB;
    enum rfade_status status = cut_at(rates, work, parameter, 1, INFINITY, &curve);
    for (int i = 0; i < SOLVE_STEPS_MAX && status == RFADE_OK; i++) {
        double middle_db = 0.5 * (low_db + high_db), probability = NAN;
        if (high_db - low_db < MARGIN_ACCURACY_DB)
            break;
        status =
            rfade_rate_curve_mean(curve, work->way, work->place_count, middle_db, &probability);
        if (probability > rates->targets[0].value)
            low_db = middle_db;
        else
            high_db = middle_db;
    }
    *shift_db = 0.5 * (low_db + high_db);
    rfade_rate_curve_destroy(curve);
    return status;
}

/* How far one end of the parameter's interval moves the margin; 0 without a parameter. */
static enum rfade_status margin_moved(const struct rates *rates, const struct work *work,
                                      double parameter, double shift_db, double *moved_db)
{
    double end_db = shift_db;
    enum rfade_status status = RFADE_OK;
    if (work->fit->model->parameter_name && !isnan(parameter))
        status = solve_shift(rates, work, parameter, &end_db);
    *moved_db = shift_db - end_db;
    return status;
}

static enum rfade_status margin_row(const struct rates *rates, const struct work *work,
                                    struct rfade_segment_margin *margin)
{
    *margin = (struct rfade_segment_margin){NAN, NAN, NAN, NAN};
    if (!work->fit)
        return RFADE_OK;
    double shift_db = NAN, moved_db[2] = {NAN, NAN};
    enum rfade_status status = solve_shift(rates, work, work->fit->parameter, &shift_db);
    if (status == RFADE_OK)
        status = margin_moved(rates, work, work->fit->parameter_low, shift_db, &moved_db[0]);
    if (status == RFADE_OK)
        status = margin_moved(rates, work, work->fit->parameter_high, shift_db, &moved_db[1]);
    if (status != RFADE_OK)
        return status;
    double below_db = fmax(0.0, -fmin(moved_db[0], moved_db[1]));
    double above_db = fmax(0.0, fmax(moved_db[0], moved_db[1]));
    *margin = (struct rfade_segment_margin){
        .required_db = work->mean_db + shift_db,
        .margin_db = -shift_db,
        .low_db = -shift_db - hypot(below_db, work->reach_db),
        .high_db = -shift_db + hypot(above_db, work->reach_db),
    };
    return RFADE_OK;
}

enum rfade_status rfade_results_margins(struct rfade_segment_results *results,
                                        const struct rfade_reception *reception,
                                        const double *reference_dbm,
                                        const struct rfade_target *target,
                                        struct rfade_segment_margin *margins,
                                        struct rfade_error *error)
{
    struct rates rates;
    enum rfade_status status =
        rates_create(results, reception, reference_dbm, target, 1, &rates);
    if (status == RFADE_OK)
        status = make_surfaces(&rates, true);
    if (status == RFADE_DOMAIN)
        status =
            rfade_error_set(error, status, "give a target between 0 and what no signal has",
                            "no level meets that target");
    for (size_t i = 0; i < results->count && status == RFADE_OK; i++)
        status = margin_row(&rates, &rates.works[i], &margins[i]);
    rates_clear(&rates);
    return status == RFADE_DOMAIN ? status : failed(status, error);
}
