/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * A condenser at one frame: what its coolant takes up (methods 4.3), from its own readings
 * only.
 */
#include "internal.h"

#include <math.h>

struct side {
    struct input pressure, temperature;
    struct enthalpy h;
    double u_model_j_kg;
};

/* Saturation temperature near a line that was computed before: second-order error below a
 * millikelvin over half a per cent of pressure, and it only decides between phases. */
static int saturation_near(const struct fluid *fluid, double pressure_pa,
                           struct fluid_saturation *line, double *temperature_k,
                           struct error *err)
{
    if (!(fabs(pressure_pa - line->pressure_pa) < 0.005 * pressure_pa)) {
        int code = fluid_saturation_at_p(fluid, pressure_pa, line, err);
        if (code != 0)
            return code;
    }
    *temperature_k = line->temperature_k + (pressure_pa - line->pressure_pa) / line->dp_dt_pa_k;
    return 0;
}

/* Coolant of which the temperature is not measured: saturated, give or take a kelvin of liquid.
 */
static void side_saturated(const struct condenser *condenser, bool in, struct side *side,
                           struct verdict *verdict)
{
    struct fluid_saturation line;
    struct error err;
    if (fluid_saturation_at_p(condenser->coolant, side->pressure.value, &line, &err) != 0) {
        verdict_doubt(verdict, QUALITY_BAD, "coolant: %.100s", err.text);
        return;
    }
    enthalpy_of_line(&line, in ? FLUID_PHASE_LIQUID : FLUID_PHASE_VAPOUR, &side->h);
    side->u_model_j_kg = line.liquid.cp_j_kg_k;
}

/* In: liquid unless clearly warmer than saturation. Out: vapour; one that leaves at saturation
 * may carry liquid over, which no thermometer can tell. */
static void side_measured(const struct condenser *condenser, bool in,
                          struct fluid_saturation *near, struct side *side,
                          struct verdict *verdict)
{
    struct fluid_state state;
    struct error err;
    double saturation;
    if (saturation_near(condenser->coolant, side->pressure.value, near, &saturation, &err) !=
        0) {
        verdict_doubt(verdict, QUALITY_BAD, "coolant: %.100s", err.text);
        return;
    }
    double above = side->temperature.value - saturation;
    double u = side->temperature.parts > 0 ? side->temperature.part[0].u : 0;
    double clearly = 3 * hypot(u, 0.1);
    if (!in && above < -clearly)
        verdict_doubt(verdict, QUALITY_BAD, "coolant of %s leaves as liquid", condenser->name);
    else if (!in && above < 2 * u)
        verdict_doubt(verdict, QUALITY_UNCERTAIN,
                      "coolant of %s leaves at saturation: may carry liquid", condenser->name);
    enum fluid_phase phase = in && above < clearly ? FLUID_PHASE_LIQUID : FLUID_PHASE_VAPOUR;
    if (!verdict_usable(verdict))
        return;
    if (phase_at(condenser->coolant, side->temperature.value, side->pressure.value, phase,
                 &state, &err) == 0)
        enthalpy_of_state(&state, &side->h);
    else
        verdict_doubt(verdict, QUALITY_BAD, "coolant: %.100s", err.text);
}

static void read_side(struct engine *engine, int index, bool in, struct side *side,
                      struct verdict *verdict)
{
    const struct condenser *condenser = &engine->plant->condenser[index];
    side->pressure = input_pressure(engine, in ? &condenser->coolant_in_pressure
                                               : &condenser->coolant_out_pressure);
    side->temperature = input_of(engine, in ? &condenser->coolant_in_temperature
                                            : &condenser->coolant_out_temperature);
    input_judge(engine, &side->pressure, in ? "coolant_in_pressure" : "coolant_out_pressure",
                verdict);
    if (side->temperature.described)
        input_judge(engine, &side->temperature, "coolant temperature", verdict);
    if (!verdict_usable(verdict))
        return;
    if (side->temperature.described)
        side_measured(condenser, in, &engine->coolant_line[2 * index + !in], side, verdict);
    else
        side_saturated(condenser, in, side, verdict);
}

void condenser_step(struct engine *engine, int index)
{
    const struct condenser *condenser = &engine->plant->condenser[index];
    struct verdict *verdict = &engine->duty_verdict[index];
    struct side in = {.u_model_j_kg = 0}, out = in;
    *verdict = (struct verdict){0};
    struct input flow = input_of(engine, &condenser->coolant_flow);
    input_judge(engine, &flow, "coolant_flow", verdict);
    read_side(engine, index, true, &in, verdict);
    read_side(engine, index, false, &out, verdict);
    struct verdict margin = *verdict;
    if (!(condenser->rated_duty_w > 0)) {
        margin = (struct verdict){0};
        verdict_doubt(&margin, QUALITY_MISSING, "the plant file gives no rated_duty");
    }
    struct estimate *duty = &engine->duty[index], left = {.count = 0};
    if (verdict_usable(verdict)) {
        double per = 1;
        struct fluid_state normal;
        if (condenser->coolant_flow.unit.dimension == DIMENSION_VOLUME_FLOW)
            per = in.h.density_kg_m3;
        else if (condenser->coolant_flow.unit.dimension == DIMENSION_NORMAL_FLOW &&
                 fluid_at_tp(condenser->coolant, 273.15, 101325, FLUID_PHASE_ANY, &normal,
                             NULL) == 0)
            per = normal.density_kg_m3;
        double rise = out.h.value_j_kg - in.h.value_j_kg, mass = per * flow.value;
        estimate_exact(duty, mass * rise);
        input_add_u(duty, per * rise, &flow);
        input_add_u(duty, mass * out.h.by_temperature, &out.temperature);
        input_add_u(duty, mass * out.h.by_pressure, &out.pressure);
        input_add_u(duty, -mass * in.h.by_temperature, &in.temperature);
        input_add_u(duty, -mass * in.h.by_pressure, &in.pressure);
        estimate_add_term(duty, source_of(SOURCE_COOLANT_STATE, index),
                          mass * hypot(in.u_model_j_kg, out.u_model_j_kg));
        left = *duty;
        estimate_scale(&left, -1);
        left.value += condenser->rated_duty_w;
    }
    engine_derive(engine, DERIVED_CONDENSER_DUTY, index, duty, verdict);
    engine_derive(engine, DERIVED_CONDENSER_MARGIN, index, &left, &margin);
}
