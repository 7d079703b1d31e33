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
 *
 * Beyond the limit: value > high, value < low, a rate > high, a bit as named, a reading that is
 * stale, bad or missing (ALARM_IS_BAD). Back: inside the limit by the deadband. An alarm
 * becomes active in the first frame at which the value has been beyond the limit for on_delay
 * without a break, and returns in the first at which it has been back for off_delay; frame time
 * decides.
 *
 * Doubt may raise an alarm and never clears one. A reading, or a hall's oxygen, that is only
 * uncertain still makes its alarm active (a low reading is never hidden), but neither returns
 * it nor counts as normal. Any other derived quantity must be good. An input that is not usable
 * moves nothing. In all these cases the alarm is unknown and pending times are dropped.
 *
 * Rates are slopes of a least-squares line whose weights fade with ALARM_RATE_TIME_S (or five
 * frames if that is longer); they are unknown until the readings reach back half of that. A
 * rate's limit is SI per second; its deadband, a span, counts over that time, at most half of
 * the limit.
 */

enum { ALARM_RATE_TIME_S = 20 };

enum alarm_phase {
    ALARM_NORMAL,
    ALARM_ACTIVE,       /* active, unacknowledged */
    ALARM_ACKNOWLEDGED, /* active, acknowledged */
    ALARM_RETURNED      /* back to normal, unacknowledged */
};
const char *alarm_phase_word(enum alarm_phase phase);

struct alarm_state {
    enum alarm_phase phase;
    bool unknown;          /* its source is not good: that it is normal cannot be told */
    int64_t since_utc_ns;  /* of the present phase; never later than the last frame */
    int64_t active_utc_ns; /* when it last became active; 0 never */
    double value;          /* of the watched tag when it last became active, SI */
    char user[32];         /* who acknowledged the last activation; empty: nobody yet */
};

/* The watched quantity of one alarm at this frame, SI in the basis of the alarm's limits. */
struct alarm_input {
    struct quantity quantity;
};

struct alarm_set;
/* All memory is taken here. plant must outlive the set. ERR_CONFIG with the place of an alarm
 * that could never act or never return, ERR_MEMORY. */
int alarm_set_create(const struct plant *plant, struct alarm_set **out,
                     struct error *err) MUST_CHECK;
void alarm_set_free(struct alarm_set *set);
/* One frame. input has one entry per alarm of the plant. A time before the last frame's
 * restarts pending times and rates. Entries that find no room in the journal wait for the next
 * step in order; 64 places stay free for the banners. */
void alarm_step(struct alarm_set *set, int64_t utc_ns, const struct alarm_input *input,
                struct journal_step *journal);
/* An acknowledgement by a user. 0, or ERR_ARGUMENT with the reason (nothing to acknowledge). */
int alarm_acknowledge(struct alarm_set *set, int alarm, int64_t utc_ns, const char *user,
                      struct journal_step *journal, struct error *err);
/* NULL for an index that is none of the plant's alarms. */
const struct alarm_state *alarm_state(const struct alarm_set *set, int alarm);
/* Active or returned, and not acknowledged. */
int alarm_unacknowledged(const struct alarm_set *set);
/* Order for lists: unacknowledged before acknowledged before normal but unknown before normal,
 * then priority, then newest, then the plant file's order. Writes indices of all alarms into
 * order. */
void alarm_order(const struct alarm_set *set, int *order);
/* What an alarm waits for, in the unit of the watched tag and the pressure basis of the limit:
 * "above 14 kPa(g)", "outside 10 .. 14 kPa", "falling faster than 2 kPa per min", "on". */
void alarm_limit_text(char *dst, size_t size, const struct plant *plant,
                      const struct alarm *alarm);

/* ---- banners -------------------------------------------------------------------------------
 */

enum banner_level { BANNER_DANGER, BANNER_CAUTION, BANNER_NOTE };
const char *banner_level_word(enum banner_level level);

enum banner_cause {
    BANNER_OXYGEN_LOW,     /* a reading below an action level */
    BANNER_OXYGEN_DOUBT,   /* was below, and a monitor has been lost since */
    BANNER_OXYGEN_UNKNOWN, /* no monitor of the hall is usable */
    BANNER_MONITOR_LOST,   /* some are */
    BANNER_NO_MONITOR,     /* the plant file gives the hall none */
    BANNER_ALARM
};

/* A standing safety statement. */
struct banner {
    enum banner_level level;
    int64_t since_utc_ns;
    char subject[64]; /* hall, link or alarm it speaks of */
    char text[320];   /* in the site's own words where it gave them; printable */
    enum banner_cause cause;
    int index;        /* of the hall or alarm */
    int action_level; /* of the hall: the lowest one passed, or -1 */
};

/* The state of one hall, as the banners need it. */
struct hall_safety {
    bool known;           /* every monitor of the hall good now */
    bool any_usable;      /* at least one monitor usable */
    double oxygen_lowest; /* mole fraction, of the usable ones */
    double u_oxygen_lowest;
    int lowest_point; /* tag of that monitor, or -1 */
    unsigned lost;    /* bit i: the hall's oxygen.at[i] is not good now */
};

enum { BANNER_MAX = 32 };
struct banner_list {
    int count; /* most serious first */
    int more;  /* stand as well, less serious, beyond the room of the list */
    struct banner at[BANNER_MAX];
};
/* Composes the standing banners: oxygen below an action level (never softened by uncertainty:
 * the reading decides), oxygen unknown, alarms with banner = yes that are active or unknown.
 * An unknown alarm on a hall's oxygen has no banner of its own where the hall's speaks of it.
 * A banner stands as long as its cause; acknowledging never clears it. Oxygen counts as back at
 * 0.1 % above the level, and only while every monitor of the hall is good. Those that stood
 * before keep their since. hall has one entry per hall. Changes are written to the journal as
 * shown and cleared. Start with a zeroed list. */
void banner_step(struct banner_list *list, const struct plant *plant,
                 const struct alarm_set *set, const struct hall_safety *hall, int64_t utc_ns,
                 struct journal_step *journal);
/* The line that stands on every screen and report: "ADVISORY ONLY. <site's rules, or plain
 * words that defer to site rules, local codes and licensed practice> and fixed hall alarms
 * prevail." */
void banner_advisory(char *dst, size_t size, const struct plant *plant);

#endif
