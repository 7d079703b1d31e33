/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The field: one worker for each link, and frames made of what they handed over. All memory is
 * taken in field_open. Times of readings are of the monotonic clock until a frame is filled, so
 * that a step of the wall clock makes no reading old or new.
 */
#include "internal.h"

#include <errno.h>
#include <stdlib.h>
#include <string.h>
#include <sys/eventfd.h>
#include <unistd.h>

struct field {
    struct arena *arena;
    const struct plant *plant;
    int wake_fd, stop_fd;
    atomic_bool stopping, keeping;
    int ready; /* workers whose slot and device exist */
    struct worker *worker;
};

static int count_points(const struct plant *plant, int link)
{
    int count = 0;
    for (int i = 0; i < plant->point_count; i++)
        count += plant->point[i].link == link;
    return count;
}

/* Tells links apart that start in the same moment: FNV-1a of the name and the clock. */
static uint64_t seed_of(const char *name)
{
    uint64_t hash = UINT64_C(14695981039346656037);
    for (; *name != '\0'; name++)
        hash = (hash ^ (unsigned char)*name) * UINT64_C(1099511628211);
    hash ^= (uint64_t)time_mono_ns();
    return hash != 0 ? hash : 1;
}

static int worker_memory(struct worker *worker, struct arena *arena)
{
    const struct plant *plant = worker->plant;
    size_t points = (size_t)count_points(plant, worker->index);
    struct item *item = arena_take(arena, points * 2, sizeof(*item));
    int *point = arena_take(arena, points, sizeof(*point));
    int *value_item = arena_take(arena, points, sizeof(*value_item));
    int *fault_item = arena_take(arena, points, sizeof(*fault_item));
    worker->item_state = arena_take(arena, points * 2, sizeof(*worker->item_state));
    worker->part = arena_take(arena, points * 2 + 1, sizeof(*worker->part));
    worker->reading = arena_take(arena, points, sizeof(*worker->reading));
    worker->slot.reading = arena_take(arena, points, sizeof(*worker->slot.reading));
    if (item == NULL || point == NULL || value_item == NULL || fault_item == NULL ||
        worker->item_state == NULL || worker->part == NULL || worker->reading == NULL ||
        worker->slot.reading == NULL)
        return ERR_MEMORY;
    worker->item_count = items_collect(plant, worker->index, item);
    int count = 0;
    for (int i = 0; i < plant->point_count; i++) {
        const struct point *p = &plant->point[i];
        if (p->link != worker->index)
            continue;
        point[count] = i;
        value_item[count] = items_find(item, worker->item_count, &p->read);
        fault_item[count] = p->has_fault ? items_find(item, worker->item_count, &p->fault) : -1;
        count++;
    }
    worker->item = item;
    worker->point = point;
    worker->point_count = count;
    worker->value_item = value_item;
    worker->fault_item = fault_item;
    return 0;
}

static int worker_init(struct field *field, int index, struct error *err)
{
    struct worker *worker = &field->worker[index];
    const struct link *link = &field->plant->link[index];
    worker->plant = field->plant;
    worker->link = link;
    worker->index = index;
    worker->wake_fd = field->wake_fd;
    worker->stop_fd = field->stop_fd;
    worker->stopping = &field->stopping;
    worker->keeping = &field->keeping;
    worker->random = seed_of(link->name);
    worker->times.since_mono_ns = time_mono_ns();
    if (worker_memory(worker, field->arena) != 0)
        return error_set(err, ERR_MEMORY, "no memory for link %s", link->name);
    worker->slot.state = worker->state;
    worker->slot.times = worker->times;
    poll_plan(worker);
    int code = device_init(&worker->device, link->host, link->port, link->unit_id,
                           link->timeout_s, err);
    if (code == 0 && pthread_mutex_init(&worker->slot.lock, NULL) != 0)
        code = error_set(err, ERR_MEMORY, "no lock");
    if (code != 0) {
        device_done(&worker->device);
        return error_context(err, "link %s", link->name);
    }
    field->ready++;
    return 0;
}

/* Everything but the threads. */
static int field_make(const struct plant *plant, struct field **out, struct error *err)
{
    struct field *field = calloc(1, sizeof(*field));
    if (field == NULL)
        return error_set(err, ERR_MEMORY, "no memory to poll the links");
    field->plant = plant;
    field->wake_fd = eventfd(0, EFD_CLOEXEC | EFD_NONBLOCK);
    field->stop_fd = eventfd(0, EFD_CLOEXEC | EFD_NONBLOCK);
    field->arena = arena_create();
    int code = 0;
    if (field->wake_fd < 0 || field->stop_fd < 0)
        code = error_set(err, ERR_IO, "the links cannot be waited for: %s", strerror(errno));
    else if (field->arena == NULL ||
             (field->worker = arena_take(field->arena, (size_t)plant->link_count,
                                         sizeof(*field->worker))) == NULL)
        code = error_set(err, ERR_MEMORY, "no memory to poll the links");
    for (int i = 0; i < plant->link_count && code == 0; i++)
        code = worker_init(field, i, err);
    if (code != 0) {
        field_close(field);
        return code;
    }
    *out = field;
    return 0;
}

static int field_start(struct field *field, struct error *err)
{
    int code = 0;
    for (int i = 0; i < field->ready && code == 0; i++) {
        struct worker *worker = &field->worker[i];
        int failure = thread_start(&worker->thread, false, link_run, worker);
        worker->started = failure == 0;
        if (failure != 0)
            code = error_set(err, ERR_MEMORY, "link %s: no thread: %s", worker->link->name,
                             strerror(failure));
    }
    return code;
}

static void field_stop(struct field *field)
{
    atomic_store(&field->stopping, true);
    if (field->stop_fd >= 0)
        eventfd_write(field->stop_fd, 1);
    for (int i = 0; i < field->ready; i++) {
        if (field->worker[i].started)
            pthread_join(field->worker[i].thread, NULL);
        field->worker[i].started = false;
    }
}

int field_open(const struct plant *plant, struct field **out, struct error *err)
{
    struct field *field = NULL;
    int code = field_make(plant, &field, err);
    if (code == 0 && (code = field_start(field, err)) != 0) {
        field_close(field);
        return code;
    }
    if (code == 0)
        *out = field;
    return code;
}

int field_reopen(struct field **field, const struct plant *plant, struct error *err)
{
    struct field *old = *field, *next = NULL;
    int code = field_make(plant, &next, err);
    if (code != 0)
        return code;
    atomic_store(&old->keeping, true);
    field_stop(old);
    for (int i = 0; i < next->ready; i++)
        for (int k = 0; k < old->ready; k++)
            worker_succeed(&next->worker[i], &old->worker[k]);
    code = field_start(next, err);
    if (code != 0) {
        /* No threads for the new links: the old ones go on, over new connections. */
        struct error ignored;
        field_close(next);
        atomic_store(&old->keeping, false);
        atomic_store(&old->stopping, false);
        eventfd_t stops;
        eventfd_read(old->stop_fd, &stops);
        for (int k = 0; k < old->ready; k++)
            if (old->worker[k].device.context == NULL) {
                const struct link *link = old->worker[k].link;
                if (device_init(&old->worker[k].device, link->host, link->port, link->unit_id,
                                link->timeout_s, &ignored) != 0)
                    log_error("link %s: cannot be polled again", link->name);
            }
        if (field_start(old, &ignored) != 0)
            log_error("%s", ignored.text);
        return code;
    }
    field_close(old);
    *field = next;
    return 0;
}

int field_wake_fd(const struct field *field)
{
    return field->wake_fd;
}

bool field_settled(const struct field *field)
{
    for (int i = 0; i < field->ready; i++) {
        struct slot *slot = &field->worker[i].slot;
        pthread_mutex_lock(&slot->lock);
        bool settled = slot->settled;
        pthread_mutex_unlock(&slot->lock);
        if (!settled)
            return false;
    }
    return true;
}

/* A reading as it stands at a time of both clocks. */
static struct sample sample_at(const struct reading *reading, double stale_s, int64_t utc_ns,
                               int64_t mono_ns)
{
    struct sample sample = reading->sample;
    bool waiting = reading->waiting != CAUSE_NONE;
    if (reading->told_mono_ns == 0)
        return (struct sample){.quality = QUALITY_MISSING,
                               .cause = waiting ? reading->waiting : CAUSE_NEVER_READ};
    if (time_ns_to_s(mono_ns - reading->told_mono_ns) > stale_s) {
        if (sample.quality != QUALITY_BAD)
            sample.quality = QUALITY_STALE;
        sample.cause = waiting ? reading->waiting : CAUSE_TOO_OLD;
    }
    sample.read_utc_ns = 0;
    if (reading->read_mono_ns != 0)
        sample.read_utc_ns =
            utc_ns - (mono_ns > reading->read_mono_ns ? mono_ns - reading->read_mono_ns : 0);
    return sample;
}

void field_fill(struct field *field, int64_t utc_ns, struct frame *frame,
                struct link_state *links)
{
    eventfd_t wakes;
    eventfd_read(field->wake_fd, &wakes);
    int64_t mono_ns = time_mono_ns();
    frame->utc_ns = utc_ns;
    for (int i = 0; i < field->ready; i++) {
        struct worker *worker = &field->worker[i];
        struct slot *slot = &worker->slot;
        pthread_mutex_lock(&slot->lock);
        for (int k = 0; k < worker->point_count; k++) {
            int point = worker->point[k];
            frame->sample[point] = sample_at(
                &slot->reading[k], field->plant->point[point].stale_s, utc_ns, mono_ns);
        }
        struct link_state state = slot->state;
        struct phase_times times = slot->times;
        pthread_mutex_unlock(&slot->lock);
        state.since_utc_ns = utc_ns - (mono_ns - times.since_mono_ns);
        state.retry_s =
            times.retry_mono_ns > mono_ns ? time_ns_to_s(times.retry_mono_ns - mono_ns) : 0;
        if (links != NULL)
            links[i] = state;
    }
}

void field_close(struct field *field)
{
    if (field == NULL)
        return;
    field_stop(field);
    for (int i = 0; i < field->ready; i++) {
        device_done(&field->worker[i].device);
        pthread_mutex_destroy(&field->worker[i].slot.lock);
    }
    if (field->wake_fd >= 0)
        close(field->wake_fd);
    if (field->stop_fd >= 0)
        close(field->stop_fd);
    arena_free(field->arena);
    free(field);
}
