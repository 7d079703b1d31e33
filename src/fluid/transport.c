/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Viscosity and thermal conductivity: Lemmon, Jacobsen, Int. J. Thermophys. 25 (2004) 21-69,
 * with the simplified critical enhancement of Olchowy and Sengers as given there. Symbols
 * follow the paper. Validity: the fluid's own; stated uncertainty 2 % (argon, nitrogen gas) to
 * 5 %.
 */
#include "equation.h"

#include <math.h>

static const double PI = 3.14159265358979323846;
static const double BOLTZMANN_J_K = 1.380658e-23; /* the value of the paper's time */

static int check(const struct fluid *fluid, const struct fluid_state *state, struct error *err)
{
    if (fluid->transport == NULL)
        return error_set(err, ERR_UNSUPPORTED, "%s: no published transport model here",
                         fluid->name);
    if (state->phase == FLUID_PHASE_TWO_PHASE)
        return error_set(err, ERR_RANGE, "%s: two phases have no one viscosity or conductivity",
                         fluid->name);
    return 0;
}

static double dilute_viscosity(const struct fluid *fluid, double temperature)
{
    static const double b[] = {0.431, -0.4623, 0.08406, 0.005341, -0.00331};
    const struct transport *transport = fluid->transport;
    double ln = log(temperature / transport->epsilon_k), omega = 0;
    for (int i = 4; i >= 0; i--)
        omega = omega * ln + b[i];
    double molar_mass_g = fluid->limits.molar_mass_kg_mol * 1e3;
    return 2.66958e-8 * sqrt(molar_mass_g * temperature) /
           (transport->sigma_nm * transport->sigma_nm * exp(omega));
}

static double residual(const struct transport_term *term, int count, double tau, double delta)
{
    double sum = 0;
    for (int i = 0; i < count; i++) {
        double value = term[i].n * pow(tau, term[i].t) * pow(delta, term[i].d);
        if (term[i].l > 0)
            value *= exp(-pow(delta, term[i].l));
        sum += value;
    }
    return sum;
}

static double viscosity(const struct fluid *fluid, const struct fluid_state *state)
{
    double tau = fluid->limits.critical_temperature_k / state->temperature_k;
    double delta = state->density_kg_m3 / fluid->limits.critical_density_kg_m3;
    return dilute_viscosity(fluid, state->temperature_k) +
           residual(fluid->transport->viscosity, fluid->transport->viscosity_count, tau, delta);
}

int fluid_viscosity(const struct fluid *fluid, const struct fluid_state *state,
                    double *viscosity_pa_s, struct error *err)
{
    int code = check(fluid, state, err);
    if (code == 0)
        *viscosity_pa_s = viscosity(fluid, state);
    return code;
}

/* X = p_c rho/rho_c^2 (drho/dp)_T, all molar. */
static double reduced_susceptibility(const struct fluid *fluid, double rho_mol,
                                     double dp_drho_mol)
{
    double rho_c = fluid->critical_density_mol_m3;
    return fluid->limits.critical_pressure_pa * rho_mol / (rho_c * rho_c) / dp_drho_mol;
}

static double critical_enhancement(const struct fluid *fluid, const struct fluid_state *state)
{
    const double r0 = 1.01, nu = 0.63, gamma = 1.2415, amplitude = 0.055;
    const struct transport *transport = fluid->transport;
    double molar_mass = fluid->limits.molar_mass_kg_mol,
           rho = state->density_kg_m3 / molar_mass;
    struct isotherm isotherm;
    struct fluid_state reference;
    isotherm_set(&isotherm, fluid, transport->t_ref_k);
    state_fill(&isotherm, rho, &reference);
    double here = reduced_susceptibility(fluid, rho, state->dp_drho_pa_m3_kg * molar_mass);
    double there = reduced_susceptibility(fluid, rho, reference.dp_drho_pa_m3_kg * molar_mass);
    double bracket = here - there * transport->t_ref_k / state->temperature_k;
    if (!(bracket > 0))
        return 0;
    double xi = transport->xi0_m * pow(bracket / amplitude, nu / gamma);
    double x = xi * transport->q_d_per_m;
    double cp = state->cp_j_kg_k * molar_mass, cv = state->cv_j_kg_k * molar_mass;
    double ratio = fluid->critical_density_mol_m3 / rho;
    double w = 2 / PI * ((cp - cv) / cp * atan(x) + cv / cp * x);
    double w0 = 2 / PI * (1 - exp(-1 / (1 / x + x * x * ratio * ratio / 3)));
    return rho * cp * r0 * BOLTZMANN_J_K * state->temperature_k /
           (6 * PI * xi * viscosity(fluid, state)) * (w - w0);
}

int fluid_conductivity(const struct fluid *fluid, const struct fluid_state *state,
                       double *conductivity_w_m_k, struct error *err)
{
    int code = check(fluid, state, err);
    if (code != 0)
        return code;
    const struct transport *transport = fluid->transport;
    double tau = fluid->limits.critical_temperature_k / state->temperature_k;
    double delta = state->density_kg_m3 / fluid->limits.critical_density_kg_m3;
    double sum = transport->a1 * dilute_viscosity(fluid, state->temperature_k) / 1e-6;
    for (size_t i = 0; i < ARRAY_LENGTH(transport->a); i++)
        if (transport->a[i] != 0)
            sum += transport->a[i] * pow(tau, transport->t[i]);
    sum += residual(transport->conductivity, transport->conductivity_count, tau, delta);
    *conductivity_w_m_k = sum + critical_enhancement(fluid, state);
    return 0;
}
