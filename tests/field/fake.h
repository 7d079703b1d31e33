/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * A scripted Modbus/TCP device for tests: a thread on a free loopback port that answers as it
 * is told, well or badly, and keeps every request. Frames are built by hand from the MODBUS
 * Application Protocol V1.1b3 and Messaging on TCP/IP V1.0b, not with the library under test.
 * A bad answer carries POISON as its data, which must never be shown.
 */
#ifndef ULLAGE_TESTS_FIELD_FAKE_H
#define ULLAGE_TESTS_FIELD_FAKE_H

#include <arpa/inet.h>
#include <netinet/in.h>
#include <netinet/tcp.h>
#include <poll.h>
#include <pthread.h>
#include <stdatomic.h>
#include <string.h>
#include <sys/eventfd.h>
#include <sys/socket.h>
#include <unistd.h>

#include "ullage/field.h"

enum { FAKE_REGISTERS = 65536, FAKE_LOG = 4096, POISON = 0x5A5A };

enum fake_mode {
    FAKE_GOOD,
    FAKE_DRIP,       /* one byte a segment, soon enough */
    FAKE_CLOSE_EACH, /* a good answer, then the connection is closed */
    FAKE_TOLERATED = FAKE_CLOSE_EACH,
    FAKE_OTHER_UNIT, /* good but for the unit it names */
    FAKE_SILENT,
    FAKE_LATE,      /* the answer comes after the timeout */
    FAKE_LATE_NEXT, /* the answer to the request before, without its transaction */
    FAKE_SLOW_DRIP, /* one byte a segment, too late as a whole */
    FAKE_RESET,
    FAKE_TRUNCATED, /* half an answer, then silence */
    FAKE_TRUNCATED_CLOSED,
    FAKE_WRONG_TRANSACTION,
    FAKE_WRONG_FUNCTION,
    FAKE_WRITE_FUNCTION,
    FAKE_SHORT_COUNT, /* fewer registers than asked for, well formed */
    FAKE_LONG_COUNT,
    FAKE_LYING_COUNT, /* byte count that is not the data's */
    FAKE_GARBAGE,
    FAKE_TWICE, /* a good answer and another with the next transaction */
    FAKE_STRANGE_EXCEPTION,
    FAKE_EXCEPTION_OF_OTHER_FUNCTION,
    FAKE_MODES,
    FAKE_MUTATED /* right data behind a header in which one byte is wrong */
};

struct fake {
    int family, listen_fd, stop_fd, port;
    pthread_t thread;
    atomic_int mode;
    atomic_int exception;              /* answered to everything if not 0 */
    atomic_int illegal, illegal_count; /* these addresses are answered with 02 */
    atomic_int silent_from;            /* requests from this address on are not answered */
    atomic_int largest;                /* most registers in a request, else 03; 0: any */
    atomic_int answered, connections;
    unsigned seed;                         /* FAKE_MUTATED */
    _Atomic uint16_t word[FAKE_REGISTERS]; /* of all four tables */
    pthread_mutex_t lock;
    bool keep_no_log;
    int logged;
    uint8_t log[FAKE_LOG][12];
};

static inline bool fake_wait(struct fake *fake, int fd, int ms)
{
    struct pollfd wait[2] = {
        {.fd = fake->stop_fd, .events = POLLIN},
        {.fd = fd,            .events = POLLIN}
    };
    poll(wait, fd < 0 ? 1 : 2, ms);
    return wait[0].revents == 0;
}

static inline void fake_send(int fd, const uint8_t *bytes, size_t length)
{
    while (length > 0) {
        ssize_t sent = send(fd, bytes, length, MSG_NOSIGNAL);
        if (sent <= 0)
            return;
        bytes += sent;
        length -= (size_t)sent;
    }
}

static inline size_t fake_frame(uint8_t *out, const uint8_t *request, const uint8_t *pdu,
                                size_t length)
{
    memcpy(out, request, 4); /* transaction, protocol */
    out[4] = (uint8_t)((length + 1) >> 8);
    out[5] = (uint8_t)((length + 1) & 0xFF);
    out[6] = request[6];
    memcpy(out + 7, pdu, length);
    return length + 7;
}

static inline size_t fake_exception(uint8_t *out, const uint8_t *request, int code)
{
    const uint8_t pdu[2] = {(uint8_t)(request[7] | 0x80), (uint8_t)code};
    return fake_frame(out, request, pdu, 2);
}

/* The answer to a request for count items from address on. */
static inline size_t fake_answer(struct fake *fake, uint8_t *out, const uint8_t *request,
                                 int address, int count, bool poison)
{
    uint8_t pdu[260] = {request[7]};
    bool bits = request[7] == 1 || request[7] == 2;
    int bytes = bits ? (count + 7) / 8 : count * 2;
    pdu[1] = (uint8_t)bytes;
    for (int i = 0; i < count; i++) {
        int at = address + i < FAKE_REGISTERS ? address + i : FAKE_REGISTERS - 1;
        uint16_t word = poison ? POISON : atomic_load(&fake->word[at]);
        if (bits) {
            if (word != 0)
                pdu[2 + i / 8] = (uint8_t)(pdu[2 + i / 8] | 1 << i % 8);
            continue;
        }
        pdu[2 + 2 * i] = (uint8_t)(word >> 8);
        pdu[3 + 2 * i] = (uint8_t)(word & 0xFF);
    }
    return fake_frame(out, request, pdu, (size_t)bytes + 2);
}

static inline int fake_refusal(struct fake *fake, int address, int count)
{
    int illegal = atomic_load(&fake->illegal), width = atomic_load(&fake->illegal_count);
    int largest = atomic_load(&fake->largest);
    if (atomic_load(&fake->exception) != 0)
        return atomic_load(&fake->exception);
    if (largest > 0 && count > largest)
        return 3;
    if (width > 0 && address < illegal + width && illegal < address + count)
        return 2;
    return address + count > FAKE_REGISTERS ? 2 : 0;
}

/* Answers one request as told; false when the connection is to be closed. */
static inline bool fake_serve(struct fake *fake, int fd, const uint8_t *request)
{
    uint8_t out[600];
    enum fake_mode mode = (enum fake_mode)atomic_load(&fake->mode);
    int address = request[8] << 8 | request[9], count = request[10] << 8 | request[11];
    size_t length;
    int refusal = fake_refusal(fake, address, count);
    bool poison = mode > FAKE_TOLERATED && mode < FAKE_MODES;

    if (atomic_load(&fake->silent_from) <= address)
        return true;
    if (refusal != 0)
        length = fake_exception(out, request, refusal);
    else
        length = fake_answer(fake, out, request, address, count, poison);
    switch (mode) {
    case FAKE_GOOD:
    case FAKE_CLOSE_EACH:
    case FAKE_MODES:
        break;
    case FAKE_MUTATED:
        fake->seed = fake->seed * 1664525U + 1013904223U;
        out[(fake->seed >> 8) % 9] = (uint8_t)(fake->seed >> 24);
        break;
    case FAKE_OTHER_UNIT:
        out[6] = (uint8_t)(out[6] + 1);
        break;
    case FAKE_DRIP:
    case FAKE_SLOW_DRIP:
        for (size_t i = 0; i < length; i++) {
            fake_send(fd, out + i, 1);
            if (!fake_wait(fake, -1, mode == FAKE_DRIP ? 1 : 40))
                return false;
        }
        atomic_fetch_add(&fake->answered, 1);
        return true;
    case FAKE_SILENT:
        return true;
    case FAKE_LATE:
        if (!fake_wait(fake, -1, 400))
            return false;
        break;
    case FAKE_LATE_NEXT:
    case FAKE_WRONG_TRANSACTION:
        out[1] = (uint8_t)(out[1] - 1);
        break;
    case FAKE_RESET: {
        const struct linger hard = {.l_onoff = 1, .l_linger = 0};
        setsockopt(fd, SOL_SOCKET, SO_LINGER, &hard, sizeof(hard));
        return false;
    }
    case FAKE_TRUNCATED:
        fake_send(fd, out, length / 2);
        return true;
    case FAKE_TRUNCATED_CLOSED:
        fake_send(fd, out, length - 1);
        return false;
    case FAKE_WRONG_FUNCTION:
        out[7] = out[7] == 3 ? 4 : 3;
        break;
    case FAKE_WRITE_FUNCTION:
        out[7] = 6;
        break;
    case FAKE_SHORT_COUNT:
        length = fake_answer(fake, out, request, address, count - 1, true);
        break;
    case FAKE_LONG_COUNT:
        length = fake_answer(fake, out, request, address, count + 1, true);
        break;
    case FAKE_LYING_COUNT:
        out[8] = (uint8_t)(out[8] - 1);
        break;
    case FAKE_GARBAGE:
        for (length = 0; length < sizeof(out); length++)
            out[length] = (uint8_t)(length * 151 + 7);
        break;
    case FAKE_TWICE: {
        uint8_t next[12];
        memcpy(next, request, sizeof(next));
        next[1] = (uint8_t)(next[1] + 1);
        length = fake_answer(fake, out, request, address, count, false);
        length += fake_answer(fake, out + length, next, address, count, true);
        break;
    }
    case FAKE_STRANGE_EXCEPTION:
        length = fake_exception(out, request, 0x7F);
        break;
    case FAKE_EXCEPTION_OF_OTHER_FUNCTION:
        length = fake_exception(out, request, 2);
        out[7] = 0x86;
        break;
    }
    fake_send(fd, out, length);
    atomic_fetch_add(&fake->answered, 1);
    return mode != FAKE_CLOSE_EACH;
}

static inline void *fake_run(void *context)
{
    struct fake *fake = context;
    int fd = -1;
    uint8_t request[12];
    size_t have = 0;
    while (fake_wait(fake, fd >= 0 ? fd : fake->listen_fd, -1)) {
        if (fd < 0) {
            int one = 1;
            fd = accept(fake->listen_fd, NULL, NULL);
            if (fd >= 0)
                setsockopt(fd, IPPROTO_TCP, TCP_NODELAY, &one, sizeof(one));
            atomic_fetch_add(&fake->connections, fd >= 0);
            have = 0;
            continue;
        }
        ssize_t got = recv(fd, request + have, sizeof(request) - have, 0);
        bool keep = got > 0;
        if (keep) {
            have += (size_t)got;
            if (have == sizeof(request)) {
                have = 0;
                pthread_mutex_lock(&fake->lock);
                if (fake->logged < FAKE_LOG && !fake->keep_no_log)
                    memcpy(fake->log[fake->logged++], request, sizeof(request));
                pthread_mutex_unlock(&fake->lock);
                keep = fake_serve(fake, fd, request);
            }
        }
        if (!keep) {
            close(fd);
            fd = -1;
        }
    }
    if (fd >= 0)
        close(fd);
    return NULL;
}

/* A listening socket on loopback; port 0 takes a free one. -1 where the family is missing. */
static inline int fake_listen(int family, int port, int backlog, int *bound)
{
    union {
        struct sockaddr any;
        struct sockaddr_in v4;
        struct sockaddr_in6 v6;
    } address;
    memset(&address, 0, sizeof(address));
    socklen_t size = family == AF_INET ? sizeof(address.v4) : sizeof(address.v6);
    address.any.sa_family = (sa_family_t)family;
    if (family == AF_INET) {
        address.v4.sin_addr.s_addr = htonl(INADDR_LOOPBACK);
        address.v4.sin_port = htons((uint16_t)port);
    } else {
        address.v6.sin6_addr = in6addr_loopback;
        address.v6.sin6_port = htons((uint16_t)port);
    }
    int fd = socket(family, SOCK_STREAM | SOCK_CLOEXEC, 0), one = 1;
    if (fd < 0)
        return -1;
    setsockopt(fd, SOL_SOCKET, SO_REUSEADDR, &one, sizeof(one));
    if (bind(fd, &address.any, size) != 0 || listen(fd, backlog) != 0 ||
        getsockname(fd, &address.any, &size) != 0) {
        close(fd);
        return -1;
    }
    *bound = ntohs(family == AF_INET ? address.v4.sin_port : address.v6.sin6_port);
    return fd;
}

/* Starts (again, on the same port if it had one). */
static inline bool fake_start(struct fake *fake)
{
    if (fake->port == 0) {
        if (fake->family == 0)
            fake->family = AF_INET;
        atomic_store(&fake->silent_from, 1 << 20);
        pthread_mutex_init(&fake->lock, NULL);
    }
    fake->listen_fd = fake_listen(fake->family, fake->port, 8, &fake->port);
    fake->stop_fd = eventfd(0, EFD_CLOEXEC);
    return fake->listen_fd >= 0 && fake->stop_fd >= 0 &&
           pthread_create(&fake->thread, NULL, fake_run, fake) == 0;
}

static inline void fake_stop(struct fake *fake)
{
    eventfd_write(fake->stop_fd, 1);
    pthread_join(fake->thread, NULL);
    close(fake->listen_fd);
    close(fake->stop_fd);
}

/* ---- a plant and its field -----------------------------------------------------------------
 */

enum { RIG_LINKS = 100, RIG_POINTS = 10000 };

struct rig {
    struct link link[RIG_LINKS];
    struct point point[RIG_POINTS];
    struct plant plant;
    struct field *field;
    struct sample sample[RIG_POINTS];
    struct frame frame;
    struct link_state state[RIG_LINKS];
    char name[RIG_LINKS][12];
};

/* A link that polls every 50 ms and waits 150 ms for an answer. */
static inline struct link *rig_link(struct rig *rig, const char *host, int port)
{
    int index = rig->plant.link_count++;
    text_format(rig->name[index], sizeof(rig->name[index]), "device-%d", index);
    rig->link[index] = (struct link){.name = rig->name[index],
                                     .host = host,
                                     .port = port,
                                     .unit_id = 1,
                                     .period_s = 0.05,
                                     .timeout_s = 0.15,
                                     .gap = 8,
                                     .block = 60};
    return &rig->link[index];
}

/* A u16 of an input register, as a pure number, on the link added last. */
static inline struct point *rig_point(struct rig *rig, int address)
{
    struct point *point = &rig->point[rig->plant.point_count++];
    *point = (struct point){
        .name = "p",
        .link = rig->plant.link_count - 1,
        .read = {.table = TABLE_INPUT, .address = address, .type = REGISTER_U16, .bit = -1},
        .unit = {.symbol = "1",           .scale = 1                            },
        .stale_s = 60
    };
    return point;
}

static inline int rig_open(struct rig *rig, struct error *err)
{
    rig->plant.link = rig->link;
    rig->plant.point = rig->point;
    rig->frame = (struct frame){.count = rig->plant.point_count, .sample = rig->sample};
    return field_open(&rig->plant, &rig->field, err);
}

static inline void rig_fill(struct rig *rig)
{
    field_fill(rig->field, time_utc_ns(), &rig->frame, rig->state);
}

/* Fills frames as the links have news until the condition holds; false after 10 s, which is a
 * deadline and no measurement. */
typedef bool rig_condition(const struct rig *rig, int argument);
static inline bool rig_wait(struct rig *rig, rig_condition *condition, int argument)
{
    int64_t deadline = time_mono_ns() + 10 * NS_PER_S;
    for (;;) {
        rig_fill(rig);
        if (condition(rig, argument))
            return true;
        if (time_mono_ns() > deadline)
            return false;
        /* the short wait lets time pass where nothing but time is waited for (staleness) */
        struct pollfd wait = {.fd = field_wake_fd(rig->field), .events = POLLIN};
        poll(&wait, 1, 20);
    }
}

#endif
