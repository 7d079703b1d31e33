/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * A start from a state found before changes the time of a search, never its result: the cold
 * search, held to published values elsewhere, is the measure here.
 */
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>

#include "ullage/fluid.h"

enum { CALLS = 4000 };

static double chance(uint64_t *seed)
{
    *seed = *seed * UINT64_C(6364136223846793005) + UINT64_C(1442695040888963407);
    return (double)(*seed >> 11) / 9007199254740992.0;
}

static void compare(const struct fluid *fluid, const struct fluid_state *cold,
                    const struct fluid_state *warm)
{
    const struct fluid_limits *limits = fluid_limits(fluid);
    /* Density carries the rounding of pressure over its slope: much near the critical point. */
    double p = cold->pressure_pa, rho = cold->density_kg_m3;
    double tolerance = 1e-12 + 1e-14 * p / (rho * cold->dp_drho_pa_m3_kg);
    double scale = limits->gas_constant_j_mol_k / limits->molar_mass_kg_mol *
                   fmax(cold->temperature_k, limits->critical_temperature_k);
    assert_int_equal(cold->phase, warm->phase);
    if (!(fabs(warm->density_kg_m3 / rho - 1) < tolerance &&
          fabs(warm->enthalpy_j_kg - cold->enthalpy_j_kg) < 10 * tolerance * scale))
        fail_msg("%s at %.12g K, %.12g Pa: warm %.15g, cold %.15g kg/m3", fluid_name(fluid),
                 cold->temperature_k, p, warm->density_kg_m3, rho);
}

static void walk(const struct fluid *fluid, double stride, uint64_t *seed)
{
    const struct fluid_limits *limits = fluid_limits(fluid);
    double part = 0.3;
    struct fluid_state last = {0}, cold, warm;
    for (int i = 0; i < CALLS; i++) {
        part = fmin(fmax(part + stride * (chance(seed) - 0.5), 0), 1);
        double temperature =
            limits->triple_temperature_k +
            part * (1.3 * limits->critical_temperature_k - limits->triple_temperature_k);
        double pressure = limits->critical_pressure_pa * pow(10, 3 * chance(seed) - 2.5);
        int code = fluid_at_tp(fluid, temperature, pressure, FLUID_PHASE_ANY, &cold, NULL);
        assert_int_equal(
            fluid_at_tp_near(fluid, temperature, pressure, FLUID_PHASE_ANY, &last, &warm, NULL),
            code);
        if (code != 0)
            continue;
        compare(fluid, &cold, &warm);
        last = warm;
    }
}

static void test_a_start_close_by_does_not_change_the_result(void **state)
{
    (void)state;
    uint64_t seed = 5;
    for (size_t f = 0; f < fluid_count(); f++)
        walk(fluid_at(f), 0.01, &seed);
}

static void test_a_start_of_no_use_does_not_change_the_result(void **state)
{
    (void)state;
    uint64_t seed = 6;
    for (size_t f = 0; f < fluid_count(); f++)
        walk(fluid_at(f), 1, &seed);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_a_start_close_by_does_not_change_the_result),
        cmocka_unit_test(test_a_start_of_no_use_does_not_change_the_result),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
