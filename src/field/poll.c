/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * One turn of a link: every request of its plan, and what the answers say about each point.
 *
 * A device may refuse a block for a single register, or for those that were only read over. So
 * a refused block is cut in two and each half asked for, down to single values; what is still
 * refused then costs its own points only. Refused values are asked for again now and then; when
 * one answers, the device has changed and the whole plan is taken up afresh. Within a turn cuts
 * and probes are limited, so that a device full of holes does not hold up the rest.
 */
#include "internal.h"

#include <string.h>

/* All common practice, no source. */
enum { CUTS_PER_TURN = 32, PROBES_PER_TURN = 2 };
static const double probe_first_s = 5, probe_longest_s = 60;
/* Modbus/TCP: a request to read is 12 bytes; an answer 9 and its data; an exception 9. */
enum { REQUEST_BYTES = 12, ANSWER_BYTES = 9 };

void poll_plan(struct worker *worker)
{
    int count = 0;
    for (int i = 0; i < worker->item_count;) {
        struct part *part = &worker->part[count++];
        *part = (struct part){.first = i};
        part->count =
            items_reach(worker->link, worker->item + i, worker->item_count - i, &part->block);
        i += part->count;
    }
    worker->part_count = count;
}

/* Cuts part i between its items; each half covers no more than its own. */
static void cut_part(struct worker *worker, int i)
{
    struct part *part = &worker->part[i];
    memmove(part + 1, part, (size_t)(worker->part_count - i) * sizeof(*part));
    worker->part_count++;
    int half = part->count / 2;
    struct part *rest = part + 1;
    part->count = half;
    rest->first += half;
    rest->count -= half;
    part->block = items_cover(worker->item + part->first, part->count);
    rest->block = items_cover(worker->item + rest->first, rest->count);
}

static void mark_part(struct worker *worker, const struct part *part, enum cause cause)
{
    for (int i = 0; i < part->count; i++)
        worker->item_state[part->first + i].cause = cause;
}

static void refuse_part(struct worker *worker, struct part *part, enum cause cause)
{
    struct item_state *state = &worker->item_state[part->first];
    state->probe_s = state->probe_s * 2;
    if (state->probe_s < probe_first_s)
        state->probe_s = probe_first_s;
    if (state->probe_s > probe_longest_s)
        state->probe_s = probe_longest_s;
    part->refused = true;
    part->cause = cause;
    part->probe_mono_ns = time_mono_ns() + time_s_to_ns(state->probe_s);
    mark_part(worker, part, cause);
}

static void take_part(struct worker *worker, const struct part *part)
{
    int64_t now = time_mono_ns();
    for (int i = part->first; i < part->first + part->count; i++) {
        const struct item *item = &worker->item[i];
        struct item_state *state = &worker->item_state[i];
        bool bits = item->table == TABLE_COIL || item->table == TABLE_DISCRETE;
        memcpy(state->words, worker->words + (item->address - part->block.address),
               (size_t)(bits ? 1 : item->words) * sizeof(*state->words));
        state->cause = CAUSE_NONE;
        state->read_mono_ns = now;
        state->probe_s = 0;
    }
}

static int reconnect(struct worker *worker, struct error *err)
{
    device_close(&worker->device);
    int code = device_connect(&worker->device, worker->stop_fd, err);
    worker->proved = false;
    worker->state.reconnects += code == 0;
    return code;
}

/* One request as it is. */
static int ask_once(struct worker *worker, const struct block *block,
                    enum device_failure *failure, struct error *err)
{
    struct link_state *state = &worker->state;
    int64_t start = time_mono_ns();
    state->requests++;
    state->bytes_sent += REQUEST_BYTES;
    int code = device_read(&worker->device, block, worker->words, failure, err);
    if (code < 0) {
        state->timeouts += *failure == DEVICE_SILENT;
        return code;
    }
    worker->answered = worker->proved = true;
    state->answers++;
    state->latency_s = time_ns_to_s(time_mono_ns() - start);
    if (state->latency_s > state->latency_worst_s)
        state->latency_worst_s = state->latency_s;
    state->bytes_received += ANSWER_BYTES;
    if (code > 0) {
        state->exceptions++;
        return code;
    }
    bool bits = block->table == TABLE_COIL || block->table == TABLE_DISCRETE;
    state->bytes_received += (uint64_t)(bits ? (block->count + 7) / 8 : block->count * 2);
    return 0;
}

/* One request, as device_read; POLL_STOPPED before it if the field closes. Many devices close a
 * connection that was idle, or after each answer: where one closes that has answered before, it
 * is asked once more on a new one. */
static int ask(struct worker *worker, const struct block *block, struct error *err)
{
    enum device_failure failure = DEVICE_WRONG;
    if (atomic_load_explicit(worker->stopping, memory_order_relaxed))
        return POLL_STOPPED;
    bool proved = worker->proved;
    int code = ask_once(worker, block, &failure, err);
    if (code < 0 && failure == DEVICE_CLOSED && proved) {
        code = reconnect(worker, err);
        if (code == 0)
            code = ask_once(worker, block, &failure, err);
    }
    return code;
}

/* Looks at a connection before the first request of a turn. */
static int look_before(struct worker *worker, struct error *err)
{
    switch (device_rest(&worker->device)) {
    case SOCKET_STRAY: /* it would be taken for the first answer */
        return error_set(err, ERR_DEVICE, "bytes came that were not asked for");
    case SOCKET_CLOSED:
        return reconnect(worker, err);
    case SOCKET_QUIET:
        break;
    }
    return 0;
}

/* MODBUS Application Protocol V1.1b3, 7: 05 and 06 mean "later", 0A and 0B come from a gateway,
 * 01 to 03 refuse the request as such, the others tell of a failure. */
static enum cause cause_of(int exception)
{
    switch (exception) {
    case 1:
    case 2:
    case 3:
        return CAUSE_EXCEPTION;
    case 5:
    case 6:
        return CAUSE_DEVICE_BUSY;
    case 10:
    case 11:
        return CAUSE_GATEWAY;
    default:
        return CAUSE_DEVICE_FAILURE;
    }
}

struct turn {
    int cuts, probes;
    int at;       /* part asked for last */
    bool changed; /* what was refused is given now */
};

/* Asks for part i, cutting it as far as it is refused. Returns how many parts it has become;
 * POLL_STOPPED or a failure in *code. */
static int ask_part(struct worker *worker, int i, struct turn *turn, int *code,
                    struct error *err)
{
    int end = i + 1;
    for (; i < end; i++) {
        struct part *part = &worker->part[i];
        if (part->refused && (time_mono_ns() < part->probe_mono_ns || turn->probes-- <= 0)) {
            mark_part(worker, part, part->cause);
            continue;
        }
        turn->at = i;
        int answer = ask(worker, &part->block, err);
        if (answer < 0 || answer == POLL_STOPPED) {
            *code = answer;
            return 0;
        }
        enum cause cause = answer == 0 ? CAUSE_NONE : cause_of(answer);
        if (cause == CAUSE_NONE) {
            turn->changed |= part->refused;
            part->refused = false;
            take_part(worker, part);
        } else if (cause == CAUSE_DEVICE_BUSY || cause == CAUSE_GATEWAY) {
            mark_part(worker, part, cause);
        } else if (part->count == 1) {
            refuse_part(worker, part, cause);
        } else if (turn->cuts-- > 0) {
            cut_part(worker, i--);
            end++;
        } /* else its points age until the cuts of the next turn reach them */
    }
    return end;
}

static void tell_refused(struct reading *reading, enum cause cause, int64_t now_mono_ns)
{
    reading->sample = (struct sample){.quality = QUALITY_BAD, .cause = cause};
    reading->told_mono_ns = now_mono_ns;
    reading->waiting = CAUSE_NONE;
}

/* What the turn says about each point. */
static void tell_points(struct worker *worker)
{
    int64_t now = time_mono_ns();
    for (int i = 0; i < worker->point_count; i++) {
        const struct point *point = &worker->plant->point[worker->point[i]];
        const struct item_state *value = &worker->item_state[worker->value_item[i]];
        struct reading *reading = &worker->reading[i];
        if (value->cause == CAUSE_NEVER_READ)
            continue;
        if (value->cause == CAUSE_DEVICE_BUSY) {
            reading->waiting = CAUSE_DEVICE_BUSY;
            continue;
        }
        if (value->cause != CAUSE_NONE) {
            tell_refused(reading, value->cause, now);
            continue;
        }
        int fault = 0;
        if (worker->fault_item[i] >= 0) {
            const struct item_state *bit = &worker->item_state[worker->fault_item[i]];
            double set;
            if (bit->cause == CAUSE_NEVER_READ)
                continue; /* the turn broke off between the two */
            fault = -1;
            if (bit->cause == CAUSE_NONE &&
                register_decode(&point->fault, bit->words, &set) == 0)
                fault = set > 0;
        }
        *reading = (struct reading){.sample = point_sample(point, value->words, fault, 0),
                                    .told_mono_ns = value->read_mono_ns,
                                    .read_mono_ns = value->read_mono_ns};
    }
}

int poll_turn(struct worker *worker, struct error *err)
{
    struct turn turn = {.cuts = CUTS_PER_TURN, .probes = PROBES_PER_TURN};
    int code = look_before(worker, err);
    if (code != 0)
        return code;
    for (int i = 0; i < worker->item_count; i++)
        worker->item_state[i].cause = CAUSE_NEVER_READ;
    /* After a failure the turn starts behind the part that failed: a request that the device
     * never answers must not starve the ones after it. */
    int first = worker->first_part < worker->part_count ? worker->first_part : 0;
    int last = worker->part_count;
    worker->first_part = 0;
    for (int lap = 0; lap < 2 && code == 0; lap++) {
        int i = lap == 0 ? first : 0;
        int stop = lap == 0 ? last : first;
        while (i < stop) {
            int before = worker->part_count;
            int next = ask_part(worker, i, &turn, &code, err);
            if (code != 0) {
                worker->first_part = turn.at + 1;
                break;
            }
            stop += worker->part_count - before;
            i = next;
        }
    }
    tell_points(worker);
    if (turn.changed)
        poll_plan(worker);
    return code;
}
