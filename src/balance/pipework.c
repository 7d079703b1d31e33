/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * What stands at the end of pipes: suction of pumps (methods 9), gas columns and friction in
 * shafts, least work of liquefaction (methods 10), conformity of deliveries (methods 12).
 */
#include "ullage/balance.h"

#include <math.h>

#define GRAVITY 9.80665
#define GAS_CONSTANT 8.314462618

double pump_npsh_m(double surface_pa, double vapour_pa, double density_kg_m3, double head_m)
{
    return (surface_pa - vapour_pa) / (density_kg_m3 * GRAVITY) + head_m;
}

double shaft_friction_factor(double reynolds, double roughness)
{
    if (!(reynolds > 0))
        return 0;
    double a = pow(2.457 * log(1 / (pow(7 / reynolds, 0.9) + 0.27 * roughness)), 16);
    double b = pow(37530 / reynolds, 16);
    return 8 * pow(pow(8 / reynolds, 12) + pow(a + b, -1.5), 1.0 / 12);
}

int shaft_foot_pa(double top_pa, double molar_mass_kg_mol, double depth_m, double temperature_k,
                  double flow_kg_s, double pipe_m, double friction_factor, double *foot_pa)
{
    double rt_m = GAS_CONSTANT * temperature_k / molar_mass_kg_mol;
    double a = 2 * GRAVITY / rt_m;
    double area = 0.25 * 3.14159265358979323846 * pipe_m * pipe_m;
    double flux = pipe_m > 0 ? flow_kg_s / area : 0;
    double b = pipe_m > 0 ? friction_factor * flux * fabs(flux) * rt_m / pipe_m : 0;
    double square = (top_pa * top_pa - b / a) * exp(a * depth_m) + b / a;
    if (!(square > 0) || !isfinite(square))
        return ERR_RANGE;
    *foot_pa = sqrt(square);
    return 0;
}

int shaft_liquefaction_j_kg(const struct fluid *fluid, double temperature_k, double pressure_pa,
                            double ambient_k, double *work_j_kg, struct error *err)
{
    struct fluid_state gas;
    struct fluid_saturation line;
    int code = fluid_at_tp(fluid, temperature_k, pressure_pa, FLUID_PHASE_ANY, &gas, err);
    if (code == 0)
        code = fluid_saturation_at_p(fluid, pressure_pa, &line, err);
    if (code == 0)
        *work_j_kg = ambient_k * (gas.entropy_j_kg_k - line.liquid.entropy_j_kg_k) -
                     (gas.enthalpy_j_kg - line.liquid.enthalpy_j_kg);
    return code;
}

double delivery_conformity(double limit, double reading, double u)
{
    if (!(u > 0))
        return reading <= limit ? 1 : 0;
    return statistics_normal_cdf((limit - reading) / u);
}
