/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * alarm: the life cycle of alarms, the journal's entries and the safety banners. It reads no
 * clock: time comes with each step. Terms: ANSI/ISA-18.2, IEC 62682.
 */
#ifndef ULLAGE_ALARM_H
#define ULLAGE_ALARM_H

#include <stdbool.h>
#include <stdint.h>

#include "ullage/base.h"
#include "ullage/plant.h"

/* ---- journal entries ------------------------------------------------------------------------
 */

enum journal_kind {
    JOURNAL_ALARM,
    JOURNAL_FINDING,
    JOURNAL_BANNER,
    JOURNAL_NOTE,
    JOURNAL_LINK,
    JOURNAL_CONFIG,
    JOURNAL_PROGRAM,
    JOURNAL_CLOCK
};
const char *journal_kind_word(enum journal_kind kind);

struct journal_entry {
    int64_t utc_ns;
    enum journal_kind kind;
    int priority;     /* alarms; else 0 */
    char subject[64]; /* an alarm's section name, a link's name, ... */
    char state[24];   /* "active", "acknowledged", "returned", "normal", "unknown", "up", ... */
    char user[32];
    char text[200];
};

/* What a step wrote, oldest first. What does not fit is counted, never silently lost. */
enum { JOURNAL_STEP_MAX = 256 };
struct journal_step {
    int count;
    int dropped;
    struct journal_entry at[JOURNAL_STEP_MAX];
};
/* Adds an entry; text and names are made printable. */
void journal_add(struct journal_step *step, int64_t utc_ns, enum journal_kind kind,
                 int priority, const char *subject, const char *state, const char *user,
                 const char *text);

/* ---- alarms --------------------------------------------------------------------------------
 */

enum alarm_phase {
    ALARM_NORMAL,
    ALARM_ACTIVE,       /* active, unacknowledged */
    ALARM_ACKNOWLEDGED, /* active, acknowledged */
    ALARM_RETURNED      /* back to normal, unacknowledged */
};
const char *alarm_phase_word(enum alarm_phase phase);

struct alarm_state {
    enum alarm_phase phase;
    bool unknown;          /* its source is not good: neither active nor normal can be told */
    int64_t since_utc_ns;  /* of the present phase */
    int64_t active_utc_ns; /* when it last became active; 0 never */
    double value;          /* of the watched tag when it last became active, SI */
    char user[32];         /* who acknowledged */
    /* for the step only: */
    int64_t pending_utc_ns; /* since when the condition has stood (or been gone); 0: not */
    bool pending_on;
    double last_value;
    int64_t last_utc_ns;
};

/* The watched quantity of one alarm at this frame, SI in the basis of the alarm's limits. */
struct alarm_input {
    struct quantity quantity;
};

struct alarm_set;
int alarm_set_create(const struct plant *plant, struct alarm_set **out,
                     struct error *err) MUST_CHECK;
void alarm_set_free(struct alarm_set *set);
/* One frame. input has one entry per alarm of the plant. An input that is not usable makes its
 * alarm unknown and moves no phase (except ALARM_IS_BAD, whose business it is). */
void alarm_step(struct alarm_set *set, int64_t utc_ns, const struct alarm_input *input,
                struct journal_step *journal);
/* An acknowledgement by a user. 0, or ERR_ARGUMENT with the reason (nothing to acknowledge). */
int alarm_acknowledge(struct alarm_set *set, int alarm, int64_t utc_ns, const char *user,
                      struct journal_step *journal, struct error *err);
const struct alarm_state *alarm_state(const struct alarm_set *set, int alarm);
/* Active or returned, and not acknowledged. */
int alarm_unacknowledged(const struct alarm_set *set);
/* Order for lists: unacknowledged before acknowledged before normal, then priority, then
 * newest. Writes indices of all alarms into order. */
void alarm_order(const struct alarm_set *set, int *order);

/* ---- banners -------------------------------------------------------------------------------
 */

enum banner_level { BANNER_DANGER, BANNER_CAUTION, BANNER_NOTE };
const char *banner_level_word(enum banner_level level);

/* A standing safety statement. */
struct banner {
    enum banner_level level;
    int64_t since_utc_ns;
    char subject[64]; /* hall, link or alarm it speaks of */
    char text[320];   /* in the site's own words where it gave them */
};

/* The state of one hall, as the banners need it. */
struct hall_safety {
    bool known;           /* every monitor of the hall good now */
    bool any_usable;      /* at least one monitor usable */
    double oxygen_lowest; /* mole fraction, of the usable ones */
    double u_oxygen_lowest;
    int lowest_point; /* tag of that monitor, or -1 */
};

enum { BANNER_MAX = 32 };
struct banner_list {
    int count; /* most serious first */
    struct banner at[BANNER_MAX];
};
/* Composes the standing banners: oxygen below an action level (never softened by uncertainty:
 * the reading decides), oxygen unknown, alarms with banner = yes that are active or unknown.
 * Those that stood before keep their since. hall has one entry per hall. Changes are written to
 * the journal as shown and cleared. */
void banner_step(struct banner_list *list, const struct plant *plant,
                 const struct alarm_set *set, const struct hall_safety *hall, int64_t utc_ns,
                 struct journal_step *journal);
/* The line that stands on every screen and report: "ADVISORY ONLY. <site's rules, or plain
 * words that defer to site rules, local codes and licensed practice> and fixed hall alarms
 * prevail." */
void banner_advisory(char *dst, size_t size, const struct plant *plant);

#endif
