/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * A rigid vessel with liquid and vapour in equilibrium. What is integrated is mass and internal
 * energy; pressure, temperature and level follow from them by the equation of state, so that
 * neither can be made or lost.
 */
#include "model.h"

#include <math.h>

/* Pressure control: closed-loop time, and the integral's, s; a vent that holds the pressure, or
 * a relief that opens, passes its full flow over this overpressure. */
static const double CONTROL_S = 300, INTEGRAL_S = 1500, OPENING_PA = 2000;

int vessel_model_init(struct vessel_model *vessel, const struct vessel *described,
                      double pressure_pa, double fill, struct error *err)
{
    *vessel = (struct vessel_model){.described = described};
    int code = fluid_saturation_at_p(described->fluid, pressure_pa, &vessel->line, err);
    if (code != 0)
        return code;
    vessel->volume_m3 = shape_volume_m3(&described->shape);
    double liquid_m3 = fill * vessel->volume_m3, vapour_m3 = vessel->volume_m3 - liquid_m3;
    double liquid = liquid_m3 * vessel->line.liquid.density_kg_m3;
    double vapour = vapour_m3 * vessel->line.vapour.density_kg_m3;
    vessel->mass_kg = liquid + vapour;
    vessel->energy_j = liquid * vessel->line.liquid.internal_energy_j_kg +
                       vapour * vessel->line.vapour.internal_energy_j_kg;
    return vessel_model_settle(vessel, err);
}

static void derive(struct vessel_model *vessel, double volume)
{
    double v_l = 1 / vessel->line.liquid.density_kg_m3;
    double v_v = 1 / vessel->line.vapour.density_kg_m3;
    vessel->vapour_fraction = (volume - v_l) / (v_v - v_l);
    vessel->vapour_kg = vessel->mass_kg * vessel->vapour_fraction;
    vessel->liquid_kg = vessel->mass_kg - vessel->vapour_kg;
    vessel->level_m = shape_level_at_m(&vessel->described->shape, vessel->liquid_kg * v_l);
}

/* Full of liquid, or dry: the state is single-phase; the line is kept for its temperature's
 * sake. */
static int settle_one_phase(struct vessel_model *vessel, struct error *err)
{
    const struct fluid *fluid = vessel->described->fluid;
    struct fluid_state state;
    int code = fluid_at_rhou(fluid, vessel->mass_kg / vessel->volume_m3,
                             vessel->energy_j / vessel->mass_kg, &state, err);
    if (code != 0)
        return code;
    bool liquid = state.density_kg_m3 > fluid_limits(fluid)->critical_density_kg_m3;
    vessel->one_phase = true;
    vessel->line.temperature_k = state.temperature_k;
    vessel->line.pressure_pa = state.pressure_pa;
    vessel->line.liquid = vessel->line.vapour = state;
    vessel->vapour_fraction = liquid ? 0 : 1;
    vessel->liquid_kg = liquid ? vessel->mass_kg : 0;
    vessel->vapour_kg = liquid ? 0 : vessel->mass_kg;
    vessel->level_m = liquid ? shape_height_m(&vessel->described->shape) : 0;
    return 0;
}

int vessel_model_settle(struct vessel_model *vessel, struct error *err)
{
    const struct fluid *fluid = vessel->described->fluid;
    double volume = vessel->volume_m3 / vessel->mass_kg;
    double target = vessel->energy_j / vessel->mass_kg;
    double pressure = vessel->line.pressure_pa;
    if (vessel->one_phase)
        return settle_one_phase(vessel, err);
    for (int i = 0; i < 30; i++) {
        double slope;
        int code = fluid_saturation_at_t(fluid, vessel->line.temperature_k, &vessel->line, err);
        if (code != 0 ||
            fluid_du_dp(fluid, 1 / volume, vessel->line.pressure_pa, &slope, NULL) != 0)
            return settle_one_phase(vessel, err);
        derive(vessel, volume);
        double energy = vessel->line.liquid.internal_energy_j_kg +
                        vessel->vapour_fraction * (vessel->line.vapour.internal_energy_j_kg -
                                                   vessel->line.liquid.internal_energy_j_kg);
        double step = (target - energy) / (slope * vessel->line.dp_dt_pa_k);
        if (fabs(step) < 1e-12 * vessel->line.temperature_k)
            return 0;
        vessel->line.temperature_k += step;
        pressure = vessel->line.pressure_pa;
    }
    return error_set(err, ERR_CONVERGE, "vessel %s: no equilibrium was found near %.6g Pa",
                     vessel->described->name, pressure);
}

/* How much heat per pascal the contents take. */
static double stiffness_j_pa(const struct vessel_model *vessel)
{
    double slope;
    if (vessel->one_phase ||
        fluid_du_dp(vessel->described->fluid, vessel->mass_kg / vessel->volume_m3,
                    vessel->line.pressure_pa, &slope, NULL) != 0)
        return vessel->mass_kg * 0.1;
    return vessel->mass_kg * slope;
}

/* What the pressure controller asks for, W of cooling. */
static double control(struct vessel_model *vessel, double span_s, double gauge_zero_pa,
                      double stiffness)
{
    double miss = vessel->line.pressure_pa - gauge_zero_pa - vessel->set_pa;
    double gain = stiffness / CONTROL_S;
    double asked = gain * miss + vessel->integral_w;
    double given = asked < 0                         ? 0
                   : asked > vessel->cooling_limit_w ? vessel->cooling_limit_w
                                                     : asked;
    /* The integral stands still while the valve is at an end. */
    if (asked == given || (asked > given) == (miss < 0))
        vessel->integral_w += gain * miss * span_s / INTEGRAL_S;
    return given;
}

static double relief_kg_s(const struct vessel_model *vessel, double gauge_zero_pa,
                          double latent)
{
    const struct limit *relief = &vessel->described->relief;
    if (!relief->set)
        return 0;
    double opens = relief->value + (relief->gauge ? gauge_zero_pa : 0);
    double over = vessel->line.pressure_pa - opens;
    double full = 4 * (vessel->leak_w + vessel->pump_w) / latent;
    return over <= 0 ? 0 : over >= OPENING_PA ? full : full * over / OPENING_PA;
}

int vessel_model_step(struct vessel_model *vessel, double span_s, double gauge_zero_pa,
                      bool has_condenser, struct error *err)
{
    const struct fluid_state *liquid = &vessel->line.liquid, *vapour = &vessel->line.vapour;
    double latent = vapour->enthalpy_j_kg - liquid->enthalpy_j_kg;
    if (!(latent > 1000))
        latent = 1000;
    double stiffness = stiffness_j_pa(vessel), before_pa = vessel->line.pressure_pa;
    double before_liquid = vessel->liquid_kg, before_mass = vessel->mass_kg;
    double cooling = control(vessel, span_s, gauge_zero_pa, stiffness);
    double flow = vessel->vapour_kg > 0 ? cooling / latent : 0;
    vessel->vent_kg_s = relief_kg_s(vessel, gauge_zero_pa, latent) + (has_condenser ? 0 : flow);
    vessel->boil_off_kg_s = has_condenser ? flow : 0;
    vessel->duty_w = vessel->boil_off_kg_s * latent;
    double heat = vessel->leak_w + vessel->pump_w - vessel->duty_w;
    double lost = vessel->vent_kg_s + vessel->released_kg_s;
    if (lost * span_s > 0.5 * vessel->mass_kg)
        lost = vessel->vent_kg_s = vessel->released_kg_s = 0;
    double energy = (heat - vessel->vent_kg_s * vapour->enthalpy_j_kg -
                     vessel->released_kg_s * liquid->enthalpy_j_kg) *
                    span_s;
    vessel->mass_kg -= lost * span_s;
    vessel->energy_j += energy;
    vessel->mass_in_kg -= lost * span_s;
    vessel->energy_in_j += energy;
    int code = vessel_model_settle(vessel, err);
    if (code != 0)
        return code;
    vessel->mass_change_kg_s = (vessel->mass_kg - before_mass) / span_s;
    vessel->pressure_rate_pa_s = (vessel->line.pressure_pa - before_pa) / span_s;
    /* Condensate comes back as liquid, so what evaporates is the liquid's loss but for what
     * left as liquid and what came back. */
    vessel->evaporation_kg_s = -(vessel->liquid_kg - before_liquid) / span_s -
                               vessel->released_kg_s + vessel->boil_off_kg_s;
    return 0;
}
