/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * What the sampling could see. The figures are from theory where it has them (Clarke 1968;
 * Rice 1948) and else from simulated drives with known truth, K from 0 to 30, direct ray
 * across and along the road, local mean steady, smooth (Gaussian correlation, 4 dB, 60 m) and
 * rough (exponential correlation, 4 dB, 20 and 60 m) at 457 MHz and windows of 40 wavelengths.
 */
#include <math.h>

#include "separate/pass.h"

/* Rows that repeat a level at least this often, and jumps beyond what a level wandering over
 * the edges of its quantisation step makes. */
static const double held_rows_an_update = 4.0;
static const double held_jump_steps_squared = 2.0;

/* A window's mean of so few readings has a standard error of 1 dB under Rayleigh fading. */
static const double least_window_readings = 20.0;
static const double least_window_wavelengths = 10.0;

/* Power half a wavelength apart is correlated by J0(pi)^2 = 0.09 under Rayleigh and at most by
 * |J0(pi)| = 0.30 under Rice fading, so squared differences there are at least 0.7 of those
 * two wavelengths apart. A receiver that averages over one wavelength brings that to 0.5, over
 * two to 0.3. The rounding of two levels adds step^2/6 to both. */
static const double averaged_ratio = 0.55;

/*
 * Squared second differences at window/2 over those at window/8: at most 0.49 by fading alone,
 * whatever K and the ray's direction; at window/4 over window/16 at most 0.45. What exceeds
 * that is the local mean. Under an exponential (that is, at short distances linear) variogram
 * it makes 6 times the leaked variance at window/2, and 3 times at window/4; a smooth local
 * mean makes next to nothing at window/4.
 */
static const double half_window_share = 0.49;
static const double quarter_window_share = 0.45;
static const double half_window_leaks = 6.0;
static const double quarter_window_leaks = 3.0;

/* Leaked variance that matters: in dB^2 and as a share of the fast fading's variance. Smooth
 * shadowing stays below 0.06 dB^2; 2 % of the variance moves a K of 10 by 3 %. */
static const double half_window_leak_db2 = 0.25;
static const double half_window_leak_share = 0.015;
static const double quarter_window_leak_share = 0.05;

static const char *const names[] = {[RFADE_RESOLVED] = "resolved",
                                    [RFADE_INSEPARABLE] = "inseparable",
                                    [RFADE_UNDERSAMPLED] = "undersampled",
                                    [RFADE_AVERAGED] = "averaged",
                                    [RFADE_HELD] = "held",
                                    [RFADE_STATIONARY] = "stationary"};

const char *rfade_sampling_name(enum rfade_sampling sampling)
{
    return names[sampling];
}

bool rfade_sampling_is_held(const struct rfade_sampling_sums *sums, int64_t half_wave_mm)
{
    double updates = (double)sums->updates;

    return sums->updates > 0 && (double)sums->travel_mm > updates * (double)half_wave_mm &&
           (double)sums->moving_intervals >= held_rows_an_update * updates &&
           (double)sums->jump_square_cdb2 >
               held_jump_steps_squared * (double)sums->step_square_cdb2;
}

static bool is_stationary(const struct rfade_sampling_sums *sums)
{
    return (double)sums->window_count * (double)sums->travel_mm * 1000.0 <=
           (double)sums->wavelength_um_readings;
}

static bool is_undersampled(const struct rfade_sampling_sums *sums)
{
    return (double)sums->window_readings < least_window_readings * (double)sums->window_count ||
           1000.0 * (double)sums->windows_mm <
               least_window_wavelengths * (double)sums->wavelength_um_readings;
}

static bool is_averaged(const struct rfade_sampling_sums *sums)
{
    double rounding_cdb2 = sums->updates > 0
                               ? (double)sums->step_square_cdb2 / (6.0 * (double)sums->updates)
                               : 0.0;
    double near_cdb2 = (double)sums->near_square / (double)sums->near_mm - rounding_cdb2;
    double far_cdb2 = (double)sums->far_square / (double)sums->far_mm - rounding_cdb2;

    /* NaN, where readings are too far apart to tell, compares false. */
    return far_cdb2 > 0.0 && near_cdb2 < averaged_ratio * far_cdb2;
}

/* Mean squared second difference at a scale, dB^2. */
static double curvature_db2(const struct rfade_sampling_sums *sums, int scale)
{
    return 1e-4 * (double)sums->curvature_square[scale] / (double)sums->curvature_mm[scale];
}

static bool is_inseparable(const struct rfade_sampling_sums *sums)
{
    double mean_cdb = (double)sums->fading_sum / (double)sums->fading_mm;
    double variance_db2 =
        1e-4 * ((double)sums->fading_square / (double)sums->fading_mm - mean_cdb * mean_cdb);
    double half_leak_db2 =
        (curvature_db2(sums, 3) - half_window_share * curvature_db2(sums, 1)) /
        half_window_leaks;
    double quarter_leak_db2 =
        (curvature_db2(sums, 2) - quarter_window_share * curvature_db2(sums, 0)) /
        quarter_window_leaks;

    /* NaN, where the pass is too short to tell, compares false. */
    return (half_leak_db2 > half_window_leak_db2 &&
            half_leak_db2 > half_window_leak_share * variance_db2) ||
           (quarter_leak_db2 > quarter_window_leak_share * variance_db2);
}

enum rfade_sampling rfade_sampling_label(const struct rfade_sampling_sums *sums)
{
    if (is_stationary(sums)) {
        return RFADE_STATIONARY;
    }
    if (2 * sums->held > sums->readings) {
        return RFADE_HELD;
    }
    if (is_undersampled(sums)) {
        return RFADE_UNDERSAMPLED;
    }
    if (is_averaged(sums)) {
        return RFADE_AVERAGED;
    }
    return is_inseparable(sums) ? RFADE_INSEPARABLE : RFADE_RESOLVED;
}
