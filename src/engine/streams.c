/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Which streams cross a vessel's border, and what they carry. The border is drawn around a
 * vessel with its pumps and purifiers, so that what circulates through them is inside and its
 * meter's error enters no balance. A condenser is outside: vapour goes, condensate comes. Where
 * only one of the two is metered, the other is taken equal to it.
 */
#include "internal.h"

#include <math.h>

/* Of what is not measured, standard uncertainties (common practice, no source). */
static const double U_STREAM_LIQUID_K = 1, U_STREAM_VAPOUR_K = 5, U_CONDENSATE_K = 1;

static bool inside(const struct plant *plant, struct thing_ref thing, int vessel)
{
    return (thing.kind == THING_VESSEL && thing.index == vessel) ||
           (thing.kind == THING_PUMP && plant->pump[thing.index].vessel == vessel) ||
           (thing.kind == THING_PURIFIER && plant->purifier[thing.index].vessel == vessel);
}

/* Is there a stream the other way between the vessel and the same thing? */
static bool answered(const struct plant *plant, int vessel, struct thing_ref other, bool leaves)
{
    for (int i = 0; i < plant->stream_count; i++) {
        struct thing_ref here = leaves ? plant->stream[i].to : plant->stream[i].from;
        struct thing_ref there = leaves ? plant->stream[i].from : plant->stream[i].to;
        if (inside(plant, here, vessel) && there.kind == other.kind &&
            there.index == other.index)
            return true;
    }
    return false;
}

/* Does any stream join the vessel and a condenser? */
static bool fed(const struct plant *plant, int vessel, int condenser)
{
    struct thing_ref other = {.kind = THING_CONDENSER, .index = condenser};
    return answered(plant, vessel, other, true) || answered(plant, vessel, other, false);
}

int streams_create(struct engine *engine, struct vessel_state *state)
{
    const struct plant *plant = engine->plant;
    state->stream =
        arena_take(engine->arena, (size_t)plant->stream_count + 1, sizeof(*state->stream));
    if (state->stream == NULL)
        return ERR_MEMORY;
    for (int i = 0; i < plant->stream_count; i++) {
        const struct stream *stream = &plant->stream[i];
        bool from = inside(plant, stream->from, state->index);
        bool to = inside(plant, stream->to, state->index);
        if (from == to)
            continue;
        struct thing_ref other = from ? stream->to : stream->from;
        bool condenser = other.kind == THING_CONDENSER &&
                         plant->condenser[other.index].vessel == state->index;
        bool loop = condenser && !answered(plant, state->index, other, from);
        if ((from && stream->phase == STREAM_VAPOUR) || loop)
            state->vapour_leaves = true;
        state->stream[state->stream_count++] =
            (struct vessel_stream){.stream = i, .sign = from ? 1 : -1, .loop = loop};
    }
    for (int i = 0; i < plant->condenser_count && state->cooling_count < PLANT_LIST_MAX; i++)
        if (plant->condenser[i].vessel == state->index && !fed(plant, state->index, i))
            state->cooling[state->cooling_count++] = i;
    state->vapour_leaves = state->vapour_leaves || state->cooling_count > 0;
    return 0;
}

/* Does the meter show a flow at all? Else it does not matter what stands in the pipe. */
static bool flows(const struct vessel_stream *flow)
{
    double u = flow->flow.parts > 0 ? flow->flow.part[0].u : 0;
    return fabs(flow->flow.value) > 3 * u;
}

static int enthalpy_of_stream(const struct vessel_state *state, struct vessel_stream *flow,
                              const struct stream *stream, struct enthalpy *h,
                              struct error *err)
{
    bool liquid = stream->phase == STREAM_LIQUID;
    enum fluid_phase phase = liquid ? FLUID_PHASE_LIQUID : FLUID_PHASE_VAPOUR;
    flow->u_model_j_kg = 0;
    if (flow->temperature.described) {
        int code = enthalpy_at(stream->fluid, flow->temperature.value, flow->pressure.value,
                               phase, false, h, err);
        if (code == 0 || flows(flow))
            return code;
    } else if (flow->sign > 0 && liquid) {
        enthalpy_of_state(&state->contents.liquid, h);
        flow->u_model_j_kg = 0.1 * U_STREAM_LIQUID_K * h->by_temperature;
        return 0;
    }
    int code = 0;
    if (flow->pressure.value == state->pressure.value) /* the line is at hand */
        enthalpy_of_line(&state->contents.line, phase, h);
    else
        code = enthalpy_at(stream->fluid, 0, flow->pressure.value, phase, true, h, err);
    if (code == 0)
        flow->u_model_j_kg = liquid ? U_STREAM_LIQUID_K * state->contents.line.liquid.cp_j_kg_k
                                    : U_STREAM_VAPOUR_K * state->contents.line.vapour.cp_j_kg_k;
    return code;
}

static void read_enthalpy(struct engine *engine, struct vessel_state *state,
                          struct vessel_stream *flow, struct enthalpy *h)
{
    const struct stream *stream = &engine->plant->stream[flow->stream];
    struct error err;
    flow->temperature = input_of(engine, &stream->temperature);
    if (!flow->temperature.described && flow->sign > 0 && stream->phase == STREAM_VAPOUR)
        flow->temperature = state->vapour_temperature;
    flow->pressure = input_pressure(engine, &stream->pressure);
    if (!flow->pressure.described)
        flow->pressure = state->pressure;
    input_judge(engine, &flow->pressure, "pressure", &flow->heat_verdict);
    if (flow->temperature.described)
        input_judge(engine, &flow->temperature, "temperature", &flow->heat_verdict);
    verdict_join(&flow->heat_verdict, &state->contents_verdict);
    if (!verdict_usable(&flow->heat_verdict))
        return;
    if (enthalpy_of_stream(state, flow, stream, h, &err) != 0) {
        verdict_doubt(&flow->heat_verdict, QUALITY_BAD, "stream %s cannot be %s: %.70s",
                      stream->name, stream->phase == STREAM_LIQUID ? "liquid" : "vapour",
                      err.text);
        return;
    }
    flow->enthalpy_j_kg = h->value_j_kg;
    flow->by_temperature = h->by_temperature;
    flow->by_pressure = h->by_pressure;
}

/* kg/s for one SI unit of the meter's reading. */
static double per_reading(const struct stream *stream, const struct enthalpy *h,
                          struct vessel_stream *flow)
{
    struct fluid_state normal;
    switch ((int)stream->flow.unit.dimension) {
    case DIMENSION_VOLUME_FLOW:
        verdict_join(&flow->flow_verdict, &flow->heat_verdict);
        return h->density_kg_m3;
    case DIMENSION_NORMAL_FLOW:
        if (fluid_at_tp(stream->fluid, 273.15, 101325, FLUID_PHASE_ANY, &normal, NULL) == 0)
            return normal.density_kg_m3;
        verdict_doubt(&flow->flow_verdict, QUALITY_BAD, "stream %s: no normal density",
                      stream->name);
        return 0;
    default:
        return 1;
    }
}

/* The side of a condenser that is not metered: the enthalpy kept is the difference of both. */
static void close_loop(const struct contents *contents, struct vessel_stream *flow)
{
    double other =
        flow->sign > 0 ? contents->line.liquid.enthalpy_j_kg : contents->vapour.enthalpy_j_kg;
    double u = flow->sign > 0 ? U_CONDENSATE_K * contents->line.liquid.cp_j_kg_k
                              : U_STREAM_VAPOUR_K * contents->vapour.cp_j_kg_k;
    flow->enthalpy_j_kg -= other;
    flow->u_model_j_kg = hypot(flow->u_model_j_kg, u);
}

void streams_read(struct engine *engine, struct vessel_state *state)
{
    for (int i = 0; i < state->stream_count; i++) {
        struct vessel_stream *flow = &state->stream[i];
        const struct stream *stream = &engine->plant->stream[flow->stream];
        struct enthalpy h = {0};
        flow->flow_verdict = flow->heat_verdict = (struct verdict){0};
        flow->flow = input_of(engine, &stream->flow);
        input_judge(engine, &flow->flow, "flow of a stream", &flow->flow_verdict);
        read_enthalpy(engine, state, flow, &h);
        flow->per_reading = per_reading(stream, &h, flow);
        flow->flow_kg_s = flow->flow.value * flow->per_reading;
        if (flow->loop && verdict_usable(&flow->heat_verdict))
            close_loop(&state->contents, flow);
        verdict_join(&state->flows_verdict, &flow->flow_verdict);
        verdict_join(&state->heat_verdict, &flow->heat_verdict);
    }
}
