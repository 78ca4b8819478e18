/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <math.h>

#include "cli/predict.h"
#include "cli/reception.h"
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

/* dB from Eb/N0 to Es/N0, which must be one for all modulations. */
static enum rfade_status symbol_over_bit_db(const struct rfade_predicted *predicted,
                                            double *over_db, struct rfade_error *error)
{
    *over_db = NAN;
    for (size_t i = 0; i < predicted->modulation_count; i++) {
        double here_db = 10.0 * log10(rfade_modulation_bits(predicted->modulations[i]));
        if (i > 0 && here_db != *over_db)
            return rfade_usage(error, &rfade_command_predict,
                               "--mean-ebn0-db needs modulations of as many bits a symbol");
        *over_db = here_db;
    }
    if (isnan(*over_db))
        return rfade_usage(error, &rfade_command_predict,
                           "--mean-ebn0-db needs --modulation: Eb/N0 depends on it");
    return RFADE_OK;
}

static bool has_target(const struct rfade_predict_options *given)
{
    return !isnan(given->target_outage) || !isnan(given->target_ber) ||
           !isnan(given->target_ser) || !isnan(given->target_per);
}

static enum rfade_status take_snr(const struct rfade_predict_options *given,
                                  struct rfade_predicted *predicted, struct rfade_error *error)
{
    const struct rfade_command *command = &rfade_command_predict;
    struct rfade_link *link = &predicted->link;
    int told =
        !isnan(given->mean_snr_db) + !isnan(given->mean_ebn0_db) + !isnan(given->median_snr_db);
    if (told > 1 || (told == 0 && !has_target(given)))
        return rfade_usage(error, command,
                           "give one of --mean-snr-db, --mean-ebn0-db, --median-snr-db");
    if (!isnan(given->median_snr_db) && isnan(given->shadowing_db))
        return rfade_usage(error, command, "--median-snr-db needs --shadowing-db");
    link->shadowing_db = isnan(given->shadowing_db) ? 0 : given->shadowing_db;
    double above_median_db = rfade_lognormal_mean_over_median_db(link->shadowing_db);
    double over_bit_db = 0.0;
    enum rfade_status status = RFADE_OK;
    if (!isnan(given->mean_ebn0_db))
        status = symbol_over_bit_db(predicted, &over_bit_db, error);
    if (!isnan(given->median_snr_db))
        link->mean_snr_db = given->median_snr_db + above_median_db;
    else if (!isnan(given->mean_ebn0_db))
        link->mean_snr_db = given->mean_ebn0_db + over_bit_db;
    else
        link->mean_snr_db = given->mean_snr_db;
    predicted->median_snr_db = isnan(given->median_snr_db) ? link->mean_snr_db - above_median_db
                                                           : given->median_snr_db;
    return status;
}

/* What goes with what. */
static enum rfade_status check_together(const struct rfade_predict_options *given,
                                        struct rfade_error *error)
{
    const struct {
        bool wrong;
        const char *what;
    } rules[] = {
        {!isnan(given->target_outage) && given->threshold_db.count == 0,
         "--target-outage needs --threshold-db"},
        {(!isnan(given->target_ber) || !isnan(given->target_ser) ||
          !isnan(given->target_per)) &&
             given->modulation.count == 0,
         "a target error rate needs --modulation"},
        {!isnan(given->target_per) && isnan(given->packet_bits),
         "--target-per needs --packet-bits"},
        {!isnan(given->packet_bits) && given->modulation.count == 0,
         "--packet-bits needs --modulation"},
        {isnan(given->carrier_hz) != isnan(given->speed_kmh),
         "--carrier-hz and --speed-kmh go together"},
        {!isnan(given->delay_spread_us) && isnan(given->symbol_rate_hz),
         "--delay-spread-us needs --symbol-rate-hz"},
        {given->branches > 1 && given->probability.count > 0,
         "--probability is of one branch: leave --branches out"},
    };
    for (size_t i = 0; i < sizeof rules / sizeof rules[0]; i++)
        if (rules[i].wrong)
            return rfade_usage(error, &rfade_command_predict, "%s", rules[i].what);
    return RFADE_OK;
}

enum rfade_status rfade_predicted_take(const struct rfade_predict_options *given,
                                       struct rfade_predicted *predicted,
                                       struct rfade_error *error)
{
    *predicted = (struct rfade_predicted){
        .link = {.parameter = NAN,
                 .mean_snr_db = NAN,
                 .branches = (int)given->branches,
                 .combining = rfade_combining_by_name(given->combining)},
        .median_snr_db = NAN,
        .given = given,
    };
    enum rfade_status status = check_together(given, error);
    if (status == RFADE_OK)
        status = take_fading(given, &predicted->link, error);
    if (status == RFADE_OK)
        status = rfade_modulations_take(&rfade_command_predict, &given->modulation,
                                        predicted->modulations, error);
    predicted->modulation_count = given->modulation.count;
    return status == RFADE_OK ? take_snr(given, predicted, error) : status;
}
