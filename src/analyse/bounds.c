/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "analyse/bounds.h"

#include <gsl/gsl_cdf.h>
#include <math.h>

/* The interval whose coverage the simulated drives are held to. */
static const double TWO_SIDED = 0.95;

double rfade_own_distance(double all, double calibration)
{
    return sqrt(fmax(0.0, all * all - calibration * calibration));
}

/* Between two places on the scale of ln(odds), which may be the same infinity. */
static double distance(double from, double to)
{
    return from == to ? 0.0 : fmax(0.0, to - from);
}

/* How far the outage moves when all levels are lower, or higher, by the calibration. */
static enum rfade_status calibration_distances(struct rfade_segment_result *row,
                                               const struct rfade_threshold *threshold,
                                               double shift_db,
                                               struct rfade_outage_bounds *bounds,
                                               struct rfade_error *error)
{
    struct rfade_stretch_outage moved;
    struct rfade_observed ignored;
    struct rfade_threshold raised = *threshold, lowered = *threshold;
    raised.level_dbm += shift_db;
    lowered.level_dbm -= shift_db;
    enum rfade_status status =
        rfade_result_outage(row, &raised, TWO_SIDED, &moved, &ignored, error);
    if (status != RFADE_OK)
        return status;
    bounds->calibration_above = distance(bounds->log_odds, rfade_log_odds(moved.outage));
    status = rfade_result_outage(row, &lowered, TWO_SIDED, &moved, &ignored, error);
    if (status == RFADE_OK)
        bounds->calibration_below = distance(rfade_log_odds(moved.outage), bounds->log_odds);
    return status;
}

enum rfade_status rfade_result_bounds(struct rfade_segment_result *row,
                                      const struct rfade_threshold *threshold,
                                      double confidence, struct rfade_outage_bounds *bounds,
                                      struct rfade_error *error)
{
    struct rfade_stretch_outage found;
    struct rfade_observed observed = {NAN, NAN, NAN};
    *bounds = (struct rfade_outage_bounds){NAN, NAN, NAN, NAN, NAN, NAN, NAN, observed};
    enum rfade_status status =
        rfade_result_outage(row, threshold, TWO_SIDED, &found, &observed, error);
    bounds->observed = observed;
    if (status != RFADE_OK || isnan(found.outage))
        return status;
    double quantile = gsl_cdf_ugaussian_Pinv(confidence);
    double scale = quantile / gsl_cdf_ugaussian_Pinv(0.5 + 0.5 * TWO_SIDED);
    bounds->outage = found.outage;
    bounds->log_odds = rfade_log_odds(found.outage);
    bounds->below = scale * distance(rfade_log_odds(found.low), bounds->log_odds);
    bounds->above = scale * distance(bounds->log_odds, rfade_log_odds(found.high));
    bounds->calibration_below = bounds->calibration_above = 0.0;
    bounds->calibration_db = row->calibration_db;
    if (bounds->calibration_db > 0.0)
        status = calibration_distances(row, threshold, quantile * bounds->calibration_db,
                                       bounds, error);
    return status;
}
