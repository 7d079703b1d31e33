/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * When the plant file is read again: a link that still means the same device goes on over its
 * connection, and a point that still means the same register keeps its last reading. What must
 * stay true: nothing of a reading is carried to a point that is read, scaled or judged
 * otherwise.
 */
#include "internal.h"

#include <string.h>

static bool same_device(const struct link *a, const struct link *b)
{
    return strcmp(a->name, b->name) == 0 && strcmp(a->host, b->host) == 0 &&
           a->port == b->port && a->unit_id == b->unit_id && a->timeout_s == b->timeout_s;
}

static bool same_register(const struct register_ref *a, const struct register_ref *b)
{
    return a->table == b->table && a->address == b->address && a->type == b->type &&
           a->bit == b->bit && a->order == b->order;
}

/* Would the same answer of the device give the same sample? */
static bool same_reading(const struct point *a, const struct point *b)
{
    return strcmp(a->name, b->name) == 0 && same_register(&a->read, &b->read) &&
           a->unit.dimension == b->unit.dimension && a->unit.scale == b->unit.scale &&
           a->unit.offset == b->unit.offset && a->unit.gauge == b->unit.gauge &&
           a->has_valid == b->has_valid && a->valid_low == b->valid_low &&
           a->valid_high == b->valid_high && a->u.absolute == b->u.absolute &&
           a->u.of_reading == b->u.of_reading && a->u.of_span == b->u.of_span &&
           a->scaled == b->scaled && a->raw_low == b->raw_low && a->raw_high == b->raw_high &&
           a->span_low == b->span_low && a->span_high == b->span_high &&
           a->has_fault == b->has_fault && a->resolution == b->resolution &&
           (!a->has_fault || same_register(&a->fault, &b->fault));
}

static void keep_readings(struct worker *worker, const struct worker *old)
{
    for (int i = 0; i < worker->point_count; i++)
        for (int k = 0; k < old->point_count; k++)
            if (same_reading(&worker->plant->point[worker->point[i]],
                             &old->plant->point[old->point[k]])) {
                worker->reading[i] = old->reading[k];
                worker->slot.reading[i] = old->reading[k];
                break;
            }
}

void worker_succeed(struct worker *worker, struct worker *old)
{
    if (!same_device(worker->link, old->link) || old->device.context == NULL)
        return;
    device_done(&worker->device);
    worker->device = old->device;
    worker->device.host = worker->link->host; /* the old plant's text goes with it */
    old->device = (struct device){0};
    worker->state = worker->slot.state = old->state;
    worker->times = worker->slot.times = old->times;
    worker->settled = worker->slot.settled = old->settled;
    worker->connected_before = old->connected_before;
    worker->proved = old->proved;
    worker->remind_mono_ns = old->remind_mono_ns;
    worker->gate = old->gate;
    worker->tries = old->tries;
    keep_readings(worker, old);
}
