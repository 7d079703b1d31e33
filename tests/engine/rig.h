/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * A plant file, an engine and frames whose readings a test sets by name; and a rigid vessel of
 * two phases in equilibrium, kept as mass and internal energy, to make readings from. Include
 * after cmocka.h.
 */
#ifndef TESTS_ENGINE_RIG_H
#define TESTS_ENGINE_RIG_H

#include <math.h>
#include <string.h>

#include "ullage/engine.h"

struct rig {
    struct plant *plant;
    struct engine *engine;
    struct arena *arena;
    struct frame frame;
    double time_s;
    const struct results *results;
};

static const int64_t RIG_START_NS = INT64_C(1796083200) * NS_PER_S; /* 2026-12-01T00:00:00Z */

static inline void rig_open(struct rig *rig, const char *path)
{
    static struct problems problems;
    struct error err = {0};
    *rig = (struct rig){.time_s = 0};
    if (plant_read(path, &rig->plant, &problems) != 0)
        fail_msg("%s: %s", path, problems.at[0].text);
    if (engine_create(rig->plant, &rig->engine, &err) != 0)
        fail_msg("%s", err.text);
    rig->arena = arena_create();
    assert_int_equal(frame_init(&rig->frame, rig->plant, rig->arena), 0);
}

static inline void rig_close(struct rig *rig)
{
    engine_free(rig->engine);
    arena_free(rig->arena);
    plant_free(rig->plant);
}

static inline int rig_tag(const struct rig *rig, const char *name)
{
    int tag = plant_tag_find(rig->plant, name);
    if (tag < 0)
        fail_msg("the plant has no %s", name);
    return tag;
}

/* A good reading, SI in the point's own basis. */
static inline void rig_set(struct rig *rig, const char *name, double value)
{
    int tag = rig_tag(rig, name);
    rig->frame.sample[tag] =
        (struct sample){.value = value,
                        .u = point_uncertainty(&rig->plant->point[tag], value),
                        .quality = QUALITY_GOOD,
                        .cause = CAUSE_NONE};
}

static inline void rig_spoil(struct rig *rig, const char *name, enum quality quality)
{
    struct sample *sample = &rig->frame.sample[rig_tag(rig, name)];
    sample->quality = quality;
    sample->cause = quality == QUALITY_STALE  ? CAUSE_TOO_OLD
                    : quality == QUALITY_BAD  ? CAUSE_OUT_OF_RANGE
                    : quality == QUALITY_GOOD ? CAUSE_NONE
                                              : CAUSE_NEVER_READ;
    if (quality == QUALITY_BAD || quality == QUALITY_MISSING)
        sample->value = sample->u = 0;
}

static inline void rig_step(struct rig *rig, double span_s)
{
    rig->time_s += span_s;
    rig->frame.utc_ns = RIG_START_NS + time_s_to_ns(rig->time_s);
    for (int i = 0; i < rig->frame.count; i++)
        if (rig->frame.sample[i].quality == QUALITY_GOOD)
            rig->frame.sample[i].read_utc_ns = rig->frame.utc_ns;
    rig->results = engine_step(rig->engine, &rig->frame, NULL, 0);
}

static inline const struct derived_value *rig_derived(const struct rig *rig, const char *name)
{
    return &rig->results->derived[rig_tag(rig, name) - rig->plant->point_count];
}

static inline double rig_value(const struct rig *rig, const char *name)
{
    const struct derived_value *value = rig_derived(rig, name);
    if (value->quantity.quality != QUALITY_GOOD)
        fail_msg("%s is %s: %s", name, quality_word(value->quantity.quality), value->reason);
    return value->quantity.value;
}

static inline const struct ledger *rig_ledger(const struct rig *rig, enum ledger_kind kind,
                                              int thing)
{
    for (int i = 0; i < rig->results->ledger_count; i++)
        if (rig->results->ledger[i].kind == kind && rig->results->ledger[i].thing == thing)
            return &rig->results->ledger[i];
    fail_msg("no such ledger");
    return NULL;
}

/* ---- a vessel in equilibrium
 * ------------------------------------------------------------------ */

struct body {
    const struct fluid *fluid;
    double volume_m3, mass_kg, energy_j;
    struct fluid_saturation line;
    double liquid_kg, liquid_m3;
};

static inline void body_settle(struct body *body)
{
    struct fluid_state state;
    struct error err = {0};
    if (fluid_at_rhou(body->fluid, body->mass_kg / body->volume_m3,
                      body->energy_j / body->mass_kg, &state, &err) != 0 ||
        fluid_saturation_at_t(body->fluid, state.temperature_k, &body->line, &err) != 0)
        fail_msg("%s", err.text);
    double v = body->volume_m3 / body->mass_kg;
    double v_l = 1 / body->line.liquid.density_kg_m3, v_v = 1 / body->line.vapour.density_kg_m3;
    body->liquid_kg = body->mass_kg * (1 - (v - v_l) / (v_v - v_l));
    body->liquid_m3 = body->liquid_kg * v_l;
}

static inline void body_fill(struct body *body, double volume_m3, double liquid_m3,
                             double pressure_pa)
{
    *body = (struct body){.fluid = fluid_find("argon"), .volume_m3 = volume_m3};
    assert_int_equal(fluid_saturation_at_p(body->fluid, pressure_pa, &body->line, NULL), 0);
    double liquid = liquid_m3 * body->line.liquid.density_kg_m3;
    double vapour = (volume_m3 - liquid_m3) * body->line.vapour.density_kg_m3;
    body->mass_kg = liquid + vapour;
    body->energy_j = liquid * body->line.liquid.internal_energy_j_kg +
                     vapour * body->line.vapour.internal_energy_j_kg;
    body_settle(body);
}

/* Everything about tank.ini that a test does not speak of: quiet readings. */
static inline void rig_quiet(struct rig *rig)
{
    struct fluid_saturation in;
    assert_int_equal(fluid_saturation_at_p(fluid_find("nitrogen"), 300000, &in, NULL), 0);
    rig_set(rig, "PT-900", 98200);
    rig_set(rig, "PT-2", 110000);
    rig_set(rig, "LT-2", 0.8);
    rig_set(rig, "FT-3", 0.05);
    rig_set(rig, "PT-3", 300000);
    rig_set(rig, "TT-6", in.temperature_k);
    rig_set(rig, "PT-4", 250000);
    rig_set(rig, "TT-7", 95);
    rig_set(rig, "AT-1", 0.2095);
    rig_set(rig, "AT-2", 0.2095);
    rig_set(rig, "FT-1", 0);
}

/* The tank's readings from a body; barometer as set before. */
static inline void rig_tank(struct rig *rig, const struct body *body)
{
    double barometer = rig->frame.sample[rig_tag(rig, "PT-900")].value;
    rig_set(rig, "PT-1", body->line.pressure_pa - barometer);
    rig_set(rig, "LT-1", body->liquid_m3 / 100);
    rig_set(rig, "TT-1", body->line.temperature_k);
    rig_set(rig, "TT-2", body->line.temperature_k);
    rig_set(rig, "TT-3", body->line.temperature_k);
    rig_set(rig, "TT-4", body->line.temperature_k);
    rig_set(rig, "TT-5", body->line.temperature_k);
}

#endif
