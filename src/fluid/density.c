/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Density from temperature and pressure. Below the critical temperature Newton's step runs from
 * the saturated density of the wanted branch: on the liquid branch pressure is convex in
 * density, on the vapour branch concave, so the steps approach the root from one side; a step
 * that loses the branch (slope not positive) is the spinodal. Above the critical temperature
 * pressure rises with density everywhere and the step is kept in a bracket.
 */
#include "equation.h"

#include <float.h>
#include <math.h>

enum { STEPS_MAX = 100 };
static const double STEP_TOLERANCE = 4 * DBL_EPSILON;
static const double GROWTH_MAX = 1.2;

static double pressure_at(const struct isotherm *isotherm, double density, double *slope)
{
    const struct fluid *fluid = isotherm->fluid;
    double rt = fluid->limits.gas_constant_j_mol_k * isotherm->temperature_k;
    struct residual_density residual;
    residual_density(isotherm, density / fluid->reduce_density_mol_m3, &residual);
    *slope = rt * (1 + 2 * residual.d + residual.dd);
    return density * rt * (1 + residual.d);
}

/* One branch below the critical temperature. low and high bound the branch. */
static int solve_branch(const struct isotherm *isotherm, double pressure, double start,
                        double low, double high, double *out)
{
    double density = start, last = HUGE_VAL;
    for (int i = 0; i < STEPS_MAX; i++) {
        double slope;
        double miss = pressure_at(isotherm, density, &slope) - pressure;
        if (!(slope > 0) || !isfinite(miss))
            return ERR_RANGE;
        double step = -miss / slope;
        double next = density + step;
        /* Pressed hard near the critical temperature the tangent is flat and points far beyond
         * any liquid, where the equation means nothing. */
        if (next > GROWTH_MAX * density)
            next = GROWTH_MAX * density;
        /* Far from the root a step may leave the branch on the far side: halve the way there.
         */
        if (next >= high)
            next = 0.5 * (density + high);
        else if (next <= low)
            next = 0.5 * (density + low);
        double moved = fabs(next - density);
        density = next;
        if (moved <= STEP_TOLERANCE * density || (moved >= last && moved < 1e-11 * density)) {
            *out = density;
            return 0;
        }
        last = moved;
    }
    return ERR_CONVERGE;
}

static int solve_bracketed(const struct isotherm *isotherm, double pressure, double start,
                           double *out)
{
    const struct fluid *fluid = isotherm->fluid;
    double low = 0, high = 3.2 * fluid->critical_density_mol_m3, slope;
    /* Solid-like densities beyond any validity end the search. */
    while (pressure_at(isotherm, high, &slope) < pressure) {
        low = high;
        high *= 1.3;
        if (high > 12 * fluid->critical_density_mol_m3)
            return ERR_RANGE;
    }
    double density = start > low && start < high ? start : 0.5 * (low + high), last = HUGE_VAL;
    for (int i = 0; i < 2 * STEPS_MAX; i++) {
        double miss = pressure_at(isotherm, density, &slope) - pressure;
        if (miss > 0)
            high = density;
        else
            low = density;
        double next = slope > 0 ? density - miss / slope : 0;
        if (!(next > low && next < high))
            next = 0.5 * (low + high);
        double moved = fabs(next - density);
        density = next;
        if (moved <= STEP_TOLERANCE * density || high - low <= STEP_TOLERANCE * density ||
            (moved >= last && moved < 1e-11 * density)) {
            *out = density;
            return 0;
        }
        last = moved;
    }
    return ERR_CONVERGE;
}

int density_solve(const struct isotherm *isotherm, double pressure_pa, enum fluid_phase wanted,
                  double start_mol_m3, double *density_mol_m3)
{
    const struct fluid *fluid = isotherm->fluid;
    double critical = fluid->critical_density_mol_m3;
    if (wanted == FLUID_PHASE_LIQUID)
        return solve_branch(isotherm, pressure_pa, start_mol_m3, critical, 12 * critical,
                            density_mol_m3);
    if (wanted == FLUID_PHASE_VAPOUR)
        return solve_branch(isotherm, pressure_pa, start_mol_m3, 0, critical, density_mol_m3);
    return solve_bracketed(isotherm, pressure_pa, start_mol_m3, density_mol_m3);
}
