/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The coolant's side of a condenser: liquid at a pressure where it boils a little colder than
 * the vessel, let down, evaporated and slightly superheated.
 */
#include "model.h"

/* Pinch, subcooling before the valve, superheat behind it, K; pressure before over behind. */
static const double PINCH_K = 4, SUBCOOLING_K = 4, SUPERHEAT_K = 3, LET_DOWN = 1.2;

int coolant_model_init(struct coolant_model *coolant, const struct condenser *described,
                       double vessel_temperature_k, struct error *err)
{
    const struct fluid *fluid = described->coolant;
    struct fluid_saturation boiling, before;
    struct fluid_state in, out;
    *coolant = (struct coolant_model){.described = described};
    int code = fluid_saturation_at_t(fluid, vessel_temperature_k - PINCH_K, &boiling, NULL);
    if (code != 0)
        code = fluid_saturation_at_p(fluid, 101325, &boiling, err);
    if (code != 0)
        return code;
    coolant->out_pressure_pa = boiling.pressure_pa;
    coolant->out_temperature_k = boiling.temperature_k + SUPERHEAT_K;
    coolant->in_pressure_pa = LET_DOWN * boiling.pressure_pa;
    code = fluid_saturation_at_p(fluid, coolant->in_pressure_pa, &before, err);
    if (code != 0)
        return code;
    coolant->in_temperature_k = before.temperature_k - SUBCOOLING_K;
    if (coolant->in_temperature_k < fluid_limits(fluid)->triple_temperature_k)
        coolant->in_temperature_k =
            0.5 * (before.temperature_k + fluid_limits(fluid)->triple_temperature_k);
    code = fluid_at_tp(fluid, coolant->in_temperature_k, coolant->in_pressure_pa,
                       FLUID_PHASE_LIQUID, &in, err);
    if (code == 0)
        code = fluid_at_tp(fluid, coolant->out_temperature_k, coolant->out_pressure_pa,
                           FLUID_PHASE_VAPOUR, &out, err);
    if (code == 0)
        coolant->rise_j_kg = out.enthalpy_j_kg - in.enthalpy_j_kg;
    return code;
}
