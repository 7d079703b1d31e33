/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Windows: the identity between weights of storage and of flow, irregular readings, gaps, the
 * stated uncertainty of a slope against its true error, changes found and not invented. Noise
 * is white, by a fixed generator (Knuth's MMIX multiplier) and Box-Muller.
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

#include "../near.h"
#include "ullage/balance.h"

static double uniform(uint64_t *seed)
{
    *seed = *seed * UINT64_C(6364136223846793005) + UINT64_C(1442695040888963407);
    return ((double)(*seed >> 11) + 0.5) / 9007199254740992.0;
}

static double normal(uint64_t *seed)
{
    double u = uniform(seed), v = uniform(seed);
    return sqrt(-2 * log(u)) * cos(6.283185307179586 * v);
}

enum { CAPACITY = 128 };
static double slope[2 * CAPACITY], rate[2 * CAPACITY];

static struct window make(struct arena *arena, int series)
{
    struct window window;
    assert_int_equal(window_init(&window, series, CAPACITY, 10 * NS_PER_S, 0, arena), 0);
    return window;
}

static void test_a_balance_closes_exactly_while_flow_and_storage_vary(void **state)
{
    (void)state;
    /* Storage is the integral of any rate; then slope of storage equals the weighted rate, for
     * readings at irregular times. One frame a block, so trapezoids are those of the storage.
     */
    struct arena *arena = arena_create();
    struct window window = make(arena, 2);
    uint64_t seed = 7;
    double t = 0, stored = 5, last_rate = 0, last_t = 0;
    for (int i = 0; i < 100; i++) {
        t = 10 * i + 9 * uniform(&seed);
        double r = 3 + sin(t / 200) + (t > 500 ? 4 : 0) + uniform(&seed);
        if (i > 0)
            stored += 0.5 * (r + last_rate) * (t - last_t);
        last_rate = r;
        last_t = t;
        window_push(&window, (int64_t)(t * 1e9), (const double[]){stored, r});
    }
    struct window_weights weights = {.slope = slope, .rate = rate};
    assert_int_equal(window_weigh(&window, 0, &weights), 0);
    double by_storage = window_sum(slope, window_series(&window, 0), 0, window.count);
    double by_flow = window_sum(rate, window_series(&window, 1), 0, window.count);
    assert_close(by_storage, by_flow, 1e-11);
    double sum = 0;
    for (int k = 0; k < window.count; k++)
        sum += rate[k];
    assert_near(sum, 1, 1e-12); /* weights of a mean */
    arena_free(arena);
}

static void test_a_straight_line_has_its_slope_across_gaps(void **state)
{
    (void)state;
    struct arena *arena = arena_create();
    struct window window = make(arena, 1);
    for (int i = 0; i < 2000; i++) {
        if (i % 5 == 3 || (i > 600 && i < 700))
            continue;
        window_push(&window, i * NS_PER_S, (const double[]){1e6 - 0.25 * i});
    }
    assert_int_equal(window.count, CAPACITY);
    struct window_line line;
    assert_int_equal(window_line(&window, 0, window.count, window_series(&window, 0), &line),
                     0);
    assert_close(line.slope, -0.25, 1e-9);
    assert_near(line.u_slope, 0, 1e-9);
    /* The oldest blocks were dropped, the order kept. */
    const double *t = window_time_s(&window);
    for (int k = 1; k < window.count; k++)
        assert_true(t[k] > t[k - 1]);
    assert_true(t[window.count - 1] - t[0] < CAPACITY * 10 + 110);
    arena_free(arena);
}

static void test_stated_uncertainty_of_a_slope_covers_its_error(void **state)
{
    (void)state;
    /* 400 windows of white noise: the slope's error over its u has a standard deviation of 1
     * (two standard errors of that: 1/sqrt(2*400) each) and 95 % lie within 2. */
    enum { RUNS = 400, BLOCKS = 60 };
    uint64_t seed = 20261130;
    double squares = 0;
    int inside = 0;
    for (int run = 0; run < RUNS; run++) {
        struct arena *arena = arena_create();
        struct window window = make(arena, 1);
        for (int i = 0; i < BLOCKS * 10; i++)
            window_push(&window, i * NS_PER_S, (const double[]){0.1 * i + normal(&seed)});
        struct window_line line;
        assert_int_equal(
            window_line(&window, 0, window.count, window_series(&window, 0), &line), 0);
        double z = (line.slope - 0.1) / line.u_slope;
        squares += z * z;
        inside += fabs(z) <= 2;
        arena_free(arena);
    }
    assert_near(sqrt(squares / RUNS), 1, 0.15);
    assert_true(inside > 0.9 * RUNS && inside < RUNS);
}

static void test_a_change_of_slope_is_found_and_none_is_invented(void **state)
{
    (void)state;
    uint64_t seed = 99;
    int false_findings = 0;
    for (int run = 0; run < 50; run++) {
        struct arena *arena = arena_create();
        struct window window = make(arena, 1);
        for (int i = 0; i < 1000; i++)
            window_push(&window, i * NS_PER_S, (const double[]){0.1 * i + normal(&seed)});
        false_findings += window_change(&window, 0, window_series(&window, 0), 100, 0, 5) != 0;
        arena_free(arena);
    }
    assert_int_equal(false_findings, 0); /* 5 sigma, three looks: 1 in a million a window */
    struct arena *arena = arena_create();
    struct window window = make(arena, 1);
    for (int i = 0; i < 1000; i++)
        window_push(
            &window, i * NS_PER_S,
            (const double[]){(i < 700 ? 0.1 * i : 70 + 0.2 * (i - 700)) + normal(&seed)});
    int found = window_change(&window, 0, window_series(&window, 0), 100, 0, 5);
    assert_true(found >= 48 && found <= 90);
    arena_free(arena);
}

static void test_too_few_blocks_give_no_weights(void **state)
{
    (void)state;
    struct arena *arena = arena_create();
    struct window window = make(arena, 1);
    struct window_weights weights = {.slope = slope, .rate = rate};
    struct window_line line;
    assert_int_equal(window_weigh(&window, 0, &weights), ERR_RANGE);
    window_push(&window, 0, (const double[]){1});
    window_push(&window, 10 * NS_PER_S, (const double[]){2});
    assert_int_equal(window_weigh(&window, 0, &weights), ERR_RANGE);
    assert_int_equal(window_line(&window, 0, 2, window_series(&window, 0), &line), ERR_RANGE);
    arena_free(arena);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_a_balance_closes_exactly_while_flow_and_storage_vary),
        cmocka_unit_test(test_a_straight_line_has_its_slope_across_gaps),
        cmocka_unit_test(test_stated_uncertainty_of_a_slope_covers_its_error),
        cmocka_unit_test(test_a_change_of_slope_is_found_and_none_is_invented),
        cmocka_unit_test(test_too_few_blocks_give_no_weights),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
