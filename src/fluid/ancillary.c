/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The auxiliary equations of a fluid: starting values of the saturation line, the melting line,
 * the surface tension; and the check of an input against the validity.
 */
#include "equation.h"

#include <math.h>

static double series(const struct fluid *fluid, const struct ancillary *ancillary,
                     double temperature)
{
    double theta = 1 - temperature / fluid->ancillary_temperature_k, sum = 0;
    if (theta <= 0)
        return 0;
    double ln_theta = log(theta);
    for (int i = 0; i < ancillary->count; i++)
        sum += ancillary->n[i] * exp(ancillary->t[i] * ln_theta);
    return sum;
}

static double exponential(const struct fluid *fluid, const struct ancillary *ancillary,
                          double temperature)
{
    double factor = fluid->ancillary_temperature_k / temperature;
    return ancillary->reducing_value * exp(factor * series(fluid, ancillary, temperature));
}

double ancillary_pressure_pa(const struct fluid *fluid, double temperature_k)
{
    return exponential(fluid, &fluid->pressure, temperature_k);
}

double ancillary_liquid_mol_m3(const struct fluid *fluid, double temperature_k)
{
    return fluid->liquid_density.reducing_value *
           (1 + series(fluid, &fluid->liquid_density, temperature_k));
}

double ancillary_vapour_mol_m3(const struct fluid *fluid, double temperature_k)
{
    return exponential(fluid, &fluid->vapour_density, temperature_k);
}

bool melting_pressure(const struct fluid *fluid, double temperature_k, double *pressure_pa)
{
    for (int i = 0; i < fluid->melting_count; i++) {
        const struct melting_part *part = &fluid->melting_part[i];
        double x = temperature_k / part->t0_k;
        if (temperature_k > part->max_temperature_k)
            continue;
        switch (fluid->melting) {
        case MELTING_SIMON:
            *pressure_pa = part->p0_pa + part->a[0] * (pow(x, part->t[0]) - 1);
            return true;
        case MELTING_POLYNOMIAL_TR:
            *pressure_pa = part->p0_pa * (1 + part->a[0] * (pow(x, part->t[0]) - 1) +
                                          part->a[1] * (pow(x, part->t[1]) - 1));
            return true;
        case MELTING_POLYNOMIAL_THETA: {
            double above = x > 1 ? x - 1 : 0;
            *pressure_pa = part->p0_pa * (1 + part->a[0] * pow(above, part->t[0]) +
                                          part->a[1] * pow(above, part->t[1]));
            return true;
        }
        case MELTING_NONE:
            return false;
        }
    }
    return false;
}

/* Less is no pressure of anything, and its reciprocals leave the range of a double. */
static const double VACUUM_PA = 1e-30;

int validity_check(const struct fluid *fluid, double temperature_k, double pressure_pa,
                   struct error *err)
{
    const struct fluid_limits *limits = &fluid->limits;
    double melting;
    if (!isfinite(temperature_k) || !isfinite(pressure_pa) || !(pressure_pa > VACUUM_PA))
        return error_set(err, ERR_RANGE,
                         "%s: temperature and pressure must be above 0 and finite (asked: %.6g "
                         "K, %.6g Pa)",
                         fluid->name, temperature_k, pressure_pa);
    if (temperature_k < limits->triple_temperature_k)
        return error_set(err, ERR_RANGE, "%s: %.6g K is below its triple point, %.6g K",
                         fluid->name, temperature_k, limits->triple_temperature_k);
    if (temperature_k > limits->max_temperature_k)
        return error_set(err, ERR_RANGE, "%s: %.6g K is above its equation's limit, %.6g K",
                         fluid->name, temperature_k, limits->max_temperature_k);
    if (pressure_pa > limits->max_pressure_pa)
        return error_set(err, ERR_RANGE, "%s: %.6g Pa is above its equation's limit, %.6g Pa",
                         fluid->name, pressure_pa, limits->max_pressure_pa);
    /* At the triple point the line's own rounding must not make its liquid a solid. */
    if (melting_pressure(fluid, temperature_k, &melting) &&
        pressure_pa > melting * (1 + 1e-4) + 1000)
        return error_set(err, ERR_RANGE, "%s: solid at %.6g K above %.6g Pa (asked: %.6g Pa)",
                         fluid->name, temperature_k, melting, pressure_pa);
    return 0;
}

int fluid_surface_tension(const struct fluid *fluid, double temperature_k, double *tension_n_m,
                          struct error *err)
{
    double critical = fluid->limits.critical_temperature_k, sum = 0;
    if (fluid->tension_count == 0)
        return error_set(err, ERR_UNSUPPORTED, "%s: no published surface tension here",
                         fluid->name);
    if (!(temperature_k >= fluid->limits.triple_temperature_k && temperature_k <= critical))
        return error_set(err, ERR_RANGE,
                         "%s: surface tension exists from the triple to the critical point, "
                         "%.6g to %.6g K",
                         fluid->name, fluid->limits.triple_temperature_k, critical);
    /* Its own critical temperature may be rounded otherwise. */
    double below = fmax(0, 1 - temperature_k / fluid->tension_temperature_k);
    for (int i = 0; i < fluid->tension_count; i++)
        sum += fluid->tension_a[i] * pow(below, fluid->tension_n[i]);
    *tension_n_m = fmax(0, sum);
    return 0;
}
