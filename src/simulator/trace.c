/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The rest of a plant: traces in the liquid and the purifier, the gas riser, the weather.
 */
#include "model.h"

#include <math.h>

static const double OXYGEN_KG_MOL = 0.0319988;
/* A clean liquid in balance: oxygen, nitrogen, part removed in a pass. */
static const double OXYGEN = 38e-12, NITROGEN = 20e-9, REMOVED = 0.98;

void trace_model_init(struct trace_model *trace, double circulation_kg_s, double liquid_kg,
                      const struct fluid *fluid)
{
    double molar = fluid_limits(fluid)->molar_mass_kg_mol;
    (void)liquid_kg;
    *trace = (struct trace_model){
        .oxygen = OXYGEN,
        .nitrogen = NITROGEN,
        .circulation_kg_s = circulation_kg_s,
        .removed = REMOVED,
        /* what the walls give is what the purifier takes */
        .oxygen_in_mol_s = REMOVED * circulation_kg_s * OXYGEN / molar,
    };
}

void trace_model_step(struct trace_model *trace, double span_s, double liquid_kg,
                      const struct fluid *fluid)
{
    double molar = fluid_limits(fluid)->molar_mass_kg_mol, moles = liquid_kg / molar;
    if (!(moles > 1e-6))
        return;
    double rate = trace->removed * trace->circulation_kg_s / liquid_kg;
    double settled = rate > 0 ? trace->oxygen_in_mol_s / (moles * rate) : 0;
    double before = trace->oxygen;
    /* dx/dt = S/n - rate x, solved over the step */
    if (rate > 0)
        trace->oxygen = settled + (before - settled) * exp(-rate * span_s);
    else
        trace->oxygen += trace->oxygen_in_mol_s / moles * span_s;
    trace->captured_kg +=
        (trace->oxygen_in_mol_s * span_s - (trace->oxygen - before) * moles) * OXYGEN_KG_MOL;
    trace->nitrogen += trace->nitrogen_in_mol_s / moles * span_s;
}

double weather_pa(double elevation_m, double time_s)
{
    /* Standard atmosphere below 11 km, geopotential height taken for geometric (ISO 2533). */
    double base = 101325 * pow((288.15 - 0.0065 * elevation_m) / 288.15, 5.255876);
    return base + 250 * sin(time_s / 13750.0) + 90 * sin(time_s / 3700.0 + 1);
}

void riser_model_init(struct riser_model *riser, const struct shaft *described)
{
    const double g = 9.80665;
    double temperature =
        described->temperature.kind == REF_CONSTANT ? described->temperature.value : 288.15;
    *riser = (struct riser_model){.described = described,
                                  .flow_kg_s = 0.04,
                                  .top_pa = 300e3,
                                  .temperature_k = temperature};
    /* Down the shaft in short pieces: the real gas's density, its weight, and friction
     * (Haaland). */
    double area = 0.25 * 3.14159265358979323846 * described->pipe_m * described->pipe_m;
    double pressure = riser->top_pa;
    const int pieces = 50;
    for (int i = 0; i < pieces; i++) {
        struct fluid_state state;
        double viscosity = 2.2e-5;
        if (fluid_at_tp(described->gas, temperature, pressure, FLUID_PHASE_ANY, &state, NULL) !=
            0)
            break;
        if (fluid_viscosity(described->gas, &state, &viscosity, NULL) != 0)
            viscosity = 2.2e-5;
        double speed = riser->flow_kg_s / (state.density_kg_m3 * area);
        double reynolds = state.density_kg_m3 * speed * described->pipe_m / viscosity;
        double rough = described->roughness_m / described->pipe_m / 3.7;
        double root = -1.8 * log10(pow(rough, 1.11) + 6.9 / reynolds);
        double loss = reynolds > 1 ? 0.5 * state.density_kg_m3 * speed * speed /
                                         (root * root * described->pipe_m)
                                   : 0;
        pressure += (state.density_kg_m3 * g - loss) * described->depth_m / pieces;
    }
    riser->bottom_pa = pressure;
}
