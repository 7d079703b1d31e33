/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Density from temperature and pressure. Halley's step, since the second derivative is at hand:
 * from a start near the root two of them reach it. Below the critical temperature the step runs
 * from the saturated density of the wanted branch, on the far side of which lies the root; a
 * step that loses the branch (slope not positive) is the spinodal. Above the critical
 * temperature pressure rises with density everywhere and the step is kept in a bracket.
 */
#include "equation.h"

#include <float.h>
#include <math.h>

enum { STEPS_MAX = 100 };
static const double STEP_TOLERANCE = 4 * DBL_EPSILON;
static const double GROWTH_MAX = 0.2;

/* Pressure, density times its slope, and density squared times half its second derivative;
 * all over density R T. */
struct compression {
    double z, slope, curve;
};

static struct compression compression_at(const struct isotherm *isotherm, double density)
{
    struct residual_density r;
    residual_density(isotherm, density / isotherm->fluid->reduce_density_mol_m3, &r);
    return (struct compression){
        .z = 1 + r.d,
        .slope = 1 + 2 * r.d + r.dd,
        .curve = r.d + 2 * r.dd + 0.5 * r.ddd,
    };
}

/* Halley's step, relative to density; Newton's where curvature would reverse it. */
static double step_relative(const struct compression *at, double miss)
{
    double newton = -miss / at->slope, bend = newton * at->curve / at->slope;
    return bend > -0.5 && bend < 0.5 ? newton / (1 + bend) : newton;
}

/* After a step of this size the next one, of third order, is below the last digits. */
static bool settled(const struct compression *at, double step)
{
    double bend = fabs(at->curve / at->slope) + 10;
    return fabs(step) < 1e-5 && bend * bend * fabs(step * step * step) < 1e-14;
}

/* One branch below the critical temperature. low and high bound the branch. */
static int solve_branch(const struct isotherm *isotherm, double pressure, double start,
                        double low, double high, double *out)
{
    double rt = isotherm->fluid->limits.gas_constant_j_mol_k * isotherm->temperature_k;
    double density = start, last = HUGE_VAL;
    for (int i = 0; i < STEPS_MAX; i++) {
        struct compression at = compression_at(isotherm, density);
        double miss = at.z - pressure / (density * rt);
        if (!(at.slope > 0) || !isfinite(miss))
            return ERR_RANGE;
        double step = step_relative(&at, miss);
        /* Pressed hard near the critical temperature the tangent is flat and points far beyond
         * any liquid, where the equation means nothing. */
        if (step > GROWTH_MAX)
            step = GROWTH_MAX;
        double next = density + step * density;
        /* Far from the root a step may leave the branch on the far side: halve the way there.
         */
        if (next >= high)
            next = 0.5 * (density + high);
        else if (next <= low)
            next = 0.5 * (density + low);
        double moved = fabs(next - density);
        density = next;
        if (moved <= STEP_TOLERANCE * density || (moved >= last && moved < 1e-11 * density) ||
            settled(&at, step)) {
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
    double rt = fluid->limits.gas_constant_j_mol_k * isotherm->temperature_k;
    double critical = fluid->critical_density_mol_m3;
    double low = 0, high = 3.2 * critical, last = HUGE_VAL;
    double density = start < 2 * critical ? start : 2 * critical;
    bool bounded = false;
    for (int i = 0; i < 2 * STEPS_MAX; i++) {
        struct compression at = compression_at(isotherm, density);
        double miss = at.z - pressure / (density * rt);
        if (miss > 0) {
            high = density;
            bounded = true;
        } else {
            low = density;
        }
        double step = at.slope > 0 ? step_relative(&at, miss) : -1;
        double next = density + step * density;
        if (fabs(step) <= STEP_TOLERANCE || settled(&at, step)) {
            *out = next;
            return 0;
        }
        if (!(next > low && next < high)) {
            /* Solid-like densities beyond any validity end the search. */
            if (!bounded && next >= high)
                high *= 1.3;
            if (high > 12 * critical)
                return ERR_RANGE;
            next = 0.5 * (low + high);
        }
        double moved = fabs(next - density);
        density = next;
        if (high - low <= STEP_TOLERANCE * density ||
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
