/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Heat in closed form: a venting vessel at steady pressure (methods 4.1), and a closed
 * homogeneous two-phase vessel (methods 4.2), whose time to relief is an upper bound: a real
 * vessel stratifies and its pressure rises faster.
 */
#include "ullage/balance.h"

double heat_evaporated_kg_s(double vent_kg_s, double liquid_kg_m3, double vapour_kg_m3)
{
    return vent_kg_s * liquid_kg_m3 / (liquid_kg_m3 - vapour_kg_m3);
}

double heat_of_vent_w(double vent_kg_s, double latent_j_kg, double liquid_kg_m3,
                      double vapour_kg_m3, double superheat_j_kg)
{
    return heat_evaporated_kg_s(vent_kg_s, liquid_kg_m3, vapour_kg_m3) * latent_j_kg +
           vent_kg_s * superheat_j_kg;
}

/* Internal energy per mass of the two phases together at pressure and specific volume. */
static int mixture_energy(const struct fluid *fluid, double density_kg_m3, double pressure_pa,
                          double *energy_j_kg, struct error *err)
{
    struct fluid_saturation line;
    int code = fluid_saturation_at_p(fluid, pressure_pa, &line, err);
    if (code != 0)
        return code;
    double v = 1 / density_kg_m3, v_l = 1 / line.liquid.density_kg_m3;
    double v_v = 1 / line.vapour.density_kg_m3;
    if (!(v >= v_l && v <= v_v))
        return error_set(err, ERR_RANGE,
                         "%s fills the vessel with one phase before it reaches %.4g kPa",
                         fluid_name(fluid), pressure_pa / 1000);
    double q = (v - v_l) / (v_v - v_l);
    *energy_j_kg = line.liquid.internal_energy_j_kg +
                   q * (line.vapour.internal_energy_j_kg - line.liquid.internal_energy_j_kg);
    return 0;
}

int heat_closed_energy_j(const struct fluid *fluid, double mass_kg, double volume_m3,
                         double from_pa, double to_pa, double *energy_j, struct error *err)
{
    double from, to;
    int code = mixture_energy(fluid, mass_kg / volume_m3, from_pa, &from, err);
    if (code == 0)
        code = mixture_energy(fluid, mass_kg / volume_m3, to_pa, &to, err);
    if (code == 0)
        *energy_j = mass_kg * (to - from);
    return code;
}

int heat_closed_pressure_rate(const struct fluid *fluid, double mass_kg, double volume_m3,
                              double pressure_pa, double heat_w, double *rate_pa_s,
                              struct error *err)
{
    double du_dp;
    int code = fluid_du_dp(fluid, mass_kg / volume_m3, pressure_pa, &du_dp, err);
    if (code == 0)
        *rate_pa_s = heat_w / (mass_kg * du_dp);
    return code;
}
