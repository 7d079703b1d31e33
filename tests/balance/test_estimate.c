/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Propagation of uncertainty against JCGM 100:2008 Annex H.2 and identities of variances. The
 * annex's inputs are rounded, so its printed u are met to about 2 % (tests/data/methods says
 * how far to trust each row).
 */
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include <cmocka.h>

#include "check_value.h"
#include "ullage/balance.h"

/* Annex H.2: voltage, current and phase, correlated, built from three independent sources by
 * the Cholesky factor of their correlation. */
static void correlated(const struct check_value *row, struct estimate x[3])
{
    const char *const names[] = {"V", "I", "phi"}, *const us[] = {"uV", "uI", "uphi"};
    double r[3][3] =
        {
            {1, 0, 0},
            {0, 1, 0},
            {0, 0, 1}
    },
           factor[3][3] = {{0}};
    r[1][0] = check_input(row, "rVI");
    r[2][0] = check_input(row, "rVphi");
    r[2][1] = check_input(row, "rIphi");
    for (int i = 0; i < 3; i++)
        for (int k = 0; k <= i; k++) {
            double sum = r[i][k];
            for (int m = 0; m < k; m++)
                sum -= factor[i][m] * factor[k][m];
            factor[i][k] = i == k ? sqrt(sum) : sum / factor[k][k];
        }
    for (int i = 0; i < 3; i++) {
        estimate_exact(&x[i], check_input(row, names[i]));
        for (int k = 0; k <= i; k++)
            estimate_add_term(&x[i], source_of(SOURCE_POINT, k),
                              factor[i][k] * check_input(row, us[i]));
    }
}

static int resistance(const void *context, const double *x, double *y)
{
    (void)context;
    *y = x[0] / x[1] * cos(x[2]);
    return 0;
}

static int reactance(const void *context, const double *x, double *y)
{
    (void)context;
    *y = x[0] / x[1] * sin(x[2]);
    return 0;
}

static int impedance(const void *context, const double *x, double *y)
{
    (void)context;
    *y = x[0] / x[1];
    return 0;
}

static void test_correlated_example_of_jcgm_100_annex_h2(void **state)
{
    (void)state;
    static const struct {
        const char *value, *u;
        estimate_function *f;
    } rows[] = {
        {"gum.h2.R.1", "gum.h2.uR.1", resistance},
        {"gum.h2.X.1", "gum.h2.uX.1", reactance },
        {"gum.h2.Z.1", "gum.h2.uZ.1", impedance }
    };
    struct estimate result[3];
    for (int i = 0; i < 3; i++) {
        struct check_value row = check_value(rows[i].value), u = check_value(rows[i].u);
        struct estimate x[3];
        correlated(&row, x);
        const struct estimate *const of[] = {&x[0], &x[1], &x[2]};
        assert_int_equal(estimate_apply(&result[i], rows[i].f, NULL, 3, of), 0);
        check_result(&row, result[i].value);
        check_result(&u, estimate_u(&result[i]));
    }
    struct check_value r = check_value("gum.h2.rRX.1");
    check_result(&r, estimate_covariance(&result[0], &result[1]) /
                         (estimate_u(&result[0]) * estimate_u(&result[1])));
}

static int product(const void *context, const double *x, double *y)
{
    (void)context;
    *y = x[0] * x[1];
    return 0;
}

static void test_product_of_independent_quantities(void **state)
{
    (void)state;
    struct check_value row = check_value("gum.product.1");
    struct estimate flow, enthalpy, heat;
    estimate_exact(&flow, check_input(&row, "m"));
    estimate_add_term(&flow, source_of(SOURCE_POINT, 1), check_input(&row, "um"));
    estimate_exact(&enthalpy, check_input(&row, "h"));
    estimate_add_term(&enthalpy, source_of(SOURCE_METHOD, 0), check_input(&row, "uh"));
    const struct estimate *const of[] = {&flow, &enthalpy};
    assert_int_equal(estimate_apply(&heat, product, NULL, 2, of), 0);
    check_result(&row, estimate_u(&heat));
}

static void test_a_sensor_used_twice_counts_once_and_cancels(void **state)
{
    (void)state;
    /* (gauge1 + barometer) - (gauge2 + barometer): the barometer is gone (JCGM 100, 5.2.2). */
    struct estimate a, b;
    estimate_exact(&a, 112400);
    estimate_add_term(&a, source_of(SOURCE_POINT, 1), 30);
    estimate_add_term(&a, source_of(SOURCE_POINT, 9), 500);
    estimate_exact(&b, 110000);
    estimate_add_term(&b, source_of(SOURCE_POINT, 9), 500);
    estimate_add_term(&b, source_of(SOURCE_POINT, 2), 40);
    estimate_add(&a, -1, &b);
    assert_true(fabs(a.value - 2400) < 1e-9);
    assert_true(fabs(estimate_u(&a) - 50) < 1e-12); /* 3, 4, 5 */
}

static void test_terms_beyond_the_room_are_kept_in_quadrature(void **state)
{
    (void)state;
    struct estimate many;
    estimate_exact(&many, 0);
    for (int i = 0; i < 100; i++)
        estimate_add_term(&many, source_of(SOURCE_POINT, (i * 37) % 100), 1);
    assert_int_equal(many.count, ESTIMATE_TERMS);
    assert_true(fabs(estimate_u(&many) - 10) < 1e-12);
    for (int i = 1; i < many.count; i++)
        assert_true(many.term[i - 1].source < many.term[i].source);
    struct estimate twice;
    estimate_exact(&twice, 0);
    estimate_add(&twice, 2, &many);
    assert_true(fabs(estimate_u(&twice) - 20) < 1e-12);
}

static int fails(const void *context, const double *x, double *y)
{
    (void)context;
    (void)x;
    (void)y;
    return ERR_RANGE;
}

static void test_a_failing_function_leaves_the_output_untouched(void **state)
{
    (void)state;
    struct estimate x, out;
    estimate_exact(&x, 1);
    estimate_exact(&out, 42);
    const struct estimate *const of[] = {&x};
    assert_int_equal(estimate_apply(&out, fails, NULL, 1, of), ERR_RANGE);
    assert_true(out.value == 42);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_correlated_example_of_jcgm_100_annex_h2),
        cmocka_unit_test(test_product_of_independent_quantities),
        cmocka_unit_test(test_a_sensor_used_twice_counts_once_and_cancels),
        cmocka_unit_test(test_terms_beyond_the_room_are_kept_in_quadrature),
        cmocka_unit_test(test_a_failing_function_leaves_the_output_untouched),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
