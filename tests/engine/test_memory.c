/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * A step takes no memory: the allocator's own calls are counted. Under a sanitizer the
 * allocator belongs to it; then the step is only run.
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

#include "rig.h"

#if defined(__has_feature)
#if __has_feature(address_sanitizer) || __has_feature(thread_sanitizer)
#define ALLOCATOR_TAKEN 1
#endif
#endif
#if defined(__SANITIZE_ADDRESS__) || defined(__SANITIZE_THREAD__)
#define ALLOCATOR_TAKEN 1
#endif

static long calls;

#ifndef ALLOCATOR_TAKEN
/* glibc's own entries, under which the replaced names still reach the allocator. */
void *__libc_malloc(size_t size);
void *__libc_calloc(size_t count, size_t size);
void *__libc_realloc(void *memory, size_t size);

void *malloc(size_t size)
{
    calls++;
    return __libc_malloc(size);
}

void *calloc(size_t count, size_t size)
{
    calls++;
    return __libc_calloc(count, size);
}

void *realloc(void *memory, size_t size)
{
    calls++;
    return __libc_realloc(memory, size);
}
#endif

static void test_a_step_takes_no_memory(void **state)
{
    (void)state;
    struct rig rig;
    struct body body;
    struct trend_column column[80];
    struct budget budget;
    long before_open = calls;
    rig_open(&rig, "tests/data/engine/tank.ini");
#ifndef ALLOCATOR_TAKEN
    assert_true(calls > before_open); /* the counter counts */
#else
    (void)before_open;
#endif
    rig_quiet(&rig);
    body_fill(&body, 1000, 800, 112000);
    static const char *const lost[] = {"PT-1", "LT-1", "TT-1",  "FT-1",
                                       "TT-5", "AT-1", "PT-900"};
    long before = calls;
    for (int i = 0; i < 900; i++) {
        rig_tank(&rig, &body);
        rig_set(&rig, "PT-900", 98200);
        rig_set(&rig, "AT-1", i % 100 < 50 ? 0.2095 : 0.17);
        rig_set(&rig, "FT-1", 0.02);
        if (i > 300)
            rig_spoil(&rig, lost[i / 10 % 7],
                      i / 70 % 2 == 0 ? QUALITY_STALE : QUALITY_MISSING);
        rig_step(&rig, i == 450 ? -100 : 10);
        engine_trend(rig.engine, i % plant_tag_count(rig.plant), 14400, column, 80);
        engine_budget(rig.engine, i % plant_tag_count(rig.plant), &budget);
    }
    assert_int_equal(calls, before);
    rig_close(&rig);
}

int main(void)
{
    const struct CMUnitTest tests[] = {cmocka_unit_test(test_a_step_takes_no_memory)};
    return cmocka_run_group_tests(tests, NULL, NULL);
}
