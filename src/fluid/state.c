/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * States by pairs of inputs. Temperature and pressure is the ground; the others look for the
 * temperature that fits, each on a stretch where their function of temperature rises.
 */
#include "equation.h"

#include <float.h>
#include <math.h>

/* A state this near to the line (relative in pressure) is on it: a double cannot tell. */
static const double ON_LINE = 1e-11;
/* A state differing more than this (relative) is no start. */
static const double NEARBY = 0.05;

/* Solid-like densities beyond any validity; over the critical one. */
static const double DENSEST = 12;
/* About where liquids are at their triple points. */
static const double DENSE = 3;
static const double SMALL_PRESSURE_PA = 1e-3;

/* Where the branches begin at a temperature; molar densities. */
struct line {
    double pressure, liquid, vapour;
    bool near_critical; /* beyond the end of the fluid's table */
};

static int line_at(const struct fluid *fluid, double temperature, struct line *line,
                   struct error *err)
{
    double reduce = fluid->reduce_density_mol_m3;
    struct fluid_saturation saturation;
    struct line_point point;
    if (line_at_temperature(fluid, temperature, &point)) {
        *line = (struct line){point.pressure_pa, point.liquid * reduce, point.vapour * reduce,
                              false};
        return 0;
    }
    int code = fluid_saturation_at_t(fluid, temperature, &saturation, err);
    if (code == 0)
        *line = (struct line){saturation.pressure_pa,
                              molar_density(fluid, saturation.liquid.density_kg_m3),
                              molar_density(fluid, saturation.vapour.density_kg_m3), true};
    return code;
}

static int no_phase(const struct fluid *fluid, enum fluid_phase wanted, double temperature,
                    double pressure, struct error *err)
{
    return error_set(err, ERR_RANGE, "%s: no %s at %.6g K and %.6g Pa, not even metastable",
                     fluid->name, fluid_phase_word(wanted), temperature, pressure);
}

/* A start from a state close by, by its own slopes: on the stable side of the branch's end. */
static double start_near(const struct fluid *fluid, const struct fluid_state *last,
                         double temperature, double pressure, enum fluid_phase phase,
                         const struct line *line, double start)
{
    double away = temperature - last->temperature_k;
    if (last->phase != phase || !(last->dp_drho_pa_m3_kg > 0) ||
        !(fabs(away) < NEARBY * temperature))
        return start;
    double step =
        (pressure - last->pressure_pa - last->dp_dt_pa_k * away) / last->dp_drho_pa_m3_kg;
    if (!(fabs(step) < NEARBY * last->density_kg_m3))
        return start;
    double near = molar_density(fluid, last->density_kg_m3 + step);
    if (phase == FLUID_PHASE_LIQUID)
        return pressure >= line->pressure ? fmax(near, line->liquid) : start;
    if (phase == FLUID_PHASE_VAPOUR)
        return pressure <= line->pressure ? fmin(near, line->vapour) : start;
    return near;
}

static int at_tp(const struct fluid *fluid, double temperature_k, double pressure_pa,
                 enum fluid_phase wanted, const struct fluid_state *last,
                 struct fluid_state *out, struct error *err)
{
    const struct fluid_limits *limits = &fluid->limits;
    int code = validity_check(fluid, temperature_k, pressure_pa, err);
    if (code != 0)
        return code;
    struct isotherm isotherm;
    struct fluid_state state = {0};
    struct line line = {0};
    double density, ideal = pressure_pa / (limits->gas_constant_j_mol_k * temperature_k);
    bool above = temperature_k >= limits->critical_temperature_k;
    enum fluid_phase phase = above ? FLUID_PHASE_SUPERCRITICAL : wanted;
    if (above && wanted != FLUID_PHASE_ANY && wanted != FLUID_PHASE_SUPERCRITICAL)
        return no_phase(fluid, wanted, temperature_k, pressure_pa, err);
    double start = ideal;
    if (!above) {
        if (wanted == FLUID_PHASE_SUPERCRITICAL || wanted == FLUID_PHASE_TWO_PHASE)
            return no_phase(fluid, wanted, temperature_k, pressure_pa, err);
        code = line_at(fluid, temperature_k, &line, err);
        if (code != 0)
            return code;
        double part = pressure_pa / line.pressure;
        if (wanted == FLUID_PHASE_ANY)
            phase = part >= 1 ? FLUID_PHASE_LIQUID : FLUID_PHASE_VAPOUR;
        /* Vapour: compressibility from 1 to that of the saturated vapour, as pressure goes. */
        if (phase == FLUID_PHASE_LIQUID || part >= 1)
            start = phase == FLUID_PHASE_LIQUID ? line.liquid : line.vapour;
        else
            start = ideal / (1 + part * (ideal / (part * line.vapour) - 1));
        state.saturated = fabs(part - 1) < ON_LINE;
    }
    if (last != NULL)
        start = start_near(fluid, last, temperature_k, pressure_pa, phase, &line, start);
    isotherm_set(&isotherm, fluid, temperature_k);
    code = ERR_RANGE;
    if (line.near_critical)
        code = critical_density_solve(&isotherm, pressure_pa, phase,
                                      phase == FLUID_PHASE_LIQUID ? line.liquid : line.vapour,
                                      &density);
    if (code == ERR_RANGE && !(line.near_critical && line.liquid == line.vapour))
        code = density_solve(&isotherm, pressure_pa, phase, start, &density);
    if (code == ERR_RANGE)
        return no_phase(fluid, phase, temperature_k, pressure_pa, err);
    if (code != 0)
        return error_set(err, code, "%s: density at %.9g K and %.9g Pa was not found",
                         fluid->name, temperature_k, pressure_pa);
    state_fill(&isotherm, density, &state);
    /* A search that came to rest at the end of its branch has found no state. */
    double reach = pressure_pa + state.density_kg_m3 * fabs(state.dp_drho_pa_m3_kg);
    if (!(fabs(state.pressure_pa - pressure_pa) <= 1e-9 * reach))
        return no_phase(fluid, phase, temperature_k, pressure_pa, err);
    /* The pressure asked for, not its image through a stiff liquid's density. */
    state.pressure_pa = pressure_pa;
    state.enthalpy_j_kg = state.internal_energy_j_kg + pressure_pa / state.density_kg_m3;
    state.phase = phase;
    state.vapour_fraction = phase == FLUID_PHASE_LIQUID ? 0 : 1;
    *out = state;
    return 0;
}

int fluid_at_tp(const struct fluid *fluid, double temperature_k, double pressure_pa,
                enum fluid_phase wanted, struct fluid_state *out, struct error *err)
{
    return at_tp(fluid, temperature_k, pressure_pa, wanted, NULL, out, err);
}

int fluid_at_tp_near(const struct fluid *fluid, double temperature_k, double pressure_pa,
                     enum fluid_phase wanted, const struct fluid_state *last,
                     struct fluid_state *out, struct error *err)
{
    return at_tp(fluid, temperature_k, pressure_pa, wanted, last, out, err);
}

static double mix(double liquid, double vapour, double fraction)
{
    return liquid + fraction * (vapour - liquid);
}

static void two_phase(const struct fluid_saturation *line, double fraction,
                      struct fluid_state *out)
{
    const struct fluid_state *l = &line->liquid, *v = &line->vapour;
    *out = (struct fluid_state){
        .temperature_k = line->temperature_k,
        .pressure_pa = line->pressure_pa,
        .density_kg_m3 = 1 / mix(1 / l->density_kg_m3, 1 / v->density_kg_m3, fraction),
        .enthalpy_j_kg = mix(l->enthalpy_j_kg, v->enthalpy_j_kg, fraction),
        .entropy_j_kg_k = mix(l->entropy_j_kg_k, v->entropy_j_kg_k, fraction),
        .internal_energy_j_kg = mix(l->internal_energy_j_kg, v->internal_energy_j_kg, fraction),
        .vapour_fraction = fraction,
        .saturated = true,
        .phase = FLUID_PHASE_TWO_PHASE,
    };
    if (fraction == 0 || fraction == 1)
        *out = fraction == 0 ? *l : *v;
}

static int check_fraction(const struct fluid *fluid, double fraction, struct error *err)
{
    if (!(fraction >= 0 && fraction <= 1))
        return error_set(err, ERR_RANGE, "%s: a vapour fraction is from 0 to 1 (asked: %.6g)",
                         fluid->name, fraction);
    return 0;
}

int fluid_at_tx(const struct fluid *fluid, double temperature_k, double vapour_fraction,
                struct fluid_state *out, struct error *err)
{
    struct fluid_saturation line;
    int code = check_fraction(fluid, vapour_fraction, err);
    if (code == 0)
        code = fluid_saturation_at_t(fluid, temperature_k, &line, err);
    if (code == 0)
        two_phase(&line, vapour_fraction, out);
    return code;
}

int fluid_at_px(const struct fluid *fluid, double pressure_pa, double vapour_fraction,
                struct fluid_state *out, struct error *err)
{
    struct fluid_saturation line;
    int code = check_fraction(fluid, vapour_fraction, err);
    if (code == 0)
        code = fluid_saturation_at_p(fluid, pressure_pa, &line, err);
    if (code == 0)
        two_phase(&line, vapour_fraction, out);
    return code;
}

/* du/dT of a mixture of a constant specific volume. */
static double mixture_slope(const struct fluid_saturation *line, double v)
{
    /* Along the line, for each phase: drho/dT = (dp/dT|sat - dp/dT|rho) / (dp/drho|T), and
     * du = cv dT + (p - T dp/dT|rho)/rho^2 drho. Then of the mixture at constant v. */
    const struct fluid_state *phase[] = {&line->liquid, &line->vapour};
    double du[2], dv[2];
    for (int i = 0; i < 2; i++) {
        const struct fluid_state *s = phase[i];
        double rho = s->density_kg_m3;
        double drho = (line->dp_dt_pa_k - s->dp_dt_pa_k) / s->dp_drho_pa_m3_kg;
        du[i] = s->cv_j_kg_k +
                (line->pressure_pa - line->temperature_k * s->dp_dt_pa_k) / (rho * rho) * drho;
        dv[i] = -drho / (rho * rho);
    }
    double v_l = 1 / line->liquid.density_kg_m3, v_v = 1 / line->vapour.density_kg_m3;
    double q = (v - v_l) / (v_v - v_l);
    double dq = -(mix(dv[0], dv[1], q)) / (v_v - v_l);
    return mix(du[0], du[1], q) +
           dq * (line->vapour.internal_energy_j_kg - line->liquid.internal_energy_j_kg);
}

/* Without a look at pressure: it may be beyond the validity. */
static int at_rhot(const struct fluid *fluid, double density, double temperature,
                   struct fluid_state *out, double *du_dt, struct error *err)
{
    const struct fluid_limits *limits = &fluid->limits;
    int code = validity_check(fluid, temperature, SMALL_PRESSURE_PA, err);
    if (code != 0)
        return code;
    if (!(density > 0 && density < DENSEST * limits->critical_density_kg_m3))
        return error_set(err, ERR_RANGE,
                         "%s: density must be above 0 and below what its equation can tell "
                         "(asked: %.6g kg/m3)",
                         fluid->name, density);
    struct fluid_state state = {.phase = FLUID_PHASE_SUPERCRITICAL, .vapour_fraction = 1};
    if (temperature <= limits->critical_temperature_k) {
        struct fluid_saturation line;
        code = fluid_saturation_at_t(fluid, temperature, &line, err);
        if (code != 0)
            return code;
        double v = 1 / density, v_l = 1 / line.liquid.density_kg_m3;
        double v_v = 1 / line.vapour.density_kg_m3;
        if (v >= v_l && v <= v_v) {
            two_phase(&line, v_v > v_l ? (v - v_l) / (v_v - v_l) : 0, out);
            *du_dt = v_v > v_l ? mixture_slope(&line, v) : 0;
            return 0;
        }
        if (temperature < limits->critical_temperature_k) {
            state.phase = v < v_l ? FLUID_PHASE_LIQUID : FLUID_PHASE_VAPOUR;
            state.vapour_fraction = v < v_l ? 0 : 1;
        }
    }
    struct isotherm isotherm;
    isotherm_set(&isotherm, fluid, temperature);
    state_fill(&isotherm, molar_density(fluid, density), &state);
    *du_dt = state.cv_j_kg_k;
    *out = state;
    return 0;
}

/* Whether what was found by density is within the validity. */
static int check_found(const struct fluid *fluid, const struct fluid_state *state,
                       struct error *err)
{
    double temperature = state->temperature_k, pressure = state->pressure_pa;
    int code = validity_check(fluid, temperature, pressure, err);
    if (code != 0 || state->density_kg_m3 < DENSE * fluid->limits.critical_density_kg_m3)
        return code;
    /* Denser than any fluid an equation may come back to a small pressure. */
    struct fluid_state same;
    code = fluid_at_tp(fluid, temperature, pressure, FLUID_PHASE_ANY, &same, err);
    if (code == 0 && fabs(same.density_kg_m3 / state->density_kg_m3 - 1) > 1e-6)
        return error_set(err, ERR_RANGE, "%s: no fluid is as dense as %.6g kg/m3 at %.6g K",
                         fluid->name, state->density_kg_m3, temperature);
    return code;
}

int fluid_at_rhot(const struct fluid *fluid, double density_kg_m3, double temperature_k,
                  struct fluid_state *out, struct error *err)
{
    struct fluid_state state;
    double du_dt;
    int code = at_rhot(fluid, density_kg_m3, temperature_k, &state, &du_dt, err);
    if (code == 0)
        code = check_found(fluid, &state, err);
    if (code == 0)
        *out = state;
    return code;
}

/* What is to be met by a temperature: a property along a path. */
struct search {
    const struct fluid *fluid;
    double density, pressure; /* the path: constant density, or constant pressure on a branch */
    enum fluid_phase phase;
    double target;
    enum { SEARCH_RHO_U, SEARCH_P_H, SEARCH_P_S } what;
};

/* last: one found before, or NULL. slope: of the property over temperature along the path, 0
 * where it is not known. */
static int search_at(const struct search *search, double temperature,
                     const struct fluid_state *last, struct fluid_state *state, double *miss,
                     double *slope)
{
    int code;
    if (search->what == SEARCH_RHO_U)
        code = at_rhot(search->fluid, search->density, temperature, state, slope, NULL);
    else
        code = at_tp(search->fluid, temperature, search->pressure, search->phase, last, state,
                     NULL);
    if (code != 0)
        return code;
    double value = search->what == SEARCH_RHO_U ? state->internal_energy_j_kg
                   : search->what == SEARCH_P_H ? state->enthalpy_j_kg
                                                : state->entropy_j_kg_k;
    if (search->what != SEARCH_RHO_U)
        *slope = search->what == SEARCH_P_H ? state->cp_j_kg_k : state->cp_j_kg_k / temperature;
    *miss = value - search->target;
    return 0;
}

enum { SEARCH_STEPS = 200, NEWTON_STEPS = 16 };
static const double SETTLED = 1e-13;

/* By how much the end of a path may miss: rounding of the target, and of the temperature where
 * the property is steep. */
static double end_slack(const struct search *search, const struct fluid_state *state)
{
    double per_mass =
        search->fluid->limits.gas_constant_j_mol_k / search->fluid->limits.molar_mass_kg_mol;
    double steep = state->cp_j_kg_k;
    if (steep == 0) /* the critical point, else two phases */
        steep = (state->phase == FLUID_PHASE_TWO_PHASE ? 1e4 : 1e7) * per_mass;
    double along = search->what == SEARCH_P_S ? 1 : state->temperature_k;
    return 1e-9 * (fabs(search->target) + per_mass) + 1e-10 * steep * along;
}

/* Newton's step from a start, kept between low and high. It serves nearly always, in four or
 * five evaluations; where it does not, the slower search decides. */
static int search_newton(const struct search *search, double low, double high, double start,
                         struct fluid_state *out)
{
    double at = start > low && start < high ? start : 0.5 * (low + high), miss, slope;
    double last = HUGE_VAL;
    struct fluid_state state = {0};
    for (int i = 0; i < NEWTON_STEPS; i++) {
        if (search_at(search, at, &state, &state, &miss, &slope) != 0 || !(slope > 0))
            return ERR_CONVERGE;
        /* What the step would still move: temperature, and density by its expansion. */
        double step = -miss / slope;
        double moves = fabs(step) * (1 / at + fluid_expansion_1_k(&state));
        if (moves <= SETTLED || (moves >= 0.5 * last && moves < 10 * SETTLED)) {
            *out = state;
            return 0;
        }
        last = moves;
        if (miss < 0)
            low = at;
        else
            high = at;
        double next = at + step;
        at = next > low && next < high ? next : 0.5 * (low + high);
    }
    return ERR_CONVERGE;
}

/* The temperature between low and high, where the property rises: false position with the
 * Illinois step (Dowell, Jarratt, BIT 11 (1971) 168), and halving whenever it dawdles. */
static int search_solve(const struct search *search, double low, double high,
                        struct fluid_state *out)
{
    double miss_low, miss_high, miss, slope, width = high - low;
    struct fluid_state state;
    if (!isfinite(search->target))
        return ERR_RANGE;
    int code = search_at(search, low, NULL, &state, &miss_low, &slope);
    if (code != 0)
        return code;
    if (miss_low >= 0) {
        if (miss_low > end_slack(search, &state))
            return ERR_RANGE;
        *out = state;
        return 0;
    }
    code = search_at(search, high, NULL, &state, &miss_high, &slope);
    if (code != 0)
        return code;
    if (miss_high <= 0) {
        if (-miss_high > end_slack(search, &state))
            return ERR_RANGE;
        *out = state;
        return 0;
    }
    int side = 0;
    for (int i = 0; i < SEARCH_STEPS; i++) {
        double middle = (low * miss_high - high * miss_low) / (miss_high - miss_low);
        if (i % 3 == 2) {
            if (high - low > 0.5 * width)
                middle = 0.5 * (low + high);
            width = high - low;
        }
        code = search_at(search, middle, NULL, &state, &miss, &slope);
        if (code != 0)
            return code;
        if (miss == 0 || high - low <= 4 * DBL_EPSILON * high) {
            /* A jump is no state: oxygen's equation has its critical point 19 mK too high. */
            if (fabs(miss) > end_slack(search, &state))
                return ERR_RANGE;
            *out = state;
            return 0;
        }
        if (miss < 0) {
            low = middle;
            miss_low = miss;
            if (side == -1)
                miss_high *= 0.5;
            side = -1;
        } else {
            high = middle;
            miss_high = miss;
            if (side == 1)
                miss_low *= 0.5;
            side = 1;
        }
    }
    return ERR_CONVERGE;
}

int fluid_at_rhou(const struct fluid *fluid, double density_kg_m3, double internal_energy_j_kg,
                  struct fluid_state *out, struct error *err)
{
    struct search search = {
        .fluid = fluid,
        .density = density_kg_m3,
        .target = internal_energy_j_kg,
        .what = SEARCH_RHO_U,
    };
    /* A dense fluid meets the pressure limit long before the highest temperature, and the solid
     * at the lowest: the path goes through, and its end is looked at. */
    struct fluid_state state;
    double low = fluid->limits.triple_temperature_k, high = fluid->limits.max_temperature_k;
    double start = 0.7 * fluid->limits.critical_temperature_k;
    int code = search_newton(&search, low, high, start, &state);
    if (code != 0)
        code = search_solve(&search, low, high, &state);
    if (code != 0)
        return error_set(err, code,
                         "%s: no state within the validity at %.6g kg/m3 and %.6g J/kg",
                         fluid->name, density_kg_m3, internal_energy_j_kg);
    code = check_found(fluid, &state, err);
    if (code == 0)
        *out = state;
    return code;
}

/* The lowest temperature at which the fluid is not solid at a pressure. */
static double coldest(const struct fluid *fluid, double pressure)
{
    double low = fluid->limits.triple_temperature_k, high = fluid->limits.max_temperature_k;
    if (validity_check(fluid, low, pressure, NULL) == 0)
        return low;
    for (int i = 0; i < 200 && high - low > 1e-13 * high; i++) {
        double middle = 0.5 * (low + high);
        if (validity_check(fluid, middle, pressure, NULL) == 0)
            high = middle;
        else
            low = middle;
    }
    return high;
}

static int at_pressure(struct search *search, struct fluid_state *out, struct error *err)
{
    double slope;
    const struct fluid *fluid = search->fluid;
    double low = coldest(fluid, search->pressure), high = fluid->limits.max_temperature_k;
    bool heat = search->what == SEARCH_P_H;
    int code = validity_check(fluid, high, search->pressure, err);
    if (code != 0)
        return code;
    if (saturation_has_pressure(fluid, search->pressure)) {
        struct fluid_saturation line;
        code = fluid_saturation_at_p(fluid, search->pressure, &line, err);
        if (code != 0)
            return code;
        double l = heat ? line.liquid.enthalpy_j_kg : line.liquid.entropy_j_kg_k;
        double v = heat ? line.vapour.enthalpy_j_kg : line.vapour.entropy_j_kg_k;
        if (search->target >= l && search->target <= v) {
            two_phase(&line, v > l ? (search->target - l) / (v - l) : 0, out);
            return 0;
        }
        search->phase = search->target < l ? FLUID_PHASE_LIQUID : FLUID_PHASE_ANY;
        const struct fluid_state *end = search->target < l ? &line.liquid : &line.vapour;
        slope = heat ? end->cp_j_kg_k : end->cp_j_kg_k / line.temperature_k;
        double start =
            line.temperature_k + (search->target - (end == &line.liquid ? l : v)) / slope;
        if (search_newton(search, end == &line.liquid ? low : line.temperature_k,
                          end == &line.liquid ? line.temperature_k : high, start, out) == 0)
            return 0;
        search->phase = search->target < l ? FLUID_PHASE_LIQUID : FLUID_PHASE_VAPOUR;
        if (search->phase == FLUID_PHASE_LIQUID) {
            high = line.temperature_k;
        } else {
            low = line.temperature_k;
            /* Above the critical temperature the vapour has another name. */
            double critical = fluid->limits.critical_temperature_k * (1 - 1e-12), miss;
            struct fluid_state state = {0};
            if (search_at(search, critical, NULL, &state, &miss, &slope) == 0 && miss < 0) {
                low = fluid->limits.critical_temperature_k;
                search->phase = FLUID_PHASE_SUPERCRITICAL;
            } else {
                high = critical;
            }
        }
    }
    if (search_newton(search, low, high, 1.1 * fluid->limits.critical_temperature_k, out) == 0)
        return 0;
    code = search_solve(search, low, high, out);
    if (code != 0)
        return error_set(err, code, "%s: no state within the validity at %.6g Pa and %.6g %s",
                         fluid->name, search->pressure, search->target,
                         heat ? "J/kg" : "J/(kg K)");
    return 0;
}

int fluid_at_ph(const struct fluid *fluid, double pressure_pa, double enthalpy_j_kg,
                struct fluid_state *out, struct error *err)
{
    struct search search = {
        .fluid = fluid, .pressure = pressure_pa, .target = enthalpy_j_kg, .what = SEARCH_P_H};
    return at_pressure(&search, out, err);
}

int fluid_at_ps(const struct fluid *fluid, double pressure_pa, double entropy_j_kg_k,
                struct fluid_state *out, struct error *err)
{
    struct search search = {
        .fluid = fluid, .pressure = pressure_pa, .target = entropy_j_kg_k, .what = SEARCH_P_S};
    return at_pressure(&search, out, err);
}

int fluid_du_dp(const struct fluid *fluid, double density_kg_m3, double pressure_pa,
                double *du_dp_j_kg_pa, struct error *err)
{
    struct fluid_saturation line;
    int code = fluid_saturation_at_p(fluid, pressure_pa, &line, err);
    if (code != 0)
        return code;
    double v = 1 / density_kg_m3, v_l = 1 / line.liquid.density_kg_m3;
    double v_v = 1 / line.vapour.density_kg_m3;
    if (!(v >= v_l && v <= v_v) || !(v_v > v_l))
        return error_set(err, ERR_RANGE, "%s: %.6g kg/m3 is not within two phases at %.6g Pa",
                         fluid->name, density_kg_m3, pressure_pa);
    *du_dp_j_kg_pa = mixture_slope(&line, v) / line.dp_dt_pa_k;
    return 0;
}

double fluid_compressibility_1_pa(const struct fluid_state *state)
{
    double stiff = state->density_kg_m3 * state->dp_drho_pa_m3_kg;
    return stiff > 0 ? 1 / stiff : 0;
}

double fluid_expansion_1_k(const struct fluid_state *state)
{
    return state->dp_dt_pa_k * fluid_compressibility_1_pa(state);
}
