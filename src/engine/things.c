/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * What needs no window: pumps, purifiers, drift, shafts, deliveries, each from this
 * frame's readings.
 */
#include "internal.h"

#include <math.h>
#include <string.h>

static void missing(struct verdict *verdict, const char *what)
{
    verdict_doubt(verdict, QUALITY_MISSING, "the plant file gives no %s", what);
}

/* ---- pumps
 * ------------------------------------------------------------------------------------ */

/* Vapour pressure of the liquid at a temperature near the vessel's saturation:
 * Clausius-Clapeyron from the line at hand (ln p linear in 1/T: 1e-5 over a kelvin), else the
 * line itself. */
static int vapour_pressure(const struct vessel_state *vessel, double temperature_k,
                           double *pressure_pa, double *slope_pa_k, struct error *err)
{
    const struct fluid_saturation *at = &vessel->contents.line;
    if (fabs(temperature_k - at->temperature_k) < 1) {
        double t0 = at->temperature_k, b = at->dp_dt_pa_k * t0 * t0 / at->pressure_pa;
        *pressure_pa = at->pressure_pa * exp(b * (1 / t0 - 1 / temperature_k));
        *slope_pa_k = *pressure_pa * b / (temperature_k * temperature_k);
        return 0;
    }
    struct fluid_saturation line;
    int code = fluid_saturation_at_t(vessel->vessel->fluid, temperature_k, &line, err);
    if (code == 0) {
        *pressure_pa = line.pressure_pa;
        *slope_pa_k = line.dp_dt_pa_k;
    }
    return code;
}

static void pump_step(struct engine *engine, int index)
{
    const struct pump *pump = &engine->plant->pump[index];
    const struct vessel_state *vessel = &engine->vessel[pump->vessel];
    struct verdict verdict = vessel->contents_verdict, margin;
    struct input suction = input_of(engine, &pump->suction_temperature);
    struct estimate npsh = {.count = 0}, left = {.count = 0};
    bool measured = suction.described || !vessel->contents_input.liquid_saturated;
    double temperature =
        suction.described ? suction.value : vessel->contents.liquid.temperature_k;
    double vapour_pa = vessel->pressure.value, slope_pa_k = 0;
    struct error err;
    if (suction.described)
        input_judge(engine, &suction, "suction_temperature", &verdict);
    if (verdict_usable(&verdict) && measured &&
        vapour_pressure(vessel, temperature, &vapour_pa, &slope_pa_k, &err) != 0)
        verdict_doubt(&verdict, QUALITY_BAD, "%.110s", err.text);
    if (verdict_usable(&verdict)) {
        double density = vessel->contents.liquid.density_kg_m3, weight = density * 9.80665;
        double head = vessel->contents_input.level_m - pump->suction_depth_m;
        estimate_exact(&npsh, pump_npsh_m(vessel->pressure.value, vapour_pa, density, head));
        input_add_u(&npsh, 1, &vessel->level);
        if (measured)
            input_add_u(&npsh, 1 / weight, &vessel->pressure);
        if (suction.described)
            input_add_u(&npsh, -slope_pa_k / weight, &suction);
        else if (measured)
            estimate_add_term(
                &npsh, source_of(SOURCE_LIQUID_TEMPERATURE, pump->vessel),
                -slope_pa_k / weight *
                    hypot(vessel->u_liquid_mean_k, vessel->thermometer[0].part[0].u));
        left = npsh;
        left.value -= pump->npsh_required_m;
    }
    margin = verdict;
    if (!(pump->npsh_required_m > 0))
        missing(&margin, "npsh_required");
    engine_derive(engine, DERIVED_PUMP_NPSH, index, &npsh, &verdict);
    engine_derive(engine, DERIVED_PUMP_NPSH_MARGIN, index, &left, &margin);
}

/* ---- purifiers
 * -------------------------------------------------------------------------------- */

static void purifier_step(struct engine *engine, int index)
{
    const struct purifier *purifier = &engine->plant->purifier[index];
    struct verdict verdict = {0};
    struct input in = input_of(engine, &purifier->oxygen_in);
    struct input out = input_of(engine, &purifier->oxygen_out);
    struct estimate efficiency = {.count = 0};
    input_judge(engine, &in, "oxygen_in", &verdict);
    input_judge(engine, &out, "oxygen_out", &verdict);
    double u = in.parts > 0 ? in.part[0].u : 0;
    if (verdict_usable(&verdict) && !(in.value > 2 * u))
        verdict_doubt(&verdict, QUALITY_MISSING, "oxygen_in is not above its uncertainty");
    if (verdict_usable(&verdict)) {
        estimate_exact(&efficiency, 1 - out.value / in.value);
        input_add_u(&efficiency, -1 / in.value, &out);
        input_add_u(&efficiency, out.value / (in.value * in.value), &in);
    }
    engine_derive(engine, DERIVED_PURIFIER_EFFICIENCY, index, &efficiency, &verdict);
}

/* ---- drift
 * ------------------------------------------------------------------------------------ */

static void drift_lifetime(struct engine *engine, int index, struct estimate *lifetime,
                           struct verdict *verdict)
{
    struct input oxygen = input_of(engine, &engine->plant->drift[index].oxygen);
    input_judge(engine, &oxygen, "oxygen", verdict);
    double u = oxygen.parts > 0 ? oxygen.part[0].u : 0;
    if (verdict_usable(verdict) && !(oxygen.value > 2 * u && oxygen.value > 0))
        verdict_doubt(verdict, QUALITY_MISSING, "oxygen is not above its uncertainty");
    if (!verdict_usable(verdict))
        return;
    double seconds = purity_lifetime_s(oxygen.value);
    estimate_exact(lifetime, seconds);
    input_add_u(lifetime, -seconds / oxygen.value, &oxygen);
    estimate_add_term(lifetime, source_of(SOURCE_METHOD, index),
                      0.01 * PURITY_LIFETIME_U_PERCENT * seconds);
}

static void drift_velocity(struct engine *engine, int index, struct estimate *velocity,
                           struct verdict *verdict)
{
    const struct drift *drift = &engine->plant->drift[index];
    const struct vessel_state *vessel = &engine->vessel[drift->vessel];
    verdict_join(verdict, &vessel->contents_verdict);
    if (strcmp(fluid_name(vessel->vessel->fluid), "argon") != 0)
        verdict_doubt(verdict, QUALITY_MISSING, "no drift velocity is known for %s",
                      fluid_name(vessel->vessel->fluid));
    if (!(drift->field_v_m > 0))
        missing(verdict, "field");
    if (!verdict_usable(verdict))
        return;
    double kelvin = vessel->contents.liquid.temperature_k;
    double speed = purity_velocity_m_s(drift->field_v_m, kelvin);
    estimate_exact(velocity, speed);
    /* v ~ T^-1.5 */
    estimate_add_term(velocity, source_of(SOURCE_LIQUID_TEMPERATURE, drift->vessel),
                      -1.5 * speed / kelvin * vessel->u_liquid_mean_k);
    estimate_add_term(velocity, source_of(SOURCE_METHOD, engine->plant->drift_count + index),
                      0.01 * PURITY_VELOCITY_U_PERCENT * speed);
}

static void drift_step(struct engine *engine, int index)
{
    const struct drift *drift = &engine->plant->drift[index];
    struct estimate lifetime = {.count = 0}, velocity = lifetime, time = lifetime,
                    left = lifetime;
    struct verdict of_lifetime = {0}, of_velocity = {0}, of_both;
    drift_lifetime(engine, index, &lifetime, &of_lifetime);
    drift_velocity(engine, index, &velocity, &of_velocity);
    struct verdict of_time = of_velocity;
    if (!(drift->length_m > 0))
        missing(&of_time, "length");
    if (verdict_usable(&of_time)) {
        time = velocity;
        estimate_scale(&time, -drift->length_m / (velocity.value * velocity.value));
        time.value = drift->length_m / velocity.value;
    }
    of_both = of_time;
    verdict_join(&of_both, &of_lifetime);
    if (verdict_usable(&of_both)) {
        double value = exp(-time.value / lifetime.value);
        const struct estimate *const of[] = {&time, &lifetime};
        const double by[] = {-value / lifetime.value,
                             value * time.value / (lifetime.value * lifetime.value)};
        estimate_combine(&left, value, 2, of, by);
    }
    engine_derive(engine, DERIVED_DRIFT_LIFETIME, index, &lifetime, &of_lifetime);
    engine_derive(engine, DERIVED_DRIFT_VELOCITY, index, &velocity, &of_velocity);
    engine_derive(engine, DERIVED_DRIFT_DRIFT_TIME, index, &time, &of_time);
    engine_derive(engine, DERIVED_DRIFT_SURVIVING_CHARGE, index, &left, &of_both);
}

/* ---- shafts
 * ----------------------------------------------------------------------------------- */

enum { SHAFT_TOP, SHAFT_TEMPERATURE, SHAFT_FLOW, SHAFT_INPUTS };

/* Pressure at the foot with the flow, or standing. x: top pressure, temperature, kg/s. */
static int foot(const struct shaft *shaft, const double *x, bool flowing, double *out)
{
    double friction = 0, flow = flowing ? x[SHAFT_FLOW] : 0, viscosity = 0;
    struct fluid_state state;
    if (flow != 0 && shaft->pipe_m > 0) {
        if (fluid_at_tp(shaft->gas, x[SHAFT_TEMPERATURE], x[SHAFT_TOP], FLUID_PHASE_ANY, &state,
                        NULL) != 0 ||
            fluid_viscosity(shaft->gas, &state, &viscosity, NULL) != 0)
            return ERR_UNSUPPORTED;
        double reynolds = 4 * fabs(flow) / (3.14159265358979323846 * shaft->pipe_m * viscosity);
        friction = shaft_friction_factor(reynolds, shaft->roughness_m / shaft->pipe_m);
    }
    return shaft_foot_pa(x[SHAFT_TOP], fluid_limits(shaft->gas)->molar_mass_kg_mol,
                         shaft->depth_m, x[SHAFT_TEMPERATURE], flow, shaft->pipe_m, friction,
                         out);
}

static int static_gain(const void *context, const double *x, double *y)
{
    int code = foot(context, x, false, y);
    *y -= x[SHAFT_TOP];
    return code;
}

static int friction_loss(const void *context, const double *x, double *y)
{
    double standing = 0, flowing = 0;
    int code = foot(context, x, false, &standing);
    if (code == 0)
        code = foot(context, x, true, &flowing);
    *y = standing - flowing;
    return code;
}

/* kg/s from whatever the meter tells, at the top. */
static void shaft_flow(const struct engine *engine, const struct shaft *shaft,
                       const struct input *top, const struct input *temperature,
                       struct estimate *out, struct verdict *verdict)
{
    struct input flow = input_of(engine, &shaft->flow);
    struct fluid_state state = {.density_kg_m3 = 1};
    input_judge(engine, &flow, "flow", verdict);
    bool normal = shaft->flow.unit.dimension == DIMENSION_NORMAL_FLOW;
    if (verdict_usable(verdict) &&
        (normal || shaft->flow.unit.dimension == DIMENSION_VOLUME_FLOW) &&
        fluid_at_tp(shaft->gas, normal ? 273.15 : temperature->value,
                    normal ? 101325 : top->value, FLUID_PHASE_ANY, &state, NULL) != 0)
        verdict_doubt(verdict, QUALITY_BAD, "no density for the flow");
    input_estimate(out, &flow);
    estimate_scale(out, state.density_kg_m3);
}

static void shaft_step(struct engine *engine, int index)
{
    const struct shaft *shaft = &engine->plant->shaft[index];
    struct input top = input_pressure(engine, &shaft->top_pressure);
    struct input bottom = input_pressure(engine, &shaft->bottom_pressure);
    struct input temperature = input_of(engine, &shaft->temperature);
    struct verdict standing = {0}, flowing, measured, power;
    struct estimate zero = {.count = 0}, x[SHAFT_INPUTS] = {zero}, gain = zero, loss = zero,
                    unexplained = zero, least = zero;
    const struct estimate *const of[] = {&x[0], &x[1], &x[2]};
    input_judge(engine, &top, "top_pressure", &standing);
    input_judge(engine, &temperature, "temperature", &standing);
    input_estimate(&x[SHAFT_TOP], &top);
    input_estimate(&x[SHAFT_TEMPERATURE], &temperature);
    if (verdict_usable(&standing) && estimate_apply(&gain, static_gain, shaft, 3, of) != 0)
        verdict_doubt(&standing, QUALITY_BAD, "the column's pressure cannot be computed");
    flowing = standing;
    shaft_flow(engine, shaft, &top, &temperature, &x[SHAFT_FLOW], &flowing);
    if (verdict_usable(&flowing) && estimate_apply(&loss, friction_loss, shaft, 3, of) != 0)
        verdict_doubt(&flowing, QUALITY_MISSING, "friction cannot be computed for %s",
                      fluid_name(shaft->gas));
    measured = flowing;
    input_judge(engine, &bottom, "bottom_pressure", &measured);
    if (verdict_usable(&measured)) {
        /* bottom - top - gain + loss */
        input_estimate(&unexplained, &bottom);
        estimate_add(&unexplained, -1, &x[SHAFT_TOP]);
        estimate_add(&unexplained, -1, &gain);
        estimate_add(&unexplained, 1, &loss);
    }
    power = flowing;
    double work = 0;
    struct error err;
    if (verdict_usable(&power) &&
        shaft_liquefaction_j_kg(shaft->gas, temperature.value, top.value, temperature.value,
                                &work, &err) != 0)
        verdict_doubt(&power, QUALITY_BAD, "%.110s", err.text);
    if (verdict_usable(&power)) {
        least = x[SHAFT_FLOW];
        estimate_scale(&least, work);
    }
    engine_derive(engine, DERIVED_SHAFT_STATIC_GAIN, index, &gain, &standing);
    engine_derive(engine, DERIVED_SHAFT_FRICTION_LOSS, index, &loss, &flowing);
    engine_derive(engine, DERIVED_SHAFT_UNEXPLAINED, index, &unexplained, &measured);
    engine_derive(engine, DERIVED_SHAFT_RELIQUEFACTION_POWER_MINIMUM, index, &least, &power);
}

/* ---- deliveries
 * ------------------------------------------------------------------------------- */

static void delivery_step(struct engine *engine, int index)
{
    const struct delivery *delivery = &engine->plant->delivery[index];
    const struct ref *const ref[] = {&delivery->oxygen, &delivery->nitrogen, &delivery->water};
    const double limit[] = {delivery->oxygen_limit, delivery->nitrogen_limit,
                            delivery->water_limit};
    struct verdict verdict = {0};
    struct estimate outcome = {.count = 0}, margin = {.count = 0};
    double coverage = statistics_normal_quantile(delivery->guard);
    bool any = false, accept = true, reject = false;
    for (int i = 0; i < 3; i++) {
        struct input x = input_of(engine, ref[i]);
        if (!(limit[i] > 0) || !x.described)
            continue;
        input_judge(engine, &x, "analyzer", &verdict);
        if (!input_usable(&x))
            continue;
        double u = x.parts > 0 ? x.part[0].u : 0;
        double conformity = delivery_conformity(limit[i], x.value, u);
        double left = (limit[i] - coverage * u - x.value) / limit[i];
        accept = accept && conformity >= delivery->guard;
        reject = reject || conformity <= 1 - delivery->guard;
        if (!any || left < margin.value) {
            estimate_exact(&margin, left);
            input_add_u(&margin, -1 / limit[i], &x);
        }
        any = true;
    }
    if (!any)
        missing(&verdict, "analyzer with a limit");
    estimate_exact(&outcome, reject ? 2 : accept ? 0 : 1);
    engine_derive(engine, DERIVED_DELIVERY_VERDICT, index, &outcome, &verdict);
    engine_derive(engine, DERIVED_DELIVERY_GUARDED_MARGIN, index, &margin, &verdict);
}

void things_step(struct engine *engine)
{
    const struct plant *plant = engine->plant;
    for (int i = 0; i < plant->pump_count; i++)
        pump_step(engine, i);
    for (int i = 0; i < plant->purifier_count; i++)
        purifier_step(engine, i);
    for (int i = 0; i < plant->drift_count; i++)
        drift_step(engine, i);
    for (int i = 0; i < plant->shaft_count; i++)
        shaft_step(engine, i);
    for (int i = 0; i < plant->delivery_count; i++)
        delivery_step(engine, i);
}
