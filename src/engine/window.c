/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * What of a frame goes into a vessel's window. Only frames enter whose contents and flows are
 * usable; a pause longer than the shortest window starts it anew, since nobody knows what
 * flowed meanwhile. A stream whose temperature alone is lost keeps its last enthalpy, so that
 * the mass balance goes on; the heat balance starts anew if that lasts.
 */
#include "internal.h"

static void push_contents(struct vessel_state *state, double *v)
{
    const struct contents *c = &state->contents;
    struct contents_property energy;
    contents_energy(c, state->base_j_kg, &energy);
    v[SERIES_ENERGY] = energy.value;
    v[SERIES_MASS] = c->mass_kg.value;
    v[SERIES_VAPOUR] = c->vapour_mass_kg.value;
    v[SERIES_PRESSURE] = state->pressure.value;
    for (int i = 0; i < CONTENTS_VARIABLES; i++) {
        v[SERIES_ENERGY_BY + i] = energy.d[i];
        v[SERIES_MASS_BY + i] = c->mass_kg.d[i];
    }
}

static void push_streams(const struct engine *engine, struct vessel_state *state, double *v)
{
    v[SERIES_NET_MASS] = v[SERIES_NET_HEAT] = v[SERIES_NET_VAPOUR] = 0;
    for (int i = 0; i < state->stream_count; i++) {
        const struct vessel_stream *flow = &state->stream[i];
        const struct stream *stream = &engine->plant->stream[flow->stream];
        double out = flow->sign * flow->flow_kg_s;
        double heat =
            flow->flow_kg_s * (flow->enthalpy_j_kg - (flow->loop ? 0 : state->base_j_kg));
        v[SERIES_STREAMS + 2 * i] = flow->flow_kg_s;
        v[SERIES_STREAMS + 2 * i + 1] = heat;
        /* A loop takes heat, whichever of its sides is metered. */
        v[SERIES_NET_HEAT] += flow->sign * heat;
        if (!flow->loop)
            v[SERIES_NET_MASS] += out;
        if (flow->loop)
            v[SERIES_NET_VAPOUR] += flow->flow_kg_s;
        else if (stream->phase == STREAM_VAPOUR)
            v[SERIES_NET_VAPOUR] += out;
    }
    v[SERIES_PUMP] = state->pump_w;
    v[SERIES_NET_HEAT] -= state->pump_w;
    v[SERIES_COOLING] = 0;
    if (state->cooling_count > 0) {
        const struct contents *c = &state->contents;
        for (int i = 0; i < state->cooling_count; i++)
            v[SERIES_COOLING] += engine->duty[state->cooling[i]].value;
        v[SERIES_NET_HEAT] += v[SERIES_COOLING];
        v[SERIES_NET_VAPOUR] +=
            v[SERIES_COOLING] / (c->vapour.enthalpy_j_kg - c->line.liquid.enthalpy_j_kg);
    }
}

/* Seconds before this frame that the window knows nothing of. */
static double lost_s(struct vessel_state *state, int64_t utc_ns)
{
    if (state->window.count == 0) {
        state->interval_s = 0;
        return 0;
    }
    double span = time_ns_to_s(utc_ns - state->pushed_utc_ns);
    bool usual = !state->rejected && (state->interval_s == 0 || span < 5 * state->interval_s);
    if (usual)
        state->interval_s += (span - state->interval_s) * (state->interval_s == 0 ? 1 : 0.1);
    return usual ? 0 : span;
}

double vessel_least_s(const struct vessel_state *state)
{
    double blocks = 4 * time_ns_to_s(state->window.block_ns);
    double least = state->vessel->window_minimum_s;
    return least > blocks ? least : blocks;
}

bool vessel_window_push(struct engine *engine, struct vessel_state *state)
{
    int64_t least_ns = time_s_to_ns(vessel_least_s(state));
    if (state->window.count > 0 && engine->utc_ns - state->pushed_utc_ns > least_ns)
        window_restart(&state->window);
    for (int i = 0; i < state->cooling_count; i++)
        verdict_join(&state->heat_verdict, &engine->duty_verdict[state->cooling[i]]);
    if (!verdict_usable(&state->contents_verdict) || !verdict_usable(&state->flows_verdict) ||
        (state->vapour_temperature.described && state->contents_input.vapour_saturated)) {
        state->lost = state->contents_verdict;
        verdict_join(&state->lost, &state->flows_verdict);
        state->rejected = true;
        return false;
    }
    bool began = state->window.count == 0;
    if (began)
        state->base_j_kg = state->contents.line.liquid.enthalpy_j_kg;
    state->values[SERIES_LOST] = lost_s(state, engine->utc_ns);
    state->rejected = false;
    push_contents(state, state->values);
    push_streams(engine, state, state->values);
    bool opened = window_push(&state->window, engine->utc_ns, state->values);
    double now_s = time_ns_to_s(engine->utc_ns - state->window.origin_ns);
    if (began) {
        for (int i = 0; i < TRACK_COUNT; i++)
            state->start_s[i] = 0;
        state->heat_utc_ns = engine->utc_ns;
        state->heat_rejected = false;
    }
    if (verdict_usable(&state->heat_verdict)) {
        /* Half a minute may be bridged with the last enthalpy. */
        if (state->heat_rejected && engine->utc_ns - state->heat_utc_ns > 30 * NS_PER_S)
            state->start_s[TRACK_HEAT] = now_s;
        state->heat_utc_ns = engine->utc_ns;
        state->heat_rejected = false;
    } else {
        state->heat_rejected = true;
        if (began) /* nothing to bridge from */
            state->heat_utc_ns = engine->utc_ns - 31 * NS_PER_S;
    }
    state->pushed_utc_ns = engine->utc_ns;
    return opened;
}
