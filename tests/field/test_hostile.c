/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Devices that answer badly: nothing of a bad answer is ever shown, the link recovers by
 * itself, and the other links never notice.
 */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>

#include <cmocka.h>

#include "fake.h"

static void quiet(enum log_level level, const char *line, void *context)
{
    (void)level, (void)line, (void)context;
}

static struct fake *fakes_start(int count)
{
    struct fake *fake = calloc((size_t)count, sizeof(*fake));
    assert_non_null(fake);
    for (int i = 0; i < count; i++)
        assert_true(fake_start(&fake[i]));
    return fake;
}

static void fakes_stop(struct fake *fake, int count)
{
    for (int i = 0; i < count; i++)
        fake_stop(&fake[i]);
    free(fake);
}

static bool poisoned(const struct rig *rig)
{
    for (int i = 0; i < rig->plant.point_count; i++)
        if (rig->sample[i].value == POISON)
            return true;
    return false;
}

/* Point i of device i shows a value, good. */
static bool all_show(const struct rig *rig, int value)
{
    if (poisoned(rig))
        return false;
    for (int i = 0; i < rig->plant.point_count; i++)
        if (rig->sample[i].quality != QUALITY_GOOD || rig->sample[i].value != value)
            return false;
    for (int i = 0; i < rig->plant.link_count; i++)
        if (rig->state[i].phase != LINK_UP)
            return false;
    return true;
}

static uint64_t answers_before[FAKE_MODES];

/* Every device that is told to misbehave was found out at least twice since, and the good ones
 * went on all the while. */
static bool all_in_trouble(const struct rig *rig, int times)
{
    assert_false(poisoned(rig));
    for (int i = 0; i < FAKE_MODES; i++) {
        bool tolerated = i <= FAKE_TOLERATED;
        const struct link_state *link = &rig->state[i];
        if (tolerated && link->answers < answers_before[i] + 20)
            return false;
        if (!tolerated && (link->phase != LINK_DOWN || link->reconnects < (uint64_t)times))
            return false;
    }
    return true;
}

static void test_no_bad_answer_is_ever_shown_and_every_link_recovers(void **state)
{
    (void)state;
    struct fake *fake = fakes_start(FAKE_MODES);
    static struct rig rig;
    for (int i = 0; i < FAKE_MODES; i++) {
        rig_link(&rig, "127.0.0.1", fake[i].port);
        rig_point(&rig, 3);
        atomic_store(&fake[i].word[3], 111);
    }
    struct error err = {0};
    assert_int_equal(rig_open(&rig, &err), 0);
    assert_true(rig_wait(&rig, all_show, 111));

    for (int i = 0; i < FAKE_MODES; i++) {
        answers_before[i] = rig.state[i].answers;
        atomic_store(&fake[i].mode, i);
    }
    assert_true(rig_wait(&rig, all_in_trouble, 2));
    for (int i = 0; i < FAKE_MODES; i++) {
        /* the last good value stays, and is no newer than it was */
        assert_true(rig.sample[i].value == 111);
        if (i > FAKE_TOLERATED) {
            /* the first of its two answers is right and may be shown */
            assert_true(i == FAKE_TWICE || frame_age_s(&rig.frame, i) > 0.3);
            assert_true(rig.state[i].trouble[0] != '\0');
            assert_true(rig.state[i].retry_s <= 15);
            print_message("mode %d: %s\n", i, rig.state[i].trouble);
        } else {
            assert_true(frame_age_s(&rig.frame, i) < 5);
            assert_int_equal(rig.state[i].phase, LINK_UP);
            assert_true(rig.state[i].trouble[0] == '\0');
        }
    }
    /* silence, in all its forms, is told apart from a wrong answer */
    assert_string_equal(rig.state[FAKE_SILENT].trouble, "no answer in 150 ms");
    assert_string_equal(rig.state[FAKE_SLOW_DRIP].trouble, "no answer in 150 ms");
    assert_true(rig.state[FAKE_TRUNCATED].timeouts > 0);
    assert_string_equal(rig.state[FAKE_WRONG_TRANSACTION].trouble,
                        "the answer does not match the request");
    assert_true(rig.state[FAKE_WRONG_TRANSACTION].timeouts == 0);
    assert_string_equal(rig.state[FAKE_RESET].trouble, "the device closed the connection");
    assert_true(rig.state[FAKE_CLOSE_EACH].reconnects > 10);

    for (int i = 0; i < FAKE_MODES; i++) {
        atomic_store(&fake[i].word[3], 222);
        atomic_store(&fake[i].mode, FAKE_GOOD);
    }
    assert_true(rig_wait(&rig, all_show, 222));
    field_close(rig.field);
    fakes_stop(fake, FAKE_MODES);
}

static bool timed_out(const struct rig *rig, int times)
{
    return rig->state[0].timeouts >= (uint64_t)times;
}

static bool good_after_trouble(const struct rig *rig, int value)
{
    /* 111 with a read time in this phase would be the late answer taken for a new one */
    if (rig->sample[0].value == 111)
        assert_true(frame_age_s(&rig->frame, 0) > 0.1);
    return rig->state[0].phase == LINK_UP && rig->sample[0].value == value;
}

static void test_late_answer_is_never_taken_for_the_next(void **state)
{
    (void)state;
    struct fake *fake = fakes_start(1);
    static struct rig rig;
    rig_link(&rig, "127.0.0.1", fake->port);
    rig_point(&rig, 0);
    atomic_store(&fake->word[0], 111);
    struct error err = {0};
    assert_int_equal(rig_open(&rig, &err), 0);
    assert_true(rig_wait(&rig, all_show, 111));
    for (int round = 0; round < 2; round++) {
        uint64_t before = rig.state[0].timeouts;
        atomic_store(&fake->mode, FAKE_LATE);
        assert_true(rig_wait(&rig, timed_out, (int)before + 1));
        atomic_store(&fake->word[0], (uint16_t)(222 + round));
        atomic_store(&fake->mode, FAKE_GOOD);
        assert_true(rig_wait(&rig, good_after_trouble, 222 + round));
    }
    field_close(rig.field);
    fakes_stop(fake, 1);
}

static bool is_phase(const struct rig *rig, int phase)
{
    return rig->state[0].phase == (enum link_phase)phase;
}

static void test_restart_of_the_device_is_recovered_from(void **state)
{
    (void)state;
    struct fake *fake = fakes_start(2);
    static struct rig rig;
    rig_link(&rig, "127.0.0.1", fake[0].port);
    rig_point(&rig, 0);
    rig_link(&rig, "127.0.0.1", fake[1].port);
    rig_point(&rig, 0);
    struct error err = {0};
    assert_int_equal(rig_open(&rig, &err), 0);
    assert_true(rig_wait(&rig, all_show, 0));
    fake_stop(&fake[0]);
    assert_true(rig_wait(&rig, is_phase, LINK_DOWN));
    assert_string_equal(rig.state[0].trouble, "no connection: Connection refused");
    assert_int_equal(rig.state[1].phase, LINK_UP);
    atomic_store(&fake[0].word[0], 7);
    atomic_store(&fake[1].word[0], 7);
    assert_true(fake_start(&fake[0]));
    assert_true(rig_wait(&rig, all_show, 7));
    assert_true(rig.state[0].reconnects > 0);
    assert_true(rig.state[1].reconnects == 0);
    field_close(rig.field);
    fakes_stop(fake, 2);
}

/* A request that is never answered ends the turn; the next one starts behind it. */
static bool first_block_lives(const struct rig *rig, int value)
{
    return rig->sample[0].quality == QUALITY_GOOD && rig->sample[0].value == value &&
           rig->sample[2].quality == QUALITY_GOOD && rig->sample[2].value == value;
}

static void test_block_that_is_never_answered_does_not_starve_the_others(void **state)
{
    (void)state;
    struct fake *fake = fakes_start(1);
    static struct rig rig;
    rig_link(&rig, "127.0.0.1", fake->port)->gap = 0;
    rig_point(&rig, 0);
    rig_point(&rig, 250); /* never answered: after the coils, before the holding registers */
    rig_point(&rig, 5)->read.table = TABLE_HOLDING;
    atomic_store(&fake->silent_from, 250);
    atomic_store(&fake->word[0], 1);
    atomic_store(&fake->word[5], 1);
    struct error err = {0};
    assert_int_equal(rig_open(&rig, &err), 0);
    for (int value = 1; value < 4; value++) {
        atomic_store(&fake->word[0], (uint16_t)value);
        atomic_store(&fake->word[5], (uint16_t)value);
        assert_true(rig_wait(&rig, first_block_lives, value));
    }
    assert_int_equal(rig.sample[1].quality, QUALITY_MISSING);
    assert_true(rig.state[0].retry_s < 1); /* the device answers: waits do not grow */
    field_close(rig.field);
    fakes_stop(fake, 1);
}

static void test_device_that_closes_after_each_answer_is_read_whole(void **state)
{
    (void)state;
    struct fake *fake = fakes_start(1);
    static struct rig rig;
    rig_link(&rig, "127.0.0.1", fake->port);
    for (int i = 0; i < 5; i++)
        rig_point(&rig, i * 100);
    atomic_store(&fake->mode, FAKE_CLOSE_EACH);
    struct error err = {0};
    assert_int_equal(rig_open(&rig, &err), 0);
    for (int value = 1; value < 5; value++) {
        for (int i = 0; i < 5; i++)
            atomic_store(&fake->word[i * 100], (uint16_t)value);
        assert_true(rig_wait(&rig, all_show, value));
    }
    assert_true(rig.state[0].reconnects >= 10);
    assert_true(rig.state[0].timeouts == 0);
    field_close(rig.field);
    fakes_stop(fake, 1);
}

enum { EXCEPTIONS = 11 };

/* Device i answers every request with exception i + 1; the last link is to a good one. */
static bool every_exception_is_told(const struct rig *rig, int unused)
{
    (void)unused;
    for (int i = 0; i < EXCEPTIONS; i++) {
        bool busy = i + 1 == 5 || i + 1 == 6; /* 05 acknowledge, 06 busy: later, not bad */
        const struct sample *sample = &rig->sample[i];
        if (rig->state[i].exceptions < 1)
            return false;
        if (busy ? sample->cause != CAUSE_DEVICE_BUSY : sample->quality != QUALITY_BAD)
            return false;
        assert_int_not_equal(sample->cause, CAUSE_NONE);
    }
    return rig->sample[EXCEPTIONS].quality == QUALITY_GOOD;
}

static bool all_are_good(const struct rig *rig, int unused)
{
    (void)unused;
    for (int i = 0; i <= EXCEPTIONS; i++)
        if (rig->sample[i].quality != QUALITY_GOOD || rig->sample[i].value != 7)
            return false;
    return true;
}

static void test_exceptions_1_to_11_are_told_apart_and_recovered_from(void **state)
{
    (void)state;
    struct fake *fake = fakes_start(EXCEPTIONS + 1);
    static struct rig rig;
    struct error err = {0};
    for (int i = 0; i <= EXCEPTIONS; i++) {
        atomic_store(&fake[i].word[3], 7);
        rig_link(&rig, "127.0.0.1", fake[i].port);
        rig_point(&rig, 3)->stale_s = 0.3;
    }
    assert_int_equal(rig_open(&rig, &err), 0);
    assert_true(rig_wait(&rig, all_are_good, 0));
    for (int i = 0; i < EXCEPTIONS; i++)
        atomic_store(&fake[i].exception, i + 1);
    assert_true(rig_wait(&rig, every_exception_is_told, 0));
    /* MODBUS Application Protocol V1.1b3, 7: 0A and 0B come from a gateway. */
    assert_int_equal(rig.sample[9].cause, CAUSE_GATEWAY);
    assert_int_equal(rig.sample[10].cause, CAUSE_GATEWAY);
    assert_int_equal(rig.sample[1].cause, CAUSE_EXCEPTION);
    assert_int_equal(rig.sample[3].cause, CAUSE_DEVICE_FAILURE);
    uint64_t answers = rig.state[EXCEPTIONS].answers;
    for (int i = 0; i < EXCEPTIONS; i++)
        atomic_store(&fake[i].exception, 0);
    /* A refused value is asked for again after 5 s. */
    assert_true(rig_wait(&rig, all_are_good, 0));
    assert_true(rig.state[EXCEPTIONS].answers > answers);
    field_close(rig.field);
    fakes_stop(fake, EXCEPTIONS + 1);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_exceptions_1_to_11_are_told_apart_and_recovered_from),
        cmocka_unit_test(test_no_bad_answer_is_ever_shown_and_every_link_recovers),
        cmocka_unit_test(test_late_answer_is_never_taken_for_the_next),
        cmocka_unit_test(test_restart_of_the_device_is_recovered_from),
        cmocka_unit_test(test_device_that_closes_after_each_answer_is_read_whole),
        cmocka_unit_test(test_block_that_is_never_answered_does_not_starve_the_others),
    };
    log_set_sink(quiet, NULL);
    return cmocka_run_group_tests(tests, NULL, NULL);
}
