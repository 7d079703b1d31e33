/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The neighbourhood of the critical point, where a branch's slope vanishes and Newton's step
 * runs away: slower ways that cannot miss. Pressure on an isotherm is nearly a cubic of density
 * there.
 */
#include "equation.h"

#include <float.h>
#include <math.h>

static const double GOLDEN = 0.6180339887498949;
/* Solid-like densities beyond any validity; over the critical one. */
static const double DENSEST = 12;
static const double EDGE_DIGITS = 1e-10;
enum { STEPS_MAX = 200 };

/* Slope of pressure over density, over R T. */
static double stiffness(const struct isotherm *isotherm, double delta)
{
    struct residual_density residual;
    residual_density(isotherm, delta, &residual);
    return 1 + 2 * residual.d + residual.dd;
}

/* Where that slope changes its sign, between a density where pressure falls and one where it
 * rises. */
static double spinodal(const struct isotherm *isotherm, double falls, double rises)
{
    for (int i = 0; i < 60 && fabs(rises - falls) > DBL_EPSILON * rises; i++) {
        double middle = 0.5 * (falls + rises);
        if (stiffness(isotherm, middle) < 0)
            falls = middle;
        else
            rises = middle;
    }
    return rises;
}

struct critical_branches critical_branches(const struct isotherm *isotherm)
{
    const struct fluid *fluid = isotherm->fluid;
    double centre = fluid->critical_density_mol_m3 / fluid->reduce_density_mol_m3;
    double low = 0.6 * centre, high = 1.4 * centre;
    for (int i = 0; i < 60; i++) { /* the softest density, by the golden section */
        double a = high - GOLDEN * (high - low), b = low + GOLDEN * (high - low);
        if (stiffness(isotherm, a) < stiffness(isotherm, b))
            high = b;
        else
            low = a;
    }
    double softest = 0.5 * (low + high);
    struct critical_branches out = {softest, softest, softest, softest};
    if (!(stiffness(isotherm, softest) < 0))
        return out;
    out.liquid_end = spinodal(isotherm, softest, 1.5 * centre);
    out.vapour_end = spinodal(isotherm, softest, 0.5 * centre);
    /* A cubic's equal roots lie sqrt 3 times as far apart as its extrema. */
    double middle = 0.5 * (out.liquid_end + out.vapour_end);
    double apart = 0.5 * sqrt(3) * (out.liquid_end - out.vapour_end);
    out.liquid = middle + apart;
    out.vapour = middle - apart;
    return out;
}

static double pressure_at(const struct isotherm *isotherm, double density, double *slope)
{
    const struct fluid *fluid = isotherm->fluid;
    double rt = fluid->limits.gas_constant_j_mol_k * isotherm->temperature_k;
    struct residual_density residual;
    residual_density(isotherm, density / fluid->reduce_density_mol_m3, &residual);
    *slope = rt * (1 + 2 * residual.d + residual.dd);
    return density * rt * (1 + residual.d);
}

int critical_density_solve(const struct isotherm *isotherm, double pressure_pa,
                           enum fluid_phase wanted, double edge_mol_m3, double *density_mol_m3)
{
    double low = 0, high = edge_mol_m3, slope;
    double miss = pressure_at(isotherm, edge_mol_m3, &slope) - pressure_pa;
    if ((wanted == FLUID_PHASE_LIQUID) != (miss <= 0)) {
        /* The edge's own pressure is known to some digits only. */
        if (fabs(miss) > EDGE_DIGITS * pressure_pa)
            return ERR_RANGE;
        *density_mol_m3 = edge_mol_m3;
        return 0;
    }
    if (wanted == FLUID_PHASE_LIQUID) {
        do {
            low = high;
            high *= 1.1;
            if (high > DENSEST * isotherm->fluid->critical_density_mol_m3)
                return ERR_RANGE;
        } while (pressure_at(isotherm, high, &slope) < pressure_pa);
    }
    double density = 0.5 * (low + high);
    for (int i = 0; i < STEPS_MAX; i++) {
        miss = pressure_at(isotherm, density, &slope) - pressure_pa;
        if (miss > 0)
            high = density;
        else
            low = density;
        double next = density - miss / slope;
        if (!(slope > 0 && next > low && next < high))
            next = 0.5 * (low + high);
        double moved = fabs(next - density);
        density = next;
        if (moved <= 2 * DBL_EPSILON * density) {
            *density_mol_m3 = density;
            return 0;
        }
    }
    return ERR_CONVERGE;
}
