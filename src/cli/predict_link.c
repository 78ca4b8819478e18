/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>

#include "cli/predict.h"
#include "routefade/predict.h"

static enum rfade_status take_fading(const struct rfade_predict_options *given,
                                     struct rfade_link *link, struct rfade_error *error)
{
    int chosen = given->unfaded + given->rayleigh + !isnan(given->rice_k) +
                 !isnan(given->rice_k_db) + !isnan(given->nakagami_m);
    if (chosen != 1)
        return rfade_usage(error, &rfade_command_predict,
                           "give one of --unfaded, --rayleigh, --rice-k, --rice-k-db, "
                           "--nakagami-m");
    if (given->rayleigh)
        link->model = rfade_model(RFADE_RAYLEIGH);
    if (!isnan(given->rice_k) || !isnan(given->rice_k_db)) {
        link->model = rfade_model(RFADE_RICE);
        link->parameter = isnan(given->rice_k) ? pow(10, given->rice_k_db / 10) : given->rice_k;
    }
    if (!isnan(given->nakagami_m)) {
        link->model = rfade_model(RFADE_NAKAGAMI);
        link->parameter = given->nakagami_m;
    }
    return RFADE_OK;
}

static enum rfade_status take_snr(const struct rfade_predict_options *given,
                                  struct rfade_link *link, struct rfade_error *error)
{
    const struct rfade_command *command = &rfade_command_predict;
    if (isnan(given->mean_snr_db) == isnan(given->median_snr_db))
        return rfade_usage(error, command, "give one of --mean-snr-db, --median-snr-db");
    if (!isnan(given->median_snr_db) && isnan(given->shadowing_db))
        return rfade_usage(error, command, "--median-snr-db needs --shadowing-db");
    link->shadowing_db = isnan(given->shadowing_db) ? 0 : given->shadowing_db;
    double above_median_db = rfade_lognormal_mean_over_median_db(link->shadowing_db);
    if (isnan(given->median_snr_db)) {
        link->mean_snr_db = given->mean_snr_db;
        link->median_snr_db = given->mean_snr_db - above_median_db;
    } else {
        link->mean_snr_db = given->median_snr_db + above_median_db;
        link->median_snr_db = given->median_snr_db;
    }
    return RFADE_OK;
}

enum rfade_status rfade_link_take(const struct rfade_predict_options *given,
                                  struct rfade_link *link, struct rfade_error *error)
{
    *link = (struct rfade_link){.parameter = NAN, .mean_snr_db = NAN, .median_snr_db = NAN};
    enum rfade_status status = take_fading(given, link, error);
    return status == RFADE_OK ? take_snr(given, link, error) : status;
}
