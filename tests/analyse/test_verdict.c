/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Verdicts on a target outage: by hand, by their own advice, and against known truth. */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <gsl/gsl_cdf.h>
#include <gsl/gsl_errno.h>
#include <gsl/gsl_randist.h>
#include <gsl/gsl_rng.h>
#include <math.h>

#include "analyse/verdict.h"

static const double confidence = 0.90;
/* ln(0.02/0.98) - ln(0.01/0.99) = ln(99/49) */
static const double distance_1_to_2_percent = 0.703299552;

/* Bounds alike on both sides: `rest` shrinks with travel. */
static struct rfade_outage_bounds bounds_at(double outage, double rest, double calibration)
{
    const double all = hypot(rest, calibration);
    return (struct rfade_outage_bounds){
        .outage = outage,
        .log_odds = rfade_log_odds(outage),
        .below = all,
        .above = all,
        .calibration_below = calibration,
        .calibration_above = calibration,
        .calibration_db = calibration > 0.0 ? 0.5 : 0.0,
    };
}

static struct rfade_judgement judge(double outage, double rest, double calibration)
{
    const struct rfade_outage_bounds bounds = bounds_at(outage, rest, calibration);
    return rfade_judge(&bounds, confidence, 0.02, 300.0, 2.0);
}

static void log_odds_go_both_ways(void **state)
{
    (void)state;
    assert_true(fabs(rfade_log_odds(0.02) - rfade_log_odds(0.01) - distance_1_to_2_percent) <
                1e-7);
    assert_true(rfade_log_odds(0.5) == 0.0);
    assert_true(rfade_log_odds(0.0) == -INFINITY && rfade_log_odds(1.0) == INFINITY);
    for (double p = 1e-300; p < 1.0; p = p * 3.0 + 1e-3)
        assert_true(fabs(rfade_from_log_odds(rfade_log_odds(p)) / p - 1.0) < 1e-12);
    assert_true(rfade_from_log_odds(-INFINITY) == 0.0 && rfade_from_log_odds(INFINITY) == 1.0);
}

static void the_bound_decides(void **state)
{
    (void)state;
    assert_int_equal(judge(0.01, 0.7032, 0.0).verdict, RFADE_MEETS);
    assert_int_equal(judge(0.01, 0.7034, 0.0).verdict, RFADE_UNDECIDED);
    assert_int_equal(judge(0.01, 0.5, 0.4945).verdict, RFADE_MEETS);
    assert_int_equal(judge(0.01, 0.5, 0.4947).verdict, RFADE_UNDECIDED);
    /* ln(0.04/0.96) - ln(0.02/0.98) = ln(49/24) = 0.71377 */
    assert_int_equal(judge(0.04, 0.7137, 0.0).verdict, RFADE_FAILS);
    assert_int_equal(judge(0.04, 0.7139, 0.0).verdict, RFADE_UNDECIDED);
    assert_int_equal(judge(NAN, 0.1, 0.0).verdict, RFADE_NOT_JUDGED);
    /* known without error: at the target is met, above it is not */
    assert_int_equal(judge(0.02, 0.0, 0.0).verdict, RFADE_MEETS);
    assert_int_equal(judge(0.0200001, 0.0, 0.0).verdict, RFADE_FAILS);
    const struct rfade_outage_bounds never = {.outage = 0.0, .log_odds = -INFINITY};
    const struct rfade_outage_bounds always = {.outage = 1.0, .log_odds = INFINITY};
    assert_int_equal(rfade_judge(&never, confidence, 0.02, 1.0, 1.0).verdict, RFADE_MEETS);
    assert_int_equal(rfade_judge(&always, confidence, 0.02, 1.0, 1.0).verdict, RFADE_FAILS);
}

static void words_are_those_of_the_contract(void **state)
{
    (void)state;
    assert_string_equal(rfade_verdict_name(RFADE_MEETS), "meets");
    assert_string_equal(rfade_verdict_name(RFADE_FAILS), "fails");
    assert_string_equal(rfade_verdict_name(RFADE_UNDECIDED), "undecided");
    assert_string_equal(rfade_verdict_name(RFADE_NOT_JUDGED), "not judged");
}

/* (0.8 / 0.703299552)^2 = 1.29390: 29.39 % more. With calibration 0.3 of it, rest^2 = 0.55,
 * 0.55 / (0.494630 - 0.09) = 1.35926. */
static void more_travel_is_by_the_square(void **state)
{
    (void)state;
    struct rfade_judgement judgement = judge(0.01, 0.8, 0.0);
    assert_true(fabs(judgement.more_m - 300.0 * 0.29390) < 0.01);
    assert_true(judgement.more_passes == 1.0); /* 0.59 of a pass */
    judgement = judge(0.01, sqrt(0.55), 0.3);
    assert_true(fabs(judgement.more_m - 300.0 * 0.35926) < 0.01);
    judgement = judge(0.01, 2.0, 0.0); /* 8.087 times: 14.2 passes more than 2 */
    assert_true(judgement.more_passes == 15.0);
    assert_true(isnan(judge(0.01, 0.1, 0.0).more_m)); /* nothing to settle */
    assert_true(isnan(judge(0.02, 0.1, 0.0).more_m)); /* at the target: nothing settles it */
    assert_true(isnan(judge(0.02, 0.1, 0.0).calibration_needed_db));
}

/* Done as advised, and the estimate where it was, the verdict follows; with less it doesn't. */
static void advice_settles_it(void **state)
{
    (void)state;
    static const double outages[] = {0.005, 0.012, 0.018, 0.023, 0.05};
    int by_travel = 0, by_calibration = 0, by_both = 0;
    for (size_t o = 0; o < 5; o++) {
        for (double rest = 0.05; rest < 3.0; rest += 0.17) {
            for (double calibration = 0.0; calibration < 1.5; calibration += 0.11) {
                const enum rfade_verdict settled =
                    outages[o] < 0.02 ? RFADE_MEETS : RFADE_FAILS;
                const struct rfade_judgement first = judge(outages[o], rest, calibration);
                const double needed = first.calibration_needed_db / 0.5 * calibration;
                if (first.verdict != RFADE_UNDECIDED)
                    continue;
                if (!isnan(first.more_m)) {
                    const double n = 1.0 + first.more_m / 300.0;
                    const double after = rest / sqrt(n);
                    assert_int_equal(judge(outages[o], after * 0.9999, calibration).verdict,
                                     settled);
                    assert_int_equal(judge(outages[o], after * 1.0001, calibration).verdict,
                                     RFADE_UNDECIDED);
                    by_travel++;
                } else if (first.calibration_is_enough) {
                    assert_int_equal(judge(outages[o], rest, needed * 0.9999).verdict, settled);
                    assert_int_equal(judge(outages[o], rest, needed * 1.0001).verdict,
                                     RFADE_UNDECIDED);
                    by_calibration++;
                } else {
                    /* just below it some travel is enough, however much */
                    assert_true(judge(outages[o], rest, needed * 0.9999).more_m > 0.0);
                    assert_true(isnan(judge(outages[o], rest, needed * 1.0001).more_m));
                    by_both++;
                }
            }
        }
    }
    assert_true(by_travel > 20 && by_calibration > 20 && by_both > 20);
}

/* p 0.005, 0.01, 0.03, 0.04 at 5 %: against 0.05/4, 0.05/3, 0.05/2: the third is too large. */
static void holm_by_hand(void **state)
{
    (void)state;
    const double p[] = {0.01, 0.04, NAN, 0.03, 0.005};
    bool meets[5];
    assert_int_equal(rfade_verdicts_together(p, 5, 0.95, meets), RFADE_OK);
    assert_true(meets[0] && !meets[1] && !meets[2] && !meets[3] && meets[4]);
    assert_int_equal(rfade_verdicts_together(p, 0, 0.95, meets), RFADE_OK);
    const double all[] = {0.049, 0.02};
    assert_int_equal(rfade_verdicts_together(all, 2, 0.95, meets), RFADE_OK);
    assert_true(meets[0] && meets[1]);
}

static void p_value_is_that_of_the_bound(void **state)
{
    (void)state;
    /* at the bound it is 1 - confidence, at the target 1/2 */
    assert_true(fabs(judge(0.01, distance_1_to_2_percent, 0.0).p_meets - 0.10) < 1e-6);
    assert_true(judge(0.02, 0.4, 0.0).p_meets == 0.5);
    assert_true(judge(0.01, 0.0, 0.0).p_meets == 0.0);
    assert_true(judge(0.03, 0.0, 0.0).p_meets == 1.0);
    assert_true(isnan(judge(NAN, 0.4, 0.0).p_meets));
}

enum { ROUTES = 4000, SEGMENTS = 20 };

/* Estimates of segments whose true outage is next to the target, the worst place: each with an
 * error of its own, and one of the calibration that all of a route share. */
static void draw_route(gsl_rng *generator, double true_log_odds,
                       struct rfade_judgement judgements[SEGMENTS])
{
    static const double rest = 0.3, calibration = 0.25; /* standard deviations */
    const double quantile = gsl_cdf_ugaussian_Pinv(confidence);
    const double shared = gsl_ran_gaussian(generator, calibration);
    for (int i = 0; i < SEGMENTS; i++) {
        const double estimate = true_log_odds + shared + gsl_ran_gaussian(generator, rest);
        const struct rfade_outage_bounds bounds =
            bounds_at(rfade_from_log_odds(estimate), quantile * rest, quantile * calibration);
        judgements[i] = rfade_judge(&bounds, confidence, 0.02, 300.0, 2.0);
    }
}

/* At most one in ten is wrong, and next to the target close to that; jointly, at most one
 * route in ten has a wrong one among those that meet it together. */
static void wrong_verdicts_are_as_rare_as_promised(void **state)
{
    (void)state;
    gsl_rng *generator = gsl_rng_alloc(gsl_rng_mt19937);
    gsl_rng_set(generator, 20270113);
    int met_wrongly = 0, failed_wrongly = 0, together_wrongly = 0;
    for (int i = 0; i < ROUTES; i++) {
        struct rfade_judgement judgements[SEGMENTS];
        double p[SEGMENTS];
        bool meets[SEGMENTS], any = false;
        draw_route(generator, rfade_log_odds(0.02) + 1e-9, judgements);
        for (int s = 0; s < SEGMENTS; s++) {
            met_wrongly += judgements[s].verdict == RFADE_MEETS;
            p[s] = judgements[s].p_meets;
        }
        assert_int_equal(rfade_verdicts_together(p, SEGMENTS, confidence, meets), RFADE_OK);
        for (int s = 0; s < SEGMENTS; s++)
            any |= meets[s];
        together_wrongly += any;
        draw_route(generator, rfade_log_odds(0.02) - 1e-9, judgements);
        for (int s = 0; s < SEGMENTS; s++)
            failed_wrongly += judgements[s].verdict == RFADE_FAILS;
    }
    gsl_rng_free(generator);
    /* shared errors: as if from ROUTES/0.41 draws at least (0.25^2 of 0.25^2 + 0.3^2); four
     * standard errors of a tenth are then 0.02 at most */
    const double count = (double)ROUTES * SEGMENTS;
    assert_true(met_wrongly / count > 0.08 && met_wrongly / count < 0.12);
    assert_true(failed_wrongly / count > 0.08 && failed_wrongly / count < 0.12);
    assert_true(together_wrongly > 0 && together_wrongly / (double)ROUTES <= 0.10);
}

int main(void)
{
    gsl_set_error_handler_off();
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(log_odds_go_both_ways),
        cmocka_unit_test(the_bound_decides),
        cmocka_unit_test(words_are_those_of_the_contract),
        cmocka_unit_test(more_travel_is_by_the_square),
        cmocka_unit_test(advice_settles_it),
        cmocka_unit_test(holm_by_hand),
        cmocka_unit_test(p_value_is_that_of_the_bound),
        cmocka_unit_test(wrong_verdicts_are_as_rare_as_promised),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
