/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * field: readings from devices over Modbus/TCP, and the frame they are gathered in. Read-only
 * by construction: function codes 1 to 4. One thread per link fills that link's slot; nothing
 * else is shared. A dead device never delays a live one.
 */
#ifndef ULLAGE_FIELD_H
#define ULLAGE_FIELD_H

#include <stdbool.h>
#include <stdint.h>

#include "ullage/base.h"
#include "ullage/plant.h"

/* ---- frame ---------------------------------------------------------------------------------
 */

/* Why a reading is not good; a sentence for each by cause_says. */
#define CAUSE_LIST(X)                                                                          \
    X(NONE, "good")                                                                            \
    X(NEVER_READ, "not read yet")                                                              \
    X(TOO_OLD, "older than its time")                                                          \
    X(OUT_OF_RANGE, "outside its valid range")                                                 \
    X(NOT_A_NUMBER, "device sent no number")                                                   \
    X(FAULT_BIT, "device reports a fault")                                                     \
    X(FAULT_UNKNOWN, "device's fault bit could not be read")                                   \
    X(EXCEPTION, "device refuses the address")                                                 \
    X(DEVICE_BUSY, "device says it is busy")                                                   \
    X(GATEWAY, "gateway cannot reach the device")                                              \
    X(NOT_IN_RECORD, "not in the record")                                                      \
    X(DEVICE_FAILURE, "device reports a failure of its own")

#define X(id, says) CAUSE_##id,
enum cause { CAUSE_LIST(X) CAUSE_COUNT };
#undef X
const char *cause_says(enum cause cause);

/* One point in one frame. value and u are SI in the point's own basis (gauge stays gauge),
 * value rounded to the point's resolution; u is the reading's standard uncertainty. A stale
 * sample keeps its last value, so that it can be shown as old; a bad or missing one has value
 * 0. */
struct sample {
    double value, u;
    enum quality quality;
    enum cause cause;
    int64_t read_utc_ns; /* 0: never */
};

/* One tick: every point's sample at one time. */
struct frame {
    int64_t utc_ns;
    int count; /* plant's point_count */
    struct sample *sample;
};
int frame_init(struct frame *frame, const struct plant *plant, struct arena *arena) MUST_CHECK;
/* Age of a sample at the frame's time, s; 0 if never read. */
double frame_age_s(const struct frame *frame, int point);

/* ---- decoding (pure) ------------------------------------------------------------------------
 */

/* One or more registers in wire order as a number: the raw count or float, before scaling.
 * words holds register_words(ref) values (a coil or discrete input: 0 or 1). 0, or ERR_FORMAT
 * when the bytes are no finite number. */
int register_decode(const struct register_ref *ref, const uint16_t *words,
                    double *raw) MUST_CHECK;
/* The reverse, for the simulator and tests: rounds to the nearest count and holds it to the
 * range of the type. A bit of a register changes that bit alone, so words must hold the
 * register as it stands. No number is sent as such by a float, as 0 by an integer. */
void register_encode(const struct register_ref *ref, double raw, uint16_t *words);
/* A raw number of a point as SI in the point's basis: raw/span map, then unit. */
double point_from_raw(const struct point *point, double raw);
double point_to_raw(const struct point *point, double value_si);
/* The sample of a point from its decoded words: scaling, valid range, fault bit, resolution, u.
 * fault: 0 clear, 1 set, -1 could not be read (ignored if the point has none). */
struct sample point_sample(const struct point *point, const uint16_t *words, int fault,
                           int64_t read_utc_ns);

/* ---- read blocks ---------------------------------------------------------------------------
 */

/* One request that serves several points. */
struct block {
    enum register_table table;
    int address, count;
};
/* Fewest requests for the points (and fault bits) of a link that its gap and block size allow;
 * no value is torn across two requests. Returns the number of blocks written, at most max;
 * negative if there are more. */
int block_plan(const struct plant *plant, int link, struct block *blocks, int max);

/* ---- links ---------------------------------------------------------------------------------
 */

enum link_phase { LINK_CONNECTING, LINK_UP, LINK_DOWN };
const char *link_phase_word(enum link_phase phase);

struct link_state {
    enum link_phase phase;
    int64_t since_utc_ns;
    /* answers count exceptions too; late counts polls left out because the turn before them
     * took too long. */
    uint64_t requests, answers, exceptions, timeouts, reconnects, late;
    uint64_t bytes_sent, bytes_received;
    double latency_s, latency_worst_s; /* of the last request; worst since start */
    double jitter_s;                   /* running mean of lateness of a poll */
    double retry_s;                    /* time to the next try while down */
    char trouble[160];                 /* last trouble, printable; empty: none since up */
};

/* Polls every link of a plant. */
struct field;
/* Starts the threads. The plant must outlive the field. */
int field_open(const struct plant *plant, struct field **out, struct error *err) MUST_CHECK;
/* Readable when a link has something new; field_fill clears it. */
int field_wake_fd(const struct field *field);
/* True when every link has either finished its first poll or failed its first try. */
bool field_settled(const struct field *field);
/* Copies the newest samples into a frame of time utc_ns (ages are taken by the monotonic clock;
 * a sample older than its point's stale time becomes stale), and the links' states. */
void field_fill(struct field *field, int64_t utc_ns, struct frame *frame,
                struct link_state *links);
/* Polls the links of another plant from now on, in place of *field, which is closed. A link of
 * the same name to the same device (host, port, unit, timeout) keeps its connection, its counts
 * and the readings of points described alike; every other begins anew. The other links pause
 * for one timeout of the slowest at most. On an error *field goes on as it was. */
int field_reopen(struct field **field, const struct plant *plant, struct error *err) MUST_CHECK;
/* Stops and joins the threads within one timeout of the slowest link. NULL is allowed. */
void field_close(struct field *field);

/* Reads count registers (or bits) of a device once, from the reference's address on, to
 * commission a point. words must hold count; a bit is 0 or 1. Values of the reference's type
 * are not torn. */
int field_inspect(const char *host, int port, int unit_id, const struct register_ref *ref,
                  int count, double timeout_s, uint16_t *words, struct error *err) MUST_CHECK;

#endif
