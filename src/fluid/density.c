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
/* A metastable state farther from the saturated one than this is proved to be on its branch. */
static const double NEAR_START = 0.02;
enum { PROOF_STEPS = 8 };

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
static double step_relative(const struct compression *at, double miss, bool halley)
{
    double newton = -miss / at->slope, bend = newton * at->curve / at->slope;
    return halley && bend > -0.5 && bend < 0.5 ? newton / (1 + bend) : newton;
}

/* After a step of this size the next one, of third order, is below the last digits. */
static bool settled(const struct compression *at, double step)
{
    double bend = fabs(at->curve / at->slope) + 10;
    return fabs(step) < 1e-5 && bend * bend * fabs(step * step * step) < 1e-14;
}

/* One branch below the critical temperature. low and high bound the branch. */
static int solve_branch(const struct isotherm *isotherm, double pressure, double start,
                        double low, double high, bool halley, double *out)
{
    double rt = isotherm->fluid->limits.gas_constant_j_mol_k * isotherm->temperature_k;
    double density = start, last = HUGE_VAL;
    for (int i = 0; i < STEPS_MAX; i++) {
        struct compression at = compression_at(isotherm, density);
        double miss = at.z - pressure / (density * rt);
        if (!(at.slope > 0) || !isfinite(miss))
            return ERR_RANGE;
        double step = step_relative(&at, miss, halley);
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
        double step = at.slope > 0 ? step_relative(&at, miss, true) : -1;
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

/* Within the spinodal an equation may have loops that are no state: pressure must rise with
 * density all the way. */
static bool same_branch(const struct isotherm *isotherm, double start, double end)
{
    for (int i = 1; i < PROOF_STEPS; i++)
        if (!(compression_at(isotherm, start + (end - start) * i / PROOF_STEPS).slope > 0))
            return false;
    return true;
}

int density_solve(const struct isotherm *isotherm, double pressure_pa, enum fluid_phase wanted,
                  double start_mol_m3, double *density_mol_m3)
{
    const struct fluid *fluid = isotherm->fluid;
    double critical = fluid->critical_density_mol_m3;
    if (wanted != FLUID_PHASE_LIQUID && wanted != FLUID_PHASE_VAPOUR)
        return solve_bracketed(isotherm, pressure_pa, start_mol_m3, density_mol_m3);
    bool liquid = wanted == FLUID_PHASE_LIQUID;
    double low = 0, high = critical;
    if (liquid) {
        /* An equation's own critical density may be below the published one. */
        low = start_mol_m3 > critical ? critical : (1 - NEAR_START) * start_mol_m3;
        high = 12 * critical;
    }
    int code =
        solve_branch(isotherm, pressure_pa, start_mol_m3, low, high, true, density_mol_m3);
    /* Close to the spinodal Halley's step may pass it, where Newton's stays before it. */
    if (code != 0)
        code =
            solve_branch(isotherm, pressure_pa, start_mol_m3, low, high, false, density_mol_m3);
    double away = code == 0 ? *density_mol_m3 / start_mol_m3 - 1 : 0;
    if ((liquid ? -away : away) > NEAR_START &&
        !same_branch(isotherm, start_mol_m3, *density_mol_m3))
        return ERR_RANGE;
    return code;
}
