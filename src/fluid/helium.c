/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Helium: the figures of its published equation of state.
 * Equation: Ortiz Vega, Hall, Holste, Arp, Harvey, Lemmon (helium-4 equation of state; J.
 * Phys. Chem. Ref. Data 52 (2023) 031502).
 */
#include "equation.h"

/* clang-format off */
/* n, t, d, l, gauss, eta, beta, gamma, epsilon */
static const struct residual_term term[] = {
    {3.0638932, 0.425, 1, 0, false, 0, 0, 0, 0},
    {-4.2420844, 0.63, 1, 0, false, 0, 0, 0, 0},
    {0.054418088, 0.69, 2, 0, false, 0, 0, 0, 0},
    {-0.18971904, 1.83, 2, 0, false, 0, 0, 0, 0},
    {0.087856262, 0.575, 3, 0, false, 0, 0, 0, 0},
    {0.015559018, 1.0, 4, 0, false, 0, 0, 0, 0},
    {2.2833566, 0.925, 1, 1, false, 0, 0, 0, 0},
    {-1.6432563, 0.8, 1, 1, false, 0, 0, 0, 0},
    {0.99444915, 1.51, 2, 1, false, 0, 0, 0, 0},
    {-0.53331595, 1.585, 1, 2, false, 0, 0, 0, 0},
    {-0.30078896, 2.9, 2, 2, false, 0, 0, 0, 0},
    {-0.53296502, 1.69, 3, 2, false, 0, 0, 0, 0},
    {0.8029102, 1.26, 2, 0, true, 1.5497, 0.2471, 3.15, 0.596},
    {0.026838669, 3.51, 1, 0, true, 9.245, 0.0983, 2.54505, 0.3423},
    {0.04687678, 2.785, 2, 0, true, 4.76323, 0.1556, 1.2513, 0.761},
    {-0.14832766, 1.0, 1, 0, true, 6.3826, 2.6782, 1.9416, 0.9747},
    {0.03016211, 4.22, 1, 0, true, 8.7023, 2.7077, 0.5984, 0.5868},
    {-0.019986041, 0.83, 3, 0, true, 0.255, 0.6621, 2.2282, 0.5627},
    {0.14283514, 1.575, 2, 0, true, 0.3523, 0.1775, 1.606, 2.5346},
    {0.007418269, 3.447, 2, 0, true, 0.1492, 0.4821, 3.815, 3.6763},
    {-0.22989793, 0.73, 3, 0, true, 0.05, 0.3069, 1.61958, 4.5245},
    {0.79224829, 1.634, 2, 0, true, 0.1668, 0.1758, 0.6407, 5.039},
    {-0.049386338, 6.13, 2, 0, true, 42.2358, 1357.6577, 1.076, 0.959},
};

const struct fluid fluid_helium = {
    .name = "helium",
    .limits = {
        .molar_mass_kg_mol = 0.004002602,
        .gas_constant_j_mol_k = 8.3144598,
        .triple_temperature_k = 2.1768,
        .triple_pressure_pa = 5039.330380576782,
        .critical_temperature_k = 5.1953000000000005,
        .critical_pressure_pa = 228326.06990902807,
        .critical_density_kg_m3 = 18130.0 * 0.004002602,
        .max_temperature_k = 2000,
        .max_pressure_pa = 1000000000,
        .source = "Ortiz Vega, Hall, Holste, Arp, Harvey, Lemmon (helium-4 equation of state; J. Phys. Chem. Ref. Data 52 (2023) 031502)",
        .uncertainty = "density 0.05 to 0.3 % (authors, from memory)",
    },
    .reduce_temperature_k = 5.1953,
    .reduce_density_mol_m3 = 17383.7,
    .critical_density_mol_m3 = 18130.0,
    .lead_a1 = 0.1871304489697973 + -0.0138816556862182,
    .lead_a2 = 0.4848903984696551 + -0.0174381783145519,
    .log_tau = 1.5,
    .term_count = (int)ARRAY_LENGTH(term),
    .term = term,
    .ancillary_temperature_k = 5.1953,
    .pressure = {
        .reducing_value = 227600.0,
        .count = 6,
        .n = {-2.5589967099484343, -2.1208869241528903, 2.0304814035943877, 0.9702906562630098, -0.006217789170073319, -4.338734244510393},
        .t = {0.981, 1.13, 1.536, 3.109, 0.338, 14.431},
    },
    .liquid_density = {
        .reducing_value = 18130.0,
        .count = 6,
        .n = {1.8225767219916278, -0.5212838519553242, 0.2130685389843537, -0.44861224586106435, 5.329845315529739, -10.020970811883176},
        .t = {0.402, 0.491, 0.941, 1.784, 8.213, 9.042},
    },
    .vapour_density = {
        .reducing_value = 18130.0,
        .count = 6,
        .n = {-0.8412289332631507, -3.590072534944493, 2.2788760536554777, -1.4459129841887175, 2.0638632716793297, -14.547720153618606},
        .t = {0.211, 0.693, 0.749, 1.118, 1.846, 19.915},
    },
    .tension_temperature_k = 5.1953,
    .tension_count = 3,
    .tension_a = {0.0004656, 0.001889, -0.002006},
    .tension_n = {1.04, 2.468, 2.661},
    .melting = MELTING_SIMON,
    .melting_count = 1,
    .melting_part = {
        {2.1768, 700, 1, -1606700.0, {1606700.0}, {1.565}},
    },
    .line = &line_helium,
};
/* clang-format on */
