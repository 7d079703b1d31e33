/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * engine: frame -> derived quantities, ledgers, findings, alarms, banners. A pure,
 * deterministic step: no clock, no file, no socket, no allocation. The same frames and commands
 * give bit-equal results live, in replay and in tests.
 */
#ifndef ULLAGE_ENGINE_H
#define ULLAGE_ENGINE_H

#include <stdbool.h>
#include <stdint.h>

#include "ullage/alarm.h"
#include "ullage/base.h"
#include "ullage/field.h"
#include "ullage/plant.h"

/* A derived quantity now. reason is empty when it is good. */
struct derived_value {
    struct quantity quantity; /* SI */
    char reason[120]; /* "filling: 7 min to go", "LT-101 is stale", "not computed yet" */
};

/* ---- ledgers -------------------------------------------------------------------------------
 */

enum ledger_kind { LEDGER_HEAT, LEDGER_MASS, LEDGER_PURITY, LEDGER_AIR };
const char *ledger_kind_word(enum ledger_kind kind); /* "HEAT" ... */

enum ledger_word {
    LEDGER_QUIET,   /* |unexplained| <= 2 u */
    LEDGER_WATCH,   /* beyond 2 u */
    LEDGER_FINDING, /* beyond 5 u */
    LEDGER_FILLING, /* window not long enough yet */
    LEDGER_BLIND,   /* an input is lost */
    LEDGER_ABSENT /* the plant file does not describe enough, or not computed by this version */
};
const char *ledger_word_text(enum ledger_word word);

/* in - out - stored = unexplained, SI (W, kg/s). */
struct ledger {
    enum ledger_kind kind;
    enum thing_kind thing_kind; /* vessel or hall */
    int thing;
    struct quantity in, out, stored, unexplained;
    enum ledger_word word;
    double window_s; /* how long the balance reaches back now */
    char reason[160];
};

/* ---- why: the uncertainty budget of a derived quantity
 * --------------------------------------- */

enum { BUDGET_MAX = 24 };
struct budget_row {
    int tag;       /* a point, or -1 for a term of the method */
    char says[48]; /* the term's name when tag is -1 */
    double u;      /* its contribution |c| u, SI of the derived quantity */
};
struct budget {
    int count; /* largest first */
    struct budget_row row[BUDGET_MAX];
};

/* ---- results -------------------------------------------------------------------------------
 */

enum { LEDGER_MAX = 128 };
struct results {
    int64_t utc_ns;
    int derived_count;
    struct derived_value *derived; /* plant's derived_count, in its order */
    int ledger_count;
    struct ledger ledger[LEDGER_MAX]; /* heat, mass, purity per vessel, then air per hall */
    int unacknowledged;
    struct banner_list banners;
    struct journal_step journal; /* what this step wrote */
};

/* What an operator did; applied at the frame it is handed in with, so that a replay can do it
 * again. */
enum command_kind { COMMAND_ACKNOWLEDGE, COMMAND_ACKNOWLEDGE_ALL, COMMAND_NOTE };
struct command {
    enum command_kind kind;
    int alarm; /* COMMAND_ACKNOWLEDGE; _ALL takes those of priority > this number */
    char user[32];
    char text[160]; /* COMMAND_NOTE */
};

struct engine;
int engine_create(const struct plant *plant, struct engine **out, struct error *err) MUST_CHECK;
void engine_free(struct engine *engine);
/* One frame; its time must be later than the last one's (an earlier or equal one is counted,
 * written to the journal as a clock step, and starts the windows anew). The results stay valid
 * to the next step. */
const struct results *engine_step(struct engine *engine, const struct frame *frame,
                                  const struct command *command, int command_count);
const struct results *engine_results(const struct engine *engine);
const struct alarm_set *engine_alarms(const struct engine *engine);
/* A tag of the last frame, SI: points as read, derived as computed. reason (may be NULL) is set
 * to an empty text or why it is not good. */
struct quantity engine_tag(const struct engine *engine, int tag, const char **reason);
/* Absolute pressure of a reference at the last frame, with the barometer added where gauge. */
struct quantity engine_pressure(const struct engine *engine, const struct ref *ref);
/* The uncertainty budget of a derived tag at the last step; count 0 where there is none. */
void engine_budget(const struct engine *engine, int tag, struct budget *out);

/* ---- trends --------------------------------------------------------------------------------
 */

/* Recent history of a tag in equal columns, newest last: lowest and highest good value of each
 * column, set false where there was none. Fed by the step, kept for four hours at least. */
struct trend_column {
    double low, high;
    bool set;
};
void engine_trend(const struct engine *engine, int tag, double span_s,
                  struct trend_column *column, int columns);

#endif
