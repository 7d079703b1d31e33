/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Statistics. The line: NIST Statistical Reference Datasets, "Norris". The normal distribution:
 * Abramowitz and Stegun, Handbook of Mathematical Functions (1964), table 26.1 (cdf) and
 * table 26.5 (quantiles).
 */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>
#include <string.h>

#include <cmocka.h>

#include "ullage/base.h"

#include "../near.h"

static void test_line_agrees_with_the_certified_values_of_norris(void **state)
{
    (void)state;
    double x[64], y[64];
    size_t n = 0;
    char line[200];
    FILE *file = fopen("tests/data/base/norris.csv", "r");
    assert_non_null(file);
    while (fgets(line, sizeof(line), file) != NULL) {
        if (line[0] == '#' || line[0] == 'y')
            continue;
        assert_true(n < ARRAY_LENGTH(x));
        assert_int_equal(sscanf(line, "%lf,%lf", &y[n], &x[n]), 2);
        n++;
    }
    fclose(file);
    assert_int_equal(n, 36);
    struct line_fit fit;
    assert_int_equal(statistics_line(x, y, n, &fit), 0);
    /* Certified to 15 digits; the data lose at most two of a double's 15.9. */
    assert_close(fit.slope, 1.00211681802045, 1e-13);
    assert_close(fit.u_slope, 0.429796848199937e-3, 1e-12);
    assert_close(fit.residual_sd, 0.884796396144373, 1e-12);
    assert_close(fit.mean_y - fit.slope * fit.mean_t, -0.262323073774029, 1e-11);
    /* NIST gives sd(intercept) = 0.232818234301152 = root of u_mean_y^2 + (mean_t u_slope)^2.
     */
    assert_close(hypot(fit.u_mean_y, fit.mean_t * fit.u_slope), 0.232818234301152, 1e-12);
    assert_int_equal(fit.n, 36);
}

static void test_line_bears_times_far_from_zero(void **state)
{
    (void)state;
    /* Exact: y = 2 + 0.001 (t - t0), t in seconds of the epoch. */
    double t[100], y[100];
    for (int i = 0; i < 100; i++) {
        t[i] = 1.8e9 + i;
        y[i] = 2 + 0.001 * i;
    }
    struct line_fit fit;
    assert_int_equal(statistics_line(t, y, 100, &fit), 0);
    assert_close(fit.slope, 0.001, 1e-9);
    assert_near(fit.residual_sd, 0, 1e-9);
    assert_close(fit.mean_y, 2 + 0.001 * 49.5, 1e-12);
}

static void test_line_refuses_what_has_no_slope(void **state)
{
    (void)state;
    const double t[] = {1, 2, 3}, same[] = {5, 5, 5}, y[] = {1, 2, 4};
    const double wild[] = {1, (double)INFINITY, 3};
    struct line_fit fit = {.slope = 42};
    assert_int_equal(statistics_line(t, y, 2, &fit), ERR_RANGE);
    assert_int_equal(statistics_line(t, y, 0, &fit), ERR_RANGE);
    assert_int_equal(statistics_line(same, y, 3, &fit), ERR_RANGE);
    assert_int_equal(statistics_line(wild, y, 3, &fit), ERR_RANGE);
    assert_int_equal(statistics_line(t, wild, 3, &fit), ERR_RANGE);
    assert_near(fit.slope, 42, 0);
    assert_int_equal(statistics_line(t, y, 3, &fit), 0);
    assert_near(fit.slope, 1.5, 1e-15);
}

static void test_normal_cdf_matches_table_26_1(void **state)
{
    (void)state;
    /* z, P(z) to the digits that are remembered with certainty. */
    assert_near(statistics_normal_cdf(0), 0.5, 0);
    assert_near(statistics_normal_cdf(1), 0.841344746068543, 1e-15);
    assert_near(statistics_normal_cdf(2), 0.977249868051821, 1e-15);
    assert_near(statistics_normal_cdf(3), 0.998650101968370, 1e-15);
    assert_near(statistics_normal_cdf(-1), 1 - 0.841344746068543, 1e-15);
    assert_near(statistics_normal_cdf(-1.96), 0.0249978951482205, 1e-15);
    assert_true(statistics_normal_cdf(-37) > 0); /* no early underflow in the far tail */
    assert_near(statistics_normal_cdf(40), 1, 0);
}

static void test_normal_quantile_matches_published_quantiles(void **state)
{
    (void)state;
    static const struct {
        double p, z;
    } rows[] = {
        {0.5,   0                },
        {0.75,  0.674489750196082},
        {0.90,  1.281551565544600},
        {0.95,  1.644853626951473},
        {0.975, 1.959963984540054},
        {0.99,  2.326347874040841},
        {0.995, 2.575829303548901},
        {0.999, 3.090232306167813},
    };
    for (size_t i = 0; i < ARRAY_LENGTH(rows); i++) {
        assert_near(statistics_normal_quantile(rows[i].p), rows[i].z, 1e-13);
        assert_near(statistics_normal_quantile(1 - rows[i].p), -rows[i].z, 1e-13);
    }
    assert_near(statistics_normal_quantile(1e-9), -5.997807015007687, 1e-12);
}

static void test_quantile_undoes_the_cdf(void **state)
{
    (void)state;
    for (double z = -30; z < 5; z += 0.37)
        assert_near(statistics_normal_quantile(statistics_normal_cdf(z)), z, 1e-8);
}

static void test_decimals_never_outrun_the_uncertainty(void **state)
{
    (void)state;
    /* JCGM 100:2008, 7.2.6: at most two significant digits of u. The second example there is
     * its 100.02147 g with u = 0.35 mg, printed to 0.01 mg: in grams at most five decimals. */
    static const struct {
        double u;
        int decimals;
    } rows[] = {
        {0.012,  3},
        {0.034,  2},
        {0.0029, 4},
        {1.5,    1},
        {3,      0},
        {15,     0},
        {4000,   0},
        {1e-20,  9},
        {1e-3,   4},
        {0.1,    2},
        {1,      1},
        {10,     0},
    };
    for (size_t i = 0; i < ARRAY_LENGTH(rows); i++)
        assert_int_equal(quantity_decimals(rows[i].u, 7), rows[i].decimals);
    assert_true(quantity_decimals(0.35e-3, 7) <= 5);
    assert_int_equal(quantity_decimals(0, 7), 7);
    assert_int_equal(quantity_decimals(-1, 7), 7);
    assert_int_equal(quantity_decimals((double)NAN, 7), 7);
    assert_int_equal(quantity_decimals((double)INFINITY, 7), 7);
}

static void test_only_good_and_uncertain_may_be_computed_with(void **state)
{
    (void)state;
    struct quantity good = quantity_good(87.3, 0.1);
    assert_true(quantity_usable(good));
    assert_near(good.value, 87.3, 0);
    assert_near(good.u, 0.1, 0);
    good.quality = QUALITY_UNCERTAIN;
    assert_true(quantity_usable(good));
    for (int q = QUALITY_STALE; q < QUALITY_COUNT; q++) {
        struct quantity none = quantity_none((enum quality)q);
        assert_false(quantity_usable(none));
        assert_near(none.value, 0, 0);
        assert_near(none.u, 0, 0);
    }
}

static void test_worse_quality_wins_and_each_has_its_own_word_and_mark(void **state)
{
    (void)state;
    for (int a = 0; a < QUALITY_COUNT; a++) {
        for (int b = 0; b < QUALITY_COUNT; b++) {
            enum quality qa = (enum quality)a, qb = (enum quality)b;
            assert_int_equal(quality_worse(qa, qb), a > b ? a : b);
            if (a != b) {
                assert_string_not_equal(quality_word(qa), quality_word(qb));
                assert_int_not_equal(quality_mark(qa), quality_mark(qb));
            }
        }
    }
    assert_string_equal(quality_word(QUALITY_GOOD), "good");
    assert_int_equal(quality_mark(QUALITY_GOOD), ' ');
    assert_string_equal(quality_word(QUALITY_MISSING), "missing");
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_line_agrees_with_the_certified_values_of_norris),
        cmocka_unit_test(test_line_bears_times_far_from_zero),
        cmocka_unit_test(test_line_refuses_what_has_no_slope),
        cmocka_unit_test(test_normal_cdf_matches_table_26_1),
        cmocka_unit_test(test_normal_quantile_matches_published_quantiles),
        cmocka_unit_test(test_quantile_undoes_the_cdf),
        cmocka_unit_test(test_decimals_never_outrun_the_uncertainty),
        cmocka_unit_test(test_only_good_and_uncertain_may_be_computed_with),
        cmocka_unit_test(test_worse_quality_wins_and_each_has_its_own_word_and_mark),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
