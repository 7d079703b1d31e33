/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The gas of a hall against published densities, the equations of state of its pure gases, and
 * the check values of the vapour pressure of water; its edges.
 */
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdio.h>
#include <string.h>

#include <cmocka.h>

#include "../near.h"
#include "ullage/fluid.h"

static struct fluid_air_state told(struct fluid_air air)
{
    struct fluid_air_state out = {0};
    struct error err = {0};
    if (fluid_air_state(&air, &out, &err) != 0)
        fail_msg("%s", err.text);
    return out;
}

static void test_dry_air_is_as_dense_as_the_standard_atmosphere_says(void **state)
{
    (void)state;
    /* ISO 2533:1975 and US Standard Atmosphere 1976: 1.225 kg/m3 at 288.15 K; by its gas 1.2041
     * at 20 degC. */
    assert_near(told((struct fluid_air){288.15, 101325, 0, 0, 0, 0}).density_kg_m3, 1.225,
                5e-5);
    assert_near(told((struct fluid_air){293.15, 101325, 0, 0, 0, 0}).density_kg_m3, 1.2041,
                5e-5);
    /* 10 km: T 223.252 K, p 26 499.9 Pa, rho 0.413 51 kg/m3. */
    assert_close(told((struct fluid_air){223.252, 26499.9, 0, 0, 0, 0}).density_kg_m3, 0.41351,
                 5e-5);
    struct fluid_air_state air = told((struct fluid_air){293.15, 101325, 0, 0, 0, 0});
    assert_close(air.molar_mass_kg_mol, 0.02896442, 1e-12);
    assert_near(air.oxygen_dry, 0.209476, 1e-12);
    assert_near(air.oxygen_pa, 21225, 1); /* 0.209476 of 101 325 Pa */
    assert_true(air.water_pa == 0 && air.helium_pa == 0);
}

static void test_argon_sinks_and_nitrogen_floats_as_the_methods_say(void **state)
{
    (void)state;
    double air = told((struct fluid_air){293.15, 101325, 0, 0, 0, 0}).density_kg_m3;
    /* Warm argon is 1.380 times air; nitrogen at 283.5 K is as dense as air at 20 degC: by the
     * published equations of state, docs/methods.md. */
    double argon = told((struct fluid_air){293.15, 101325, 0, 1, 0, 0}).density_kg_m3;
    assert_near(argon / air, 1.380, 1e-3);
    double nitrogen = told((struct fluid_air){283.5, 101325, 0, 0, 1, 0}).density_kg_m3;
    assert_near(nitrogen / air, 1, 5e-4);
    double helium = told((struct fluid_air){293.15, 101325, 0, 0, 0, 1}).density_kg_m3;
    assert_near(helium / air, 4.0026 / 28.96442, 1e-6);
    /* Cold vapours by those equations: argon at 87.3 K 4.795, nitrogen at 77.4 K 3.830 times
     * air; the ideal gas may be 4.5 % short and never beyond. */
    double cold = told((struct fluid_air){87.31, 101325, 0, 1, 0, 0}).density_kg_m3 / air;
    assert_true(cold < 4.795 && cold > 4.795 * 0.955);
    cold = told((struct fluid_air){77.4, 101325, 0, 0, 1, 0}).density_kg_m3 / air;
    assert_true(cold < 3.830 && cold > 3.830 * 0.955);
}

static void test_the_stated_error_holds_against_the_equations_of_state(void **state)
{
    (void)state;
    static const struct {
        const char *name;
        struct fluid_air pure;
    } gases[] = {
        {"argon",    {.argon = 1}   },
        {"nitrogen", {.nitrogen = 1}},
        {"helium",   {.helium = 1}  },
    };
    int compared = 0;
    for (size_t i = 0; i < ARRAY_LENGTH(gases); i++) {
        for (double t = 78; t <= 400; t += 4) {
            struct fluid_air air = gases[i].pure;
            struct fluid_air_state mixture;
            struct fluid_state real;
            air.temperature_k = t;
            air.pressure_pa = 101325;
            const struct fluid *fluid = fluid_find(gases[i].name);
            int code = fluid_air_state(&air, &mixture, NULL);
            if (code != 0) { /* only where the gas is no gas */
                struct fluid_saturation line;
                bool gas = t >= fluid_limits(fluid)->triple_temperature_k &&
                           fluid_saturation_at_t(fluid, t, &line, NULL) == 0 &&
                           line.pressure_pa > 101325;
                assert_false(gas);
                continue;
            }
            assert_int_equal(fluid_at_tp(fluid, t, 101325, FLUID_PHASE_ANY, &real, NULL), 0);
            double off = mixture.density_kg_m3 / real.density_kg_m3 - 1;
            double low = t >= 250 ? -1.5e-3 : -0.045, high = t >= 250 ? 1e-3 : 2e-3;
            if (!(off >= low && off <= high))
                fail_msg("%s at %g K: %.3g %% from its equation", gases[i].name, t, 100 * off);
            compared++;
        }
    }
    assert_true(compared > 200);
}

static void test_water_has_its_published_vapour_pressure(void **state)
{
    (void)state;
    double p;
    /* Wagner, Pruss 1993, table of check values: 273.16 K 611.657 Pa; 373.1243 K 101 325 Pa. */
    assert_int_equal(fluid_water_pressure(273.16, &p, NULL), 0);
    assert_close(p, 611.657, 1e-5);
    assert_int_equal(fluid_water_pressure(373.1243, &p, NULL), 0);
    assert_close(p, 101325, 1e-4);
    /* Steam tables (IAPWS-95): 20 degC 2339.3 Pa. */
    assert_int_equal(fluid_water_pressure(293.15, &p, NULL), 0);
    assert_close(p, 2339.3, 1e-4);
    /* Supercooled at -20 degC: 125.4 Pa (WMO-No. 8, Magnus form: 1.2551 hPa, within 0.6 %). */
    assert_int_equal(fluid_water_pressure(253.15, &p, NULL), 0);
    assert_close(p, 125.4, 6e-3);
    p = 7;
    assert_int_equal(fluid_water_pressure(200, &p, NULL), ERR_RANGE);
    assert_int_equal(fluid_water_pressure((double)NAN, &p, NULL), ERR_RANGE);
    assert_true(p == 7);
}

static void test_humid_air_is_lighter_by_what_water_replaces(void **state)
{
    (void)state;
    /* CIPM-2007 (Picard et al., Metrologia 45 (2008) 149) with 400 ppm CO2: 20 degC, 101 325
     * Pa, 50 % humidity: 1.1992 kg/m3; its gas is real, so 0.05 %. */
    struct fluid_air_state humid = told((struct fluid_air){293.15, 101325, 0.5, 0, 0, 0});
    assert_close(humid.density_kg_m3, 1.1992, 5e-4);
    assert_close(humid.water_pa, 0.5 * 2339.3, 1e-4);
    assert_near(humid.oxygen_dry, 0.209476, 1e-12);
    assert_close(humid.oxygen_pa, (101325 - humid.water_pa) * 0.209476, 1e-12);
}

static void test_partial_pressures_make_up_the_whole(void **state)
{
    (void)state;
    for (double argon = 0; argon < 0.9; argon += 0.2) {
        struct fluid_air_state s = told((struct fluid_air){290, 99000, 0.4, argon, 0.05, 0.02});
        double rest = 1 - argon - 0.07; /* of air, of which 0.034 % is not told apart */
        double sum = s.oxygen_pa + s.nitrogen_pa + s.argon_pa + s.helium_pa + s.water_pa;
        assert_near((99000 - sum) / (99000 - s.water_pa), rest * (1 - 0.999656), 1e-9);
        /* Dalton: the fraction of oxygen left is that of the air left. */
        assert_near(s.oxygen_dry, 0.209476 * rest, 1e-12);
    }
    struct fluid_air_state pure = told((struct fluid_air){290, 99000, 0, 0.3, 0.3, 0.4});
    assert_near(pure.oxygen_pa, 0, 1e-6);
}

static void test_what_is_no_air_is_refused_and_touches_nothing(void **state)
{
    (void)state;
    static const struct {
        struct fluid_air air;
        const char *word;
    } bad[] = {
        {{0, 101325, 0, 0, 0, 0},             "K"        },
        {{(double)NAN, 101325, 0, 0, 0, 0},   "K"        },
        {{1e9, 101325, 0, 0, 0, 0},           "K"        },
        {{290, 0, 0, 0, 0, 0},                "MPa"      },
        {{290, (double)NAN, 0, 0, 0, 0},      "MPa"      },
        {{290, HUGE_VAL, 0, 0, 0, 0},         "MPa"      },
        {{290, 101325, -0.1, 0, 0, 0},        "humidity" },
        {{290, 101325, 50, 0, 0, 0},          "humidity" },
        {{290, 101325, 0, 0.6, 0.6, 0},       "together" },
        {{290, 101325, 0, -0.1, 0, 0},        "fractions"},
        {{290, 101325, 0, 0, (double)NAN, 0}, "fractions"},
        {{200, 101325, 0.5, 0, 0, 0},         "water"    },
        {{290, 1000, 1, 0, 0, 0},             "water"    },
        {{75, 101325, 0, 0, 1, 0},            "nitrogen" },
        {{85, 101325, 0, 1, 0, 0},            "argon"    },
        {{70, 101325, 0, 0, 0, 0},            "oxygen"   },
    };
    for (size_t i = 0; i < ARRAY_LENGTH(bad); i++) {
        struct fluid_air_state out = {.density_kg_m3 = 7};
        struct error err = {0};
        if (fluid_air_state(&bad[i].air, &out, &err) != ERR_RANGE)
            fail_msg("case %zu was answered", i);
        if (strstr(err.text, bad[i].word) == NULL)
            fail_msg("case %zu: %s", i, err.text);
        assert_true(out.density_kg_m3 == 7);
        assert_int_equal(fluid_air_state(&bad[i].air, &out, NULL), ERR_RANGE);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_dry_air_is_as_dense_as_the_standard_atmosphere_says),
        cmocka_unit_test(test_argon_sinks_and_nitrogen_floats_as_the_methods_say),
        cmocka_unit_test(test_the_stated_error_holds_against_the_equations_of_state),
        cmocka_unit_test(test_water_has_its_published_vapour_pressure),
        cmocka_unit_test(test_humid_air_is_lighter_by_what_water_replaces),
        cmocka_unit_test(test_partial_pressures_make_up_the_whole),
        cmocka_unit_test(test_what_is_no_air_is_refused_and_touches_nothing),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
