/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The saturation line: equal pressure and Gibbs energy of both phases, by Newton's method from
 * the auxiliary equations' start. At given temperature two unknowns (both densities; the scheme
 * of Akasaka, J. Thermal Sci. Tech. 3 (2008) 442); at given pressure the temperature is the
 * third. Where the fluid's table of that solution applies (line.c), it is read instead.
 */
#include "equation.h"

#include <float.h>
#include <math.h>

enum { STEPS_MAX = 60 };

/* Closer to the critical temperature than this (relative) the auxiliary equations are no start.
 */
static const double CRITICAL_NEAR = 1e-3;
/* The published triple and critical pressures differ less than this from the equation's. */
static const double ROUNDED = 1e-2;

/* p/(R T rho_r) and g/(R T) up to terms of temperature alone, with their density derivatives.
 */
struct branch {
    double pressure, pressure_d, gibbs, gibbs_d;
};

static struct branch branch_at(const struct isotherm *isotherm, double delta)
{
    struct residual_density r;
    residual_density(isotherm, delta, &r);
    double stiffness = 1 + 2 * r.d + r.dd;
    return (struct branch){
        .pressure = delta * (1 + r.d),
        .pressure_d = stiffness,
        .gibbs = r.a + r.d + log(delta),
        .gibbs_d = stiffness / delta,
    };
}

int saturation_solve(const struct isotherm *isotherm, double *liquid, double *vapour)
{
    double last = HUGE_VAL, rest = 0;
    for (int i = 0; i < STEPS_MAX; i++) {
        struct branch l = branch_at(isotherm, *liquid), v = branch_at(isotherm, *vapour);
        double miss_p = v.pressure - l.pressure, miss_g = v.gibbs - l.gibbs;
        double determinant = v.pressure_d * l.gibbs_d - l.pressure_d * v.gibbs_d;
        if (determinant == 0 || !isfinite(determinant))
            return ERR_CONVERGE;
        double step_l = (v.pressure_d * miss_g - miss_p * v.gibbs_d) / determinant;
        double step_v = (l.pressure_d * miss_g - miss_p * l.gibbs_d) / determinant;
        double share = 1;
        /* Near the critical point a step may pass the other root or the axis: shorten it. */
        while (share > 1e-6 && (*liquid + share * step_l <= *vapour + share * step_v ||
                                *vapour + share * step_v <= 0))
            share *= 0.5;
        *liquid += share * step_l;
        *vapour += share * step_v;
        double moved = fabs(step_l) / *liquid + fabs(step_v) / *vapour;
        /* Where the branches meet slopes vanish, and what a double leaves of a step grows with
         * the second and third power of their nearness. */
        double apart = (*liquid - *vapour) / (*liquid + *vapour);
        rest = 1e-10 + (1e-12 + 1e-15 / apart) / (apart * apart);
        if (moved < 4 * DBL_EPSILON || (moved >= last && moved < rest && share == 1))
            return 0;
        last = moved;
    }
    return last < 10 * rest && rest < 1e-5 ? 0 : ERR_CONVERGE;
}

static void densities_near_critical(const struct isotherm *isotherm, double *liquid,
                                    double *vapour)
{
    struct critical_branches cubic = critical_branches(isotherm);
    double l = *liquid = cubic.liquid, v = *vapour = cubic.vapour;
    /* So near that Newton finds nothing the cubic is better than any double tells. */
    if (l > v && saturation_solve(isotherm, &l, &v) == 0 && l > cubic.liquid_end &&
        v < cubic.vapour_end) {
        *liquid = l;
        *vapour = v;
    }
}

static void fill_pressure(struct fluid_saturation *out, double pressure)
{
    struct fluid_state *phase[] = {&out->liquid, &out->vapour};
    out->pressure_pa = pressure;
    for (int i = 0; i < 2; i++) {
        phase[i]->pressure_pa = pressure;
        phase[i]->enthalpy_j_kg =
            phase[i]->internal_energy_j_kg + pressure / phase[i]->density_kg_m3;
    }
}

static void fill(const struct isotherm *isotherm, double liquid, double vapour,
                 struct fluid_saturation *out)
{
    double reduce = isotherm->fluid->reduce_density_mol_m3;
    state_fill(isotherm, liquid * reduce, &out->liquid);
    state_fill(isotherm, vapour * reduce, &out->vapour);
    out->temperature_k = isotherm->temperature_k;
    /* The vapour's pressure is the better conditioned one; both phases carry it. */
    fill_pressure(out, out->vapour.pressure_pa);
    out->liquid.phase = FLUID_PHASE_LIQUID;
    out->vapour.phase = FLUID_PHASE_VAPOUR;
    out->liquid.vapour_fraction = 0;
    out->vapour.vapour_fraction = 1;
    out->liquid.saturated = out->vapour.saturated = true;
    double volume = 1 / out->vapour.density_kg_m3 - 1 / out->liquid.density_kg_m3;
    double entropy = out->vapour.entropy_j_kg_k - out->liquid.entropy_j_kg_k;
    out->dp_dt_pa_k = volume > 0 ? entropy / volume : out->vapour.dp_dt_pa_k;
}

int fluid_saturation_at_t(const struct fluid *fluid, double temperature_k,
                          struct fluid_saturation *out, struct error *err)
{
    const struct fluid_limits *limits = &fluid->limits;
    if (!(temperature_k >= limits->triple_temperature_k &&
          temperature_k <= limits->critical_temperature_k))
        return error_set(err, ERR_RANGE,
                         "%s: saturation exists from the triple to the critical point, %.6g to "
                         "%.6g K (asked: %.6g K)",
                         fluid->name, limits->triple_temperature_k,
                         limits->critical_temperature_k, temperature_k);
    struct isotherm isotherm;
    struct line_point line;
    isotherm_set(&isotherm, fluid, temperature_k);
    if (line_at_temperature(fluid, temperature_k, &line)) {
        fill(&isotherm, line.liquid, line.vapour, out);
        return 0;
    }
    double reduce = fluid->reduce_density_mol_m3;
    double liquid = ancillary_liquid_mol_m3(fluid, temperature_k) / reduce;
    double vapour = ancillary_vapour_mol_m3(fluid, temperature_k) / reduce;
    double gap = 1 - temperature_k / limits->critical_temperature_k;
    if (gap < CRITICAL_NEAR) {
        densities_near_critical(&isotherm, &liquid, &vapour);
    } else if (saturation_solve(&isotherm, &liquid, &vapour) != 0) {
        return error_set(err, ERR_CONVERGE, "%s: saturation at %.9g K was not found",
                         fluid->name, temperature_k);
    }
    fill(&isotherm, liquid, vapour, out);
    return 0;
}

/* Temperature at which the auxiliary equation gives a pressure: a start within its error. ln p
 * is nearly linear in 1/T, so the secant in these hardly needs three steps. */
static double start_temperature(const struct fluid *fluid, double pressure)
{
    double t_low = fluid->limits.triple_temperature_k,
           t_high = fluid->limits.critical_temperature_k;
    double x0 = 1 / t_low, y0 = log(ancillary_pressure_pa(fluid, t_low));
    double x1 = 1 / t_high, y1 = log(fluid->limits.critical_pressure_pa);
    double wanted = log(pressure), x = x1;
    for (int i = 0; i < 8; i++) {
        double next = x1 + (wanted - y1) * (x0 - x1) / (y0 - y1);
        next = next > 1 / t_low ? 1 / t_low : next < 1 / t_high ? 1 / t_high : next;
        double moved = fabs(next - x);
        x = next;
        double y = log(ancillary_pressure_pa(fluid, 1 / x));
        if (moved < 1e-9 * x || fabs(y - wanted) < 1e-7 || y == y1)
            break;
        x0 = x1;
        y0 = y1;
        x1 = x;
        y1 = y;
    }
    return 1 / x;
}

/* Saturation in a narrow gap below the critical point, where the slopes that Newton needs
 * vanish: by halving the temperature instead. */
static int by_bisection(const struct fluid *fluid, double pressure,
                        struct fluid_saturation *out)
{
    double low = fluid->limits.triple_temperature_k,
           high = fluid->limits.critical_temperature_k;
    for (int i = 0; i < 100 && high - low > 1e-15 * high; i++) {
        double middle = 0.5 * (low + high);
        struct fluid_saturation found;
        if (fluid_saturation_at_t(fluid, middle, &found, NULL) != 0)
            return ERR_CONVERGE;
        if (found.pressure_pa < pressure)
            low = middle;
        else
            high = middle;
    }
    return fluid_saturation_at_t(fluid, 0.5 * (low + high), out, NULL);
}

bool saturation_has_pressure(const struct fluid *fluid, double pressure_pa)
{
    const struct fluid_limits *limits = &fluid->limits;
    double low = limits->triple_pressure_pa, high = limits->critical_pressure_pa;
    struct fluid_saturation end;
    if (fabs(pressure_pa / low - 1) < ROUNDED &&
        fluid_saturation_at_t(fluid, limits->triple_temperature_k, &end, NULL) == 0)
        low = end.pressure_pa;
    if (fabs(pressure_pa / high - 1) < ROUNDED &&
        fluid_saturation_at_t(fluid, limits->critical_temperature_k, &end, NULL) == 0)
        high = end.pressure_pa;
    return pressure_pa >= low * (1 - 1e-9) && pressure_pa < high * (1 - 1e-12);
}

int fluid_saturation_at_p(const struct fluid *fluid, double pressure_pa,
                          struct fluid_saturation *out, struct error *err)
{
    const struct fluid_limits *limits = &fluid->limits;
    struct fluid_saturation found;
    double temperature, last = HUGE_VAL;
    if (line_temperature(fluid, pressure_pa, &temperature) &&
        fluid_saturation_at_t(fluid, temperature, &found, NULL) == 0) {
        fill_pressure(&found, pressure_pa);
        *out = found;
        return 0;
    }
    /* The pressures of the tables are rounded; the equation's own decide. */
    bool within = saturation_has_pressure(fluid, pressure_pa);
    if (!within && fabs(pressure_pa / limits->critical_pressure_pa - 1) < ROUNDED) {
        int code = fluid_saturation_at_t(fluid, limits->critical_temperature_k, &found, err);
        double critical = fmax(found.pressure_pa, limits->critical_pressure_pa);
        if (code != 0)
            return code;
        if (pressure_pa <= critical * (1 + 1e-9)) {
            *out = found;
            return 0;
        }
    }
    if (!within)
        return error_set(err, ERR_RANGE,
                         "%s: saturation exists from the triple to the critical point, %.6g to "
                         "%.6g Pa (asked: %.6g Pa)",
                         fluid->name, limits->triple_pressure_pa, limits->critical_pressure_pa,
                         pressure_pa);
    temperature = start_temperature(fluid, pressure_pa);
    for (int i = 0; i < STEPS_MAX; i++) {
        int code = fluid_saturation_at_t(fluid, temperature, &found, NULL);
        if (code != 0)
            break;
        /* ln p against 1/T, slope by Clapeyron: second order, and nearly straight. */
        double slope = found.dp_dt_pa_k * temperature / found.pressure_pa;
        double next = temperature / (1 - log(pressure_pa / found.pressure_pa) / slope);
        double moved = fabs(next - temperature);
        if (!isfinite(next))
            break;
        if (next > limits->critical_temperature_k)
            next = 0.5 * (temperature + limits->critical_temperature_k);
        if (next < limits->triple_temperature_k)
            next = limits->triple_temperature_k;
        temperature = next;
        if (moved < 2e-15 * temperature || (moved >= last && moved < 1e-11 * temperature)) {
            *out = found;
            return 0;
        }
        last = moved;
    }
    if (by_bisection(fluid, pressure_pa, &found) != 0)
        return error_set(err, ERR_CONVERGE, "%s: saturation at %.9g Pa was not found",
                         fluid->name, pressure_pa);
    *out = found;
    return 0;
}
