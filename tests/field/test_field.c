/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Live polling: samples with their age, exceptions, the schedule, what leaves on the wire,
 * names and addresses, and that closing never waits long. The meaning of exception codes:
 * MODBUS Application Protocol V1.1b3, 7.
 */
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <sys/resource.h>

#include <cmocka.h>

#include "fake.h"

/* What the log says, to be counted. */
static atomic_int lines_written, lines_of_up, lines_of_trouble;

static void count_lines(enum log_level level, const char *line, void *context)
{
    (void)context;
    atomic_fetch_add(&lines_written, 1);
    atomic_fetch_add(&lines_of_up, strstr(line, ": up") != NULL);
    atomic_fetch_add(&lines_of_trouble, level == LOG_LEVEL_WARNING);
}

struct bench {
    struct fake fake;
    struct rig rig;
};

static int bench_start(void **state)
{
    struct bench *bench = calloc(1, sizeof(*bench));
    if (bench == NULL || !fake_start(&bench->fake))
        return -1;
    rig_link(&bench->rig, "127.0.0.1", bench->fake.port);
    *state = bench;
    return 0;
}

static int bench_stop(void **state)
{
    struct bench *bench = *state;
    field_close(bench->rig.field);
    fake_stop(&bench->fake);
    free(bench);
    return 0;
}

static void bench_open(struct bench *bench)
{
    struct error err = {0};
    int code = rig_open(&bench->rig, &err);
    if (code != 0)
        fail_msg("%s", err.text);
}

static bool is_phase(const struct rig *rig, int phase)
{
    return rig->state[0].phase == (enum link_phase)phase;
}

static bool all_good(const struct rig *rig, int value)
{
    for (int i = 0; i < rig->plant.point_count; i++)
        if (rig->sample[i].quality != QUALITY_GOOD ||
            (value >= 0 && rig->sample[i].value != value))
            return false;
    return true;
}

static bool first_is(const struct rig *rig, int quality)
{
    return rig->sample[0].quality == (enum quality)quality;
}

static bool first_has_cause(const struct rig *rig, int cause)
{
    return rig->sample[0].cause == (enum cause)cause;
}

static bool has_exceptions(const struct rig *rig, int count)
{
    return rig->state[0].exceptions >= (uint64_t)count;
}

static bool has_answers(const struct rig *rig, int count)
{
    return rig->state[0].answers >= (uint64_t)count;
}

static bool settled(const struct rig *rig, int unused)
{
    (void)unused;
    return field_settled(rig->field);
}

/* ---- values --------------------------------------------------------------------------------
 */

static void test_all_tables_and_types_arrive_with_time_and_counts(void **state)
{
    struct bench *b = *state;
    /* 12.41f = 4146 8F5C (see test_decode) at 10, in the order CDAB at 20 */
    const struct {
        enum register_table table;
        int address;
        enum register_type type;
        enum byte_order order;
        double value;
    } at[] = {
        {TABLE_INPUT,    10,  REGISTER_F32, ORDER_ABCD, 13012828.0 / 1048576.0},
        {TABLE_HOLDING,  20,  REGISTER_F32, ORDER_CDAB, 13012828.0 / 1048576.0},
        {TABLE_INPUT,    30,  REGISTER_I16, ORDER_ABCD, -2                    },
        {TABLE_COIL,     31,  REGISTER_BIT, ORDER_ABCD, 1                     },
        {TABLE_DISCRETE, 32,  REGISTER_BIT, ORDER_ABCD, 0                     },
        {TABLE_HOLDING,  200, REGISTER_U16, ORDER_ABCD, 555                   },
    };
    for (size_t i = 0; i < ARRAY_LENGTH(at); i++)
        rig_point(&b->rig, 0)->read = (struct register_ref){.table = at[i].table,
                                                            .address = at[i].address,
                                                            .type = at[i].type,
                                                            .bit = -1,
                                                            .order = at[i].order};
    atomic_store(&b->fake.word[10], 0x4146);
    atomic_store(&b->fake.word[11], 0x8F5C);
    atomic_store(&b->fake.word[20], 0x8F5C);
    atomic_store(&b->fake.word[21], 0x4146);
    atomic_store(&b->fake.word[30], 0xFFFE);
    atomic_store(&b->fake.word[31], 1);
    atomic_store(&b->fake.word[200], 555);
    int64_t before = time_utc_ns();
    bench_open(b);
    assert_true(rig_wait(&b->rig, has_answers, 50));
    for (size_t i = 0; i < ARRAY_LENGTH(at); i++) {
        const struct sample *s = &b->rig.sample[i];
        assert_int_equal(s->quality, QUALITY_GOOD);
        assert_true(s->value == at[i].value);
        assert_true(s->read_utc_ns >= before && s->read_utc_ns <= b->rig.frame.utc_ns);
        assert_true(frame_age_s(&b->rig.frame, (int)i) < 5);
    }
    const struct link_state *link = &b->rig.state[0];
    assert_int_equal(link->phase, LINK_UP);
    assert_true(link->since_utc_ns >= before && link->since_utc_ns <= b->rig.frame.utc_ns);
    assert_true(link->requests >= link->answers && link->answers > 0);
    assert_true(link->exceptions == 0 && link->timeouts == 0 && link->reconnects == 0);
    assert_true(link->latency_s > 0 && link->latency_s <= link->latency_worst_s);
    /* five requests a turn; answers by the protocol: 9 bytes and 4, 4, 2, 1, 1, 2 of data */
    assert_true(link->bytes_sent == link->requests * 12);
    assert_true(link->bytes_received > link->answers * 9);
    assert_true(b->rig.state[0].trouble[0] == '\0');
}

static void test_readings_age_to_stale_and_keep_their_value_when_the_link_is_lost(void **state)
{
    struct bench *b = *state;
    rig_point(&b->rig, 1)->stale_s = 0.6;
    rig_point(&b->rig, 2)->stale_s = 0.6;
    atomic_store(&b->fake.word[1], 42);
    atomic_store(&b->fake.word[2], 42);
    b->rig.point[1].has_valid = true; /* bad: 42 is outside 0..1 */
    b->rig.point[1].valid_high = 1;
    bench_open(b);
    assert_true(rig_wait(&b->rig, first_is, QUALITY_GOOD));
    fake_stop(&b->fake);
    assert_true(rig_wait(&b->rig, is_phase, LINK_DOWN));
    /* lost, but not yet old */
    if (frame_age_s(&b->rig.frame, 0) < 0.5)
        assert_int_equal(b->rig.sample[0].quality, QUALITY_GOOD);
    assert_true(rig_wait(&b->rig, first_is, QUALITY_STALE));
    assert_true(frame_age_s(&b->rig.frame, 0) >= 0.6);
    assert_true(b->rig.sample[0].value == 42);
    assert_int_equal(b->rig.sample[0].cause, CAUSE_TOO_OLD);
    assert_int_equal(b->rig.sample[1].quality, QUALITY_BAD); /* bad never becomes better */
    assert_true(b->rig.sample[1].value == 0);
    atomic_store(&b->fake.word[1], 43);
    assert_true(fake_start(&b->fake));
    assert_true(rig_wait(&b->rig, first_is, QUALITY_GOOD));
    assert_true(b->rig.sample[0].value == 43);
}

static void test_step_of_the_wall_clock_makes_no_reading_old_or_new(void **state)
{
    struct bench *b = *state;
    rig_point(&b->rig, 1)->stale_s = 5;
    bench_open(b);
    assert_true(rig_wait(&b->rig, first_is, QUALITY_GOOD));
    const int64_t hour = 3600 * NS_PER_S;
    for (int step = -1; step <= 1; step++) {
        int64_t utc = time_utc_ns() + step * hour;
        field_fill(b->rig.field, utc, &b->rig.frame, NULL);
        assert_int_equal(b->rig.sample[0].quality, QUALITY_GOOD);
        assert_true(frame_age_s(&b->rig.frame, 0) < 4);
        assert_true(b->rig.sample[0].read_utc_ns <= utc);
    }
}

static void test_device_that_is_not_there_settles_and_stays_missing(void **state)
{
    struct bench *b = *state;
    rig_point(&b->rig, 1);
    fake_stop(&b->fake);
    bench_open(b);
    assert_true(rig_wait(&b->rig, settled, 0));
    rig_fill(&b->rig);
    assert_int_equal(b->rig.sample[0].quality, QUALITY_MISSING);
    assert_int_equal(b->rig.sample[0].cause, CAUSE_NEVER_READ);
    assert_true(b->rig.sample[0].read_utc_ns == 0);
    assert_int_equal(b->rig.state[0].phase, LINK_DOWN);
    assert_true(fake_start(&b->fake));
}

/* ---- exceptions ----------------------------------------------------------------------------
 */

static bool only_twelve_and_thirteen_refused(const struct rig *rig, int count)
{
    for (int i = 0; i < count; i++) {
        bool refused = i == 12 || i == 13;
        if (rig->sample[i].quality != (refused ? QUALITY_BAD : QUALITY_GOOD) ||
            rig->sample[i].cause != (refused ? CAUSE_EXCEPTION : CAUSE_NONE))
            return false;
    }
    return true;
}

static void test_illegal_registers_cost_only_their_own_points(void **state)
{
    struct bench *b = *state;
    for (int i = 0; i < 50; i++)
        rig_point(&b->rig, i);
    atomic_store(&b->fake.illegal, 12);
    atomic_store(&b->fake.illegal_count, 2);
    bench_open(b);
    assert_true(rig_wait(&b->rig, only_twelve_and_thirteen_refused, 50));
    assert_int_equal(b->rig.state[0].phase, LINK_UP);
    /* once found, the refused ones are left alone: the same few requests each turn */
    uint64_t exceptions = b->rig.state[0].exceptions;
    assert_true(exceptions < 20);
    assert_true(rig_wait(&b->rig, has_answers, (int)b->rig.state[0].answers + 60));
    assert_true(b->rig.state[0].exceptions <= exceptions + 2);
    assert_int_equal(b->rig.sample[12].cause, CAUSE_EXCEPTION);
    assert_true(b->rig.sample[12].value == 0);
    assert_true(b->rig.sample[12].read_utc_ns == 0);
    /* asked for again after 5 s; then all is read with one request again */
    atomic_store(&b->fake.illegal_count, 0);
    assert_true(rig_wait(&b->rig, all_good, 0));
    uint64_t requests = b->rig.state[0].requests;
    pthread_mutex_lock(&b->fake.lock);
    int logged = b->fake.logged;
    pthread_mutex_unlock(&b->fake.lock);
    assert_true(rig_wait(&b->rig, has_answers, (int)requests + 4));
    pthread_mutex_lock(&b->fake.lock);
    assert_int_equal(b->fake.log[logged + 3][11], 50);
    pthread_mutex_unlock(&b->fake.lock);
}

static void test_registers_that_may_not_be_read_over_lose_nothing(void **state)
{
    struct bench *b = *state;
    rig_point(&b->rig, 0);
    rig_point(&b->rig, 5); /* 1..4 are read over, and refused */
    atomic_store(&b->fake.illegal, 2);
    atomic_store(&b->fake.illegal_count, 1);
    bench_open(b);
    assert_true(rig_wait(&b->rig, all_good, 0));
    assert_true(b->rig.state[0].exceptions == 1);
}

static void test_block_larger_than_the_device_takes_is_cut(void **state)
{
    struct bench *b = *state;
    for (int i = 0; i < 60; i++)
        rig_point(&b->rig, i);
    atomic_store(&b->fake.largest, 16);
    bench_open(b);
    assert_true(rig_wait(&b->rig, all_good, 0));
}

static void test_busy_keeps_the_last_value_while_it_ages(void **state)
{
    struct bench *b = *state;
    rig_point(&b->rig, 1)->stale_s = 0.6;
    atomic_store(&b->fake.word[1], 9);
    bench_open(b);
    assert_true(rig_wait(&b->rig, first_is, QUALITY_GOOD));
    for (int code = 5; code <= 6; code++) {
        atomic_store(&b->fake.exception, code);
        assert_true(rig_wait(&b->rig, has_exceptions, (int)b->rig.state[0].exceptions + 2));
        if (frame_age_s(&b->rig.frame, 0) < 0.5)
            assert_int_equal(b->rig.sample[0].quality, QUALITY_GOOD);
        assert_true(rig_wait(&b->rig, first_is, QUALITY_STALE));
        assert_true(b->rig.sample[0].value == 9);
        assert_int_equal(b->rig.sample[0].cause, CAUSE_DEVICE_BUSY);
        assert_int_equal(b->rig.state[0].phase, LINK_UP);
        atomic_store(&b->fake.exception, 0);
        assert_true(rig_wait(&b->rig, first_is, QUALITY_GOOD));
    }
}

static void test_gateway_without_its_device_is_a_live_link_with_bad_points(void **state)
{
    struct bench *b = *state;
    rig_point(&b->rig, 1);
    rig_point(&b->rig, 100);
    bench_open(b);
    assert_true(rig_wait(&b->rig, all_good, 0));
    for (int code = 10; code <= 11; code++) {
        atomic_store(&b->fake.exception, code);
        assert_true(rig_wait(&b->rig, first_has_cause, CAUSE_GATEWAY));
        assert_int_equal(b->rig.sample[0].quality, QUALITY_BAD);
        assert_int_equal(b->rig.state[0].phase, LINK_UP);
        atomic_store(&b->fake.exception, 0);
        assert_true(rig_wait(&b->rig, all_good, 0));
    }
}

static void test_device_failure_is_told_as_such(void **state)
{
    struct bench *b = *state;
    rig_point(&b->rig, 1);
    bench_open(b);
    assert_true(rig_wait(&b->rig, all_good, 0));
    atomic_store(&b->fake.exception, 4);
    assert_true(rig_wait(&b->rig, first_has_cause, CAUSE_DEVICE_FAILURE));
    assert_int_equal(b->rig.sample[0].quality, QUALITY_BAD);
}

static void test_fault_bit_that_cannot_be_read_leaves_doubt(void **state)
{
    struct bench *b = *state;
    struct point *point = rig_point(&b->rig, 1);
    point->has_fault = true;
    point->fault = (struct register_ref){
        .table = TABLE_DISCRETE, .address = 12, .type = REGISTER_BIT, .bit = -1};
    rig_point(&b->rig, 3);
    bench_open(b);
    assert_true(rig_wait(&b->rig, all_good, 0));
    atomic_store(&b->fake.word[12], 1);
    assert_true(rig_wait(&b->rig, first_has_cause, CAUSE_FAULT_BIT));
    assert_int_equal(b->rig.sample[0].quality, QUALITY_BAD);
    assert_int_equal(b->rig.sample[1].quality, QUALITY_GOOD);
    atomic_store(&b->fake.word[12], 0);
    assert_true(rig_wait(&b->rig, all_good, 0));
    atomic_store(&b->fake.illegal, 12);
    atomic_store(&b->fake.illegal_count, 1);
    assert_true(rig_wait(&b->rig, first_has_cause, CAUSE_FAULT_UNKNOWN));
    assert_int_equal(b->rig.sample[0].quality, QUALITY_UNCERTAIN);
}

/* ---- schedule and log ----------------------------------------------------------------------
 */

static void test_polls_keep_an_absolute_schedule(void **state)
{
    struct bench *b = *state;
    rig_point(&b->rig, 1);
    b->rig.link[0].period_s = 0.02;
    bench_open(b);
    assert_true(rig_wait(&b->rig, has_answers, 1));
    uint64_t before = b->rig.state[0].answers + b->rig.state[0].late;
    int64_t start = time_mono_ns();
    assert_true(rig_wait(&b->rig, has_answers, 60));
    double took_s = time_ns_to_s(time_mono_ns() - start);
    uint64_t polls = b->rig.state[0].answers + b->rig.state[0].late - before;
    /* polls done and polls left out add up to the time, whatever each took: no drift */
    assert_true(fabs((double)polls - took_s / 0.02) <= 4);
    assert_true(b->rig.state[0].jitter_s >= 0);
}

static void test_link_that_stays_down_writes_one_line_and_up_another(void **state)
{
    struct bench *b = *state;
    rig_point(&b->rig, 1);
    atomic_store(&b->fake.mode, FAKE_SILENT);
    int up = atomic_load(&lines_of_up), trouble = atomic_load(&lines_of_trouble);
    bench_open(b);
    assert_true(rig_wait(&b->rig, is_phase, LINK_DOWN));
    int tries = atomic_load(&b->fake.connections);
    while (atomic_load(&b->fake.connections) < tries + 1) {
        assert_true(rig_wait(&b->rig, is_phase, LINK_DOWN));
        struct pollfd wait = {.fd = field_wake_fd(b->rig.field), .events = POLLIN};
        assert_int_equal(poll(&wait, 1, 10000), 1);
    }
    assert_int_equal(atomic_load(&lines_of_trouble), trouble + 1);
    assert_int_equal(atomic_load(&lines_of_up), up);
    atomic_store(&b->fake.mode, FAKE_GOOD);
    assert_true(rig_wait(&b->rig, is_phase, LINK_UP));
    assert_true(rig_wait(&b->rig, has_answers, 3));
    assert_int_equal(atomic_load(&lines_of_up), up + 1);
    assert_int_equal(atomic_load(&lines_of_trouble), trouble + 1);
}

/* ---- the wire ------------------------------------------------------------------------------
 */

static void test_nothing_but_reads_leaves(void **state)
{
    struct bench *b = *state;
    bool seen[5] = {false};
    b->rig.link[0].unit_id = 17;
    for (int table = 0; table < TABLE_COUNT; table++) {
        struct point *point = rig_point(&b->rig, 7);
        point->read.table = (enum register_table)table;
        if (table == TABLE_COIL || table == TABLE_DISCRETE)
            point->read.type = REGISTER_BIT;
    }
    bench_open(b);
    assert_true(rig_wait(&b->rig, has_answers, 100));
    /* some trouble, so that recovery is seen too */
    atomic_store(&b->fake.mode, FAKE_GARBAGE);
    assert_true(rig_wait(&b->rig, is_phase, LINK_DOWN));
    atomic_store(&b->fake.mode, FAKE_GOOD);
    atomic_store(&b->fake.exception, 1);
    assert_true(rig_wait(&b->rig, first_has_cause, CAUSE_EXCEPTION));
    pthread_mutex_lock(&b->fake.lock);
    assert_true(b->fake.logged > 100);
    for (int i = 0; i < b->fake.logged; i++) {
        const uint8_t *request = b->fake.log[i];
        /* protocol 0, 6 bytes to follow, the unit, function codes 1 to 4 */
        assert_memory_equal(request + 2, "\0\0\0\6\21", 5);
        assert_in_range(request[7], 1, 4);
        seen[request[7]] = true;
    }
    pthread_mutex_unlock(&b->fake.lock);
    for (int code = 1; code <= 4; code++)
        assert_true(seen[code]);
}

static void test_device_is_found_by_name(void **state)
{
    struct bench *b = *state;
    rig_point(&b->rig, 1);
    b->rig.link[0].host = "localhost";
    b->rig.link[0].timeout_s = 2;
    bench_open(b);
    assert_true(rig_wait(&b->rig, all_good, 0));
}

static void test_device_is_found_by_ipv6(void **state)
{
    struct bench *b = *state;
    static struct fake six;
    memset(&six, 0, sizeof(six));
    six.family = AF_INET6;
    if (!fake_start(&six)) {
        print_message("no IPv6 on this machine\n");
        skip();
    }
    rig_point(&b->rig, 1);
    b->rig.link[0].host = "::1";
    b->rig.link[0].port = six.port;
    atomic_store(&six.word[1], 66);
    bench_open(b);
    bool good = rig_wait(&b->rig, all_good, 66);
    field_close(b->rig.field);
    b->rig.field = NULL;
    fake_stop(&six);
    assert_true(good);
}

/* ".invalid" never resolves: RFC 6761, 6.4. */
static void test_name_without_address_is_told_and_delays_no_close(void **state)
{
    struct bench *b = *state;
    rig_point(&b->rig, 1);
    b->rig.link[0].host = "cold-end.invalid";
    bench_open(b);
    struct pollfd wait = {.fd = field_wake_fd(b->rig.field), .events = POLLIN};
    if (poll(&wait, 1, 1000) == 1) { /* where the resolver answers at all */
        rig_fill(&b->rig);
        assert_int_equal(b->rig.state[0].phase, LINK_DOWN);
        assert_non_null(strstr(b->rig.state[0].trouble, "cold-end.invalid"));
    }
    int64_t start = time_mono_ns();
    field_close(b->rig.field);
    b->rig.field = NULL;
    assert_true(time_ns_to_s(time_mono_ns() - start) < 1);
}

/* ---- closing -------------------------------------------------------------------------------
 */

static double close_s(struct bench *b)
{
    int64_t start = time_mono_ns();
    field_close(b->rig.field);
    b->rig.field = NULL;
    return time_ns_to_s(time_mono_ns() - start);
}

static void test_close_waits_no_longer_than_a_timeout_for_a_silent_device(void **state)
{
    struct bench *b = *state;
    rig_point(&b->rig, 1);
    b->rig.link[0].timeout_s = 0.7;
    atomic_store(&b->fake.mode, FAKE_SILENT);
    bench_open(b);
    int64_t deadline = time_mono_ns() + 10 * NS_PER_S;
    for (;;) { /* until a request is under way */
        pthread_mutex_lock(&b->fake.lock);
        int logged = b->fake.logged;
        pthread_mutex_unlock(&b->fake.lock);
        if (logged > 0)
            break;
        assert_true(time_mono_ns() < deadline);
        poll(NULL, 0, 1);
    }
    assert_true(close_s(b) < 0.7 + 0.5);
}

static void test_close_is_prompt_between_polls_and_between_tries(void **state)
{
    struct bench *b = *state;
    rig_point(&b->rig, 1);
    b->rig.link[0].period_s = 3600;
    bench_open(b);
    assert_true(rig_wait(&b->rig, is_phase, LINK_UP));
    assert_true(close_s(b) < 0.5);
}

/* A listener whose queue is full leaves a connect hanging. */
static void test_close_is_prompt_while_a_connection_hangs(void **state)
{
    struct bench *b = *state;
    int port = 0;
    int full = fake_listen(AF_INET, 0, 0, &port), fill[4];
    assert_true(full >= 0);
    struct sockaddr_in to = {.sin_family = AF_INET,
                             .sin_port = htons((uint16_t)port),
                             .sin_addr.s_addr = htonl(INADDR_LOOPBACK)};
    for (size_t i = 0; i < ARRAY_LENGTH(fill); i++) {
        fill[i] = socket(AF_INET, SOCK_STREAM | SOCK_NONBLOCK, 0);
        if (connect(fill[i], (struct sockaddr *)&to, sizeof(to)) != 0)
            poll(NULL, 0, 10);
    }
    rig_point(&b->rig, 1);
    b->rig.link[0].port = port;
    b->rig.link[0].timeout_s = 30;
    bench_open(b);
    struct pollfd wait = {.fd = field_wake_fd(b->rig.field), .events = POLLIN};
    assert_int_equal(poll(&wait, 1, 200), 0); /* it hangs */
    assert_true(close_s(b) < 1);
    for (size_t i = 0; i < ARRAY_LENGTH(fill); i++)
        close(fill[i]);
    close(full);
}

static void test_field_without_links_or_points_is_a_field(void **state)
{
    struct bench *b = *state;
    bench_open(b); /* a link without points */
    assert_true(rig_wait(&b->rig, is_phase, LINK_UP));
    static struct rig none;
    struct error err = {0};
    assert_int_equal(rig_open(&none, &err), 0);
    assert_true(field_settled(none.field));
    rig_fill(&none);
    field_close(none.field);
    field_close(NULL);
}

static void test_unit_and_timeout_that_cannot_be_are_told_with_the_link(void **state)
{
    struct bench *b = *state;
    struct error err = {0};
    rig_point(&b->rig, 1);
    b->rig.link[0].unit_id = 250;
    assert_int_equal(rig_open(&b->rig, &err), ERR_ARGUMENT);
    assert_non_null(strstr(err.text, "device-0"));
    assert_non_null(strstr(err.text, "250"));
    b->rig.link[0].unit_id = 1;
    b->rig.link[0].timeout_s = 0;
    assert_int_equal(rig_open(&b->rig, &err), ERR_ARGUMENT);
    b->rig.field = NULL;
}

/* ---- inspect -------------------------------------------------------------------------------
 */

static void test_inspect_reads_once_and_long_reads_whole(void **state)
{
    struct bench *b = *state;
    struct error err = {0};
    enum { WORDS = 300 };
    uint16_t words[WORDS];
    const struct register_ref ref = {.table = TABLE_HOLDING, .type = REGISTER_F64, .bit = -1};
    for (int i = 0; i < WORDS; i++)
        atomic_store(&b->fake.word[i], (uint16_t)(i * 7));
    assert_int_equal(field_inspect("127.0.0.1", b->fake.port, 1, &ref, WORDS, 1, words, &err),
                     0);
    for (int i = 0; i < WORDS; i++)
        assert_int_equal(words[i], i * 7);
    pthread_mutex_lock(&b->fake.lock);
    assert_int_equal(b->fake.logged, 3); /* 300 registers, 125 at most in one request */
    for (int i = 0; i < b->fake.logged; i++) {
        assert_int_equal(b->fake.log[i][7], 3);
        assert_int_equal((b->fake.log[i][8] << 8 | b->fake.log[i][9]) % 4, 0);
    }
    pthread_mutex_unlock(&b->fake.lock);
}

static void test_inspect_tells_what_is_wrong_and_the_mend(void **state)
{
    struct bench *b = *state;
    struct error err = {0};
    uint16_t word;
    const struct register_ref ref = {.table = TABLE_INPUT, .type = REGISTER_U16, .bit = -1};
    const char *host = "127.0.0.1";
    int port = b->fake.port;
    atomic_store(&b->fake.exception, 2);
    assert_int_equal(field_inspect(host, port, 1, &ref, 1, 1, &word, &err), ERR_DEVICE);
    assert_non_null(strstr(err.text, "02, illegal address"));
    assert_non_null(strstr(err.text, "count from 0"));
    atomic_store(&b->fake.exception, 11);
    assert_int_equal(field_inspect(host, port, 1, &ref, 1, 1, &word, &err), ERR_DEVICE);
    assert_non_null(strstr(err.text, "--unit"));
    atomic_store(&b->fake.exception, 0);
    atomic_store(&b->fake.mode, FAKE_SILENT);
    assert_int_equal(field_inspect(host, port, 1, &ref, 1, 0.05, &word, &err), ERR_DEVICE);
    assert_non_null(strstr(err.text, "no answer in 50 ms"));
    assert_int_equal(field_inspect(host, port, 1, &ref, 0, 1, &word, &err), ERR_ARGUMENT);
}

/* One byte of the header replaced by anything: the answer is refused, but where that byte is by
 * chance the right one (1 in 256). */
static void test_no_wrong_header_brings_wrong_data(void **state)
{
    struct bench *b = *state;
    const struct register_ref ref = {.table = TABLE_HOLDING, .type = REGISTER_U16, .bit = -1};
    int taken = 0, refused = 0;
    b->fake.seed = 20261201;
    print_message("seed %u\n", b->fake.seed);
    for (int i = 0; i < 8; i++)
        atomic_store(&b->fake.word[i], (uint16_t)(0x1111 * (i + 1)));
    atomic_store(&b->fake.mode, FAKE_MUTATED);
    for (int run = 0; run < 300; run++) {
        struct error err = {0};
        uint16_t words[8] = {0};
        int code = field_inspect("127.0.0.1", b->fake.port, 1, &ref, 8, 0.01, words, &err);
        refused += code != 0;
        if (code != 0) {
            assert_true(err.code == code && err.text[0] != '\0');
            continue;
        }
        taken++;
        for (int i = 0; i < 8; i++)
            assert_int_equal(words[i], 0x1111 * (i + 1));
    }
    assert_true(taken <= 6 && refused >= 294);
}

/* libmodbus waits with select, whose sets end at FD_SETSIZE. */
static void test_descriptor_beyond_what_select_takes_is_refused_with_the_reason(void **state)
{
    struct bench *b = *state;
    struct error err = {0};
    struct rlimit limit;
    uint16_t word;
    static int taken[1100];
    int count = 0;
    getrlimit(RLIMIT_NOFILE, &limit);
    if (limit.rlim_max < 2048) {
        print_message("this machine allows %lu open files only\n",
                      (unsigned long)limit.rlim_max);
        skip();
    }
    limit.rlim_cur = 2048;
    assert_int_equal(setrlimit(RLIMIT_NOFILE, &limit), 0);
    while (count < (int)ARRAY_LENGTH(taken)) {
        taken[count] = dup(b->fake.stop_fd);
        if (taken[count++] >= FD_SETSIZE)
            break;
    }
    const struct register_ref ref = {.table = TABLE_INPUT, .type = REGISTER_U16, .bit = -1};
    int code = field_inspect("127.0.0.1", b->fake.port, 1, &ref, 1, 1, &word, &err);
    while (count > 0)
        close(taken[--count]);
    assert_int_equal(code, ERR_NETWORK);
    assert_non_null(strstr(err.text, "too many open files"));
}

#define LIVE(test) cmocka_unit_test_setup_teardown(test, bench_start, bench_stop)

int main(void)
{
    const struct CMUnitTest tests[] = {
        LIVE(test_all_tables_and_types_arrive_with_time_and_counts),
        LIVE(test_readings_age_to_stale_and_keep_their_value_when_the_link_is_lost),
        LIVE(test_step_of_the_wall_clock_makes_no_reading_old_or_new),
        LIVE(test_device_that_is_not_there_settles_and_stays_missing),
        LIVE(test_illegal_registers_cost_only_their_own_points),
        LIVE(test_registers_that_may_not_be_read_over_lose_nothing),
        LIVE(test_block_larger_than_the_device_takes_is_cut),
        LIVE(test_busy_keeps_the_last_value_while_it_ages),
        LIVE(test_gateway_without_its_device_is_a_live_link_with_bad_points),
        LIVE(test_device_failure_is_told_as_such),
        LIVE(test_fault_bit_that_cannot_be_read_leaves_doubt),
        LIVE(test_polls_keep_an_absolute_schedule),
        LIVE(test_link_that_stays_down_writes_one_line_and_up_another),
        LIVE(test_nothing_but_reads_leaves),
        LIVE(test_device_is_found_by_name),
        LIVE(test_device_is_found_by_ipv6),
        LIVE(test_name_without_address_is_told_and_delays_no_close),
        LIVE(test_close_waits_no_longer_than_a_timeout_for_a_silent_device),
        LIVE(test_close_is_prompt_between_polls_and_between_tries),
        LIVE(test_close_is_prompt_while_a_connection_hangs),
        LIVE(test_field_without_links_or_points_is_a_field),
        LIVE(test_unit_and_timeout_that_cannot_be_are_told_with_the_link),
        LIVE(test_inspect_reads_once_and_long_reads_whole),
        LIVE(test_inspect_tells_what_is_wrong_and_the_mend),
        LIVE(test_no_wrong_header_brings_wrong_data),
        LIVE(test_descriptor_beyond_what_select_takes_is_refused_with_the_reason),
    };
    log_set_sink(count_lines, NULL);
    return cmocka_run_group_tests(tests, NULL, NULL);
}
