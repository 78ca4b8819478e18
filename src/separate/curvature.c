/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * How much the local mean bends: second differences m1 - 2 m2 + m3 of the levels of three
 * adjacent mean powers, each over a length h of travel. A steady slope of the local mean adds
 * nothing to them, nor does it leak into the fast fading of a centred window.
 */
#include <math.h>
#include <stdlib.h>

#include "separate/pass.h"

/* One second difference, so large that it can only be an artefact, adds no more than this. */
static const double most_difference_cdb = 10000.0;

/* First reading at or beyond a place, at or after `from`; the count if there is none. */
static size_t first_beyond(const struct rfade_pass *pass, size_t from, int64_t place_mm)
{
    while (from < pass->count && pass->readings[from].travel_mm < place_mm) {
        from++;
    }
    return from;
}

/* Level of the mean power over [place, place + length) of each reading; NaN near the end. */
static void forward_means(const struct rfade_pass *pass, int64_t length_mm, double *means_cdb)
{
    struct rfade_range range = {0, 0};

    for (range.from = 0; range.from < pass->count; range.from++) {
        range.to =
            first_beyond(pass, range.to, pass->readings[range.from].travel_mm + length_mm);
        means_cdb[range.from] = range.to < pass->count ? rfade_pass_mean_cdb(pass, range) : NAN;
    }
}

static double second_difference(const struct rfade_pass *pass, const double *means_cdb,
                                size_t first, size_t second, size_t third, int64_t length_mm)
{
    int64_t slack_mm = length_mm / 4;
    const struct rfade_track_reading *readings = pass->readings;
    double bend_cdb;

    if (third >= pass->count ||
        readings[second].travel_mm > readings[first].travel_mm + length_mm + slack_mm ||
        readings[third].travel_mm > readings[first].travel_mm + 2 * length_mm + slack_mm) {
        return NAN;
    }
    bend_cdb = means_cdb[first] - 2.0 * means_cdb[second] + means_cdb[third];
    return fabs(bend_cdb) > most_difference_cdb ? most_difference_cdb : bend_cdb;
}

static void sum_scale(const struct rfade_pass *pass, int64_t length_mm, const double *means_cdb,
                      struct rfade_curvature *curvature)
{
    size_t second = 0;
    size_t third = 0;

    for (size_t first = 0; first < pass->count; first++) {
        int64_t place_mm = pass->readings[first].travel_mm;
        double bend_cdb = NAN;

        if (pass->weight_mm[first] > 0) {
            second = first_beyond(pass, second, place_mm + length_mm);
            third = first_beyond(pass, third, place_mm + 2 * length_mm);
            bend_cdb = second_difference(pass, means_cdb, first, second, third, length_mm);
        }
        curvature->square[first + 1] = curvature->square[first];
        curvature->mm[first + 1] = curvature->mm[first];
        if (!isnan(bend_cdb)) {
            curvature->square[first + 1] +=
                pass->weight_mm[first] * (int64_t)round(bend_cdb * bend_cdb);
            curvature->mm[first + 1] += pass->weight_mm[first];
        }
    }
}

enum rfade_status rfade_pass_curvature(struct rfade_pass *pass)
{
    enum rfade_status status = RFADE_OK;
    double *means_cdb = calloc(pass->count, sizeof *means_cdb);

    for (int scale = 0; scale < RFADE_SAMPLING_SCALES && status == RFADE_OK; scale++) {
        struct rfade_curvature *curvature = &pass->curvature[scale];
        int64_t length_mm = pass->window_mm >> (RFADE_SAMPLING_SCALES - scale);

        curvature->square = calloc(pass->count + 1, sizeof *curvature->square);
        curvature->mm = calloc(pass->count + 1, sizeof *curvature->mm);
        if (means_cdb == NULL || curvature->square == NULL || curvature->mm == NULL) {
            status = RFADE_NO_MEMORY;
        } else {
            forward_means(pass, length_mm, means_cdb);
            sum_scale(pass, length_mm, means_cdb, curvature);
        }
    }
    free(means_cdb);
    return status;
}
