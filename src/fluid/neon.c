/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Neon: the figures of its published equation of state.
 * Equation: Thol, Beckmueller, Weiss, Harvey, Lemmon, Jacobsen, Span, Int. J. Thermophys. 40
 * (2019) 91 (form as distributed with the reference library).
 */
#include "equation.h"

/* clang-format off */
/* n, t, d, l, gauss, eta, beta, gamma, epsilon */
static const struct residual_term term[] = {
    {3.7716418, 0.431, 1, 0, false, 0, 0, 0, 0},
    {-4.27399448, 0.592, 1, 0, false, 0, 0, 0, 0},
    {-0.756466758, 1.105, 2, 0, false, 0, 0, 0, 0},
    {0.066679921, 0.49, 3, 0, false, 0, 0, 0, 0},
    {0.031522418, 1.0, 4, 0, false, 0, 0, 0, 0},
    {0.9407234, 1.36, 2, 1, false, 0, 0, 0, 0},
    {0.461243234, 0.5, 4, 1, false, 0, 0, 0, 0},
    {0.008184422, 1.12, 7, 1, false, 0, 0, 0, 0},
    {-0.356928434, 2.3, 1, 2, false, 0, 0, 0, 0},
    {-0.969302374, 2.0, 2, 2, false, 0, 0, 0, 0},
    {-0.053124761, 3.18, 3, 2, false, 0, 0, 0, 0},
    {7.84771604, 0.41, 1, 0, true, 0.76, 0.537, 1.997, 0.5775},
    {6.39604094, 0.64, 1, 0, true, 2.126, 0.765, 1.782, 0.9137},
    {-1.27480579, 0.579, 3, 0, true, 2.168, 0.883, 1.663, 0.7895},
    {-5.51887999, 0.6, 2, 0, true, 2.033, 0.751, 1.837, 0.6229},
    {-8.76652276, 0.52, 1, 0, true, 0.743, 0.531, 1.953, 0.4992},
    {-0.351732709, 0.655, 2, 0, true, 4.38, 11.4, 1.658, 0.869},
};

const struct fluid fluid_neon = {
    .name = "neon",
    .limits = {
        .molar_mass_kg_mol = 0.020179,
        .gas_constant_j_mol_k = 8.3144598,
        .triple_temperature_k = 24.5561,
        .triple_pressure_pa = 43417.232458065846,
        .critical_temperature_k = 44.4,
        .critical_pressure_pa = 2661630.8085948555,
        .critical_density_kg_m3 = 24100.0 * 0.020179,
        .max_temperature_k = 725,
        .max_pressure_pa = 1000000000,
        .source = "Thol, Beckmueller, Weiss, Harvey, Lemmon, Jacobsen, Span, Int. J. Thermophys. 40 (2019) 91 (form as distributed with the reference library)",
        .uncertainty = "density 0.05 to 0.3 % (authors, from memory)",
    },
    .reduce_temperature_k = 44.4,
    .reduce_density_mol_m3 = 24100,
    .critical_density_mol_m3 = 24100.0,
    .lead_a1 = -3.0384719151147275 + 0,
    .lead_a2 = 3.253690479855404 + 0,
    .log_tau = 1.5,
    .term_count = (int)ARRAY_LENGTH(term),
    .term = term,
    .ancillary_temperature_k = 44.4918,
    .pressure = {
        .reducing_value = 2680000.0,
        .count = 6,
        .n = {-0.00074500795037099, -3.682372301668146, -9.78153179091002, 4.096945170441814, -2.9886393690120436, 7.178339654951069},
        .t = {0.019, 0.9, 1.026, 1.808, 2.247, 0.954},
    },
    .liquid_density = {
        .reducing_value = 23882.0,
        .count = 6,
        .n = {0.22207659869985238, 2.4573200546328224, -1969.4302835894664, 6749.387057643627, -4813.477464106806, 591.6954480241219},
        .t = {0.361, 0.489, 3.226, 3.371, 3.443, 9.965},
    },
    .vapour_density = {
        .reducing_value = 23882.0,
        .count = 6,
        .n = {-1.3474639960955583, -2.7571994490012472, 0.009650364682861507, 2.0354003457571044, -3.227001419324544, 122.46077167651404},
        .t = {0.408, 0.648, 1.315, 2.286, 2.901, 11.792},
    },
    .tension_temperature_k = 44.4918,
    .tension_count = 3,
    .tension_a = {0.012254, 0.02728, -0.025715},
    .tension_n = {1.4136, 1.4517, 1.6567},
    .melting = MELTING_POLYNOMIAL_THETA,
    .melting_count = 1,
    .melting_part = {
        {24.556, 330, 24.556, 43417.232458065846, {3552.0834, 1447.21543}, {1.0, 1.60834}},
    },
    .line = &line_neon,
};
/* clang-format on */
