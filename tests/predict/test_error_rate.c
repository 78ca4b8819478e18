/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Error rates, unfaded and averaged over fading, against values from outside. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <gsl/gsl_errno.h>
#include <math.h>
#include <string.h>

#include "routefade/error_rate.h"
#include "support/reference_table.h"

static const double rate_accuracy = 1e-10;

/* The table's names of fading and modulations. */
static const struct rfade_model *fading_named(const char *name)
{
    const char *const names[] = {"Rayleigh", "Rice", "Nakagami"};
    const enum rfade_model_id ids[] = {RFADE_RAYLEIGH, RFADE_RICE, RFADE_NAKAGAMI};
    for (size_t i = 0; i < 3; i++) {
        if (strcmp(name, names[i]) == 0) {
            return rfade_model(ids[i]);
        }
    }
    assert_string_equal(name, "AWGN");
    return NULL;
}

static const struct rfade_modulation *modulation_named(const char *name)
{
    const char *const names[RFADE_MODULATION_COUNT] = {"BPSK",  "QPSK",   "8PSK",  "16QAM",
                                                       "64QAM", "256QAM", "DBPSK", "NCBFSK"};
    for (int i = 0; i < RFADE_MODULATION_COUNT; i++) {
        if (strcmp(name, names[i]) == 0) {
            return rfade_modulation((enum rfade_modulation_id)i);
        }
    }
    fail_msg("no modulation %s", name);
    return NULL;
}

static void rates_match_reference(void **state)
{
    (void)state;
    struct reference_table table;
    reference_open(&table, "error_rate_open.tsv");
    while (reference_next(&table)) {
        const struct rfade_modulation *modulation =
            modulation_named(reference_text(&table, "modulation"));
        const struct rfade_link link = {
            .model = fading_named(reference_text(&table, "fading")),
            .parameter = reference_number(&table, "par"),
            .mean_snr_db = reference_number(&table, "EsN0_dB"),
            .branches = (int)reference_number(&table, "branches"),
            .combining = RFADE_MAXIMAL_RATIO,
        };
        struct rfade_error_rate rate;
        assert_int_equal(rfade_error_rates(&link, &modulation, 1, &rate), RFADE_OK);
        reference_assert_column(&table, "BER", rate.bit, rate_accuracy);
        reference_assert_column(&table, "SER", rate.symbol, rate_accuracy);
        reference_assert_column(&table, "ln_BER", rate.log_bit, rate_accuracy);
        reference_assert_column(&table, "ln_SER", rate.log_symbol, rate_accuracy);
    }
    assert_int_equal(table.row_count, 739);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(rates_match_reference),
    };
    gsl_set_error_handler_off();
    return cmocka_run_group_tests(tests, NULL, NULL);
}
