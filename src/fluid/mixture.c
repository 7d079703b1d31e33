/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The gas of a hall as a mixture of ideal gases. Dry air by ISO 2533:1975, table 1: its mean
 * molar mass, and the fractions that are told apart here; the rest (carbon dioxide, neon and
 * less) is in the mean.
 */
#include "ullage/fluid.h"

#include <math.h>

static const double GAS_CONSTANT_J_MOL_K = 8.314462618; /* CODATA 2018 */
static const double AIR_KG_MOL = 0.02896442;
static const double AIR_OXYGEN = 0.209476, AIR_NITROGEN = 0.78084, AIR_ARGON = 0.00934;
/* Standard atomic weights, IUPAC 2021, abridged. */
static const double ARGON_KG_MOL = 0.03995, NITROGEN_KG_MOL = 0.028014,
                    HELIUM_KG_MOL = 0.0040026, WATER_KG_MOL = 0.018015;
static const double COLDEST_WATER_K = 233.15, HOTTEST_K = 400, COLDEST_K = 60;

int fluid_water_pressure(double temperature_k, double *pressure_pa, struct error *err)
{
    static const double a[] = {-7.85951783, 1.84408259,  -11.7866497,
                               22.6807411,  -15.9618719, 1.80122502};
    static const double power[] = {1, 1.5, 3, 3.5, 4, 7.5};
    const double critical_k = 647.096, critical_pa = 22.064e6;
    if (!(temperature_k >= COLDEST_WATER_K && temperature_k <= HOTTEST_K))
        return error_set(err, ERR_RANGE,
                         "vapour pressure of water is told from %.6g to %.6g K (asked: %.6g K)",
                         COLDEST_WATER_K, HOTTEST_K, temperature_k);
    double theta = 1 - temperature_k / critical_k, sum = 0;
    for (size_t i = 0; i < ARRAY_LENGTH(a); i++)
        sum += a[i] * pow(theta, power[i]);
    *pressure_pa = critical_pa * exp(critical_k / temperature_k * sum);
    return 0;
}

/* A gas that alone would condense at its partial pressure surely does so in a mixture. */
static int check_gaseous(const char *name, double temperature, double partial,
                         struct error *err)
{
    const struct fluid *fluid = fluid_find(name);
    const struct fluid_limits *limits = fluid_limits(fluid);
    struct fluid_saturation line;
    if (temperature >= limits->critical_temperature_k)
        return 0;
    double limit = limits->triple_pressure_pa;
    if (temperature >= limits->triple_temperature_k) {
        int code = fluid_saturation_at_t(fluid, temperature, &line, err);
        if (code != 0)
            return code;
        limit = line.pressure_pa;
    }
    if (partial > limit * (1 + 1e-6))
        return error_set(err, ERR_RANGE,
                         "%s condenses from a mixture at %.6g K above %.6g Pa of it (asked: "
                         "%.6g Pa)",
                         name, temperature, limit, partial);
    return 0;
}

static int check_air(const struct fluid_air *air, struct error *err)
{
    double released = air->argon + air->nitrogen + air->helium;
    if (!(air->temperature_k >= COLDEST_K && air->temperature_k <= HOTTEST_K))
        return error_set(err, ERR_RANGE,
                         "air of a hall is told from %.6g to %.6g K (asked: "
                         "%.6g K)",
                         COLDEST_K, HOTTEST_K, air->temperature_k);
    if (!(air->pressure_pa >= 1 && air->pressure_pa <= 3e5))
        return error_set(err, ERR_RANGE,
                         "air of a hall is told from 1 Pa to 0.3 MPa (asked: %.6g Pa)",
                         air->pressure_pa);
    if (!(air->argon >= 0 && air->nitrogen >= 0 && air->helium >= 0 && released <= 1 + 1e-12))
        return error_set(err, ERR_RANGE,
                         "released gases are fractions of the mixture, together 0 to 1 "
                         "(asked: argon %.6g, nitrogen %.6g, helium %.6g)",
                         air->argon, air->nitrogen, air->helium);
    if (!(air->humidity >= 0 && air->humidity <= 1))
        return error_set(err, ERR_RANGE, "relative humidity is from 0 to 1 (asked: %.6g)",
                         air->humidity);
    return 0;
}

int fluid_air_state(const struct fluid_air *air, struct fluid_air_state *out, struct error *err)
{
    double water = 0;
    int code = check_air(air, err);
    if (code == 0 && air->humidity > 0)
        code = fluid_water_pressure(air->temperature_k, &water, err);
    if (code != 0)
        return code;
    water *= air->humidity;
    double pressure = air->pressure_pa, dry = pressure - water;
    if (!(dry > 0))
        return error_set(err, ERR_RANGE,
                         "water vapour alone would be %.6g Pa of %.6g Pa; lower the humidity",
                         water, pressure);
    double plain = fmax(0, 1 - air->argon - air->nitrogen - air->helium);
    struct fluid_air_state state = {
        .oxygen_pa = dry * plain * AIR_OXYGEN,
        .nitrogen_pa = dry * (plain * AIR_NITROGEN + air->nitrogen),
        .argon_pa = dry * (plain * AIR_ARGON + air->argon),
        .helium_pa = dry * air->helium,
        .water_pa = water,
        .oxygen_dry = plain * AIR_OXYGEN,
    };
    double mass = dry * (plain * AIR_KG_MOL + air->argon * ARGON_KG_MOL +
                         air->nitrogen * NITROGEN_KG_MOL + air->helium * HELIUM_KG_MOL) +
                  water * WATER_KG_MOL;
    state.molar_mass_kg_mol = mass / pressure;
    state.density_kg_m3 = mass / (GAS_CONSTANT_J_MOL_K * air->temperature_k);
    code = check_gaseous("oxygen", air->temperature_k, state.oxygen_pa, err);
    if (code == 0)
        code = check_gaseous("nitrogen", air->temperature_k, state.nitrogen_pa, err);
    if (code == 0)
        code = check_gaseous("argon", air->temperature_k, state.argon_pa, err);
    if (code == 0)
        *out = state;
    return code;
}
