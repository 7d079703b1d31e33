/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Oxygen: the figures of its published equation of state.
 * Equation: Schmidt, Wagner, Fluid Phase Equilibria 19 (1985) 175-200; Stewart, Jacobsen,
 * Wagner, J. Phys. Chem. Ref. Data 20 (1991) 917-1021.
 * Transport: Lemmon, Jacobsen, Int. J. Thermophys. 25 (2004) 21-69.
 */
#include "equation.h"

/* clang-format off */
static const struct ideal_planck planck[] = {
    {1.02323928, 14.5316979447668},
    {0.784357918, 72.8419165356674},
    {0.00337183363, 7.7710849975094},
    {-0.0170864084, 0.446425786480874},
    {0.0463751562, 34.4677188658373},
};

/* n, t, d, l, gauss, eta, beta, gamma, epsilon */
static const struct residual_term term[] = {
    {0.3983768749, 0, 1, 0, false, 0, 0, 0, 0},
    {-1.846157454, 1.5, 1, 0, false, 0, 0, 0, 0},
    {0.4183473197, 2.5, 1, 0, false, 0, 0, 0, 0},
    {0.02370620711, -0.5, 2, 0, false, 0, 0, 0, 0},
    {0.09771730573, 1.5, 2, 0, false, 0, 0, 0, 0},
    {0.03017891294, 2, 2, 0, false, 0, 0, 0, 0},
    {0.02273353212, 0, 3, 0, false, 0, 0, 0, 0},
    {0.01357254086, 1, 3, 0, false, 0, 0, 0, 0},
    {-0.04052698943, 2.5, 3, 0, false, 0, 0, 0, 0},
    {0.0005454628515, 0, 6, 0, false, 0, 0, 0, 0},
    {0.0005113182277, 2, 7, 0, false, 0, 0, 0, 0},
    {2.953466883e-07, 5, 7, 0, false, 0, 0, 0, 0},
    {-8.687645072e-05, 2, 8, 0, false, 0, 0, 0, 0},
    {-0.2127082589, 5, 1, 2, false, 0, 0, 0, 0},
    {0.08735941958, 6, 1, 2, false, 0, 0, 0, 0},
    {0.127550919, 3.5, 2, 2, false, 0, 0, 0, 0},
    {-0.09067701064, 5.5, 2, 2, false, 0, 0, 0, 0},
    {-0.03540084206, 3, 3, 2, false, 0, 0, 0, 0},
    {-0.03623278059, 7, 3, 2, false, 0, 0, 0, 0},
    {0.0132769929, 6, 5, 2, false, 0, 0, 0, 0},
    {-0.0003254111865, 8.5, 6, 2, false, 0, 0, 0, 0},
    {-0.008313582932, 4, 7, 2, false, 0, 0, 0, 0},
    {0.002124570559, 6.5, 8, 2, false, 0, 0, 0, 0},
    {-0.0008325206232, 5.5, 10, 2, false, 0, 0, 0, 0},
    {-2.626173276e-05, 22, 2, 4, false, 0, 0, 0, 0},
    {0.002599581482, 11, 3, 4, false, 0, 0, 0, 0},
    {0.009984649663, 18, 3, 4, false, 0, 0, 0, 0},
    {0.002199923153, 11, 4, 4, false, 0, 0, 0, 0},
    {-0.02591350486, 23, 4, 4, false, 0, 0, 0, 0},
    {-0.1259630848, 17, 5, 4, false, 0, 0, 0, 0},
    {0.1478355637, 18, 5, 4, false, 0, 0, 0, 0},
    {-0.01011251078, 23, 5, 4, false, 0, 0, 0, 0},
};

static const struct transport transport = {
    .sigma_nm = 0.3428,
    .epsilon_k = 118.5,
    .viscosity_count = 5,
    .viscosity = {
        {1.767e-05, 0.05, 1, 0},
        {4.042e-07, 0.0, 5, 0},
        {1.077e-10, 2.1, 12, 0},
        {3.51e-07, 0.0, 8, 1},
        {-1.367e-05, 0.5, 1, 2},
    },
    .conductivity_count = 6,
    .conductivity = {
        {0.01531, 0.0, 1, 0},
        {0.008898, 0.0, 3, 0},
        {-0.0007336, 0.3, 4, 0},
        {0.006728, 4.3, 5, 2},
        {-0.004374, 0.5, 7, 2},
        {-0.0004747, 1.8, 10, 2},
    },
    .a1 = 0.001036,
    .a = {0.006283, -0.004262},
    .t = {-0.9, -0.6},
    .q_d_per_m = 1.96078e+09,
    .xi0_m = 2.4e-10,
    .t_ref_k = 309.162,
};

const struct fluid fluid_oxygen = {
    .name = "oxygen",
    .limits = {
        .molar_mass_kg_mol = 0.0319988,
        .gas_constant_j_mol_k = 8.31434,
        .triple_temperature_k = 54.361,
        .triple_pressure_pa = 146.27764705809653,
        .critical_temperature_k = 154.58100000000002,
        .critical_pressure_pa = 5043000.0,
        .critical_density_kg_m3 = 13630.0 * 0.0319988,
        .max_temperature_k = 2000,
        .max_pressure_pa = 80000000,
        .source = "Schmidt, Wagner, Fluid Phase Equilibria 19 (1985) 175-200; Stewart, Jacobsen, Wagner, J. Phys. Chem. Ref. Data 20 (1991) 917-1021",
        .uncertainty = "density 0.1 % (authors, from memory)",
    },
    .reduce_temperature_k = 154.581,
    .reduce_density_mol_m3 = 13630,
    .critical_density_mol_m3 = 13630.0,
    .lead_a1 = 0 + -14.716836666461498,
    .lead_a2 = 0 + -0.011083985429237124,
    .log_tau = 2.51808732,
    .planck_count = 5,
    .planck = planck,
    .term_count = (int)ARRAY_LENGTH(term),
    .term = term,
    .ancillary_temperature_k = 154.581,
    .pressure = {
        .reducing_value = 5043000.0,
        .count = 6,
        .n = {-7.645535357219451, 2.4214288702883655, 9.642620060548747, -10.094822869854763, -1.6856689587691926, 1.2776407609527567},
        .t = {1.019, 1.177, 2.44, 2.493, 5.646, 10.887},
    },
    .liquid_density = {
        .reducing_value = 13630.0,
        .count = 6,
        .n = {2.398534228348317, -0.9602489731250617, 4.608521959548032, -4.459907685966375, 1.4756239105744295, -71.13005503778817},
        .t = {0.398, 0.86, 1.704, 2.122, 4.266, 18.786},
    },
    .vapour_density = {
        .reducing_value = 13630.0,
        .count = 6,
        .n = {-4.045898237284726, 13.351580368749335, -13.257394903986311, -0.5839929431960236, -2.395023810536666, -4.561062605120816},
        .t = {0.311, 0.407, 0.472, 1.701, 4.684, 16.677},
    },
    .tension_temperature_k = 154.581,
    .tension_count = 1,
    .tension_a = {0.03843},
    .tension_n = {1.225},
    .melting = MELTING_SIMON,
    .melting_count = 1,
    .melting_part = {
        {54.361, 63.1, 1, -266999247.652, {227606.348}, {1.769}},
    },
    .transport = &transport,
    .line = &line_oxygen,
};
/* clang-format on */
