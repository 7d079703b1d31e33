/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Krypton: the figures of its published equation of state.
 * Equation: Lemmon, Span, J. Chem. Eng. Data 51 (2006) 785-850.
 */
#include "equation.h"

/* clang-format off */
/* n, t, d, l, gauss, eta, beta, gamma, epsilon */
static const struct residual_term term[] = {
    {0.83561, 0.25, 1, 0, false, 0, 0, 0, 0},
    {-2.3725, 1.125, 1, 0, false, 0, 0, 0, 0},
    {0.54567, 1.5, 1, 0, false, 0, 0, 0, 0},
    {0.014361, 1.375, 2, 0, false, 0, 0, 0, 0},
    {0.066502, 0.25, 3, 0, false, 0, 0, 0, 0},
    {0.0001931, 0.875, 7, 0, false, 0, 0, 0, 0},
    {0.16818, 0.625, 2, 1, false, 0, 0, 0, 0},
    {-0.033133, 1.75, 5, 1, false, 0, 0, 0, 0},
    {-0.15008, 3.625, 1, 2, false, 0, 0, 0, 0},
    {-0.022897, 3.625, 4, 2, false, 0, 0, 0, 0},
    {-0.021454, 14.5, 3, 3, false, 0, 0, 0, 0},
    {0.0069397, 12, 4, 3, false, 0, 0, 0, 0},
};

const struct fluid fluid_krypton = {
    .name = "krypton",
    .limits = {
        .molar_mass_kg_mol = 0.083798,
        .gas_constant_j_mol_k = 8.314472,
        .triple_temperature_k = 115.77,
        .triple_pressure_pa = 73502.83747636901,
        .critical_temperature_k = 209.48000000000002,
        .critical_pressure_pa = 5525000.0,
        .critical_density_kg_m3 = 10850.0 * 0.083798,
        .max_temperature_k = 750,
        .max_pressure_pa = 200000000,
        .source = "Lemmon, Span, J. Chem. Eng. Data 51 (2006) 785-850",
        .uncertainty = "density 0.05 to 0.3 % (authors, from memory)",
    },
    .reduce_temperature_k = 209.48,
    .reduce_density_mol_m3 = 10850,
    .critical_density_mol_m3 = 10850.0,
    .lead_a1 = -3.7506412806 + 0,
    .lead_a2 = 3.7798018435 + 0,
    .log_tau = 1.5,
    .term_count = (int)ARRAY_LENGTH(term),
    .term = term,
    .ancillary_temperature_k = 209.48,
    .pressure = {
        .reducing_value = 5525000.0,
        .count = 6,
        .n = {0.6286380394785566, -6.084114621397644, 0.9243637669284523, -1.2177291623316775, -484.84085075238977, 2458.926650746003},
        .t = {0.822, 0.961, 1.811, 2.937, 13.131, 15.629},
    },
    .liquid_density = {
        .reducing_value = 10850.0,
        .count = 6,
        .n = {2.546150113785161, -5.378194265123711, 8.373146326331726, -116.81279901170906, 18068.951065200818, -1719409.740660462},
        .t = {0.423, 1.611, 2.063, 6.632, 12.833, 19.438},
    },
    .vapour_density = {
        .reducing_value = 10850.0,
        .count = 6,
        .n = {-5.11839525888464, 1.8524855046540656, -2.3327083913774804, 5.670498376648386, -13.437817551364956, 2923.704628658189},
        .t = {0.487, 0.544, 1.593, 3.18, 4.851, 14.775},
    },
    .tension_temperature_k = 209.48,
    .tension_count = 1,
    .tension_a = {0.0447},
    .tension_n = {1.245},
    .melting = MELTING_SIMON,
    .melting_count = 1,
    .melting_part = {
        {115.77, 170, 1, -237497645.7, {109479.2307}, {1.6169841}},
    },
    .line = &line_krypton,
};
/* clang-format on */
