/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Links for a long time among devices that misbehave at random: never a wrong value called
 * good, the healthy links on time, no descriptor and no memory lost, and everything back in the
 * end. Short in 'make check'; 'make soak' runs it for a day (ULLAGE_SOAK_S seconds).
 */
#include <dirent.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdio.h>
#include <stdlib.h>

#include <cmocka.h>

#include "fake.h"

enum { LINKS = 20, HEALTHY = 10, VALUE = 1000 };

static struct fake fakes[LINKS];
static struct rig rig;
static unsigned seed = 4711;

static unsigned next_random(unsigned below)
{
    seed = seed * 1664525u + 1013904223u;
    return (seed >> 8) % below;
}

static int descriptors(void)
{
    DIR *folder = opendir("/proc/self/fd");
    int count = 0;
    assert_non_null(folder);
    while (readdir(folder) != NULL)
        count++;
    closedir(folder);
    return count;
}

static long resident_kib(void)
{
    char line[200];
    long kib = 0;
    FILE *file = fopen("/proc/self/status", "r");
    assert_non_null(file);
    while (fgets(line, sizeof(line), file) != NULL)
        if (sscanf(line, "VmRSS: %ld", &kib) == 1)
            break;
    fclose(file);
    return kib;
}

static bool all_up(const struct rig *r, int unused)
{
    (void)unused;
    for (int i = 0; i < LINKS; i++)
        if (r->state[i].phase != LINK_UP || r->sample[i].quality != QUALITY_GOOD)
            return false;
    return true;
}

/* A wrong number labelled good is the one thing that must never be. */
static void judge_values(void)
{
    for (int i = 0; i < LINKS; i++)
        if (rig.sample[i].quality == QUALITY_GOOD && rig.sample[i].value != VALUE + i)
            fail_msg("device %d shows %g, good", i, rig.sample[i].value);
}

static void be_quiet(enum log_level level, const char *line, void *context)
{
    (void)level, (void)line, (void)context;
}

static void test_misbehaving_devices_harm_nobody_for_as_long_as_it_takes(void **state)
{
    struct error err = {0};
    const char *asked = getenv("ULLAGE_SOAK_S"), *given_seed = getenv("ULLAGE_SEED");
    double span_s = asked != NULL ? strtod(asked, NULL) : 8;
    uint64_t fills = 0, late = 0, changes = 0;
    (void)state;
    if (given_seed != NULL)
        seed = (unsigned)strtoul(given_seed, NULL, 10);
    print_message("seed %u, %.0f s\n", seed, span_s);
    log_set_sink(be_quiet, NULL);
    for (int i = 0; i < LINKS; i++) {
        assert_true(fake_start(&fakes[i]));
        fakes[i].keep_no_log = true;
        atomic_store(&fakes[i].word[3], (uint16_t)(VALUE + i));
        rig_link(&rig, "127.0.0.1", fakes[i].port);
        rig_point(&rig, 3)->stale_s = 1;
    }
    assert_int_equal(rig_open(&rig, &err), 0);
    assert_true(rig_wait(&rig, all_up, 0));
    int64_t start_ns = time_mono_ns(), next_ns = start_ns,
            end_ns = start_ns + time_s_to_ns(span_s);
    int first_descriptors = 0;
    long first_kib = 0;
    for (int64_t now_ns = start_ns; now_ns < end_ns; now_ns = time_mono_ns()) {
        if (now_ns >= next_ns) {
            int device = HEALTHY + (int)next_random(LINKS - HEALTHY);
            atomic_store(&fakes[device].mode, (int)next_random(FAKE_MODES));
            next_ns = now_ns + (int64_t)(50 + next_random(300)) * 1000000;
            changes++;
        }
        struct pollfd wait = {.fd = field_wake_fd(rig.field), .events = POLLIN};
        poll(&wait, 1, 20);
        rig_fill(&rig);
        judge_values();
        fills++;
        for (int i = 0; i < HEALTHY; i++) {
            assert_int_equal(rig.state[i].timeouts, 0);
            late += frame_age_s(&rig.frame, i) > 0.5;
        }
        if (first_descriptors == 0 && now_ns > start_ns + (end_ns - start_ns) / 4) {
            first_descriptors = descriptors();
            first_kib = resident_kib();
        }
    }
    int last_descriptors = descriptors();
    long last_kib = resident_kib();
    for (int i = 0; i < LINKS; i++)
        atomic_store(&fakes[i].mode, FAKE_GOOD);
    bool back = false;
    for (int i = 0; i < 6 && !back; i++) /* the longest back-off is 15 s */
        back = rig_wait(&rig, all_up, 0);
    print_message(
        "%llu fills, %llu changes of behaviour; late %llu of %llu; descriptors %d, %d; "
        "resident %ld, %ld KiB\n",
        (unsigned long long)fills, (unsigned long long)changes, (unsigned long long)late,
        (unsigned long long)(fills * HEALTHY), first_descriptors, last_descriptors, first_kib,
        last_kib);
    assert_true(back);
    judge_values();
    /* On a busy machine a poll is late now and then; a dead neighbour would make it the rule.
     */
    assert_true(late * 50 <= fills * HEALTHY);
    /* Each misbehaving link may hold a connection more or less, and its device the other end.
     */
    assert_true(last_descriptors <= first_descriptors + 4 * (LINKS - HEALTHY));
#ifndef __SANITIZE_ADDRESS__
    assert_true(last_kib <= first_kib + 4096);
#endif
    field_close(rig.field);
    for (int i = 0; i < LINKS; i++)
        fake_stop(&fakes[i]);
    log_set_sink(NULL, NULL);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_misbehaving_devices_harm_nobody_for_as_long_as_it_takes),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
