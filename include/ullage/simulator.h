/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * simulator: a dynamic model of the described plant behind a Modbus/TCP server. Its physics is
 * written apart from balance/ (it shares fluid/ only), so that it can prove balance/ wrong. For
 * the demo, for tests and for training; nothing but its verbs and tests includes it.
 */
#ifndef ULLAGE_SIMULATOR_H
#define ULLAGE_SIMULATOR_H

#include <stdint.h>
#include <stdio.h>

#include "ullage/base.h"
#include "ullage/field.h"
#include "ullage/plant.h"

/* A scripted upset; starts at start_s of simulated time. */
struct upset {
    const char *name; /* "hall-release", "cooling-lost", ... */
    const char *says;
};
const struct upset *upset_list(size_t *count);
const struct upset *upset_find(const char *name); /* or NULL */

struct simulator_options {
    uint64_t seed;
    const struct upset *upset; /* NULL: a quiet plant */
    double upset_start_s;      /* simulated time at which it begins */
    double heat_leak_w;        /* of every vessel; 0: the vessel's budget */
};

struct simulator;
int simulator_create(const struct plant *plant, const struct simulator_options *options,
                     struct simulator **out, struct error *err) MUST_CHECK;
void simulator_free(struct simulator *simulator);
/* Moves the model on by span_s (0 < span_s <= 3600) and takes new noisy readings. */
int simulator_step(struct simulator *simulator, double span_s, struct error *err) MUST_CHECK;
double simulator_time_s(const struct simulator *simulator);
/* The readings now as a frame, through the same registers and decoding as over the wire. */
void simulator_frame(const struct simulator *simulator, int64_t utc_ns, struct frame *frame);
/* A line of the model's truth as CSV: header, then one line per call; SI. Columns:
 * time, then THING.quantity of what it knows (names of interface.md, e.g. store.heat_load). */
void simulator_truth_header(const struct simulator *simulator, FILE *out);
void simulator_truth(const struct simulator *simulator, int64_t utc_ns, FILE *out);
/* The true value of a derived quantity. 0 or ERR_UNSUPPORTED. */
int simulator_true_value(const struct simulator *simulator, int tag, double *out);

/* The Modbus/TCP server: unit id chooses the device. Serves on listen_host:listen_port (0: a
 * free port, told by simulator_server_port) in its own thread while the model runs at pace
 * times real time. Not to be mixed with simulator_step by the caller until stopped. */
struct simulator_server;
int simulator_serve(struct simulator *simulator, const char *listen_host, int listen_port,
                    double pace, FILE *truth, struct simulator_server **out,
                    struct error *err) MUST_CHECK;
int simulator_server_port(const struct simulator_server *server);
/* Starts an upset now (of the demo's key or a later command). */
void simulator_server_upset(struct simulator_server *server, const struct upset *upset);
void simulator_server_stop(struct simulator_server *server);

#endif
