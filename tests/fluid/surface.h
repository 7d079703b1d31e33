/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * A grid over the whole surface of a fluid, for tests: temperatures from the triple point to
 * the limit, denser around the critical one; pressures from a thousandth of the triple pressure
 * to the limit, denser around the critical one. Include after cmocka.h.
 */
#ifndef TESTS_FLUID_SURFACE_H
#define TESTS_FLUID_SURFACE_H

#include <math.h>

#include "ullage/fluid.h"

enum { GRID_T = 36, GRID_P = 30 };

static inline double grid_temperature(const struct fluid *fluid, int i)
{
    static const double near_critical[] = {0.90,  0.95,  0.98, 0.99, 0.995, 0.999,
                                           1.001, 1.005, 1.01, 1.02, 1.05,  1.1};
    const struct fluid_limits *limits = fluid_limits(fluid);
    int even = GRID_T - (int)ARRAY_LENGTH(near_critical);
    if (i >= even)
        return limits->critical_temperature_k * near_critical[i - even];
    double low = limits->triple_temperature_k, high = limits->max_temperature_k;
    return low * pow(high / low, 0.001 + 0.998 * i / (even - 1));
}

static inline double grid_pressure(const struct fluid *fluid, int i)
{
    static const double near_critical[] = {0.9, 0.98, 0.995, 1.005, 1.02, 1.1};
    const struct fluid_limits *limits = fluid_limits(fluid);
    int even = GRID_P - (int)ARRAY_LENGTH(near_critical);
    if (i >= even)
        return limits->critical_pressure_pa * near_critical[i - even];
    double low = limits->triple_pressure_pa * 1e-3, high = limits->max_pressure_pa;
    return low * pow(high / low, 0.998 * i / (even - 1));
}

/* The scale on which energies and entropies of a state are compared: their zero is arbitrary.
 */
static inline double entropy_scale(const struct fluid *fluid)
{
    return fluid_limits(fluid)->gas_constant_j_mol_k / fluid_limits(fluid)->molar_mass_kg_mol;
}
static inline double energy_scale(const struct fluid *fluid, double temperature_k)
{
    double critical = fluid_limits(fluid)->critical_temperature_k;
    return entropy_scale(fluid) * (temperature_k > critical ? temperature_k : critical);
}

/* How far from the critical point, relative, as its neighbourhood is shaped: 0 there. */
static inline double critical_distance(const struct fluid *fluid, const struct fluid_state *s)
{
    const struct fluid_limits *limits = fluid_limits(fluid);
    double density = s->density_kg_m3 / limits->critical_density_kg_m3 - 1;
    return fabs(s->temperature_k / limits->critical_temperature_k - 1) + density * density;
}

/* Calls visit for each state of the grid that exists; the number of them. */
typedef void surface_visit(const struct fluid *fluid, const struct fluid_state *state);
static inline int surface_each(const struct fluid *fluid, surface_visit *visit)
{
    int count = 0;
    for (int i = 0; i < GRID_T; i++) {
        for (int k = 0; k < GRID_P; k++) {
            struct fluid_state state;
            struct error err = {0};
            int code = fluid_at_tp(fluid, grid_temperature(fluid, i), grid_pressure(fluid, k),
                                   FLUID_PHASE_ANY, &state, &err);
            if (code != 0) { /* only the solid is left out */
                if (code != ERR_RANGE || strstr(err.text, "solid") == NULL)
                    fail_msg("%s", err.text);
                continue;
            }
            visit(fluid, &state);
            count++;
        }
    }
    return count;
}

#endif
