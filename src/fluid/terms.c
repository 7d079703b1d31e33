/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The terms of every equation of state, written once. On an isotherm the factors that depend on
 * temperature are computed once (logarithm taken once), so that a density solver pays for
 * powers of delta only. Derivatives come with the function, in the reduced form delta d/d delta
 * and tau d/d tau, where each is the term times a small polynomial.
 */
#include "equation.h"

#include <math.h>

enum { POWER_MAX = 16, EXPONENT_MAX = 8 };

void isotherm_set(struct isotherm *isotherm, const struct fluid *fluid, double temperature_k)
{
    double tau = fluid->reduce_temperature_k / temperature_k, ln_tau = log(tau);
    isotherm->fluid = fluid;
    isotherm->temperature_k = temperature_k;
    isotherm->tau = tau;
    for (int i = 0; i < fluid->term_count; i++) {
        const struct residual_term *term = &fluid->term[i];
        double exponent = term->t * ln_tau;
        if (term->gauss)
            exponent -= term->beta * (tau - term->gamma) * (tau - term->gamma);
        isotherm->c[i] = term->n * exp(exponent);
    }
}

/* Powers of delta, and exp(-delta^l) for each l; shared by all terms at one density. */
struct powers {
    double of[POWER_MAX + 1];
    double decay[EXPONENT_MAX + 1];
};

static void powers_set(struct powers *powers, const struct fluid *fluid, double delta)
{
    bool used[EXPONENT_MAX + 1] = {false};
    powers->of[0] = 1;
    for (int i = 1; i <= POWER_MAX; i++)
        powers->of[i] = powers->of[i - 1] * delta;
    for (int i = 0; i < fluid->term_count; i++)
        used[fluid->term[i].l] = true;
    powers->decay[0] = 1;
    for (int l = 1; l <= EXPONENT_MAX; l++)
        powers->decay[l] = used[l] ? exp(-powers->of[l]) : 0;
}

/* A term's density factor f (without c), and delta f'/f and delta^2 f''/f. */
struct factor {
    double f, k1, k2;
};

static struct factor density_factor(const struct residual_term *term,
                                    const struct powers *powers, double delta)
{
    struct factor out;
    double d = term->d;
    if (term->gauss) {
        double away = delta - term->epsilon;
        out.f = powers->of[term->d] * exp(-term->eta * away * away);
        out.k1 = d - 2 * term->eta * delta * away;
        out.k2 = out.k1 * out.k1 - d - 2 * term->eta * delta * delta;
    } else {
        double l = term->l, power = term->l > 0 ? powers->of[term->l] : 0;
        out.f = powers->of[term->d] * powers->decay[term->l];
        out.k1 = d - l * power;
        out.k2 = out.k1 * (out.k1 - 1) - l * l * power;
    }
    return out;
}

void residual_density(const struct isotherm *isotherm, double delta,
                      struct residual_density *out)
{
    const struct fluid *fluid = isotherm->fluid;
    struct powers powers;
    powers_set(&powers, fluid, delta);
    double a = 0, ad = 0, add = 0;
    for (int i = 0; i < fluid->term_count; i++) {
        struct factor factor = density_factor(&fluid->term[i], &powers, delta);
        double value = isotherm->c[i] * factor.f;
        a += value;
        ad += value * factor.k1;
        add += value * factor.k2;
    }
    *out = (struct residual_density){.a = a, .d = ad, .dd = add};
}

void residual_whole(const struct isotherm *isotherm, double delta, struct residual_whole *out)
{
    const struct fluid *fluid = isotherm->fluid;
    double tau = isotherm->tau;
    struct powers powers;
    powers_set(&powers, fluid, delta);
    struct residual_whole sum = {0};
    for (int i = 0; i < fluid->term_count; i++) {
        const struct residual_term *term = &fluid->term[i];
        struct factor factor = density_factor(term, &powers, delta);
        double value = isotherm->c[i] * factor.f;
        double m1 = term->t, m2 = term->t * (term->t - 1);
        if (term->gauss) {
            m1 -= 2 * term->beta * tau * (tau - term->gamma);
            m2 = m1 * m1 - term->t - 2 * term->beta * tau * tau;
        }
        sum.density.a += value;
        sum.density.d += value * factor.k1;
        sum.density.dd += value * factor.k2;
        sum.t += value * m1;
        sum.tt += value * m2;
        sum.dt += value * factor.k1 * m1;
    }
    *out = sum;
}

/* Ideal part without ln delta: a, tau a_t, tau^2 a_tt. */
static void ideal(const struct fluid *fluid, double tau, double *a, double *t, double *tt)
{
    *a = fluid->lead_a1 + fluid->lead_a2 * tau + fluid->log_tau * log(tau);
    *t = fluid->lead_a2 * tau + fluid->log_tau;
    *tt = -fluid->log_tau;
    for (int i = 0; i < fluid->ideal_power_count; i++) {
        double exponent = fluid->ideal_power[i].t;
        double value = fluid->ideal_power[i].n * pow(tau, exponent);
        *a += value;
        *t += value * exponent;
        *tt += value * exponent * (exponent - 1);
    }
    for (int i = 0; i < fluid->planck_count; i++) {
        double n = fluid->planck[i].n, x = fluid->planck[i].theta * tau;
        double grown =
            expm1(x); /* e^x - 1; infinite at low temperature, where all of it is 0 */
        *a += n * log1p(-exp(-x));
        *t += n * x / grown;
        /* -n x^2 e^x / (e^x - 1)^2, written so that it does not overflow */
        *tt -= n * x * x / (grown * (1 - exp(-x)));
    }
}

double molar_density(const struct fluid *fluid, double density_kg_m3)
{
    return density_kg_m3 / fluid->limits.molar_mass_kg_mol;
}

void state_fill(const struct isotherm *isotherm, double density_mol_m3, struct fluid_state *out)
{
    const struct fluid *fluid = isotherm->fluid;
    double molar_mass = fluid->limits.molar_mass_kg_mol;
    double r = fluid->limits.gas_constant_j_mol_k, temperature = isotherm->temperature_k;
    double delta = density_mol_m3 / fluid->reduce_density_mol_m3;
    struct residual_whole residual;
    double a0, a0_t, a0_tt;
    residual_whole(isotherm, delta, &residual);
    ideal(fluid, isotherm->tau, &a0, &a0_t, &a0_tt);
    a0 += log(delta);
    double z = 1 + residual.density.d;
    double energy_t = a0_t + residual.t;
    double cv = -(a0_tt + residual.tt);
    double stiffness = 1 + 2 * residual.density.d + residual.density.dd;
    double thermal = z - residual.dt;
    double cp = cv + thermal * thermal / stiffness;
    double sound = stiffness + thermal * thermal / cv;
    double per_mass = r / molar_mass;
    out->temperature_k = temperature;
    out->pressure_pa = density_mol_m3 * r * temperature * z;
    out->density_kg_m3 = density_mol_m3 * molar_mass;
    out->internal_energy_j_kg = per_mass * temperature * energy_t;
    out->enthalpy_j_kg = per_mass * temperature * (energy_t + z);
    out->entropy_j_kg_k = per_mass * (energy_t - a0 - residual.density.a);
    out->cv_j_kg_k = per_mass * cv;
    out->cp_j_kg_k = per_mass * cp;
    out->sound_speed_m_s = sound > 0 ? sqrt(per_mass * temperature * sound) : 0;
    out->dp_dt_pa_k = density_mol_m3 * r * thermal;
    out->dp_drho_pa_m3_kg = per_mass * temperature * stiffness;
}
