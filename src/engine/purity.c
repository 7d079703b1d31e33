/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Oxygen in the liquid of a vessel with a purifier, taken as well mixed (methods 2.1): what
 * enters is what the purifier takes and what the liquid keeps. Oxygen is in kilograms of
 * oxygen, the analyzers read mole fractions.
 */
#include "internal.h"

#include <math.h>

static const double OXYGEN_KG_MOL = 0.0319988;

enum purity_series { PURITY_FRACTION, PURITY_TAKEN, PURITY_SERIES_COUNT };

int purity_create(struct engine *engine, int vessel)
{
    const struct vessel *described = &engine->plant->vessel[vessel];
    double block_s = described->window_s / WINDOW_BLOCKS;
    if (described->purifier < 0)
        return 0;
    if (block_s < engine->plant->site.frame_s)
        block_s = engine->plant->site.frame_s;
    return window_init(&engine->purity[vessel].window, PURITY_SERIES_COUNT, WINDOW_BLOCKS + 8,
                       time_s_to_ns(block_s), 0, engine->arena);
}

/* One frame of a purifier. */
struct pass {
    struct input flow, in, out;
    double flow_kg_s, per_reading;
    double mass_ratio;     /* kg of oxygen in a kg of liquid for a mole fraction of 1 */
    struct estimate taken; /* kg/s of oxygen */
    struct estimate time_constant;
    struct verdict verdict;
};

static void read_pass(const struct engine *engine, int vessel, struct pass *pass)
{
    const struct vessel_state *state = &engine->vessel[vessel];
    const struct purifier *purifier = &engine->plant->purifier[state->vessel->purifier];
    *pass = (struct pass){.per_reading = 1};
    pass->verdict = state->contents_verdict;
    pass->flow = input_of(engine, &purifier->flow);
    pass->in = input_of(engine, &purifier->oxygen_in);
    pass->out = input_of(engine, &purifier->oxygen_out);
    input_judge(engine, &pass->flow, "flow through the purifier", &pass->verdict);
    input_judge(engine, &pass->in, "oxygen_in", &pass->verdict);
    input_judge(engine, &pass->out, "oxygen_out", &pass->verdict);
    if (!verdict_usable(&pass->verdict))
        return;
    if (purifier->flow.unit.dimension == DIMENSION_VOLUME_FLOW)
        pass->per_reading = state->contents.liquid.density_kg_m3;
    pass->flow_kg_s = pass->per_reading * pass->flow.value;
    pass->mass_ratio = OXYGEN_KG_MOL / fluid_limits(state->vessel->fluid)->molar_mass_kg_mol;
    double removed = pass->in.value - pass->out.value;
    estimate_exact(&pass->taken, pass->mass_ratio * pass->flow_kg_s * removed);
    input_add_systematic(&pass->taken, pass->mass_ratio * pass->per_reading * removed,
                         &pass->flow);
    input_add_systematic(&pass->taken, pass->mass_ratio * pass->flow_kg_s, &pass->in);
    input_add_systematic(&pass->taken, -pass->mass_ratio * pass->flow_kg_s, &pass->out);
}

/* M/(eps F), eps = 1 - out/in. */
static void derive_time_constant(struct engine *engine, int vessel, struct pass *pass,
                                 struct verdict *verdict)
{
    const struct estimate *mass = &engine->vessel[vessel].liquid_mass;
    struct estimate *tau = &pass->time_constant;
    *verdict = pass->verdict;
    double u_in = pass->in.parts > 0 ? pass->in.part[0].u : 0;
    if (verdict_usable(verdict) &&
        !(pass->flow_kg_s > 0 && pass->in.value > 2 * u_in && pass->in.value > pass->out.value))
        verdict_doubt(verdict, QUALITY_MISSING, "the purifier takes nothing that can be told");
    if (verdict_usable(verdict)) {
        double in = pass->in.value, efficiency = 1 - pass->out.value / in;
        double value = purity_time_constant_s(mass->value, pass->flow_kg_s, efficiency);
        estimate_exact(tau, 0);
        estimate_add(tau, value / mass->value, mass);
        tau->value = value;
        input_add_u(tau, -value / pass->flow.value, &pass->flow);
        input_add_u(tau, value / (efficiency * in), &pass->out);
        input_add_u(tau, -value * pass->out.value / (efficiency * in * in), &pass->in);
    }
    engine_derive(engine, DERIVED_VESSEL_PURITY_TIME_CONSTANT, vessel, tau, verdict);
}

static void evaluate_ingress(struct engine *engine, int vessel, const struct pass *pass,
                             struct estimate *ingress, struct verdict *verdict)
{
    const struct vessel *described = &engine->plant->vessel[vessel];
    const struct window *window = &engine->purity[vessel].window;
    int from = window_from(window,
                           fmax(described->window_s, 8 * time_ns_to_s(window->block_ns)), 0),
        to = window->count;
    const double *t = window_time_s(window), *x = window_series(window, PURITY_FRACTION);
    double span = to > 0 ? t[to - 1] - t[from] : 0,
           least = vessel_least_s(&engine->vessel[vessel]);
    struct window_line line;
    if (span + time_ns_to_s(window->block_ns) < least ||
        window_weigh(window, from, &engine->weights) != 0 ||
        window_line(window, from, to, x, &line) != 0) {
        verdict_filling(verdict, least - span);
        return;
    }
    double keeps = pass->mass_ratio * engine->vessel[vessel].liquid_mass.value;
    double taken =
        window_sum(engine->weights.rate, window_series(window, PURITY_TAKEN), from, to);
    estimate_exact(ingress, 0);
    estimate_add(ingress, 1, &pass->taken); /* its errors now, its value of the window */
    ingress->value = taken + keeps * window_sum(engine->weights.slope, x, from, to);
    estimate_add_term(ingress, source_of(SOURCE_PURITY_NOISE, vessel), keeps * line.u_slope);
    for (int i = 0; i < pass->in.parts; i++)
        estimate_add_term(ingress, source_of(SOURCE_DRIFT, pass->in.part[i].tag),
                          keeps * pass->in.part[i].u * input_drift_per_s);
}

static void derive_time_to_purity(struct engine *engine, int vessel, const struct pass *pass,
                                  const struct estimate *ingress, const struct verdict *both)
{
    const struct vessel_state *state = &engine->vessel[vessel];
    double target = engine->plant->purifier[state->vessel->purifier].target;
    struct verdict verdict = *both;
    struct estimate time = {.count = 0};
    if (!(target > 0)) {
        verdict = (struct verdict){0};
        verdict_doubt(&verdict, QUALITY_MISSING, "the plant file gives no target");
    }
    if (verdict_usable(&verdict)) {
        double molar = fluid_limits(state->vessel->fluid)->molar_mass_kg_mol;
        double efficiency = 1 - pass->out.value / pass->in.value, value = 0;
        double steady = purity_steady_fraction(ingress->value / OXYGEN_KG_MOL, pass->flow_kg_s,
                                               efficiency, molar);
        double tau = pass->time_constant.value, x = pass->in.value;
        if (x > target && purity_time_to_s(x, steady, target, tau, &value) != 0) {
            verdict_doubt(&verdict, QUALITY_MISSING, "not reached at the present ingress");
        } else {
            /* dt/dx, dt/dx_ss, dt/dtau of tau ln((x - x_ss)/(x_t - x_ss)) */
            double by_steady = tau * (1 / (target - steady) - 1 / (x - steady));
            estimate_exact(&time, value);
            if (x > target) {
                estimate_add(&time, value / tau, &pass->time_constant);
                estimate_add(&time, by_steady * steady / ingress->value, ingress);
                input_add_u(&time, tau / (x - steady), &pass->in);
                time.value = value;
            }
        }
    }
    engine_derive(engine, DERIVED_VESSEL_TIME_TO_PURITY, vessel, &time, &verdict);
}

void purity_step(struct engine *engine, int vessel)
{
    struct purity_state *state = &engine->purity[vessel];
    const struct vessel *described = &engine->plant->vessel[vessel];
    if (described->purifier < 0)
        return;
    struct pass pass;
    struct verdict constant, verdict;
    read_pass(engine, vessel, &pass);
    derive_time_constant(engine, vessel, &pass, &constant);
    verdict = pass.verdict;
    if (verdict_usable(&verdict)) {
        if (state->window.count > 0 && time_ns_to_s(engine->utc_ns - state->pushed_utc_ns) >
                                           vessel_least_s(&engine->vessel[vessel]))
            window_restart(&state->window);
        const double values[] = {
            [PURITY_FRACTION] = pass.in.value, [PURITY_TAKEN] = pass.taken.value};
        bool opened = window_push(&state->window, engine->utc_ns, values);
        state->pushed_utc_ns = engine->utc_ns;
        if (opened) {
            state->verdict = (struct verdict){0};
            evaluate_ingress(engine, vessel, &pass, &state->ingress, &state->verdict);
        }
        verdict_join(&verdict, &state->verdict);
    }
    engine_derive(engine, DERIVED_VESSEL_OXYGEN_INGRESS, vessel, &state->ingress, &verdict);
    verdict_join(&verdict, &constant);
    derive_time_to_purity(engine, vessel, &pass, &state->ingress, &verdict);
}
