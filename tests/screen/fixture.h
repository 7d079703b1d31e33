/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * A view made by hand: a plant from a file, and fixed numbers where the engine would put its
 * own, so that a picture changes only when drawing does. Alarms are those of the alarm room.
 */
#ifndef ULLAGE_TEST_SCREEN_FIXTURE_H
#define ULLAGE_TEST_SCREEN_FIXTURE_H

#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "ullage/screen.h"

struct fixture {
    struct plant *plant;
    struct problems problems;
    struct arena *arena;
    struct alarm_set *alarms;
    struct frame frame;
    struct results results;
    struct link_state *link;
    struct journal_entry journal[4];
    struct view view;
};

static inline int fixture_tag(const struct fixture *fixture, const char *name)
{
    int tag = plant_tag_find(fixture->plant, name);
    if (tag < 0)
        fail_msg("the plant of the fixture has no %s", name);
    return tag;
}

/* A good point, read a second ago; value and u in its own unit. */
static inline void fixture_point(struct fixture *fixture, const char *name, double value,
                                 double u)
{
    int tag = fixture_tag(fixture, name);
    const struct unit *unit = plant_tag_unit(fixture->plant, tag);
    fixture->frame.sample[tag] = (struct sample){
        .value = unit_to_si(unit, value),
        .u = unit_span_to_si(unit, u),
        .quality = QUALITY_GOOD,
        .read_utc_ns = fixture->frame.utc_ns - NS_PER_S,
    };
}

static inline void fixture_quality(struct fixture *fixture, const char *name,
                                   enum quality quality, enum cause cause, double age_s)
{
    struct sample *sample = &fixture->frame.sample[fixture_tag(fixture, name)];
    sample->quality = quality;
    sample->cause = cause;
    sample->read_utc_ns = fixture->frame.utc_ns - time_s_to_ns(age_s);
    if (quality == QUALITY_BAD || quality == QUALITY_MISSING)
        sample->value = sample->u = 0;
}

static inline struct derived_value *fixture_derived(struct fixture *fixture, const char *name)
{
    return &fixture->results.derived[fixture_tag(fixture, name) - fixture->plant->point_count];
}

/* A good derived quantity, SI. */
static inline void fixture_set(struct fixture *fixture, const char *name, double value,
                               double u)
{
    *fixture_derived(fixture, name) =
        (struct derived_value){.quantity = quantity_good(value, u), .reason = ""};
}

static inline void fixture_lose(struct fixture *fixture, const char *name, enum quality quality,
                                const char *reason)
{
    struct derived_value *derived = fixture_derived(fixture, name);
    derived->quantity.quality = quality;
    if (quality == QUALITY_BAD || quality == QUALITY_MISSING)
        derived->quantity = quantity_none(quality);
    text_copy(derived->reason, sizeof(derived->reason), reason);
}

static inline struct ledger *fixture_ledger(struct fixture *fixture, enum ledger_kind kind,
                                            int thing)
{
    for (int i = 0; i < fixture->results.ledger_count; i++) {
        struct ledger *ledger = &fixture->results.ledger[i];
        if (ledger->kind == kind && ledger->thing == thing)
            return ledger;
    }
    fail_msg("the fixture has no such ledger");
    return NULL;
}

/* in - out - stored = unexplained, SI; the word follows from the numbers. */
static inline void fixture_sum(struct fixture *fixture, enum ledger_kind kind, int thing,
                               double in, double out, double stored, double u)
{
    struct ledger *ledger = fixture_ledger(fixture, kind, thing);
    double rest = in - out - stored, size = rest < 0 ? -rest : rest;
    ledger->in = quantity_good(in, u);
    ledger->out = quantity_good(out, u);
    ledger->stored = quantity_good(stored, u);
    ledger->unexplained = quantity_good(rest, u);
    ledger->word = size > 5 * u ? LEDGER_FINDING : size > 2 * u ? LEDGER_WATCH : LEDGER_QUIET;
    ledger->window_s = 7200;
    ledger->reason[0] = '\0';
}

static inline void fixture_no_sum(struct fixture *fixture, enum ledger_kind kind, int thing,
                                  enum ledger_word word, const char *reason)
{
    struct ledger *ledger = fixture_ledger(fixture, kind, thing);
    ledger->in = ledger->out = ledger->stored = ledger->unexplained =
        quantity_none(word == LEDGER_BLIND ? QUALITY_BAD : QUALITY_MISSING);
    ledger->word = word;
    text_copy(ledger->reason, sizeof(ledger->reason), reason);
}

static inline void fixture_banner(struct fixture *fixture, enum banner_level level,
                                  const char *subject, const char *text)
{
    struct banner *banner = &fixture->results.banners.at[fixture->results.banners.count++];
    banner->level = level;
    banner->since_utc_ns = fixture->frame.utc_ns - 240 * NS_PER_S;
    text_copy(banner->subject, sizeof(banner->subject), subject);
    text_copy(banner->text, sizeof(banner->text), text);
}

/* What the alarms see in a frame of age_s ago. */
static inline void fixture_alarms(struct fixture *fixture, double age_s)
{
    struct alarm_input input[64];
    struct journal_step *journal = calloc(1, sizeof(*journal));
    assert_non_null(journal);
    assert_true(fixture->plant->alarm_count <= 64);
    for (int i = 0; i < fixture->plant->alarm_count; i++) {
        int tag = fixture->plant->alarm[i].watch;
        if (plant_tag_is_point(fixture->plant, tag)) {
            const struct sample *sample = &fixture->frame.sample[tag];
            input[i].quantity = (struct quantity){sample->value, sample->u, sample->quality};
        } else {
            input[i].quantity =
                fixture->results.derived[tag - fixture->plant->point_count].quantity;
        }
    }
    alarm_step(fixture->alarms, fixture->frame.utc_ns - time_s_to_ns(age_s), input, journal);
    free(journal);
}

static inline void fixture_link(struct fixture *fixture, const char *name,
                                enum link_phase phase, const char *trouble)
{
    for (int i = 0; i < fixture->plant->link_count; i++) {
        if (strcmp(fixture->plant->link[i].name, name) != 0)
            continue;
        fixture->link[i].phase = phase;
        fixture->link[i].retry_s = 8;
        fixture->link[i].since_utc_ns = fixture->frame.utc_ns - 95 * NS_PER_S;
        text_copy(fixture->link[i].trouble, sizeof(fixture->link[i].trouble), trouble);
    }
    fixture->view.links_up = 0;
    for (int i = 0; i < fixture->plant->link_count; i++)
        fixture->view.links_up += fixture->link[i].phase == LINK_UP;
}

/* A plant with nothing known of it yet. */
static inline struct fixture *fixture_open(const char *path)
{
    struct fixture *fixture = calloc(1, sizeof(*fixture));
    assert_non_null(fixture);
    if (plant_read(path, &fixture->plant, &fixture->problems) != 0)
        fail_msg("%s:%d: %s", fixture->problems.at[0].file, fixture->problems.at[0].line,
                 fixture->problems.at[0].text);
    const struct plant *plant = fixture->plant;
    fixture->arena = arena_create();
    assert_non_null(fixture->arena);
    assert_int_equal(frame_init(&fixture->frame, plant, fixture->arena), 0);
    assert_int_equal(time_parse("2026-11-30T23:59:07Z", &fixture->frame.utc_ns, NULL), 0);
    assert_int_equal(alarm_set_create(plant, &fixture->alarms, NULL), 0);
    struct results *results = &fixture->results;
    results->utc_ns = fixture->frame.utc_ns;
    results->derived_count = plant->derived_count;
    results->derived =
        arena_take(fixture->arena, (size_t)plant->derived_count + 1, sizeof(*results->derived));
    fixture->link =
        arena_take(fixture->arena, (size_t)plant->link_count + 1, sizeof(*fixture->link));
    for (int i = 0; i < plant->derived_count; i++)
        results->derived[i].quantity.quality = QUALITY_MISSING;
    for (int i = 0; i < plant->vessel_count; i++)
        for (int kind = LEDGER_HEAT; kind <= LEDGER_PURITY; kind++)
            results->ledger[results->ledger_count++] =
                (struct ledger){.kind = (enum ledger_kind)kind,
                                .thing_kind = THING_VESSEL,
                                .thing = i,
                                .word = LEDGER_ABSENT};
    for (int i = 0; i < plant->hall_count; i++)
        results->ledger[results->ledger_count++] = (struct ledger){
            .kind = LEDGER_AIR, .thing_kind = THING_HALL, .thing = i, .word = LEDGER_ABSENT};
    for (int i = 0; i < plant->link_count; i++)
        fixture->link[i] = (struct link_state){
            .phase = LINK_UP,
            .since_utc_ns = fixture->frame.utc_ns - 86400 * NS_PER_S,
            .requests = 172814,
            .answers = 172812,
            .timeouts = 2,
            .bytes_sent = 2073768,
            .bytes_received = 9850284,
            .latency_s = 0.0021,
            .latency_worst_s = 0.0874,
            .jitter_s = 0.0003,
        };
    fixture->view = (struct view){
        .plant = plant,
        .mode = VIEW_LIVE,
        .utc_ns = fixture->frame.utc_ns,
        .ready = true,
        .frame = &fixture->frame,
        .results = results,
        .alarms = fixture->alarms,
        .link = fixture->link,
        .links_up = plant->link_count,
        .journal = fixture->journal,
    };
    return fixture;
}

static inline void fixture_close(struct fixture *fixture)
{
    alarm_set_free(fixture->alarms);
    plant_free(fixture->plant);
    arena_free(fixture->arena);
    free(fixture);
}

/* ---- situations that an operator meets
 * ---------------------------------------------------------- */

static inline void fixture_quiet(struct fixture *fixture)
{
    fixture_point(fixture, "PT-900", 104.81, 0.03);
    fixture_point(fixture, "PT-101", 12.41, 0.05);
    fixture_point(fixture, "LT-101", 77.93, 0.05);
    fixture_point(fixture, "TT-101", 88.32, 0.03);
    fixture_point(fixture, "FT-110", 33.08, 0.17);
    fixture_point(fixture, "FT-112", 32.96, 0.17);
    fixture_point(fixture, "FT-201", 1.214, 0.0036);
    fixture_point(fixture, "FT-301", 24.7, 0.12);
    fixture_point(fixture, "PT-301", 251.4, 0.3);
    fixture_point(fixture, "TT-301", 85.1, 0.1);
    fixture_point(fixture, "PT-302", 240.2, 0.3);
    fixture_point(fixture, "TT-302", 87.6, 0.3);
    fixture_point(fixture, "AT-201", 38.2, 2.8);
    fixture_point(fixture, "AT-202", 2.1, 1.0);
    fixture_point(fixture, "AT-401", 20.91, 0.1);
    fixture_point(fixture, "AT-402", 20.88, 0.1);
    fixture_point(fixture, "AT-403", 20.93, 0.1);
    fixture_point(fixture, "FT-401", 2.41, 0.05);
    fixture_point(fixture, "XS-401", 1, 0);
    fixture_point(fixture, "XS-402", 0, 0);
    fixture_set(fixture, "store.heat_load", 5390, 130);
    fixture_set(fixture, "store.heat_excess", 190, 130);
    fixture_set(fixture, "store.hold_time", 111600, 7200);
    fixture_set(fixture, "store.liquid_mass", 455320, 290);
    fixture_set(fixture, "store.fill", 0.7824, 0.0005);
    fixture_set(fixture, "store.boil_off", 0.0331, 0.0002);
    fixture_set(fixture, "store.boil_off_daily", 0.00628 / 86400, 0.00004 / 86400);
    fixture_set(fixture, "store.mass_unexplained", 0.0002, 0.0009);
    fixture_set(fixture, "reliquefier.duty", 5310, 100);
    fixture_set(fixture, "reliquefier.margin", 3690, 100);
    fixture_set(fixture, "chamber.lifetime", 7.9e-3, 1.8e-3);
    fixture_set(fixture, "deoxo.efficiency", 0.945, 0.026);
    fixture_set(fixture, "deoxo.loading", 0.412, 0.021);
    fixture_set(fixture, "cold-hall.oxygen_lowest", 0.2088, 0.001);
    fixture_set(fixture, "cold-hall.oxygen_pressure", 21884, 105);
    fixture_set(fixture, "cold-hall.fatality_factor", 0, 0);
    fixture_set(fixture, "cold-hall.release", 0.0000, 0.0006);
    fixture_set(fixture, "cold-hall.spread", 0.0005, 0.0014);
    fixture_sum(fixture, LEDGER_HEAT, 0, 6640, 6330, 120, 130);
    fixture_sum(fixture, LEDGER_MASS, 0, 0.0412, 0.0409, 0.0001, 0.0009);
    fixture_no_sum(fixture, LEDGER_PURITY, 0, LEDGER_ABSENT, "not computed by this version");
    fixture_sum(fixture, LEDGER_AIR, 0, 0, 0, 0, 0.0006);
    fixture_alarms(fixture, 600);
}

static inline void fixture_hall_danger(struct fixture *fixture)
{
    fixture_quiet(fixture);
    fixture_point(fixture, "AT-401", 19.82, 0.1);
    fixture_point(fixture, "AT-402", 17.61, 0.1);
    fixture_point(fixture, "AT-403", 20.64, 0.1);
    fixture_point(fixture, "XS-401", 0, 0);
    fixture_point(fixture, "XS-402", 1, 0);
    fixture_point(fixture, "FT-401", 0.02, 0.02);
    fixture_set(fixture, "cold-hall.oxygen_lowest", 0.1761, 0.001);
    fixture_set(fixture, "cold-hall.oxygen_pressure", 18457, 105);
    fixture_set(fixture, "cold-hall.fatality_factor", 3e-7, 1e-7);
    fixture_set(fixture, "cold-hall.spread", 0.0303, 0.0014);
    fixture_set(fixture, "cold-hall.release", 0.148, 0.02);
    fixture_set(fixture, "cold-hall.release_total", 36, 5);
    fixture_set(fixture, "cold-hall.time_to_action", 190, 30);
    fixture_sum(fixture, LEDGER_AIR, 0, 0.148, 0, 0, 0.02);
    fixture_alarms(fixture, 240);
    fixture_banner(fixture, BANNER_DANGER, "cold-hall",
                   "OXYGEN BELOW 18 % IN cold-hall. Leave by the lit route, ring 2222 from the "
                   "lobby. Nobody enters until site rules say so. (AT-402 17.6 %)");
    fixture_banner(
        fixture, BANNER_CAUTION, "hall-fan-off",
        "hall-fan-off: XS-401 off. A release is not drawn off. Start the fan by site "
        "procedure; keep people out until it runs.");
}

static inline void fixture_lost_link(struct fixture *fixture)
{
    fixture_quiet(fixture);
    fixture_link(fixture, "purity", LINK_DOWN, "no answer in 400 ms from 192.0.2.11:502");
    fixture_quality(fixture, "AT-201", QUALITY_STALE, CAUSE_TOO_OLD, 95);
    fixture_quality(fixture, "AT-202", QUALITY_STALE, CAUSE_TOO_OLD, 95);
    fixture_lose(fixture, "chamber.lifetime", QUALITY_BAD, "AT-201 is stale");
    fixture_lose(fixture, "deoxo.efficiency", QUALITY_BAD, "AT-201 is stale");
    fixture_no_sum(fixture, LEDGER_PURITY, 0, LEDGER_BLIND, "AT-201 is stale");
}

static inline void fixture_stale_source(struct fixture *fixture)
{
    fixture_quiet(fixture);
    for (int i = 0; i < fixture->plant->point_count; i++)
        fixture_quality(fixture, fixture->plant->point[i].name, QUALITY_STALE, CAUSE_TOO_OLD,
                        95);
    fixture->view.stale = true;
    fixture->view.stale_s = 95;
}

static inline void fixture_oxygen_unknown(struct fixture *fixture)
{
    fixture_quiet(fixture);
    fixture_link(fixture, "hall", LINK_DOWN, "connection refused by 192.0.2.12:502");
    static const char *const names[] = {"AT-401", "AT-402", "AT-403",
                                        "FT-401", "XS-401", "XS-402"};
    for (size_t i = 0; i < ARRAY_LENGTH(names); i++)
        fixture_quality(fixture, names[i], QUALITY_STALE, CAUSE_TOO_OLD, 41);
    fixture_quality(fixture, "AT-402", QUALITY_BAD, CAUSE_FAULT_BIT, 41);
    fixture_lose(fixture, "cold-hall.oxygen_lowest", QUALITY_BAD, "no monitor is usable");
    fixture_lose(fixture, "cold-hall.oxygen_pressure", QUALITY_BAD, "no monitor is usable");
    fixture_lose(fixture, "cold-hall.fatality_factor", QUALITY_BAD, "no monitor is usable");
    fixture_lose(fixture, "cold-hall.release", QUALITY_BAD, "AT-401 is stale");
    fixture_lose(fixture, "cold-hall.spread", QUALITY_BAD, "AT-401 is stale");
    fixture_no_sum(fixture, LEDGER_AIR, 0, LEDGER_BLIND, "AT-401 is stale");
    fixture_alarms(fixture, 30);
    fixture_banner(
        fixture, BANNER_DANGER, "cold-hall",
        "OXYGEN UNKNOWN IN cold-hall: treat the hall as deficient until site rules say "
        "otherwise.");
}

static inline void fixture_finding(struct fixture *fixture)
{
    fixture_quiet(fixture);
    fixture_set(fixture, "store.heat_load", 6480, 130);
    fixture_sum(fixture, LEDGER_HEAT, 0, 6640, 7800, 120, 130);
    fixture->view.journal_count = 2;
    fixture->journal[0] = (struct journal_entry){
        .utc_ns = fixture->frame.utc_ns - 4680 * NS_PER_S,
        .kind = JOURNAL_FINDING,
        .subject = "HEAT store",
        .state = "opened",
        .text =
            "heat load 1280 W more than budget (u 130 W): worse insulation, lost vacuum, or "
            "a meter lies: FT-110, FT-112"};
    fixture->journal[1] =
        (struct journal_entry){.utc_ns = fixture->frame.utc_ns - 600 * NS_PER_S,
                               .kind = JOURNAL_FINDING,
                               .subject = "MASS store",
                               .state = "closed",
                               .text = "within its uncertainty again"};
}

static inline void fixture_filling(struct fixture *fixture)
{
    fixture_quiet(fixture);
    fixture_no_sum(fixture, LEDGER_HEAT, 0, LEDGER_FILLING, "filling: 7 min to go");
    fixture_no_sum(fixture, LEDGER_MASS, 0, LEDGER_FILLING, "filling: 7 min to go");
    fixture_no_sum(fixture, LEDGER_PURITY, 0, LEDGER_FILLING, "filling: 7 min to go");
    fixture_no_sum(fixture, LEDGER_AIR, 0, LEDGER_FILLING, "filling: 50 s to go");
    static const char *const names[] = {"store.heat_load",      "store.heat_excess",
                                        "store.hold_time",      "store.boil_off",
                                        "store.boil_off_daily", "store.mass_unexplained",
                                        "deoxo.efficiency",     "cold-hall.release"};
    for (size_t i = 0; i < ARRAY_LENGTH(names); i++)
        fixture_lose(fixture, names[i], QUALITY_MISSING, "filling: 7 min to go");
}

struct situation {
    const char *name;
    void (*set)(struct fixture *fixture);
};
static const struct situation situations[] = {
    {"quiet",          fixture_quiet         },
    {"hall-danger",    fixture_hall_danger   },
    {"lost-link",      fixture_lost_link     },
    {"stale-source",   fixture_stale_source  },
    {"oxygen-unknown", fixture_oxygen_unknown},
    {"finding",        fixture_finding       },
    {"filling",        fixture_filling       },
};

#endif
