/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The thread of a link: polls on an absolute schedule, reconnects after trouble, and hands over
 * what it knows. It waits for nothing but its device, its clock and the stop; a dead device
 * delays nobody else.
 *
 *   CONNECTING --turn done--> UP --trouble--> DOWN --turn done--> UP
 *        `------trouble------------------------^
 *
 * Any trouble closes the connection. A link is up only after a whole turn, so that a device
 * that accepts and then is silent is never called up.
 */
#include "internal.h"

#include <stdio.h>
#include <string.h>
#include <sys/eventfd.h>

/* Retries: 0.5 s doubling to 12 s, each times 0.75 to 1.25, so that many links to one dead
 * switch do not knock in step; at most 15 s. Any answer sets them back. */
static const double retry_first_s = 0.5, retry_longest_s = 12;
/* A link that stays down is told of at once, then this often. */
static const double remind_s = 300;
/* A link that comes and goes writes at most so many lines in that time; the rest is counted. */
enum { LINES_PER_WINDOW = 6 };
/* The mean lateness is over about this many polls. */
enum { JITTER_POLLS = 16 };
/* All of these: common practice, no source. */

const char *link_phase_word(enum link_phase phase)
{
    static const char *const words[] = {
        [LINK_CONNECTING] = "connecting", [LINK_UP] = "up", [LINK_DOWN] = "down"};
    return phase < ARRAY_LENGTH(words) ? words[phase] : "unknown";
}

/* xorshift64 (Marsaglia, J. Stat. Softw. 8(14), 2003) in 0..1; only spreads retries. */
static double random_part(struct worker *worker)
{
    uint64_t x = worker->random;
    x ^= x << 13;
    x ^= x >> 7;
    x ^= x << 17;
    worker->random = x;
    return (double)(x >> 11) * 0x1p-53;
}

static void hand_over(struct worker *worker)
{
    struct slot *slot = &worker->slot;
    worker->settled = true;
    pthread_mutex_lock(&slot->lock);
    slot->settled = worker->settled;
    slot->state = worker->state;
    slot->times = worker->times;
    memcpy(slot->reading, worker->reading,
           (size_t)worker->point_count * sizeof(*worker->reading));
    pthread_mutex_unlock(&slot->lock);
    eventfd_write(worker->wake_fd, 1);
}

/* Whether another line may be written; *held is what was kept back before it. */
static bool may_tell(struct log_gate *gate, unsigned *held)
{
    int64_t now = time_mono_ns();
    *held = 0;
    if (gate->lines == 0 || now - gate->window_mono_ns > time_s_to_ns(remind_s)) {
        gate->window_mono_ns = now;
        gate->lines = 0;
    }
    if (gate->lines >= LINES_PER_WINDOW) {
        gate->held++;
        return false;
    }
    gate->lines++;
    *held = gate->held;
    gate->held = 0;
    return true;
}

static const char *held_text(char *text, size_t size, unsigned held)
{
    text[0] = '\0';
    if (held > 0)
        text_format(text, size, " (and %u lines like it held back)", held);
    return text;
}

static void go_up(struct worker *worker)
{
    worker->state.trouble[0] = '\0';
    worker->times.retry_mono_ns = 0;
    if (worker->state.phase == LINK_UP)
        return;
    int64_t now = time_mono_ns();
    bool first = worker->state.phase == LINK_CONNECTING;
    char after[64] = "", span[32], more[64];
    if (!first) {
        time_format_span(span, sizeof(span), time_ns_to_s(now - worker->times.since_mono_ns));
        text_format(after, sizeof(after), " again after %s", span);
    }
    worker->state.phase = LINK_UP;
    worker->times.since_mono_ns = now;
    unsigned held;
    if (may_tell(&worker->gate, &held))
        log_notice("link %s: up%s%s", worker->link->name, after,
                   held_text(more, sizeof(more), held));
}

static void go_down(struct worker *worker, const struct error *err, double retry_s)
{
    int64_t now = time_mono_ns();
    const char *name = worker->link->name;
    char more[64];
    unsigned held;
    text_printable(worker->state.trouble, sizeof(worker->state.trouble), err->text);
    worker->times.retry_mono_ns = now + time_s_to_ns(retry_s);
    if (worker->state.phase != LINK_DOWN) {
        worker->state.phase = LINK_DOWN;
        worker->times.since_mono_ns = now;
        worker->remind_mono_ns = now + time_s_to_ns(remind_s);
        worker->tries = 0;
        if (may_tell(&worker->gate, &held))
            log_warning("link %s: %s, retry in %.1f s%s", name, worker->state.trouble, retry_s,
                        held_text(more, sizeof(more), held));
    } else if (++worker->tries > 0 && now >= worker->remind_mono_ns) {
        char span[32];
        time_format_span(span, sizeof(span), time_ns_to_s(now - worker->times.since_mono_ns));
        worker->remind_mono_ns = now + time_s_to_ns(remind_s);
        log_warning("link %s: still down after %s and %u tries: %s", name, span, worker->tries,
                    worker->state.trouble);
    }
}

/* Lateness of a poll that was due at a time of the schedule. */
static void count_lateness(struct worker *worker, int64_t due_mono_ns)
{
    double late_s = time_ns_to_s(time_mono_ns() - due_mono_ns);
    worker->state.jitter_s += (late_s - worker->state.jitter_s) / JITTER_POLLS;
}

/* The first time of the schedule in the future. Times are start + phase + k period, whatever
 * happened before, so that lateness does not add up; the phases of the links are spread over a
 * period. */
static int64_t next_due(struct worker *worker, int64_t start, int64_t due, bool scheduled)
{
    int64_t period = time_s_to_ns(worker->link->period_s);
    if (period < 1000)
        period = 1000; /* back to back, and no division by nothing */
    int64_t base = start + period / worker->plant->link_count * worker->index;
    int64_t now = time_mono_ns();
    int64_t next = now < base ? base : base + ((now - base) / period + 1) * period;
    if (scheduled && next - due > period)
        worker->state.late += (uint64_t)((next - due) / period - 1);
    return next;
}

static int turn(struct worker *worker, bool scheduled, int64_t due, struct error *err)
{
    bool partial = worker->answered; /* the turn before this one */
    worker->answered = false;
    if (!device_connected(&worker->device)) {
        int code = device_connect(&worker->device, worker->stop_fd, err);
        if (code != 0)
            return code;
        worker->proved = false;
        if (worker->connected_before) {
            worker->state.reconnects++;
            /* After an absence it may be another device, or have other registers. */
            if (!partial)
                poll_plan(worker);
        }
        worker->connected_before = true;
    }
    if (scheduled)
        count_lateness(worker, due);
    return poll_turn(worker, err);
}

void *link_run(void *context)
{
    struct worker *worker = context;
    int64_t start = time_mono_ns(), due = start;
    double retry_s = retry_first_s;
    bool scheduled = false;
    while (!wait_stopped(worker->stop_fd, due)) {
        struct error err = {0};
        int code = turn(worker, scheduled, due, &err);
        if (code == POLL_STOPPED)
            break;
        if (code == 0 || worker->answered)
            retry_s = retry_first_s;
        if (code == 0) {
            go_up(worker);
            due = next_due(worker, start, due, scheduled);
            scheduled = true;
        } else {
            double wait_s = retry_s * (0.75 + 0.5 * random_part(worker));
            device_close(&worker->device);
            go_down(worker, &err, wait_s);
            due = time_mono_ns() + time_s_to_ns(wait_s);
            scheduled = false;
            retry_s = retry_s * 2 < retry_longest_s ? retry_s * 2 : retry_longest_s;
        }
        hand_over(worker);
    }
    if (!atomic_load(worker->keeping))
        device_close(&worker->device);
    return NULL;
}
