/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * What a fluid's file holds, and the evaluation of its equation. A fluid is data: every term of
 * every equation is one of the forms below, written once in terms.c.
 *
 * alpha(tau, delta) = a/(R T), tau = T_reduce/T, delta = rho/rho_reduce (molar).
 */
#ifndef ULLAGE_FLUID_EQUATION_H
#define ULLAGE_FLUID_EQUATION_H

#include "ullage/fluid.h"

enum { FLUID_TERM_MAX = 64, FLUID_ANCILLARY_MAX = 8 };

/* n delta^d tau^t, with exp(-delta^l) where l > 0, or with
 * exp(-eta (delta - epsilon)^2 - beta (tau - gamma)^2) where gauss. A table is in order of l,
 * then d, Gaussian terms last: so terms of the same l and d are summed once per isotherm. */
struct residual_term {
    double n, t;
    int d, l;
    bool gauss;
    double eta, beta, gamma, epsilon;
};

/* n tau^t; n ln(1 - exp(-theta tau)). */
struct ideal_power {
    double n, t;
};
struct ideal_planck {
    double n, theta;
};

/* sum n theta^t, theta = 1 - T/T_reduce: starting values only, the equal-Gibbs condition
 * decides. */
struct ancillary {
    double reducing_value;
    int count;
    double n[FLUID_ANCILLARY_MAX], t[FLUID_ANCILLARY_MAX];
};

enum melting_form {
    MELTING_NONE,
    MELTING_SIMON,
    MELTING_POLYNOMIAL_TR,
    MELTING_POLYNOMIAL_THETA
};
struct melting_part {
    double min_temperature_k, max_temperature_k, t0_k, p0_pa;
    double a[2], t[2];
};

struct transport_term {
    double n, t;
    int d, l;
};
struct transport {
    double sigma_nm, epsilon_k;
    int viscosity_count, conductivity_count;
    struct transport_term viscosity[8], conductivity[8];
    double a1;                        /* conductivity of the dilute gas per uPa s */
    double a[2], t[2];                /* and its terms in tau */
    double q_d_per_m, xi0_m, t_ref_k; /* critical enhancement */
};

/* The saturation line as Chebyshev expansions, of delta or of logarithms relative to the
 * critical values; made from the equation by 'make lines'. */
enum { LINE_TERMS = 14 };
struct line_piece {
    double liquid[LINE_TERMS], ln_vapour[LINE_TERMS], ln_pressure[LINE_TERMS];
};
struct saturation_line {
    double critical_temperature_k; /* where the equation's two phases are one */
    double end_temperature_k;      /* the table applies up to here */
    double low, high;              /* of s = sqrt(1 - T/T_c) */
    int count;
    const struct line_piece *piece;
    double inverse_low, inverse_high; /* of q = sqrt(ln(p_c/p)) */
    int inverse_count;
    const double (*inverse)[LINE_TERMS]; /* T/T_c */
};

struct fluid {
    const char *name;
    struct fluid_limits limits;
    double reduce_temperature_k, reduce_density_mol_m3; /* of the equation */
    double critical_density_mol_m3;
    double lead_a1, lead_a2; /* with the offset of the reference state added */
    double log_tau;
    int ideal_power_count, planck_count;
    const struct ideal_power *ideal_power;
    const struct ideal_planck *planck;
    int term_count;
    const struct residual_term *term;
    double ancillary_temperature_k;
    struct ancillary pressure, liquid_density, vapour_density;
    double tension_temperature_k; /* sum a (1 - T/this)^n */
    int tension_count;
    double tension_a[3], tension_n[3];
    enum melting_form melting;
    int melting_count;
    struct melting_part melting_part[2];
    const struct transport *transport;  /* NULL: no model */
    const struct saturation_line *line; /* NULL: every saturation is solved in full */
};
extern const struct saturation_line line_argon, line_nitrogen, line_oxygen, line_helium,
    line_neon, line_krypton, line_xenon, line_parahydrogen, line_methane;

/* The part of an equation that depends on temperature alone, computed once per isotherm. A
 * slot gathers the terms of one delta^d exp(-delta^l): c = sum n tau^t, tau dc/dtau,
 * tau^2 d2c/dtau2; slots up to .end belong to a group of one l. A Gaussian term keeps n tau^t,
 * its exponent's part in tau, and the factors of its tau derivatives. */
struct slot {
    int power;
    double d, c, t, tt;
};
struct group {
    int l, end;
};
struct gauss {
    const struct residual_term *term;
    double exponent, c, t, tt;
};
struct isotherm {
    const struct fluid *fluid;
    double temperature_k, tau, ln_tau;
    int group_count, gauss_count;
    struct group group[FLUID_TERM_MAX];
    struct slot slot[FLUID_TERM_MAX];
    struct gauss gauss[FLUID_TERM_MAX];
};
void isotherm_set(struct isotherm *isotherm, const struct fluid *fluid, double temperature_k);

/* Residual part and its density derivatives at one density: a, delta a_d, delta^2 a_dd,
 * delta^3 a_ddd. */
struct residual_density {
    double a, d, dd, ddd;
};
void residual_density(const struct isotherm *isotherm, double delta,
                      struct residual_density *out);

/* The rest: tau a_t, tau^2 a_tt, delta tau a_dt (density.ddd is not computed). */
struct residual_whole {
    struct residual_density density;
    double t, tt, dt;
};
void residual_whole(const struct isotherm *isotherm, double delta, struct residual_whole *out);

/* Molar density from mass density and back. */
double molar_density(const struct fluid *fluid, double density_kg_m3);

/* All properties of one phase at a molar density on an isotherm (phase, saturated and
 * vapour_fraction are the caller's to set). */
void state_fill(const struct isotherm *isotherm, double density_mol_m3,
                struct fluid_state *out);

/* Molar density of the wanted phase (LIQUID, VAPOUR or SUPERCRITICAL) at a pressure on an
 * isotherm, from a start on the stable side of it. 0, ERR_RANGE beyond the spinodal,
 * ERR_CONVERGE. */
int density_solve(const struct isotherm *isotherm, double pressure_pa, enum fluid_phase wanted,
                  double start_mol_m3, double *density_mol_m3);

/* Near the critical point: reduced densities where each branch ends (its spinodal), and those
 * of both phases in equilibrium as a cubic tells them. All the same where the isotherm has but
 * one branch. */
struct critical_branches {
    double liquid, vapour, liquid_end, vapour_end;
};
struct critical_branches critical_branches(const struct isotherm *isotherm);
/* As density_solve, for a stable state beside the saturated density of its branch. ERR_RANGE on
 * that density's far side. */
int critical_density_solve(const struct isotherm *isotherm, double pressure_pa,
                           enum fluid_phase wanted, double edge_mol_m3, double *density_mol_m3);

/* Whether the saturation line of the equation itself reaches this pressure, its critical point
 * left out. */
bool saturation_has_pressure(const struct fluid *fluid, double pressure_pa);

/* Starting values of the saturation line; within 1 % or so. */
double ancillary_pressure_pa(const struct fluid *fluid, double temperature_k);
double ancillary_liquid_mol_m3(const struct fluid *fluid, double temperature_k);
double ancillary_vapour_mol_m3(const struct fluid *fluid, double temperature_k);

/* The saturation line by its table: densities as delta. False where the table does not apply
 * (above its end, below the triple point). */
struct line_point {
    double pressure_pa, liquid, vapour;
};
bool line_at_temperature(const struct fluid *fluid, double temperature_k,
                         struct line_point *out);
bool line_temperature(const struct fluid *fluid, double pressure_pa, double *temperature_k);
/* Both densities (delta) in equilibrium at a temperature, by Newton's method on the equation
 * itself from the values given. 0 or ERR_CONVERGE. */
int saturation_solve(const struct isotherm *isotherm, double *liquid, double *vapour);

/* Pressure of the melting line at T; false where no line is known. */
bool melting_pressure(const struct fluid *fluid, double temperature_k, double *pressure_pa);

/* 0, or ERR_RANGE with the sentence, when T (and p) leave the validity or enter the solid. */
int validity_check(const struct fluid *fluid, double temperature_k, double pressure_pa,
                   struct error *err);

#endif
