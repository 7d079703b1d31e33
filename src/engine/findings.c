/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Findings: a ledger whose unexplained part stays beyond five u for a minute opens one, one
 * that stays within two u for a minute closes it. The sentence names every explanation that
 * fits, also that an instrument lies; a finding is advice and never an alarm. A ledger that is
 * blind or filling moves none.
 */
#include "internal.h"

#include <math.h>
#include <stdio.h>

static const double HOLD_S = 60;

/* Adds "FT-110, LT-101" of the inputs that a vessel's balance rests on. */
static void name_input(char *text, size_t size, const struct engine *engine,
                       const struct ref *ref)
{
    if (ref->kind != REF_TAG)
        return;
    size_t used = 0;
    while (text[used] != '\0')
        used++;
    if (used < size)
        text_format(text + used, size - used, "%s%s", used > 0 ? ", " : "",
                    plant_tag_name(engine->plant, ref->tag));
}

static void name_flows(char *text, size_t size, const struct engine *engine,
                       const struct vessel_state *state)
{
    text[0] = '\0';
    for (int i = 0; i < state->stream_count; i++)
        name_input(text, size, engine, &engine->plant->stream[state->stream[i].stream].flow);
}

/* A hall whose air shows a release now, or NULL. */
static const char *hall_with_release(const struct engine *engine)
{
    for (int i = 0; i < engine->plant->hall_count; i++) {
        const struct ledger *air = &engine->results.ledger[3 * engine->plant->vessel_count + i];
        if ((air->word == LEDGER_WATCH || air->word == LEDGER_FINDING) &&
            air->unexplained.value > 0)
            return engine->plant->hall[i].name;
    }
    return NULL;
}

static void say_heat(const struct engine *engine, const struct ledger *ledger, char *text,
                     size_t size)
{
    const struct vessel_state *state = &engine->vessel[ledger->thing];
    char flows[80];
    name_flows(flows, sizeof(flows), engine, state);
    double excess = -ledger->unexplained.value;
    text_format(text, size,
                "heat load %.0f W %s than budget (u %.0f W): %s, or a meter lies: %s",
                fabs(excess), excess > 0 ? "more" : "less", ledger->unexplained.u,
                excess > 0 ? "worse insulation, lost vacuum"
                           : "vapour leaves unmetered, budget too high",
                flows[0] != '\0' ? flows : "see the inputs");
}

static void say_mass(const struct engine *engine, const struct ledger *ledger, char *text,
                     size_t size)
{
    const struct vessel_state *state = &engine->vessel[ledger->thing];
    char level[60] = "", flows[60];
    name_input(level, sizeof(level), engine, &state->vessel->level);
    name_flows(flows, sizeof(flows), engine, state);
    const char *hall = ledger->unexplained.value > 0 ? hall_with_release(engine) : NULL;
    text_format(
        text, size, "%.3g g/s %s (u %.2g): %s%s%s, gauge %s drifts, or a meter lies: %s",
        1000 * fabs(ledger->unexplained.value),
        ledger->unexplained.value > 0 ? "lost" : "gained", 1000 * ledger->unexplained.u,
        ledger->unexplained.value > 0 ? "liquid or vapour escapes" : "an unmetered flow enters",
        hall != NULL ? "; air shows a release in " : "", hall != NULL ? hall : "",
        level[0] != '\0' ? level : "of level", flows[0] != '\0' ? flows : "none is described");
}

static void say_air(const struct ledger *ledger, char *text, size_t size)
{
    if (ledger->unexplained.value > 0)
        text_format(text, size,
                    "%.3g g/s of gas released into the hall (u %.2g), or monitors "
                    "read low, or the ventilation reads high",
                    1000 * ledger->unexplained.value, 1000 * ledger->unexplained.u);
    else
        text_format(text, size,
                    "more oxygen than fresh air brings: monitors read high, or "
                    "oxygen enters the hall");
}

static void tell(struct engine *engine, const struct ledger *ledger, bool opened)
{
    const struct plant *plant = engine->plant;
    bool vessel = ledger->thing_kind == THING_VESSEL;
    char text[200] = "", subject[64];
    text_format(subject, sizeof(subject), "%s %s", ledger_kind_word(ledger->kind),
                vessel ? plant->vessel[ledger->thing].name : plant->hall[ledger->thing].name);
    if (!opened)
        text_copy(text, sizeof(text), "within its uncertainty again");
    else if (ledger->kind == LEDGER_HEAT)
        say_heat(engine, ledger, text, sizeof(text));
    else if (ledger->kind == LEDGER_MASS)
        say_mass(engine, ledger, text, sizeof(text));
    else
        say_air(ledger, text, sizeof(text));
    journal_add(&engine->results.journal, engine->utc_ns, JOURNAL_FINDING, 0, subject,
                opened ? "opened" : "closed", "", text);
}

void findings_step(struct engine *engine)
{
    for (int i = 0; i < engine->results.ledger_count; i++) {
        const struct ledger *ledger = &engine->results.ledger[i];
        struct finding *finding = &engine->finding[i];
        bool good = ledger->unexplained.quality == QUALITY_GOOD;
        bool leans = good && (finding->open ? ledger->word == LEDGER_QUIET
                                            : ledger->word == LEDGER_FINDING);
        if (!leans || finding->since_utc_ns > engine->utc_ns) {
            finding->since_utc_ns = 0;
        } else if (finding->since_utc_ns == 0) {
            finding->since_utc_ns = engine->utc_ns;
        } else if (time_ns_to_s(engine->utc_ns - finding->since_utc_ns) >= HOLD_S) {
            finding->open = !finding->open;
            finding->since_utc_ns = 0;
            tell(engine, ledger, finding->open);
        }
    }
}
