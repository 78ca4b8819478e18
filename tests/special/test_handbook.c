/* SPDX-License-Identifier: GPL-3.0-or-later */
/*
 * M. Abramowitz and I. A. Stegun, Handbook of Mathematical Functions, NBS AMS 55 (1964): the
 * tabulated functions that fading goes through, to one unit in the last figure. Which printed
 * digits were read and which computed and rounded to the table's digits stands in the column
 * `verification` of handbook_special.tsv; the tables of this file are computed but for the
 * first 42 entries of Table 7.1 and the examples of section 6.7, which were read.
 */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>
#include <gsl/gsl_errno.h>
#include <gsl/gsl_math.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "routefade/model.h"
#include "special/bessel.h"
#include "special/gamma_tails.h"
#include "support/reference_table.h"

/* "chi2=0.5 nu=2" with name "nu" gives 2; NAN if it is not there. */
static double argument(const char *arguments, const char *name)
{
    const size_t length = strlen(name);
    for (const char *p = arguments; p != NULL; p = strchr(p, ' ')) {
        p += *p == ' ' ? 1 : 0;
        if (strncmp(p, name, length) == 0 && p[length] == '=') {
            return strtod(p + length + 1, NULL);
        }
    }
    return NAN;
}

/* Figures after the point, "10D", or significant ones, "8S", that the table gives. */
static double last_unit(const char *printed, const char *digits)
{
    const double count = strtod(digits, NULL);
    if (strchr(digits, 'D') != NULL) {
        return pow(10.0, -count);
    }
    return pow(10.0, floor(log10(fabs(strtod(printed, NULL)))) + 1.0 - count);
}

typedef double function_of_row(const char *arguments);

/* Checks every row of a function from one table; there must be `rows` of them. */
static void check_table(const char *function, const char *source, size_t rows,
                        function_of_row *compute)
{
    struct reference_table table;
    size_t found = 0;
    reference_open(&table, "handbook_special.tsv");
    while (reference_next(&table)) {
        if (strcmp(reference_text(&table, "function"), function) != 0 ||
            strstr(reference_text(&table, "source"), source) == NULL) {
            continue;
        }
        const double actual = compute(reference_text(&table, "arguments"));
        const double expected = reference_number(&table, "value");
        const double unit =
            last_unit(reference_text(&table, "value"), reference_text(&table, "digits"));
        /* rounded as the table is, it may differ by one unit */
        if (!(fabs(round(actual / unit) - round(expected / unit)) <= 1.0)) {
            fail_msg("%s:%zu: %s at %s is %.17g, not %.17g", table.file_name, table.line,
                     function, reference_text(&table, "arguments"), actual, expected);
        }
        found++;
    }
    assert_int_equal(found, rows);
}

static double log_gamma(double x)
{
    return (x - 0.5) * log(x) - x + 0.5 * log(2.0 * M_PI) + rfade_log_gamma_star(x);
}

static double log_gamma_at_x(const char *arguments)
{
    return log_gamma(argument(arguments, "x"));
}

static double gamma_at_x(const char *arguments)
{
    return exp(log_gamma(argument(arguments, "x")));
}

static double gamma_past_n(const char *arguments)
{
    return exp(log_gamma(argument(arguments, "n") + 0.5));
}

static double stirling_rest(const char *arguments)
{
    return rfade_log_gamma_star(argument(arguments, "x")) + 0.5 * log(2.0 * M_PI);
}

static double psi_at(double x)
{
    double value = NAN;
    assert_int_equal(rfade_log_minus_psi(x, &value, NULL), RFADE_OK);
    return log(x) - value;
}

static double psi_at_x(const char *arguments)
{
    return psi_at(argument(arguments, "x"));
}

static double psi_at_n(const char *arguments)
{
    return psi_at(argument(arguments, "n"));
}

static double psi_derivative(const char *arguments)
{
    const double x = argument(arguments, "x");
    double value = NAN;
    double derivative = NAN;
    assert_int_equal(rfade_log_minus_psi(x, &value, &derivative), RFADE_OK);
    return 1.0 / x - derivative;
}

static void ams55_table_6_1_gamma_and_psi(void **state)
{
    (void)state;
    check_table("gamma(x)", "Table 6.1", 30, gamma_at_x);
    check_table("ln gamma(x)", "Table 6.1", 30, log_gamma_at_x);
    check_table("psi(x)", "Table 6.1", 30, psi_at_x);
    check_table("psi'(x)", "Table 6.1", 30, psi_derivative);
    check_table("gamma(x)", "section 6.7 Example 1", 1, gamma_at_x);
    check_table("ln gamma(x)-(x-1/2)*ln x+x", "section 6.7 Example 2", 1, stirling_rest);
}

static void ams55_table_6_3_gamma_and_psi_of_integers(void **state)
{
    (void)state;
    check_table("psi(n)", "Table 6.3", 20, psi_at_n);
    check_table("gamma(n+1/2)", "Table 6.3", 20, gamma_past_n);
}

static struct rfade_tails normal(double z)
{
    struct rfade_tails tails;
    assert_int_equal(rfade_normal_tails(z, &tails), RFADE_OK);
    return tails;
}

/* Density of the standard normal, as the lognormal model gives it per dB for 1 dB. */
static double normal_density(double z)
{
    struct rfade_log_gradient density;
    const struct rfade_model *lognormal = rfade_model(RFADE_LOGNORMAL);
    assert_int_equal(lognormal->log_density(1.0, z, &density), RFADE_OK);
    return exp(density.value);
}

static double error_function(const char *arguments)
{
    const struct rfade_tails tails = normal(argument(arguments, "x") * M_SQRT2);
    return tails.lower - tails.upper;
}

static double error_function_derivative(const char *arguments)
{
    return 2.0 * M_SQRT2 * normal_density(argument(arguments, "x") * M_SQRT2);
}

static void ams55_table_7_1_error_function(void **state)
{
    (void)state;
    check_table("erf(x)", "Table 7.1", 62, error_function);
    check_table("2/sqrt(pi)*exp(-x^2)", "Table 7.1", 42, error_function_derivative);
}

static double scaled_complement(const char *arguments)
{
    /* the table's 1/x^2 = 0 is a limit */
    const double x = sqrt(1.0 / fmax(argument(arguments, "x^-2"), 1e-7));
    return x * 2.0 * exp(normal(x * M_SQRT2).log_upper + x * x);
}

static void ams55_table_7_3_complementary_error_function(void **state)
{
    (void)state;
    check_table("x*exp(x^2)*erfc(x)", "Table 7.3", 15, scaled_complement);
}

static double i0_scaled(const char *arguments)
{
    return rfade_bessel_pair(argument(arguments, "x")).i0_scaled;
}

static double i1_scaled(const char *arguments)
{
    const struct rfade_bessel_pair pair = rfade_bessel_pair(argument(arguments, "x"));
    return pair.i0_scaled * (1.0 - pair.complement);
}

/* The table's 1/x = 0 is a limit. */
static double large_argument(const char *arguments)
{
    return 1.0 / fmax(argument(arguments, "1/x"), 1e-18);
}

static double i0_auxiliary(const char *arguments)
{
    const double x = large_argument(arguments);
    return sqrt(x) * rfade_bessel_pair(x).i0_scaled;
}

static double i1_auxiliary(const char *arguments)
{
    const double x = large_argument(arguments);
    const struct rfade_bessel_pair pair = rfade_bessel_pair(x);
    return sqrt(x) * pair.i0_scaled * (1.0 - pair.complement);
}

static void ams55_table_9_8_modified_bessel_functions(void **state)
{
    (void)state;
    check_table("exp(-x)*I0(x)", "Table 9.8", 38, i0_scaled);
    check_table("exp(-x)*I1(x)", "Table 9.8", 38, i1_scaled);
    check_table("sqrt(x)*exp(-x)*I0(x)", "Table 9.8", 14, i0_auxiliary);
    check_table("sqrt(x)*exp(-x)*I1(x)", "Table 9.8", 14, i1_auxiliary);
}

static double normal_lower(const char *arguments)
{
    return normal(argument(arguments, "x")).lower;
}

static double normal_density_at_x(const char *arguments)
{
    return normal_density(argument(arguments, "x"));
}

static double normal_upper_decades(const char *arguments)
{
    return -normal(argument(arguments, "x")).log_upper / M_LN10;
}

static double normal_quantile(const char *arguments)
{
    const double q = argument(arguments, "q");
    double x = NAN;
    const struct rfade_model *lognormal = rfade_model(RFADE_LOGNORMAL);
    assert_int_equal(lognormal->quantile(1.0, 1.0 - q, q, &x), RFADE_OK);
    return x;
}

static void ams55_tables_26_1_26_2_26_5_26_6_normal(void **state)
{
    (void)state;
    check_table("P(x)", "Table 26.1", 36, normal_lower);
    check_table("Z(x)", "Table 26.1", 36, normal_density_at_x);
    check_table("-log10 Q(x)", "Table 26.2", 37, normal_upper_decades);
    check_table("x such that Q(x)=q", "Table 26.5", 15, normal_quantile);
    check_table("x such that Q(x)=q", "Table 26.6", 20, normal_quantile);
}

static double chi_square_upper(const char *arguments)
{
    struct rfade_tails tails;
    assert_int_equal(rfade_gamma_tails(0.5 * argument(arguments, "nu"),
                                       0.5 * argument(arguments, "chi2"), &tails),
                     RFADE_OK);
    return tails.upper;
}

/* Chi-square over its mean is Nakagami power with m = nu/2. */
static double chi_square_quantile(const char *arguments)
{
    const double q = argument(arguments, "q");
    const double nu = argument(arguments, "nu");
    double x_db = NAN;
    const struct rfade_model *nakagami = rfade_model(RFADE_NAKAGAMI);
    assert_int_equal(nakagami->quantile(0.5 * nu, 1.0 - q, q, &x_db), RFADE_OK);
    return nu * pow(10.0, 0.1 * x_db);
}

static void ams55_tables_26_7_26_8_chi_square(void **state)
{
    (void)state;
    check_table("Q(chi2|nu)", "Table 26.7", 46, chi_square_upper);
    check_table("chi2 such that Q(chi2|nu)=q", "Table 26.8", 39, chi_square_quantile);
}

/* P(chi2|2, lambda) = 1 - Q1(sqrt(lambda), sqrt(chi2)) */
static double noncentral_chi_square(const char *arguments)
{
    assert_true(argument(arguments, "nu") == 2.0);
    struct rfade_tails tails;
    assert_int_equal(rfade_marcum_tails(sqrt(argument(arguments, "lambda")),
                                        sqrt(argument(arguments, "chi2")), &tails),
                     RFADE_OK);
    return tails.lower;
}

static void ams55_equation_26_4_25_noncentral_chi_square(void **state)
{
    (void)state;
    check_table("P(chi2|nu,lambda) non-central", "eq. 26.4.25", 11, noncentral_chi_square);
}

int main(void)
{
    gsl_set_error_handler_off();
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(ams55_table_6_1_gamma_and_psi),
        cmocka_unit_test(ams55_table_6_3_gamma_and_psi_of_integers),
        cmocka_unit_test(ams55_table_7_1_error_function),
        cmocka_unit_test(ams55_table_7_3_complementary_error_function),
        cmocka_unit_test(ams55_table_9_8_modified_bessel_functions),
        cmocka_unit_test(ams55_tables_26_1_26_2_26_5_26_6_normal),
        cmocka_unit_test(ams55_tables_26_7_26_8_chi_square),
        cmocka_unit_test(ams55_equation_26_4_25_noncentral_chi_square),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
