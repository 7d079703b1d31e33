/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * balance: what follows from readings by physics: contents of a vessel, heat, mass, the air of
 * a hall, purity, each with its uncertainty. Pure functions and plain memory: no I/O, no clock,
 * no allocation after init. Equations and sources: docs/methods.md. SI, absolute pressure.
 */
#ifndef ULLAGE_BALANCE_H
#define ULLAGE_BALANCE_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

#include "ullage/base.h"
#include "ullage/fluid.h"
#include "ullage/plant.h"

/* ---- estimates
 * -------------------------------------------------------------------------------
 */

/* Where an uncertainty comes from. Sources are independent of each other; one source that
 * enters a result by two ways is added with its sign, so it may cancel. The index is a tag for
 * POINT and DRIFT, a thing's or stream's for the others. */
#define SOURCE_LIST(X)                                                                         \
    X(POINT, "reading")                                                                        \
    X(DRIFT, "drift")                                                                          \
    X(FLOW_NOISE, "scatter of the flows")                                                      \
    X(HEAT_NOISE, "scatter of the heat balance")                                               \
    X(MASS_NOISE, "scatter of the mass balance")                                               \
    X(VAPOUR_NOISE, "scatter of the vapour balance")                                           \
    X(PRESSURE_NOISE, "scatter of the pressure")                                               \
    X(HALL_NOISE, "scatter of the monitors")                                                   \
    X(PURITY_NOISE, "scatter of the analyzer")                                                 \
    X(LIQUID_TEMPERATURE, "liquid: mean of the places measured")                               \
    X(LIQUID_SATURATED, "liquid taken as saturated")                                           \
    X(VAPOUR_TEMPERATURE, "vapour: mean of the space above")                                   \
    X(STREAM_STATE, "stream's unmeasured temperature")                                         \
    X(CONDENSATE, "condensate taken as saturated")                                             \
    X(COOLANT_STATE, "coolant's unmeasured state")                                             \
    X(CONDENSER, "vapour condensed, from the duty")                                            \
    X(FLUID, "equation of state")                                                              \
    X(GAPS, "times without readings")                                                          \
    X(MIXING, "hall not perfectly mixed")                                                      \
    X(METHOD, "the method itself")                                                             \
    X(REST, "small terms together")

#define X(id, says) SOURCE_##id,
enum source_kind { SOURCE_LIST(X) SOURCE_KIND_COUNT };
#undef X
const char *source_kind_says(enum source_kind kind);
/* A source's number. index 0..2^24-1. */
int source_of(enum source_kind kind, int index);
enum source_kind source_kind_of(int source);
int source_index_of(int source);

/* A value and its first-order dependence on independent sources: each term is sensitivity times
 * standard uncertainty, with sign, in the value's own unit (JCGM 100:2008, 5.1 and 5.2 with
 * correlation carried by shared sources). Terms are sorted by source. What does not fit is kept
 * in one REST term in quadrature. */
enum { ESTIMATE_TERMS = 40 };
struct estimate_term {
    int source;
    double u;
};
struct estimate {
    double value;
    int count;
    struct estimate_term term[ESTIMATE_TERMS];
};
void estimate_exact(struct estimate *out, double value);
/* Adds a term; a source that is there already adds with its sign. */
void estimate_add_term(struct estimate *estimate, int source, double u);
/* sum += factor * x. sum may not be x. */
void estimate_add(struct estimate *sum, double factor, const struct estimate *x);
void estimate_scale(struct estimate *estimate, double factor);
double estimate_u(const struct estimate *estimate);
double estimate_covariance(const struct estimate *a, const struct estimate *b);
/* out = value, with u from derivatives with regard to n inputs. out may not be an input. */
void estimate_combine(struct estimate *out, double value, int n,
                      const struct estimate *const *x, const double *derivative);
/* out = f(x), derivatives by central differences over +-u of each input. n <= 8. An error of f
 * is returned, out untouched. */
typedef int estimate_function(const void *context, const double *x, double *y);
int estimate_apply(struct estimate *out, estimate_function *f, const void *context, int n,
                   const struct estimate *const *x) MUST_CHECK;

/* ---- windows
 * ---------------------------------------------------------------------------------
 */

/* A sliding window of block means of several series, oldest first. Irregular readings and gaps
 * are allowed; a block is the mean of the frames that fell into its span. */
struct window {
    int series_count, capacity;
    int first, count;
    int64_t block_ns, phase_ns, origin_ns;
    int64_t open_block; /* number of the block that is being filled */
    double *time_s;     /* mean time of a block, from origin_ns */
    double *frames;     /* frames in it */
    double *series;     /* series_count rows of 2 * capacity */
};
/* block_ns > 0; phase shifts the borders of blocks. */
int window_init(struct window *window, int series_count, int capacity, int64_t block_ns,
                int64_t phase_ns, struct arena *arena) MUST_CHECK;
void window_restart(struct window *window);
/* One frame. True when it opened a new block, so that all before it are whole. Time must not go
 * back. */
bool window_push(struct window *window, int64_t utc_ns, const double *value);
/* The blocks of a series, oldest first: window->count of them. */
const double *window_series(const struct window *window, int series);
const double *window_time_s(const struct window *window);
const double *window_frames(const struct window *window);
/* Index of the first block within span_s of the newest and not before not_before_s. */
int window_from(const struct window *window, double span_s, double not_before_s);

/* Weights over the blocks from..count-1 of a window:
 * slope: sum slope[k] y[k] is the least-squares slope (frames as weights);
 * rate: sum rate[k] r[k] is the least-squares slope of the integral (trapezoid) of r, so slope
 * of storage and mean of flow are taken alike and a balance holds exactly while both vary.
 * Written at [from..count-1] of the arrays. ERR_RANGE with fewer than 3 blocks. */
struct window_weights {
    int from, to;
    double span_s; /* from the first to the last block */
    double frames;
    double mean_s, squares; /* weighted mean of time; sum of weighted squares about it */
    double *slope, *rate;
};
int window_weigh(const struct window *window, int from, struct window_weights *out) MUST_CHECK;
double window_sum(const double *weight, const double *series, int from, int to);
/* Integral of a rate by trapezoids over the window's blocks, added to y: y[k] += factor int r.
 */
void window_integrate(const struct window *window, int from, const double *rate, double factor,
                      double *y);
/* Scatter of y about its line over [from, to), as standard uncertainty of the slope: from the
 * residuals, widened for their correlation from block to block (lag one). */
struct window_line {
    double slope, u_slope;
    double sd; /* of the block means about the line */
};
int window_line(const struct window *window, int from, int to, const double *y,
                struct window_line *out) MUST_CHECK;
/* Has the slope of y changed within from..count? Compares the newest half, quarter and eighth
 * (not shorter than least_s) with what is before; u_drift_rate is added to the scatter. Returns
 * the block from which the present regime runs: from if nothing has changed beyond z. */
int window_change(const struct window *window, int from, const double *y, double least_s,
                  double u_drift_rate, double z);

/* ---- contents of a vessel
 * --------------------------------------------------------------------
 */

enum contents_variable {
    CONTENTS_PRESSURE,
    CONTENTS_LEVEL,
    CONTENTS_LIQUID_TEMPERATURE,
    CONTENTS_VAPOUR_TEMPERATURE,
    CONTENTS_VARIABLES
};
struct contents_input {
    double pressure_pa, level_m;
    double liquid_temperature_k; /* liquid_saturated: not used */
    double vapour_temperature_k;
    bool liquid_saturated, vapour_saturated;
};
struct contents_property {
    double value;
    double d[CONTENTS_VARIABLES]; /* partial derivatives */
};
struct contents {
    struct fluid_saturation line;
    struct fluid_state liquid, vapour;
    double height_m, volume_m3, surface_m2;
    bool vapour_doubtful; /* the vapour's reading is no vapour: taken as saturated */
    struct contents_property liquid_volume_m3, liquid_mass_kg, vapour_mass_kg, mass_kg;
};
/* Masses by shape and real-fluid densities, liquid as a liquid and vapour as a vapour also a
 * little across the saturation line. ERR_RANGE with the sentence where the equation of state
 * has no such state. */
int contents_at(const struct fluid *fluid, const struct shape *shape,
                const struct contents_input *input, struct contents *out,
                struct error *err) MUST_CHECK;
/* Internal energy of the contents less reference_j_kg times their mass, J. */
void contents_energy(const struct contents *contents, double reference_j_kg,
                     struct contents_property *out);

/* The state of one phase; a gas above the critical temperature counts as vapour. */
int phase_at(const struct fluid *fluid, double temperature_k, double pressure_pa,
             enum fluid_phase phase, struct fluid_state *out, struct error *err) MUST_CHECK;
/* Enthalpy of one phase with its derivatives by temperature and pressure. With saturated true
 * temperature_k is not used, and by_pressure runs along the line. */
struct enthalpy {
    double value_j_kg, by_temperature, by_pressure;
    double density_kg_m3, density_by_temperature, density_by_pressure;
};
int enthalpy_at(const struct fluid *fluid, double temperature_k, double pressure_pa,
                enum fluid_phase phase, bool saturated, struct enthalpy *out,
                struct error *err) MUST_CHECK;
/* The same from states at hand. */
void enthalpy_of_state(const struct fluid_state *state, struct enthalpy *out);
void enthalpy_of_line(const struct fluid_saturation *line, enum fluid_phase phase,
                      struct enthalpy *out);

/* ---- heat
 * ------------------------------------------------------------------------------------
 */

/* Liquid that boils when a vent leaves a vessel at steady pressure, and the heat it takes
 * (methods 4.1): m_e = m_vent rho_l/(rho_l - rho_v). superheat_j_kg is the enthalpy of the vent
 * above saturated vapour. */
double heat_evaporated_kg_s(double vent_kg_s, double liquid_kg_m3, double vapour_kg_m3);
double heat_of_vent_w(double vent_kg_s, double latent_j_kg, double liquid_kg_m3,
                      double vapour_kg_m3, double superheat_j_kg);
/* Closed homogeneous two-phase vessel (methods 4.2): internal energy it takes to go from
 * pressure to pressure at constant mass and volume. ERR_RANGE where it is not two-phase at
 * either. */
int heat_closed_energy_j(const struct fluid *fluid, double mass_kg, double volume_m3,
                         double from_pa, double to_pa, double *energy_j,
                         struct error *err) MUST_CHECK;
/* dp/dt of it under heat_w. */
int heat_closed_pressure_rate(const struct fluid *fluid, double mass_kg, double volume_m3,
                              double pressure_pa, double heat_w, double *rate_pa_s,
                              struct error *err) MUST_CHECK;

/* ---- hall
 * ------------------------------------------------------------------------------------
 */

/* Fatality factor of a partial pressure of oxygen (methods 7.3): 10^(6.5 - p/10 mmHg), at most
 * 1, 0 above 18 % of 101 325 Pa. */
double hall_fatality_factor(double oxygen_pa);
/* Perfect-mix room (methods 7.4): oxygen fraction after time_s of a release, from
 * fresh air at the start; volume flows at the room's state. */
enum hall_ventilation {
    HALL_VENTILATION_SUPPLY,
    HALL_VENTILATION_EXHAUST,
    HALL_VENTILATION_OFF
};
double hall_oxygen_after(enum hall_ventilation ventilation, double volume_m3, double fan_m3_s,
                         double release_m3_s, double fresh, double time_s);
/* Release that explains a mean oxygen fraction and its rate of change, m3/s, and the same as a
 * ledger of air in gas equivalents: in - out - stored = release. */
struct hall_air {
    double in_m3_s, out_m3_s, stored_m3_s, release_m3_s;
};
void hall_release(enum hall_ventilation ventilation, double volume_m3, double fan_m3_s,
                  double fresh, double oxygen, double oxygen_rate, struct hall_air *out);

/* ---- purity, pumps, shafts, deliveries
 * -------------------------------------------------------
 */

/* Lifetime of free electrons for a mole fraction of oxygen: 3.0e-13 s / x (methods 1.1). */
double purity_lifetime_s(double oxygen_fraction);
enum { PURITY_LIFETIME_U_PERCENT = 25, PURITY_VELOCITY_U_PERCENT = 3 };
/* Well-mixed tank (methods 2.1): time constant M/(eps F), steady fraction of a source in mol/s,
 * time from one fraction to another. ERR_RANGE where it is never reached. */
double purity_time_constant_s(double liquid_kg, double flow_kg_s, double efficiency);
double purity_steady_fraction(double source_mol_s, double flow_kg_s, double efficiency,
                              double molar_mass_kg_mol);
int purity_time_to_s(double fraction, double steady, double wanted, double time_constant_s,
                     double *time_s) MUST_CHECK;
/* Drift velocity in liquid argon by the global mobility fit (methods 1.4). */
double purity_velocity_m_s(double field_v_m, double temperature_k);

/* NPSH available (methods 9): (p_surface - p_vapour)/(rho g) + height. */
double pump_npsh_m(double surface_pa, double vapour_pa, double density_kg_m3, double head_m);

/* Darcy friction factor of all Reynolds numbers, Churchill 1977 (methods 10.2). roughness is
 * relative. */
double shaft_friction_factor(double reynolds, double roughness);
/* Pressure at the foot of an isothermal gas column under a downward flow (methods 10.1). Flow
 * may be 0 or negative (upwards). ERR_RANGE where it would not arrive. */
int shaft_foot_pa(double top_pa, double molar_mass_kg_mol, double depth_m, double temperature_k,
                  double flow_kg_s, double pipe_m, double friction_factor,
                  double *foot_pa) MUST_CHECK;
/* Least work to turn a gas into saturated liquid at its pressure, J/kg (methods 10.3). */
int shaft_liquefaction_j_kg(const struct fluid *fluid, double temperature_k, double pressure_pa,
                            double ambient_k, double *work_j_kg, struct error *err) MUST_CHECK;

/* Probability that the true value is within an upper limit (JCGM 106:2012, normal, no prior).
 */
double delivery_conformity(double limit, double reading, double u);

#endif
