/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Contents of a vessel: level by shape to liquid volume, densities from the equation of state,
 * and the derivatives of all by what was measured, taken analytically from the states (methods
 * 11). The mass m = V(h) rho_l + (V - V(h)) rho_v.
 */
#include "ullage/balance.h"

/* Derivatives of a state's properties at constant pressure and at constant temperature. */
struct slopes {
    double density_t, density_p;
    double energy_t, energy_p;
};

static double enthalpy_by_pressure(const struct fluid_state *s)
{
    double rho = s->density_kg_m3;
    return (1 - s->temperature_k * s->dp_dt_pa_k / (rho * s->dp_drho_pa_m3_kg)) / rho;
}

static struct slopes state_slopes(const struct fluid_state *s)
{
    double rho = s->density_kg_m3;
    double density_t = -s->dp_dt_pa_k / s->dp_drho_pa_m3_kg;
    double density_p = 1 / s->dp_drho_pa_m3_kg;
    /* u = h - p/rho */
    return (struct slopes){
        .density_t = density_t,
        .density_p = density_p,
        .energy_t = s->cp_j_kg_k + s->pressure_pa * density_t / (rho * rho),
        .energy_p =
            enthalpy_by_pressure(s) - 1 / rho + s->pressure_pa * density_p / (rho * rho),
    };
}

void enthalpy_of_state(const struct fluid_state *state, struct enthalpy *out)
{
    *out = (struct enthalpy){
        .value_j_kg = state->enthalpy_j_kg,
        .by_temperature = state->cp_j_kg_k,
        .by_pressure = enthalpy_by_pressure(state),
        .density_kg_m3 = state->density_kg_m3,
        .density_by_temperature = -state->dp_dt_pa_k / state->dp_drho_pa_m3_kg,
        .density_by_pressure = 1 / state->dp_drho_pa_m3_kg,
    };
}

void enthalpy_of_line(const struct fluid_saturation *line, enum fluid_phase phase,
                      struct enthalpy *out)
{
    enthalpy_of_state(phase == FLUID_PHASE_LIQUID ? &line->liquid : &line->vapour, out);
    out->by_pressure += out->by_temperature / line->dp_dt_pa_k;
    out->density_by_pressure += out->density_by_temperature / line->dp_dt_pa_k;
    out->by_temperature = out->density_by_temperature = 0;
}

int phase_at(const struct fluid *fluid, double temperature_k, double pressure_pa,
             enum fluid_phase phase, struct fluid_state *out, struct error *err)
{
    if (phase == FLUID_PHASE_VAPOUR &&
        temperature_k >= fluid_limits(fluid)->critical_temperature_k)
        phase = FLUID_PHASE_ANY;
    return fluid_at_tp(fluid, temperature_k, pressure_pa, phase, out, err);
}

int enthalpy_at(const struct fluid *fluid, double temperature_k, double pressure_pa,
                enum fluid_phase phase, bool saturated, struct enthalpy *out, struct error *err)
{
    if (saturated) {
        struct fluid_saturation line;
        int code = fluid_saturation_at_p(fluid, pressure_pa, &line, err);
        if (code == 0)
            enthalpy_of_line(&line, phase, out);
        return code;
    }
    struct fluid_state state;
    int code = phase_at(fluid, temperature_k, pressure_pa, phase, &state, err);
    if (code == 0)
        enthalpy_of_state(&state, out);
    return code;
}

static int phases_at(const struct fluid *fluid, const struct contents_input *input,
                     struct contents *out, struct error *err)
{
    int code = fluid_saturation_at_p(fluid, input->pressure_pa, &out->line, err);
    if (code != 0)
        return code;
    out->liquid = out->line.liquid;
    out->vapour = out->line.vapour;
    out->vapour_doubtful = false;
    /* An empty vessel's thermometers stand in gas: there is no liquid to ask about. */
    if (!input->liquid_saturated && input->level_m > 0) {
        code = fluid_at_tp(fluid, input->liquid_temperature_k, input->pressure_pa,
                           FLUID_PHASE_LIQUID, &out->liquid, err);
        if (code != 0)
            return code;
    }
    if (!input->vapour_saturated)
        out->vapour_doubtful = phase_at(fluid, input->vapour_temperature_k, input->pressure_pa,
                                        FLUID_PHASE_VAPOUR, &out->vapour, NULL) != 0;
    return 0;
}

/* Sets a property q = V(level) * per_volume of one phase. */
static void phase_property(struct contents_property *q, double volume, double surface,
                           enum contents_variable temperature, bool saturated, double dt_dp,
                           double per_volume, double by_t, double by_p)
{
    *q = (struct contents_property){.value = volume * per_volume};
    q->d[CONTENTS_LEVEL] = surface * per_volume;
    q->d[CONTENTS_PRESSURE] = volume * (by_p + (saturated ? by_t * dt_dp : 0));
    q->d[temperature] = saturated ? 0 : volume * by_t;
}

static void property_add(struct contents_property *sum, const struct contents_property *x)
{
    sum->value += x->value;
    for (int i = 0; i < CONTENTS_VARIABLES; i++)
        sum->d[i] += x->d[i];
}

/* Both phases' share of volume * density * (internal energy - reference), or of mass alone. */
static void phase_shares(const struct contents *c, bool mass_only, double reference,
                         struct contents_property *liquid, struct contents_property *vapour)
{
    const struct fluid_state *state[] = {&c->liquid, &c->vapour};
    struct contents_property *out[] = {liquid, vapour};
    double liquid_volume = c->liquid_volume_m3.value;
    double volume[] = {liquid_volume, c->volume_m3 - liquid_volume};
    double surface[] = {c->surface_m2, -c->surface_m2};
    double dt_dp = 1 / c->line.dp_dt_pa_k;
    for (int i = 0; i < 2; i++) {
        const struct fluid_state *s = state[i];
        struct slopes by = state_slopes(s);
        double rho = s->density_kg_m3;
        double energy = mass_only ? 1 : s->internal_energy_j_kg - reference;
        double energy_t = mass_only ? 0 : by.energy_t, energy_p = mass_only ? 0 : by.energy_p;
        phase_property(out[i], volume[i], surface[i],
                       i == 0 ? CONTENTS_LIQUID_TEMPERATURE : CONTENTS_VAPOUR_TEMPERATURE,
                       s->saturated, dt_dp, rho * energy,
                       by.density_t * energy + rho * energy_t,
                       by.density_p * energy + rho * energy_p);
    }
}

int contents_at(const struct fluid *fluid, const struct shape *shape,
                const struct contents_input *input, struct contents *out, struct error *err)
{
    struct contents c;
    int code = phases_at(fluid, input, &c, err);
    if (code != 0)
        return code;
    /* Saturated here means: follows the pressure. A measured temperature that happens to lie on
     * the line does not. */
    c.liquid.saturated = input->liquid_saturated;
    c.vapour.saturated = input->vapour_saturated || c.vapour_doubtful;
    c.height_m = shape_height_m(shape);
    c.volume_m3 = shape_volume_m3(shape);
    c.surface_m2 = shape_surface_at_m2(shape, input->level_m);
    c.liquid_volume_m3 = (struct contents_property){
        .value = shape_volume_at_m3(shape, input->level_m), .d[CONTENTS_LEVEL] = c.surface_m2};
    phase_shares(&c, true, 0, &c.liquid_mass_kg, &c.vapour_mass_kg);
    c.mass_kg = c.liquid_mass_kg;
    property_add(&c.mass_kg, &c.vapour_mass_kg);
    *out = c;
    return 0;
}

void contents_energy(const struct contents *contents, double reference_j_kg,
                     struct contents_property *out)
{
    struct contents_property vapour;
    phase_shares(contents, false, reference_j_kg, out, &vapour);
    property_add(out, &vapour);
}
