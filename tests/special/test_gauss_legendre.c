/* SPDX-License-Identifier: GPL-3.0-or-later */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "special/gauss_legendre.h"
#include "support/reference_table.h"

/* The rule of 2 half_count nodes, or NULL. */
static const struct rfade_gauss_rule *rule_of(int half_count)
{
    for (int variation_step = 0; 0.0 + variation_step * 0.01 < 30.0; variation_step++) {
        const double variation = 0.0 + variation_step * 0.01;
        const struct rfade_gauss_rule *rule = rfade_gauss_rule_for(variation, 0.0);
        if (rule != NULL && rule->half_count == half_count) {
            return rule;
        }
    }
    return NULL;
}

static int index_of_node(const struct rfade_gauss_rule *rule, double node, double tolerance)
{
    for (int i = 0; i < rule->half_count; i++) {
        if (fabs(rule->node[i] - node) <= tolerance) {
            return i;
        }
    }
    return -1;
}

/* AMS 55, Table 25.4 (digits computed and rounded to the table's 15 decimals). */
static void ams55_table_25_4_gauss_legendre(void **state)
{
    (void)state;
    struct reference_table table;
    size_t checked = 0;
    reference_open(&table, "handbook_special.tsv");
    while (reference_next(&table)) {
        const char *function = reference_text(&table, "function");
        const char *arguments = reference_text(&table, "arguments");
        if (strncmp(function, "Gauss-Legendre", 14) != 0) {
            continue;
        }
        const long n = strtol(arguments + strlen("n="), NULL, 10);
        const struct rfade_gauss_rule *rule = n % 2 == 0 ? rule_of((int)n / 2) : NULL;
        if (rule == NULL) {
            continue; /* a rule that the library does not use */
        }
        const double value = reference_number(&table, "value");
        const char *node = strstr(arguments, "x=");
        if (node == NULL) {
            assert_true(index_of_node(rule, value, 1e-15) >= 0);
        } else {
            const int i = index_of_node(rule, strtod(node + 2, NULL), 1e-6);
            assert_true(i >= 0);
            assert_true(fabs(rule->weight[i] - value) <= 1e-15);
        }
        checked++;
    }
    assert_int_equal(checked, 2 * (2 + 4 + 8)); /* n = 4, 8 and 16 */
}

/* A rule of n nodes is exact to degree 2n - 1. */
static void rules_are_exact_to_their_degree(void **state)
{
    (void)state;
    const int half_counts[] = {2, 3, 4, 6, 8, 12, 16};
    for (size_t r = 0; r < sizeof half_counts / sizeof half_counts[0]; r++) {
        const struct rfade_gauss_rule *rule = rule_of(half_counts[r]);
        assert_non_null(rule);
        for (int degree = 0; degree < 4 * rule->half_count; degree += 2) {
            double sum = 0.0;
            for (int i = 0; i < rule->half_count; i++) {
                sum += 2.0 * rule->weight[i] * pow(rule->node[i], degree);
            }
            assert_true(fabs(sum * (degree + 1) / 2.0 - 1.0) < 4e-15);
        }
    }
}

/* The rule that is handed out integrates exp(v t) to 2 sinh(v)/v. */
static void chosen_rule_keeps_its_promise(void **state)
{
    (void)state;
    for (int v_step = 0; 1e-3 * pow(1.05, v_step) < 24.0; v_step++) {
        const double v = 1e-3 * pow(1.05, v_step);
        const struct rfade_gauss_rule *rule = rfade_gauss_rule_for(v, 0.0);
        assert_non_null(rule);
        double sum = 0.0;
        for (int i = 0; i < rule->half_count; i++) {
            sum += 2.0 * rule->weight[i] * cosh(v * rule->node[i]);
        }
        assert_true(fabs(sum * v / (2.0 * sinh(v)) - 1.0) < 2e-15);
    }
    assert_null(rfade_gauss_rule_for(26.5, 0.0));
    assert_null(rfade_gauss_rule_for(NAN, 0.0));
    assert_int_equal(rfade_gauss_rule_finest()->half_count, 16);
}

/* exp(-c t^2/2), whose slope at the ends is c: sqrt(2 pi/c) erf(sqrt(c/2)). */
static void chosen_rule_follows_curvature(void **state)
{
    (void)state;
    for (int c_step = 0; c_step < 180; c_step++) {
        const double c = 1e-3 * pow(1.05, c_step);
        const struct rfade_gauss_rule *rule = rfade_gauss_rule_for(c, c);
        if (rule == NULL) {
            assert_true(c > 15.0);
            continue;
        }
        double sum = 0.0;
        for (int i = 0; i < rule->half_count; i++) {
            sum += 2.0 * rule->weight[i] * exp(-0.5 * c * rule->node[i] * rule->node[i]);
        }
        const double expected = sqrt(2.0 * acos(-1.0) / c) * erf(sqrt(0.5 * c));
        assert_true(fabs(sum / expected - 1.0) < 2e-15);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(ams55_table_25_4_gauss_legendre),
        cmocka_unit_test(rules_are_exact_to_their_degree),
        cmocka_unit_test(chosen_rule_keeps_its_promise),
        cmocka_unit_test(chosen_rule_follows_curvature),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
