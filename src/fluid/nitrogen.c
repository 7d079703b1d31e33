/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Nitrogen: the figures of its published equation of state.
 * Equation: Span, Lemmon, Jacobsen, Wagner, Yokozeki, J. Phys. Chem. Ref. Data 29 (2000)
 * 1361-1433.
 * Transport: Lemmon, Jacobsen, Int. J. Thermophys. 25 (2004) 21-69.
 */
#include "equation.h"

/* clang-format off */
static const struct ideal_power ideal_power[] = {
    {-0.0001934819, -1},
    {-1.247742e-05, -2},
    {6.678326e-08, -3},
};

static const struct ideal_planck planck[] = {
    {1.012941, 26.657878470901483},
};

/* n, t, d, l, gauss, eta, beta, gamma, epsilon */
static const struct residual_term term[] = {
    {0.924803575275, 0.25, 1, 0, false, 0, 0, 0, 0},
    {-0.492448489428, 0.875, 1, 0, false, 0, 0, 0, 0},
    {0.661883336938, 0.5, 2, 0, false, 0, 0, 0, 0},
    {-1.92902649201, 0.875, 2, 0, false, 0, 0, 0, 0},
    {-0.0622469309629, 0.375, 3, 0, false, 0, 0, 0, 0},
    {0.349943957581, 0.75, 3, 0, false, 0, 0, 0, 0},
    {0.564857472498, 0.5, 1, 1, false, 0, 0, 0, 0},
    {-1.61720005987, 0.75, 1, 1, false, 0, 0, 0, 0},
    {-0.481395031883, 2, 1, 1, false, 0, 0, 0, 0},
    {0.421150636384, 1.25, 3, 1, false, 0, 0, 0, 0},
    {-0.0161962230825, 3.5, 3, 1, false, 0, 0, 0, 0},
    {0.172100994165, 1, 4, 1, false, 0, 0, 0, 0},
    {0.00735448924933, 0.5, 6, 1, false, 0, 0, 0, 0},
    {0.0168077305479, 3, 6, 1, false, 0, 0, 0, 0},
    {-0.00107626664179, 0, 7, 1, false, 0, 0, 0, 0},
    {-0.0137318088513, 2.75, 7, 1, false, 0, 0, 0, 0},
    {0.000635466899859, 0.75, 8, 1, false, 0, 0, 0, 0},
    {0.00304432279419, 2.5, 8, 1, false, 0, 0, 0, 0},
    {-0.0435762336045, 4, 1, 2, false, 0, 0, 0, 0},
    {-0.0723174889316, 6, 2, 2, false, 0, 0, 0, 0},
    {0.0389644315272, 6, 3, 2, false, 0, 0, 0, 0},
    {-0.021220136391, 3, 4, 2, false, 0, 0, 0, 0},
    {0.00408822981509, 3, 5, 2, false, 0, 0, 0, 0},
    {-5.51990017984e-05, 6, 8, 2, false, 0, 0, 0, 0},
    {-0.0462016716479, 16, 4, 3, false, 0, 0, 0, 0},
    {-0.00300311716011, 11, 5, 3, false, 0, 0, 0, 0},
    {0.0368825891208, 15, 5, 3, false, 0, 0, 0, 0},
    {-0.0025585684622, 12, 8, 3, false, 0, 0, 0, 0},
    {0.00896915264558, 12, 3, 4, false, 0, 0, 0, 0},
    {-0.0044151337035, 7, 5, 4, false, 0, 0, 0, 0},
    {0.00133722924858, 4, 6, 4, false, 0, 0, 0, 0},
    {0.000264832491957, 16, 9, 4, false, 0, 0, 0, 0},
    {19.6688194015, 0, 1, 0, true, 20, 325, 1.16, 1},
    {-20.911560073, 1, 1, 0, true, 20, 325, 1.16, 1},
    {0.0167788306989, 2, 3, 0, true, 15, 300, 1.13, 1},
    {2627.67566274, 3, 2, 0, true, 25, 275, 1.25, 1},
};

static const struct transport transport = {
    .sigma_nm = 0.3656,
    .epsilon_k = 98.94,
    .viscosity_count = 5,
    .viscosity = {
        {1.072e-05, 0.1, 2, 0},
        {3.989e-08, 0.25, 10, 1},
        {1.208e-09, 3.2, 12, 1},
        {-7.402e-06, 0.9, 2, 2},
        {4.62e-06, 0.3, 1, 3},
    },
    .conductivity_count = 6,
    .conductivity = {
        {0.008862, 0.0, 1, 0},
        {0.03111, 0.03, 2, 0},
        {-0.07313, 0.2, 3, 1},
        {0.02003, 0.8, 4, 2},
        {-0.0007096, 0.6, 8, 2},
        {0.0002672, 1.9, 10, 2},
    },
    .a1 = 0.001511,
    .a = {0.002117, -0.003332},
    .t = {-1.0, -0.7},
    .q_d_per_m = 2.5e+09,
    .xi0_m = 1.7e-10,
    .t_ref_k = 252.384,
};

const struct fluid fluid_nitrogen = {
    .name = "nitrogen",
    .limits = {
        .molar_mass_kg_mol = 0.02801348,
        .gas_constant_j_mol_k = 8.31451,
        .triple_temperature_k = 63.151,
        .triple_pressure_pa = 12519.79537858119,
        .critical_temperature_k = 126.19200000000001,
        .critical_pressure_pa = 3395800.0,
        .critical_density_kg_m3 = 11183.901464580624 * 0.02801348,
        .max_temperature_k = 2000,
        .max_pressure_pa = 2200000000,
        .source = "Span, Lemmon, Jacobsen, Wagner, Yokozeki, J. Phys. Chem. Ref. Data 29 (2000) 1361-1433",
        .uncertainty = "density 0.02 %, vapour pressure 0.02 to 0.05 % (authors, from memory)",
    },
    .reduce_temperature_k = 126.192,
    .reduce_density_mol_m3 = 11183.901464580624,
    .critical_density_mol_m3 = 11183.901464580624,
    .lead_a1 = -12.76952708 + 0,
    .lead_a2 = -0.00784163 + 0,
    .log_tau = 2.5,
    .ideal_power_count = 3,
    .ideal_power = ideal_power,
    .planck_count = 1,
    .planck = planck,
    .term_count = (int)ARRAY_LENGTH(term),
    .term = term,
    .ancillary_temperature_k = 126.192,
    .pressure = {
        .reducing_value = 3395800.0,
        .count = 6,
        .n = {7.557523110967278, -15.31423072093374, 2.530452363947435, -3.5464937257192077, 2.4443140451500853, -1.089727092432518},
        .t = {0.945, 0.976, 1.134, 4.43, 4.942, 6.222},
    },
    .liquid_density = {
        .reducing_value = 11183.901464580624,
        .count = 6,
        .n = {3.423788275604014, -2.9664673074957677, 12.095926119341373, -13.681823050784574, 4.19110684294756, -0.6241396008655289},
        .t = {0.396, 0.549, 1.037, 1.209, 1.682, 2.819},
    },
    .vapour_density = {
        .reducing_value = 11183.901464580624,
        .count = 6,
        .n = {-2.412387653165135, 1.2535963572601478, -6.375300212535008, 3.257106728291224, -3.263645679265735, 1.2673447905058262},
        .t = {0.369, 0.556, 0.878, 1.049, 4.174, 6.303},
    },
    .tension_temperature_k = 126.192,
    .tension_count = 1,
    .tension_a = {0.02898},
    .tension_n = {1.246},
    .melting = MELTING_POLYNOMIAL_TR,
    .melting_count = 1,
    .melting_part = {
        {63.151, 287, 63.151, 12523, {12798.61}, {1.78963}},
    },
    .transport = &transport,
    .line = &line_nitrogen,
};
/* clang-format on */
