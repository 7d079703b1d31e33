/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The terms of every equation of state, written once. On an isotherm all terms of the same
 * delta^d exp(-delta^l) are one coefficient, with its temperature derivatives beside it, so
 * that a density costs one power per such slot and one exponential per l. Sums are taken of the
 * operator delta d/d delta, applied up to three times, and of tau d/d tau: each is the term
 * times a small polynomial.
 */
#include "equation.h"

#include <math.h>

enum { POWER_MAX = 16, WHOLE_MAX = 25, EIGHTHS = 8 };

/* exp of less than this is nothing beside 1, whatever polynomial of a term stands before it
 * (exp(-80) is 2e-35; the largest such factor is below 1e17). */
static const double NEGLIGIBLE = -80;

/* Powers of tau: published exponents are mostly eighths, and for these no exponential is
 * needed. */
struct tau_powers {
    double ln_tau, whole[WHOLE_MAX], eighth[EIGHTHS];
};

static void tau_powers_set(struct tau_powers *powers, double tau)
{
    powers->ln_tau = log(tau);
    powers->whole[0] = 1;
    powers->whole[1] = tau;
    for (int i = 2; i < WHOLE_MAX; i++)
        powers->whole[i] = powers->whole[i / 2] * powers->whole[i - i / 2];
    double half = sqrt(tau), quarter = sqrt(half), eighth = sqrt(quarter);
    powers->eighth[0] = 1;
    powers->eighth[1] = eighth;
    powers->eighth[2] = quarter;
    powers->eighth[3] = quarter * eighth;
    powers->eighth[4] = half;
    powers->eighth[5] = half * eighth;
    powers->eighth[6] = half * quarter;
    powers->eighth[7] = half * quarter * eighth;
}

static double tau_power(const struct tau_powers *powers, double t)
{
    double eighths = t * EIGHTHS;
    int k = (int)eighths;
    if (k >= 0 && k < WHOLE_MAX * EIGHTHS && (double)k == eighths)
        return powers->whole[k / EIGHTHS] * powers->eighth[k % EIGHTHS];
    return exp(t * powers->ln_tau);
}

static void add_gauss(struct isotherm *isotherm, const struct residual_term *term, double value)
{
    double tau = isotherm->tau, away = tau - term->gamma;
    double exponent = -term->beta * away * away;
    if (exponent < NEGLIGIBLE)
        return;
    double m1 = term->t - 2 * term->beta * tau * away;
    isotherm->gauss[isotherm->gauss_count++] = (struct gauss){
        .term = term,
        .exponent = exponent,
        .c = value,
        .t = m1,
        .tt = m1 * m1 - term->t - 2 * term->beta * tau * tau,
    };
}

void isotherm_set(struct isotherm *isotherm, const struct fluid *fluid, double temperature_k)
{
    double tau = fluid->reduce_temperature_k / temperature_k;
    struct tau_powers powers;
    tau_powers_set(&powers, tau);
    isotherm->fluid = fluid;
    isotherm->temperature_k = temperature_k;
    isotherm->tau = tau;
    isotherm->ln_tau = powers.ln_tau;
    isotherm->gauss_count = 0;
    int slots = 0, groups = 0, i = 0;
    while (i < fluid->term_count) {
        const struct residual_term *term = &fluid->term[i];
        if (term->gauss) {
            add_gauss(isotherm, term, term->n * tau_power(&powers, term->t));
            i++;
            continue;
        }
        int d = term->d, l = term->l;
        double c = 0, ct = 0, ctt = 0;
        for (; i < fluid->term_count; i++, term++) {
            if (term->d != d || term->l != l || term->gauss)
                break;
            double value = term->n * tau_power(&powers, term->t);
            c += value;
            ct += value * term->t;
            ctt += value * term->t * (term->t - 1);
        }
        if (groups == 0 || isotherm->group[groups - 1].l != l)
            isotherm->group[groups++].l = l;
        isotherm->slot[slots++] = (struct slot){.power = d, .d = d, .c = c, .t = ct, .tt = ctt};
        isotherm->group[groups - 1].end = slots;
    }
    isotherm->group_count = groups;
}

static void powers_set(double power[POWER_MAX], double delta)
{
    power[0] = 1;
    power[1] = delta;
    for (int i = 2; i < POWER_MAX; i++)
        power[i] = power[i / 2] * power[i - i / 2];
}

void residual_density(const struct isotherm *isotherm, double delta,
                      struct residual_density *out)
{
    double power[POWER_MAX], a = 0, d1 = 0, d2 = 0, d3 = 0;
    powers_set(power, delta);
    const struct slot *slot = isotherm->slot;
    for (int g = 0; g < isotherm->group_count; g++) {
        int l = isotherm->group[g].l;
        const struct slot *end = isotherm->slot + isotherm->group[g].end;
        double s0 = 0, s1 = 0, s2 = 0, s3 = 0;
        for (; slot < end; slot++) {
            double v0 = slot->c * power[slot->power], v1 = v0 * slot->d, v2 = v1 * slot->d;
            s0 += v0;
            s1 += v1;
            s2 += v2;
            s3 += v2 * slot->d;
        }
        if (l > 0) {
            double f = exp(-power[l]), q = l * power[l], lq = l * q;
            double k1 = s1 - q * s0;
            double k2 = s2 + q * (q * s0 - 2 * s1);
            double k3 = s3 + q * (3 * (q * s1 - s2) - q * q * s0);
            s3 = f * (k3 - lq * (3 * k1 + l * s0));
            s2 = f * (k2 - lq * s0);
            s1 = f * k1;
            s0 *= f;
        }
        a += s0;
        d1 += s1;
        d2 += s2;
        d3 += s3;
    }
    for (int i = 0; i < isotherm->gauss_count; i++) {
        const struct gauss *gauss = &isotherm->gauss[i];
        const struct residual_term *term = gauss->term;
        double away = delta - term->epsilon;
        double exponent = gauss->exponent - term->eta * away * away;
        if (exponent < NEGLIGIBLE)
            continue;
        double v = gauss->c * power[term->d] * exp(exponent), twice = 2 * term->eta * delta;
        double k1 = term->d - twice * away;
        double m = -twice * (delta + away), dm = -twice * (3 * delta + away);
        a += v;
        d1 += v * k1;
        d2 += v * (k1 * k1 + m);
        d3 += v * (k1 * (k1 * k1 + 3 * m) + dm);
    }
    *out =
        (struct residual_density){.a = a, .d = d1, .dd = d2 - d1, .ddd = d3 - 3 * d2 + 2 * d1};
}

void residual_whole(const struct isotherm *isotherm, double delta, struct residual_whole *out)
{
    double power[POWER_MAX], a = 0, d1 = 0, d2 = 0, t = 0, tt = 0, dt = 0;
    powers_set(power, delta);
    const struct slot *slot = isotherm->slot;
    for (int g = 0; g < isotherm->group_count; g++) {
        int l = isotherm->group[g].l;
        const struct slot *end = isotherm->slot + isotherm->group[g].end;
        double s0 = 0, s1 = 0, s2 = 0, st = 0, stt = 0, sdt = 0;
        for (; slot < end; slot++) {
            double p = power[slot->power], v0 = slot->c * p, v1 = v0 * slot->d,
                   vt = slot->t * p;
            s0 += v0;
            s1 += v1;
            s2 += v1 * slot->d;
            st += vt;
            sdt += vt * slot->d;
            stt += slot->tt * p;
        }
        if (l > 0) {
            double f = exp(-power[l]), q = l * power[l];
            s2 = f * (s2 + q * ((q - l) * s0 - 2 * s1));
            s1 = f * (s1 - q * s0);
            sdt = f * (sdt - q * st);
            s0 *= f;
            st *= f;
            stt *= f;
        }
        a += s0;
        d1 += s1;
        d2 += s2;
        t += st;
        tt += stt;
        dt += sdt;
    }
    for (int i = 0; i < isotherm->gauss_count; i++) {
        const struct gauss *gauss = &isotherm->gauss[i];
        const struct residual_term *term = gauss->term;
        double away = delta - term->epsilon;
        double exponent = gauss->exponent - term->eta * away * away;
        if (exponent < NEGLIGIBLE)
            continue;
        double v = gauss->c * power[term->d] * exp(exponent), twice = 2 * term->eta * delta;
        double k1 = term->d - twice * away;
        a += v;
        d1 += v * k1;
        d2 += v * (k1 * k1 - twice * (delta + away));
        t += v * gauss->t;
        tt += v * gauss->tt;
        dt += v * k1 * gauss->t;
    }
    *out = (struct residual_whole){
        .density = {.a = a, .d = d1, .dd = d2 - d1},
        .t = t,
        .tt = tt,
        .dt = dt,
    };
}

/* Ideal part without ln delta: a, tau a_t, tau^2 a_tt. */
static void ideal(const struct isotherm *isotherm, double *a, double *t, double *tt)
{
    const struct fluid *fluid = isotherm->fluid;
    double tau = isotherm->tau, ln_tau = isotherm->ln_tau;
    *a = fluid->lead_a1 + fluid->lead_a2 * tau + fluid->log_tau * ln_tau;
    *t = fluid->lead_a2 * tau + fluid->log_tau;
    *tt = -fluid->log_tau;
    for (int i = 0; i < fluid->ideal_power_count; i++) {
        double exponent = fluid->ideal_power[i].t;
        double value = fluid->ideal_power[i].n * exp(exponent * ln_tau);
        *a += value;
        *t += value * exponent;
        *tt += value * exponent * (exponent - 1);
    }
    for (int i = 0; i < fluid->planck_count; i++) {
        double n = fluid->planck[i].n, x = fluid->planck[i].theta * tau;
        double decay = exp(-x); /* 0 at low temperature, where all of it is 0 */
        double rest = -expm1(-x);
        *a += n * log1p(-decay);
        *t += n * x * decay / rest;
        *tt -= n * x * x * decay / (rest * rest);
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
    ideal(isotherm, &a0, &a0_t, &a0_tt);
    a0 += log(delta);
    double z = 1 + residual.density.d;
    double energy_t = a0_t + residual.t;
    double cv = -(a0_tt + residual.tt);
    double stiffness = 1 + 2 * residual.density.d + residual.density.dd;
    double thermal = z - residual.dt;
    /* At the critical point it grows beyond all bounds. */
    double cp = stiffness > 0 ? cv + thermal * thermal / stiffness : 0;
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
