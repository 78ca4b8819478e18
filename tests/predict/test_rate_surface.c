/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The surface against the rates it stands for, computed one by one. */
#include <gsl/gsl_errno.h>
#include <gsl/gsl_rng.h>
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>

#include "routefade/rate_surface.h"

enum { TARGETS = 2 * RFADE_MODULATION_COUNT + 3, DRAWS = 300 };

static void set_targets(struct rfade_target targets[TARGETS])
{
    for (int i = 0; i < 2 * RFADE_MODULATION_COUNT; i++)
        targets[i] = (struct rfade_target){
            .kind = i % 2 ? RFADE_TARGET_SYMBOL : RFADE_TARGET_BIT,
            .modulation = rfade_modulation((enum rfade_modulation_id)(i / 2))};
    targets[TARGETS - 3] =
        (struct rfade_target){.kind = RFADE_TARGET_OUTAGE, .threshold_db = 6.0};
    targets[TARGETS - 2] = (struct rfade_target){.kind = RFADE_TARGET_PACKET_BLOCK,
                                                 .modulation = rfade_modulation(RFADE_QPSK),
                                                 .packet_bits = 256};
    targets[TARGETS - 1] = (struct rfade_target){.kind = RFADE_TARGET_PACKET_INDEPENDENT,
                                                 .modulation = rfade_modulation(RFADE_DBPSK),
                                                 .packet_bits = 256};
}

static double direct(const struct rfade_link *link, const struct rfade_target *target)
{
    struct rfade_error_rate rate;
    struct rfade_packet_error packet;
    struct rfade_tails tails;
    switch (target->kind) {
    case RFADE_TARGET_OUTAGE:
        assert_int_equal(rfade_link_outage(link, target->threshold_db, &tails), RFADE_OK);
        return tails.lower;
    case RFADE_TARGET_PACKET_INDEPENDENT:
    case RFADE_TARGET_PACKET_BLOCK:
        assert_int_equal(
            rfade_packet_error(link, target->modulation, target->packet_bits, &packet),
            RFADE_OK);
        return target->kind == RFADE_TARGET_PACKET_BLOCK ? packet.block : packet.independent;
    default:
        assert_int_equal(rfade_error_rates(link, &target->modulation, 1, &rate), RFADE_OK);
        return target->kind == RFADE_TARGET_BIT ? rate.bit : rate.symbol;
    }
}

/* Draws points of the domain; every target there is the direct one. */
static void check_surface(struct rfade_link link, const struct rfade_rate_domain *domain)
{
    struct rfade_target targets[TARGETS];
    struct rfade_rate_surface *surface = NULL;
    gsl_rng *generator = gsl_rng_alloc(gsl_rng_mt19937);
    assert_non_null(generator);
    set_targets(targets);
    assert_int_equal(rfade_rate_surface_create(&link, targets, TARGETS, domain, &surface),
                     RFADE_OK);
    for (int draw = 0; draw < DRAWS; draw++) {
        double u = gsl_rng_uniform(generator), v = gsl_rng_uniform(generator);
        double found[TARGETS];
        struct rfade_rate_curve *curve = NULL;
        link.mean_snr_db = domain->snr_low_db + u * (domain->snr_high_db - domain->snr_low_db);
        link.parameter =
            (domain->parameter_low + 0.5) *
                pow((domain->parameter_high + 0.5) / (domain->parameter_low + 0.5), v) -
            0.5;
        const struct rfade_snr_place here = {link.mean_snr_db - 3.0, 2.0};
        assert_int_equal(rfade_rate_surface_cut(surface, link.parameter, TARGETS,
                                                link.mean_snr_db, link.mean_snr_db, &curve),
                         RFADE_OK);
        assert_int_equal(rfade_rate_curve_mean(curve, &here, 1, 3.0, found), RFADE_OK);
        rfade_rate_curve_destroy(curve);
        /* The first targets alone are the same. */
        double some[2];
        assert_int_equal(rfade_rate_surface_cut(surface, link.parameter, 2, link.mean_snr_db,
                                                link.mean_snr_db, &curve),
                         RFADE_OK);
        assert_int_equal(rfade_rate_curve_mean(curve, &here, 1, 3.0, some), RFADE_OK);
        assert_true(some[0] == found[0] && some[1] == found[1]);
        rfade_rate_curve_destroy(curve);
        for (int i = 0; i < TARGETS; i++) {
            double expected = direct(&link, &targets[i]);
            double accuracy = targets[i].packet_bits > 0.0 ? 2e-4 : 2e-5;
            if (expected > 1e-30 && !(fabs(found[i] / expected - 1.0) < accuracy))
                fail_msg("%d: SNR %g, parameter %g: %.12g, not %.12g", i, link.mean_snr_db,
                         link.parameter, found[i], expected);
        }
    }
    rfade_rate_surface_destroy(surface);
    gsl_rng_free(generator);
}

static void rice_is_that_of_the_rates(void **state)
{
    (void)state;
    const struct rfade_link link = {.model = rfade_model(RFADE_RICE), .branches = 1};
    check_surface(link, &(struct rfade_rate_domain){-15.0, 45.0, 0.0, 1000.0});
}

static void nakagami_with_two_branches_is_that_of_the_rates(void **state)
{
    (void)state;
    const struct rfade_link link = {.model = rfade_model(RFADE_NAKAGAMI), .branches = 2};
    check_surface(link, &(struct rfade_rate_domain){-10.0, 40.0, 0.5, 100.0});
}

static void unfaded_is_that_of_the_rates(void **state)
{
    (void)state;
    const struct rfade_link link = {.model = NULL, .branches = 1};
    check_surface(link, &(struct rfade_rate_domain){-20.0, 30.0, NAN, NAN});
}

/* Along a way it is the weighted mean; beyond the domain its end. */
static void a_way_is_averaged(void **state)
{
    (void)state;
    const struct rfade_link link = {.model = rfade_model(RFADE_RAYLEIGH), .branches = 1};
    const struct rfade_target target = {.kind = RFADE_TARGET_BIT,
                                        .modulation = rfade_modulation(RFADE_NCFSK2)};
    const struct rfade_rate_domain domain = {0.0, 20.0, NAN, NAN};
    const struct rfade_snr_place way[] = {{10.0, 3.0}, {20.0, 1.0}};
    struct rfade_rate_surface *surface = NULL;
    struct rfade_rate_curve *curve = NULL;
    double mean = NAN;
    assert_int_equal(rfade_rate_surface_create(&link, &target, 1, &domain, &surface), RFADE_OK);
    assert_int_equal(rfade_rate_surface_cut(surface, NAN, 1, -INFINITY, INFINITY, &curve),
                     RFADE_OK);
    /* Over Rayleigh fading it is 1/(2 + SNR) [Proakis]. */
    assert_int_equal(rfade_rate_curve_mean(curve, way, 2, 0.0, &mean), RFADE_OK);
    assert_true(fabs(mean / (0.75 / 12.0 + 0.25 / 102.0) - 1.0) < 1e-9);
    assert_int_equal(rfade_rate_curve_mean(curve, way, 2, 30.0, &mean), RFADE_OK);
    assert_true(fabs(mean * 102.0 - 1.0) < 1e-9);
    assert_int_equal(rfade_rate_curve_mean(curve, way, 0, 0.0, &mean), RFADE_NO_DATA);
    assert_true(isnan(mean));
    rfade_rate_curve_destroy(curve);
    rfade_rate_surface_destroy(surface);
}

static void what_makes_no_surface_is_refused(void **state)
{
    (void)state;
    struct rfade_link link = {.model = rfade_model(RFADE_RICE), .branches = 1};
    struct rfade_target target = {.kind = RFADE_TARGET_BIT};
    const struct rfade_rate_domain good = {0.0, 20.0, 0.0, 1.0};
    const struct rfade_rate_domain bad[] = {{20.0, 0.0, 0.0, 1.0},
                                            {0.0, 401.0, 0.0, 1.0},
                                            {0.0, 20.0, 1.0, 0.0},
                                            {0.0, NAN, 0.0, 1.0}};
    struct rfade_rate_surface *surface = NULL;
    assert_int_equal(rfade_rate_surface_create(&link, &target, 1, &good, &surface),
                     RFADE_DOMAIN);
    target.modulation = rfade_modulation(RFADE_BPSK);
    for (size_t i = 0; i < sizeof bad / sizeof bad[0]; i++)
        assert_int_equal(rfade_rate_surface_create(&link, &target, 1, &bad[i], &surface),
                         RFADE_DOMAIN);
    assert_int_equal(rfade_rate_surface_create(&link, &target, 0, &good, &surface),
                     RFADE_DOMAIN);
    link.branches = 0;
    assert_int_equal(rfade_rate_surface_create(&link, &target, 1, &good, &surface),
                     RFADE_DOMAIN);
    assert_null(surface);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(rice_is_that_of_the_rates),
        cmocka_unit_test(nakagami_with_two_branches_is_that_of_the_rates),
        cmocka_unit_test(unfaded_is_that_of_the_rates),
        cmocka_unit_test(a_way_is_averaged),
        cmocka_unit_test(what_makes_no_surface_is_refused),
    };
    gsl_set_error_handler_off();
    return cmocka_run_group_tests(tests, NULL, NULL);
}
