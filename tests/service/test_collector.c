/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The collector on the simulated plant over real Modbus/TCP: frames come by the schedule, the
 * view says what is live, commands reach the engine, and a plant that is gone makes everything
 * stale.
 */
#include <poll.h>
#include <setjmp.h>
#include <signal.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include <cmocka.h>

#include "ullage/service.h"
#include "ullage/simulator.h"

static struct problems problems;

struct rig {
    struct plant *simulated; /* the simulator's own copy */
    struct plant *plant;
    struct simulator *simulator;
    struct simulator_server *server;
    struct collector *collector;
};

static void rig_start(struct rig *rig, const char *upset)
{
    struct error err = {0};
    const struct simulator_options model = {.seed = 1,
                                            .upset = upset != NULL ? upset_find(upset) : NULL};
    const struct collector_options options = {.mode = VIEW_LIVE};
    *rig = (struct rig){0};
    if (plant_read("tests/data/e2e/dewar.ini", &rig->simulated, &problems) != 0 ||
        plant_read("tests/data/e2e/dewar.ini", &rig->plant, &problems) != 0 ||
        simulator_create(rig->simulated, &model, &rig->simulator, &err) != 0 ||
        simulator_serve(rig->simulator, "127.0.0.1", 0, 1, NULL, &rig->server, &err) != 0 ||
        plant_redirect(rig->plant, "127.0.0.1", simulator_server_port(rig->server)) != 0 ||
        collector_open(rig->plant, &options, &rig->collector, &err) != 0)
        fail_msg("%s", err.text);
}

static void rig_stop(struct rig *rig)
{
    collector_close(rig->collector);
    simulator_server_stop(rig->server);
    simulator_free(rig->simulator);
    plant_free(rig->plant);
    plant_free(rig->simulated);
}

/* Ticks until the probe says so; the deadline is no measurement. */
static void tick_until(struct rig *rig, bool (*probe)(const struct view *), const char *what)
{
    int64_t deadline_ns = time_mono_ns() + 60 * NS_PER_S;
    while (!probe(collector_view(rig->collector))) {
        struct pollfd fd = {.fd = collector_fd(rig->collector), .events = POLLIN};
        if (time_mono_ns() > deadline_ns)
            fail_msg("not in time: %s", what);
        poll(&fd, 1, 1000);
        collector_tick(rig->collector);
    }
}

static bool is_ready(const struct view *view)
{
    return view->ready;
}

static bool is_stale(const struct view *view)
{
    return view->stale;
}

static bool link_is_down(const struct view *view)
{
    return view->links_up == 0;
}

static bool has_unacknowledged(const struct view *view)
{
    return view->ready && alarm_unacknowledged(view->alarms) > 0;
}

static bool has_none_unacknowledged(const struct view *view)
{
    return alarm_unacknowledged(view->alarms) == 0;
}

static void test_first_frame_comes_on_the_links_word_and_is_whole(void **state)
{
    struct rig rig;
    struct error err = {0};
    (void)state;
    rig_start(&rig, NULL);
    assert_false(collector_view(rig.collector)->ready);
    assert_int_equal(collector_start(rig.collector, &err), 0);
    tick_until(&rig, is_ready, "a first frame");
    const struct view *view = collector_view(rig.collector);
    assert_int_equal(view->links_up, 1);
    assert_false(view->stale);
    for (int i = 0; i < rig.plant->point_count; i++)
        assert_int_equal(view->frame->sample[i].quality, QUALITY_GOOD);
    assert_int_equal(view->utc_ns % 1000000, 0); /* frame times are whole milliseconds */
    rig_stop(&rig);
}

static void test_frames_keep_their_period_on_an_absolute_schedule(void **state)
{
    enum { FRAMES = 20 };
    struct rig rig;
    struct error err = {0};
    uint64_t frames = 0, missed = 0;
    (void)state;
    rig_start(&rig, NULL);
    assert_int_equal(collector_start(rig.collector, &err), 0);
    int64_t start_ns = time_mono_ns();
    while (frames < FRAMES) {
        struct pollfd fd = {.fd = collector_fd(rig.collector), .events = POLLIN};
        poll(&fd, 1, 1000);
        collector_tick(rig.collector);
        collector_counts(rig.collector, &frames, &missed);
    }
    double elapsed_s = time_ns_to_s(time_mono_ns() - start_ns);
    /* One frame may come early, on the links' word; the others by the period, missed ones
     * counted. */
    double least_s = rig.plant->site.frame_s * (FRAMES - 1);
    assert_true(elapsed_s > least_s - 0.01);
    assert_true(elapsed_s < rig.plant->site.frame_s * (double)(frames + missed + 2) + 0.5);
    rig_stop(&rig);
}

static void test_a_plant_that_is_gone_makes_the_view_stale_and_the_journal_says_so(void **state)
{
    struct rig rig;
    struct error err = {0};
    bool told = false;
    (void)state;
    rig_start(&rig, NULL);
    assert_int_equal(collector_start(rig.collector, &err), 0);
    tick_until(&rig, is_ready, "a first frame");
    simulator_server_stop(rig.server);
    rig.server = NULL;
    tick_until(&rig, is_stale, "stale");
    tick_until(&rig, link_is_down, "link down");
    const struct view *view = collector_view(rig.collector);
    assert_true(view->stale_s >= 2); /* the points' stale time */
    for (int i = 0; i < rig.plant->point_count; i++)
        assert_int_not_equal(view->frame->sample[i].quality, QUALITY_GOOD);
    for (int i = 0; i < view->journal_count; i++)
        told |= view->journal[i].kind == JOURNAL_LINK &&
                strcmp(view->journal[i].state, "down") == 0;
    assert_true(told);
    int tag = plant_tag_find(rig.plant, "bench-room.oxygen_lowest");
    assert_false(
        quantity_usable(view->results->derived[tag - rig.plant->point_count].quantity));
    rig_stop(&rig);
}

static void test_an_acknowledgement_carries_its_user_and_the_banner_stays(void **state)
{
    struct rig rig;
    struct error err = {0};
    const struct command command = {
        .kind = COMMAND_ACKNOWLEDGE, .alarm = 0, .user = "operator"};
    (void)state;
    rig_start(&rig, "hall-release");
    assert_int_equal(collector_start(rig.collector, &err), 0);
    tick_until(&rig, has_unacknowledged, "an alarm");
    assert_int_equal(collector_command(rig.collector, &command, &err), 0);
    tick_until(&rig, has_none_unacknowledged, "acknowledged");
    const struct view *view = collector_view(rig.collector);
    assert_string_equal(alarm_state(view->alarms, 0)->user, "operator");
    /* Nothing silences a safety banner while its cause stands. */
    assert_true(view->results->banners.count > 0);
    assert_int_equal(view->results->banners.at[0].level, BANNER_DANGER);
    rig_stop(&rig);
}

static void test_too_many_commands_in_a_frame_are_refused_with_a_sentence(void **state)
{
    struct rig rig;
    struct error err = {0};
    const struct command command = {.kind = COMMAND_ACKNOWLEDGE, .alarm = 0};
    int taken = 0;
    (void)state;
    rig_start(&rig, NULL);
    while (collector_command(rig.collector, &command, &err) == 0)
        assert_true(++taken < 10000);
    assert_true(taken >= 16);
    assert_non_null(strstr(err.text, "commands"));
    rig_stop(&rig);
}

static void
test_another_plant_takes_over_and_an_unchanged_link_keeps_its_connection(void **state)
{
    struct rig rig;
    struct error err = {0};
    struct plant *next = NULL, *moved = NULL;
    (void)state;
    rig_start(&rig, NULL);
    assert_int_equal(collector_start(rig.collector, &err), 0);
    tick_until(&rig, is_ready, "a first frame");
    const struct view *view = collector_view(rig.collector);
    uint64_t requests = view->link[0].requests, total = view->journal_total;
    assert_true(requests > 0);
    int port = simulator_server_port(rig.server);
    assert_int_equal(plant_read("tests/data/e2e/dewar.ini", &next, &problems), 0);
    assert_int_equal(plant_redirect(next, "127.0.0.1", port), 0);
    assert_int_equal(collector_reload(rig.collector, next, &err), 0);
    plant_free(rig.plant); /* nothing may look at the old one any more */
    rig.plant = next;
    view = collector_view(rig.collector);
    assert_ptr_equal(view->plant, next);
    assert_int_equal(view->links_up, 1);
    assert_false(view->stale);
    /* Readings go over, so the first frame of the new plant is whole, with no gap. */
    for (int i = 0; i < next->point_count; i++)
        assert_int_equal(view->frame->sample[i].quality, QUALITY_GOOD);
    assert_true(view->link[0].requests >= requests);
    collector_note(rig.collector, JOURNAL_CONFIG, "plant file", "read again", "");
    assert_true(collector_view(rig.collector)->journal_total ==
                total + 1); /* no link went down */
    uint64_t frames, missed;
    collector_counts(rig.collector, &frames, &missed);
    for (uint64_t now = frames; now < frames + 5;
         collector_counts(rig.collector, &now, &missed)) {
        struct pollfd fd = {.fd = collector_fd(rig.collector), .events = POLLIN};
        poll(&fd, 1, 1000);
        collector_tick(rig.collector);
    }
    assert_int_equal(collector_view(rig.collector)->link[0].reconnects, 0);
    assert_true(collector_view(rig.collector)->link[0].requests > requests);
    /* The same link to another device begins anew: here one that is not there. */
    assert_int_equal(plant_read("tests/data/e2e/dewar.ini", &moved, &problems), 0);
    assert_int_equal(plant_redirect(moved, "127.0.0.1", 1), 0);
    assert_int_equal(collector_reload(rig.collector, moved, &err), 0);
    plant_free(rig.plant);
    rig.plant = moved;
    for (int i = 0; i < moved->point_count; i++)
        assert_int_equal(collector_view(rig.collector)->frame->sample[i].quality,
                         QUALITY_MISSING);
    tick_until(&rig, link_is_down, "link down");
    rig_stop(&rig);
}

static void test_signals_arrive_as_events(void **state)
{
    struct error err = {0};
    int fd = signals_open(&err);
    (void)state;
    assert_true(fd >= 0);
    assert_int_equal(signals_take(fd), 0);
    kill(getpid(), SIGTERM);
    struct pollfd wait = {.fd = fd, .events = POLLIN};
    assert_int_equal(poll(&wait, 1, 10000), 1);
    assert_int_equal(signals_take(fd), SIGTERM);
    assert_int_equal(signals_take(fd), 0);
    close(fd);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_first_frame_comes_on_the_links_word_and_is_whole),
        cmocka_unit_test(test_frames_keep_their_period_on_an_absolute_schedule),
        cmocka_unit_test(
            test_a_plant_that_is_gone_makes_the_view_stale_and_the_journal_says_so),
        cmocka_unit_test(test_an_acknowledgement_carries_its_user_and_the_banner_stays),
        cmocka_unit_test(test_too_many_commands_in_a_frame_are_refused_with_a_sentence),
        cmocka_unit_test(
            test_another_plant_takes_over_and_an_unchanged_link_keeps_its_connection),
        cmocka_unit_test(test_signals_arrive_as_events),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
