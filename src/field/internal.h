/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * What the files of field share: values to be read (item), the device behind a link, and the
 * worker that polls it.
 */
#ifndef ULLAGE_FIELD_INTERNAL_H
#define ULLAGE_FIELD_INTERNAL_H

#include <pthread.h>
#include <stdatomic.h>

#include "ullage/field.h"

/* ---- items (block.c) -----------------------------------------------------------------------
 */

/* Registers or bits that must arrive in one answer. */
struct item {
    enum register_table table;
    int address, words;
};

/* The distinct items of a link's points and fault bits in order of table and address. items
 * has room for twice the plant's points. Returns their number. */
int items_collect(const struct plant *plant, int link, struct item *items);
/* Index of a reference's item; it must be among them. */
int items_find(const struct item *items, int count, const struct register_ref *ref);
/* How many items, from the first on, one request of this link may serve; count > 0. The
 * request is written to block. */
int items_reach(const struct link *link, const struct item *items, int count,
                struct block *block);
/* The smallest request that serves all of count items, whatever its size. */
struct block items_cover(const struct item *items, int count);

/* ---- sockets (socket.c) --------------------------------------------------------------------
 */

/* A connected, non-blocking TCP socket, or a negative code. Waits at most timeout_s for each
 * of the host's addresses, and a fixed time for its name; returns early when stop_fd (or -1)
 * becomes readable. */
int socket_connect(const char *host, int port, double timeout_s, int stop_fd,
                   struct error *err) MUST_CHECK;
/* What stands at a connection on which nothing is due. */
enum socket_rest { SOCKET_QUIET, SOCKET_CLOSED, SOCKET_STRAY };
enum socket_rest socket_rest(int fd);
/* Waits for stop_fd until a time of the monotonic clock; true if it became readable. */
bool wait_stopped(int stop_fd, int64_t until_mono_ns);
/* pthread_create with all signals blocked in the new thread. 0 or an errno value. */
int thread_start(pthread_t *thread, bool detached, void *(*run)(void *), void *context);

/* ---- device (device.c) ---------------------------------------------------------------------
 */

enum { DEVICE_READ_MAX = 2000, DEVICE_REGISTER_MAX = 125 };

struct device {
    const char *host;
    int port, unit_id;
    uint16_t transaction; /* of the last request */
    double timeout_s;
    struct _modbus *context;
};

int device_init(struct device *device, const char *host, int port, int unit_id,
                double timeout_s, struct error *err) MUST_CHECK;
int device_connect(struct device *device, int stop_fd, struct error *err) MUST_CHECK;
bool device_connected(const struct device *device);
/* What waits at an open connection before a request. */
enum socket_rest device_rest(const struct device *device);
/* How a request failed: nothing came in time; the other end closed; or what came was wrong. */
enum device_failure { DEVICE_SILENT, DEVICE_CLOSED, DEVICE_WRONG };
/* One request. words takes block->count values (a bit is 0 or 1). 0; a positive Modbus
 * exception code; or a negative code with err and failure, after which the connection must be
 * closed, so that a late answer never meets the next request. */
int device_read(struct device *device, const struct block *block, uint16_t *words,
                enum device_failure *failure, struct error *err) MUST_CHECK;
void device_close(struct device *device);
void device_done(struct device *device);
/* "02, illegal address" */
const char *exception_says(int exception);

/* ---- worker (poll.c, link.c) ---------------------------------------------------------------
 */

/* A point's last word, with times of the monotonic clock; frames turn them into UTC. */
struct reading {
    struct sample sample; /* its read_utc_ns is not used */
    int64_t told_mono_ns; /* the device last said something about the point; 0: never */
    int64_t read_mono_ns; /* it last gave a value; 0: never */
    enum cause waiting;   /* why no newer word has come though the link is up, or CAUSE_NONE */
};

/* The phase's start and the next try, by the monotonic clock. */
struct phase_times {
    int64_t since_mono_ns, retry_mono_ns;
};

/* What a worker hands over: filled under the lock, never while waiting for anything. */
struct slot {
    pthread_mutex_t lock;
    bool settled;
    struct link_state state;
    struct phase_times times;
    struct reading *reading; /* of the link's points, in plant order */
};

/* An item in a turn. */
struct item_state {
    enum cause cause; /* NONE: read in this turn; NEVER_READ: nothing known in this turn */
    uint16_t words[4];
    int64_t read_mono_ns;
    double probe_s; /* wait before a refused item is asked for again */
};

/* A run of items that one request serves. */
struct part {
    struct block block;
    int first, count;
    bool refused; /* a single item that the device will not give */
    enum cause cause;
    int64_t probe_mono_ns;
};

/* Keeps a link that comes and goes from filling the log. */
struct log_gate {
    int64_t window_mono_ns;
    unsigned lines, held;
};

struct worker {
    const struct plant *plant;
    const struct link *link;
    int index, stop_fd, wake_fd;
    const atomic_bool *stopping; /* set before stop_fd becomes readable */
    const atomic_bool *keeping;  /* the connection outlives the thread, for its successor */
    pthread_t thread;
    bool started;
    struct device device;

    int item_count, part_count, point_count;
    const struct item *item;
    struct item_state *item_state;
    struct part *part;     /* room for item_count */
    const int *point;      /* plant's index of each of the link's points */
    const int *value_item; /* item of each point */
    const int *fault_item; /* or -1 */

    /* Only the thread touches these. */
    uint16_t words[DEVICE_READ_MAX];
    struct reading *reading;
    struct link_state state;
    struct phase_times times;
    bool settled, connected_before;
    bool answered;  /* some request of this turn was */
    bool proved;    /* some request on this connection was */
    int first_part; /* where the next turn begins */
    unsigned tries; /* since the link went down */
    int64_t remind_mono_ns;
    struct log_gate gate;
    uint64_t random;

    struct slot slot;
};

/* Plans the requests of a worker afresh. */
void poll_plan(struct worker *worker);
/* poll_turn broke off because the field closes. Modbus has no such exception. */
enum { POLL_STOPPED = 256 };
/* One turn: asks for every part. 0; POLL_STOPPED; or a negative code with err when the
 * connection can no longer be trusted. What was read before stands in the readings either way.
 */
int poll_turn(struct worker *worker, struct error *err) MUST_CHECK;
/* Takes the connection, counts and readings of a worker whose thread has ended, if it polled
 * the same device; before this one's thread starts. */
void worker_succeed(struct worker *worker, struct worker *old);
/* The thread: polls until stop_fd becomes readable. */
void *link_run(void *context);

#endif
