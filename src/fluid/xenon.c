/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Xenon: the figures of its published equation of state.
 * Equation: Lemmon, Span, J. Chem. Eng. Data 51 (2006) 785-850.
 */
#include "equation.h"

/* clang-format off */
/* n, t, d, l, gauss, eta, beta, gamma, epsilon */
static const struct residual_term term[] = {
    {0.83115, 0.25, 1, 0, false, 0, 0, 0, 0},
    {-2.3553, 1.125, 1, 0, false, 0, 0, 0, 0},
    {0.53904, 1.5, 1, 0, false, 0, 0, 0, 0},
    {0.014382, 1.375, 2, 0, false, 0, 0, 0, 0},
    {0.066309, 0.25, 3, 0, false, 0, 0, 0, 0},
    {0.00019649, 0.875, 7, 0, false, 0, 0, 0, 0},
    {0.14996, 0.625, 2, 1, false, 0, 0, 0, 0},
    {-0.035319, 1.75, 5, 1, false, 0, 0, 0, 0},
    {-0.15929, 3.625, 1, 2, false, 0, 0, 0, 0},
    {-0.027521, 3.625, 4, 2, false, 0, 0, 0, 0},
    {-0.023305, 14.5, 3, 3, false, 0, 0, 0, 0},
    {0.0086941, 12, 4, 3, false, 0, 0, 0, 0},
};

const struct fluid fluid_xenon = {
    .name = "xenon",
    .limits = {
        .molar_mass_kg_mol = 0.131293,
        .gas_constant_j_mol_k = 8.314472,
        .triple_temperature_k = 161.4,
        .triple_pressure_pa = 81747.79911792238,
        .critical_temperature_k = 289.733,
        .critical_pressure_pa = 5842000.0,
        .critical_density_kg_m3 = 8400.0 * 0.131293,
        .max_temperature_k = 750,
        .max_pressure_pa = 700000000,
        .source = "Lemmon, Span, J. Chem. Eng. Data 51 (2006) 785-850",
        .uncertainty = "density 0.05 to 0.3 % (authors, from memory)",
    },
    .reduce_temperature_k = 289.733,
    .reduce_density_mol_m3 = 8400,
    .critical_density_mol_m3 = 8400.0,
    .lead_a1 = -3.8227178129 + 0,
    .lead_a2 = 3.8416395351 + 0,
    .log_tau = 1.5,
    .term_count = (int)ARRAY_LENGTH(term),
    .term = term,
    .ancillary_temperature_k = 289.733,
    .pressure = {
        .reducing_value = 5842000.0,
        .count = 6,
        .n = {-16.19625075039699, 11.57828555218498, -0.8039722338089157, -0.44871260923308376, -3.2943901833234577, -0.38871476100259306},
        .t = {1.057, 1.12, 3.837, 4.253, 9.273, 1.349},
    },
    .liquid_density = {
        .reducing_value = 8400.0,
        .count = 6,
        .n = {-0.07701425735191812, 2.124910237054726, 3.0205260680663732, -192.08348472998213, 269.9245321947838, -15087.387586364559},
        .t = {0.084, 0.346, 2.447, 5.49, 6.019, 15.158},
    },
    .vapour_density = {
        .reducing_value = 8400.0,
        .count = 6,
        .n = {-2.3064783393038195, -1.620761716561509, -2.202094575030882, 84230.43322373286, -29642269.39439326, 40329098.33422997},
        .t = {0.415, 0.698, 2.925, 14.138, 18.611, 19.123},
    },
    .tension_temperature_k = 289.733,
    .tension_count = 2,
    .tension_a = {-0.11538, 0.16598},
    .tension_n = {1.0512, 1.098},
    .line = &line_xenon,
};
/* clang-format on */
