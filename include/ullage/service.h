/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * service: the collector loop, and what a terminal is given to show. One frame per tick by an
 * absolute schedule on the monotonic clock: take the links' slots, make the frame, step the
 * engine, publish the view.
 */
#ifndef ULLAGE_SERVICE_H
#define ULLAGE_SERVICE_H

#include <stdbool.h>
#include <stdint.h>

#include "ullage/base.h"
#include "ullage/engine.h"
#include "ullage/field.h"
#include "ullage/plant.h"

/* ---- view: all that a picture is drawn from
 * -------------------------------------------------- */

enum view_mode { VIEW_LIVE, VIEW_DEMO, VIEW_REPLAY };
const char *view_mode_word(enum view_mode mode);

enum { VIEW_JOURNAL_MAX = 500, VIEW_LOG_MAX = 100 };

/* Const for whoever draws; valid until the next tick. */
struct view {
    const struct plant *plant;
    enum view_mode mode;
    int64_t utc_ns; /* the clock of the title: of the frame */
    bool ready;     /* a first whole frame is there */
    bool stale;     /* the source has stopped: nothing here is live */
    double stale_s; /* for how long */
    const struct frame *frame;
    const struct results *results;
    const struct engine *engine; /* for budgets and trends; NULL in a picture without one */
    const struct alarm_set *alarms;
    const struct link_state *link;
    int links_up;
    int journal_count; /* newest last */
    const struct journal_entry *journal;
    uint64_t journal_total; /* entries since the start, also those that are no longer here */
};

/* ---- collector ------------------------------------------------------------------------------
 */

struct collector;
struct collector_options {
    enum view_mode mode;
};
/* Makes the engine and the frame of a plant, which must outlive it. Nothing is polled yet. */
int collector_open(const struct plant *plant, const struct collector_options *options,
                   struct collector **out, struct error *err) MUST_CHECK;
void collector_close(struct collector *collector);
/* Hands the engine a frame made elsewhere (the demo's past); before collector_start only. */
void collector_feed(struct collector *collector, const struct frame *frame);
/* Opens the links and starts the schedule. */
int collector_start(struct collector *collector, struct error *err) MUST_CHECK;
/* Becomes readable when collector_tick has something to do; -1 before the start. */
int collector_fd(const struct collector *collector);
/* Does what is due; true when a new frame has been made. */
bool collector_tick(struct collector *collector);
const struct view *collector_view(const struct collector *collector);
/* A command of an operator, applied with the next frame. 0, or ERR_ARGUMENT when the queue is
 * full. */
int collector_command(struct collector *collector, const struct command *command,
                      struct error *err) MUST_CHECK;
/* Goes on with another plant, which must outlive the collector; the old one is then the
 * caller's to free. Links that still mean the same device keep their connection; windows,
 * trends and alarms begin anew, since they may mean other things. The next frame is made at
 * once. On an error all is as it was. */
int collector_reload(struct collector *collector, const struct plant *plant,
                     struct error *err) MUST_CHECK;
/* Writes an entry of the program itself (JOURNAL_CONFIG, JOURNAL_PROGRAM) into the journal, at
 * the time of the last frame. */
void collector_note(struct collector *collector, enum journal_kind kind, const char *subject,
                    const char *state, const char *text);
/* Frames made, and ticks of the schedule that passed without one. */
void collector_counts(const struct collector *collector, uint64_t *frames, uint64_t *missed);

/* ---- signals as events
 * ----------------------------------------------------------------------- */

/* Blocks SIGINT, SIGTERM and SIGHUP in the calling thread (do it before any other is started)
 * and gives a descriptor that becomes readable when one arrives. Negative code on failure. */
int signals_open(struct error *err) MUST_CHECK;
/* The signal that arrived, 0 if none waits. */
int signals_take(int fd);

#endif
