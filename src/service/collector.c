/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The collector loop: one frame per tick. What must stay true:
 *
 * 1. Ticks are absolute on the monotonic clock, so lateness does not add up; a tick that was
 *    missed is counted, never made up for by two frames at once.
 * 2. A frame's time is the UTC clock then, cut to a millisecond, so that it is the same number
 *    wherever it is written.
 * 3. The first frame is made as soon as every link has answered or failed once; until then the
 *    view is not ready.
 * 4. The view is stale when not one point has a reading young enough: then nothing on the
 * screen is live, and it says so.
 */
#include "ullage/service.h"

#include <errno.h>
#include <stdlib.h>
#include <string.h>
#include <sys/epoll.h>
#include <sys/timerfd.h>
#include <unistd.h>

#define NS_PER_MS INT64_C(1000000)

enum { COMMAND_MAX = 64 };

/* What a plant needs of its own: replaced as a whole when the plant is. */
struct making {
    struct arena *arena;
    struct engine *engine;
    struct frame frame;
    struct link_state *link;
    enum link_phase *link_before;
};

struct collector {
    const struct plant *plant;
    struct making made;
    struct field *field;
    int epoll_fd, timer_fd;
    bool first_wanted; /* the first frame is made on the links' word, not the timer's */
    uint64_t frames, missed;
    int command_count;
    struct command command[COMMAND_MAX];
    struct journal_entry *journal;
    struct view view;
};

/* Memory for the journal's tail: twice the length, so that dropping the oldest moves it rarely.
 */
enum { JOURNAL_ROOM = 2 * VIEW_JOURNAL_MAX };

static void journal_keep(struct collector *collector, const struct journal_entry *entry)
{
    struct view *view = &collector->view;
    view->journal_total++;
    const struct journal_entry *end = collector->journal + JOURNAL_ROOM;
    if (view->journal + view->journal_count == end) {
        int kept = VIEW_JOURNAL_MAX - 1;
        memmove(collector->journal, end - kept, (size_t)kept * sizeof(*entry));
        view->journal = collector->journal;
        view->journal_count = kept;
    }
    collector->journal[(view->journal - collector->journal) + view->journal_count++] = *entry;
    if (view->journal_count > VIEW_JOURNAL_MAX) {
        view->journal++;
        view->journal_count--;
    }
}

static void journal_links(struct collector *collector, int64_t utc_ns)
{
    struct journal_step step = {.count = 0};
    for (int i = 0; i < collector->plant->link_count; i++) {
        const struct link_state *now = &collector->made.link[i];
        bool was_up = collector->made.link_before[i] == LINK_UP;
        bool is_up = now->phase == LINK_UP;
        bool newly_down =
            now->phase == LINK_DOWN && collector->made.link_before[i] != LINK_DOWN;
        collector->made.link_before[i] = now->phase;
        if (is_up == was_up && !newly_down)
            continue;
        if (step.count == JOURNAL_STEP_MAX)
            break;
        journal_add(&step, utc_ns, JOURNAL_LINK, 0, collector->plant->link[i].name,
                    is_up ? "up" : "down", "", is_up ? "" : now->trouble);
    }
    for (int i = 0; i < step.count; i++)
        journal_keep(collector, &step.at[i]);
}

/* Newest time at which any point was read, and whether any reading is young enough. */
static void judge_age(struct collector *collector)
{
    struct view *view = &collector->view;
    int64_t newest = 0;
    bool live = collector->made.frame.count == 0;
    for (int i = 0; i < collector->made.frame.count; i++) {
        const struct sample *sample = &collector->made.frame.sample[i];
        if (sample->read_utc_ns > newest)
            newest = sample->read_utc_ns;
        if (sample->read_utc_ns != 0 && sample->quality != QUALITY_STALE)
            live = true;
    }
    view->stale = !live;
    view->stale_s = newest != 0 ? time_ns_to_s(collector->made.frame.utc_ns - newest) : 0;
}

static void publish(struct collector *collector, const struct results *results)
{
    struct view *view = &collector->view;
    view->utc_ns = collector->made.frame.utc_ns;
    view->results = results;
    view->links_up = 0;
    for (int i = 0; i < collector->plant->link_count; i++)
        view->links_up += collector->made.link[i].phase == LINK_UP;
    for (int i = 0; i < results->journal.count; i++)
        journal_keep(collector, &results->journal.at[i]);
    judge_age(collector);
}

static void unmake(struct making *making)
{
    engine_free(making->engine);
    arena_free(making->arena);
}

static int make(const struct plant *plant, struct making *out, struct error *err)
{
    size_t links = (size_t)plant->link_count + 1;
    *out = (struct making){.arena = arena_create()};
    int code = out->arena == NULL ? ERR_MEMORY : frame_init(&out->frame, plant, out->arena);
    if (code == 0) {
        out->link = arena_take(out->arena, links, sizeof(*out->link));
        out->link_before = arena_take(out->arena, links, sizeof(*out->link_before));
        if (out->link == NULL || out->link_before == NULL)
            code = ERR_MEMORY;
    }
    if (code != 0)
        error_set(err, code, "no memory for the collector");
    else
        code = engine_create(plant, &out->engine, err);
    if (code != 0)
        unmake(out);
    return code;
}

static void adopt(struct collector *collector, const struct plant *plant, struct making *making)
{
    struct view *view = &collector->view;
    collector->plant = plant;
    collector->made = *making;
    view->plant = plant;
    view->frame = &collector->made.frame;
    view->results = engine_results(making->engine);
    view->engine = making->engine;
    view->alarms = engine_alarms(making->engine);
    view->link = making->link;
}

int collector_open(const struct plant *plant, const struct collector_options *options,
                   struct collector **out, struct error *err)
{
    struct collector *collector = calloc(1, sizeof(*collector));
    if (collector == NULL)
        return error_set(err, ERR_MEMORY, "no memory for the collector");
    collector->epoll_fd = collector->timer_fd = -1;
    collector->journal = calloc(JOURNAL_ROOM, sizeof(*collector->journal));
    struct making making;
    int code = collector->journal == NULL
                   ? error_set(err, ERR_MEMORY, "no memory for the collector")
                   : make(plant, &making, err);
    if (code != 0) {
        free(collector->journal);
        free(collector);
        return code;
    }
    collector->view = (struct view){.mode = options->mode, .journal = collector->journal};
    adopt(collector, plant, &making);
    *out = collector;
    return 0;
}

void collector_close(struct collector *collector)
{
    if (collector == NULL)
        return;
    field_close(collector->field);
    if (collector->timer_fd >= 0)
        close(collector->timer_fd);
    if (collector->epoll_fd >= 0)
        close(collector->epoll_fd);
    unmake(&collector->made);
    free(collector->journal);
    free(collector);
}

void collector_feed(struct collector *collector, const struct frame *frame)
{
    const struct results *results = engine_step(collector->made.engine, frame, NULL, 0);
    for (int i = 0; i < results->journal.count; i++)
        journal_keep(collector, &results->journal.at[i]);
}

static int watch_fd(struct collector *collector, int fd)
{
    struct epoll_event event = {.events = EPOLLIN, .data = {.fd = fd}};
    return epoll_ctl(collector->epoll_fd, EPOLL_CTL_ADD, fd, &event);
}

/* A frame period from now, and from then on by the period. */
static int set_schedule(struct collector *collector)
{
    int64_t period_ns = time_s_to_ns(collector->plant->site.frame_s);
    struct timespec period = {.tv_sec = period_ns / NS_PER_S, .tv_nsec = period_ns % NS_PER_S};
    struct itimerspec schedule = {.it_interval = period};
    int64_t first_ns = time_mono_ns() + period_ns;
    schedule.it_value.tv_sec = first_ns / NS_PER_S;
    schedule.it_value.tv_nsec = first_ns % NS_PER_S;
    return timerfd_settime(collector->timer_fd, TFD_TIMER_ABSTIME, &schedule, NULL);
}

int collector_start(struct collector *collector, struct error *err)
{
    collector->epoll_fd = epoll_create1(EPOLL_CLOEXEC);
    collector->timer_fd = timerfd_create(CLOCK_MONOTONIC, TFD_CLOEXEC | TFD_NONBLOCK);
    if (collector->epoll_fd < 0 || collector->timer_fd < 0 || set_schedule(collector) != 0)
        return error_set(err, ERR_IO, "the frame timer cannot be set: %s", strerror(errno));
    int code = field_open(collector->plant, &collector->field, err);
    if (code != 0)
        return code;
    if (watch_fd(collector, collector->timer_fd) != 0 ||
        watch_fd(collector, field_wake_fd(collector->field)) != 0)
        return error_set(err, ERR_IO, "the collector cannot wait: %s", strerror(errno));
    collector->first_wanted = true;
    return 0;
}

int collector_fd(const struct collector *collector)
{
    return collector->epoll_fd;
}

/* The links' word is wanted for the first frame only; after it the timer alone wakes the loop.
 */
static void stop_first_wait(struct collector *collector)
{
    collector->first_wanted = false;
    epoll_ctl(collector->epoll_fd, EPOLL_CTL_DEL, field_wake_fd(collector->field), NULL);
}

static void make_frame(struct collector *collector)
{
    int64_t utc_ns = time_utc_ns();
    utc_ns -= utc_ns % NS_PER_MS;
    field_fill(collector->field, utc_ns, &collector->made.frame, collector->made.link);
    const struct results *results = engine_step(collector->made.engine, &collector->made.frame,
                                                collector->command, collector->command_count);
    collector->command_count = 0;
    collector->frames++;
    journal_links(collector, utc_ns);
    publish(collector, results);
    collector->view.ready = !collector->first_wanted;
}

bool collector_tick(struct collector *collector)
{
    uint64_t ticks = 0;
    bool due = read(collector->timer_fd, &ticks, sizeof(ticks)) == (ssize_t)sizeof(ticks);
    if (due && ticks > 1)
        collector->missed += ticks - 1;
    if (collector->first_wanted && field_settled(collector->field)) {
        stop_first_wait(collector);
        due = true;
    }
    if (!due) {
        if (collector->first_wanted)
            field_fill(collector->field, collector->made.frame.utc_ns, &collector->made.frame,
                       collector->made.link); /* clears the wake */
        return false;
    }
    make_frame(collector);
    return true;
}

int collector_reload(struct collector *collector, const struct plant *plant, struct error *err)
{
    struct making making;
    int code = make(plant, &making, err);
    if (code != 0)
        return code;
    if (collector->first_wanted)
        stop_first_wait(collector);
    code = field_reopen(&collector->field, plant, err);
    if (code != 0) {
        unmake(&making);
        return code;
    }
    /* A link that kept its phase has no news for the journal. */
    for (int i = 0; i < plant->link_count; i++)
        for (int k = 0; k < collector->plant->link_count; k++)
            if (strcmp(plant->link[i].name, collector->plant->link[k].name) == 0)
                making.link_before[i] = collector->made.link_before[k];
    unmake(&collector->made);
    adopt(collector, plant, &making);
    /* Commands name alarms by their number, which may be another's now. */
    collector->command_count = 0;
    if (set_schedule(collector) != 0)
        log_error("the frame timer cannot be set: %s", strerror(errno));
    make_frame(collector);
    return 0;
}

void collector_note(struct collector *collector, enum journal_kind kind, const char *subject,
                    const char *state, const char *text)
{
    struct journal_step step = {.count = 0};
    journal_add(&step, collector->made.frame.utc_ns, kind, 0, subject, state, "", text);
    for (int i = 0; i < step.count; i++)
        journal_keep(collector, &step.at[i]);
}

const struct view *collector_view(const struct collector *collector)
{
    return &collector->view;
}

int collector_command(struct collector *collector, const struct command *command,
                      struct error *err)
{
    if (collector->command_count == COMMAND_MAX)
        return error_set(err, ERR_ARGUMENT,
                         "more than %d commands in one frame; wait for the next", COMMAND_MAX);
    collector->command[collector->command_count++] = *command;
    return 0;
}

void collector_counts(const struct collector *collector, uint64_t *frames, uint64_t *missed)
{
    *frames = collector->frames;
    *missed = collector->missed;
}
