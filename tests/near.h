/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Comparing doubles in tests: cmocka 1.1 has only the float forms. Include after cmocka.h.
 */
#ifndef TESTS_NEAR_H
#define TESTS_NEAR_H

#include <math.h>
#include <stdio.h>

static inline int near_enough(double actual, double expected, double tolerance)
{
    if (fabs(actual - expected) <= tolerance)
        return 1;
    print_error("%.17g is not within %g of %.17g\n", actual, tolerance, expected);
    return 0;
}

/* |actual - expected| <= tolerance; a NaN never passes. */
#define assert_near(actual, expected, tolerance)                                               \
    assert_true(near_enough(actual, expected, tolerance))
/* The same, relative to expected. */
#define assert_close(actual, expected, relative)                                               \
    assert_true(near_enough(actual, expected, (relative)*fabs((double)(expected))))

#endif
