/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Parahydrogen: the figures of its published equation of state.
 * Equation: Leachman, Jacobsen, Penoncello, Lemmon, J. Phys. Chem. Ref. Data 38 (2009)
 * 721-748.
 */
#include "equation.h"

/* clang-format off */
static const struct ideal_planck planck[] = {
    {4.30256, 15.14967514724634},
    {13.0289, 25.092598214827856},
    {-47.7365, 29.473556378650795},
    {50.0013, 35.40591414172081},
    {-18.6261, 40.72499848199648},
    {0.993973, 163.79257999878558},
    {0.536078, 309.2173173841763},
};

/* n, t, d, l, gauss, eta, beta, gamma, epsilon */
static const struct residual_term term[] = {
    {-7.33375, 0.6855, 1, 0, false, 0, 0, 0, 0},
    {2.60375, 1, 1, 0, false, 0, 0, 0, 0},
    {4.66279, 0.489, 1, 0, false, 0, 0, 0, 0},
    {0.68239, 0.774, 2, 0, false, 0, 0, 0, 0},
    {-1.47078, 1.133, 2, 0, false, 0, 0, 0, 0},
    {0.135801, 1.386, 3, 0, false, 0, 0, 0, 0},
    {0.01, 1, 4, 0, false, 0, 0, 0, 0},
    {-1.05327, 1.619, 1, 1, false, 0, 0, 0, 0},
    {0.328239, 1.162, 3, 1, false, 0, 0, 0, 0},
    {-0.0577833, 3.96, 2, 0, true, 1.7437, 0.194, 0.8048, 1.5487},
    {0.0449743, 5.276, 1, 0, true, 0.5516, 0.2019, 1.5248, 0.1785},
    {0.0703464, 0.99, 3, 0, true, 0.0634, 0.0301, 0.6648, 1.28},
    {-0.0401766, 6.791, 1, 0, true, 2.1341, 0.2383, 0.6832, 0.6319},
    {0.11951, 3.19, 1, 0, true, 1.777, 0.3253, 1.493, 1.7104},
};

const struct fluid fluid_parahydrogen = {
    .name = "parahydrogen",
    .limits = {
        .molar_mass_kg_mol = 0.00201588,
        .gas_constant_j_mol_k = 8.314472,
        .triple_temperature_k = 13.8033,
        .triple_pressure_pa = 7041.087413598502,
        .critical_temperature_k = 32.938,
        .critical_pressure_pa = 1285800.0,
        .critical_density_kg_m3 = 15538.0 * 0.00201588,
        .max_temperature_k = 1000,
        .max_pressure_pa = 2000000000,
        .source = "Leachman, Jacobsen, Penoncello, Lemmon, J. Phys. Chem. Ref. Data 38 (2009) 721-748",
        .uncertainty = "density 0.05 to 0.3 % (authors, from memory)",
    },
    .reduce_temperature_k = 32.938,
    .reduce_density_mol_m3 = 15538,
    .critical_density_mol_m3 = 15538.0,
    .lead_a1 = -1.4485891134 + 0,
    .lead_a2 = 1.884521239 + 0,
    .log_tau = 1.5,
    .planck_count = 7,
    .planck = planck,
    .term_count = (int)ARRAY_LENGTH(term),
    .term = term,
    .ancillary_temperature_k = 32.938,
    .pressure = {
        .reducing_value = 1285800.0,
        .count = 6,
        .n = {0.1490037759465196, -4.78237888041144, 1.5087203071678434, -0.880650150281499, 1.2942713948220537, -0.3877150898692146},
        .t = {0.852, 0.986, 1.827, 2.355, 3.05, 4.286},
    },
    .liquid_density = {
        .reducing_value = 15538.0,
        .count = 6,
        .n = {2.42209314197553, -0.8105757647156946, 5.292441752641816, -801.4099838859875, 965.4158391322754, -2288.927990716296},
        .t = {0.44, 0.833, 4.399, 8.501, 8.893, 17.08},
    },
    .vapour_density = {
        .reducing_value = 15538.0,
        .count = 6,
        .n = {-5.1023908882756785, 15.472633152203006, -25.539938117401427, 65.8971290411631, -53.56192274807538, -9.178291109165437},
        .t = {0.533, 1.001, 1.276, 1.876, 1.958, 19.379},
    },
    .tension_temperature_k = 32.938,
    .tension_count = 1,
    .tension_a = {0.005314},
    .tension_n = {1.06},
    .melting = MELTING_SIMON,
    .melting_count = 2,
    .melting_part = {
        {13.8033, 22, 1, -21155737.752, {125746.643}, {1.955}},
        {22, 170, 1, -26280332.904, {248578.596}, {1.764739}},
    },
    .line = &line_parahydrogen,
};
/* clang-format on */
