/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Every row of the check values: states and saturation of all fluids. Source: tests/data/fluid,
 * whose heads name the published equation and how the numbers were made (an independent
 * evaluation of the published coefficients; saturation by a general-purpose property library).
 */
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include <cmocka.h>

#include "ullage/fluid.h"

enum { COLUMNS = 11, ROWS = 64 };

/* Rows of a CSV without comment lines and header; an empty field is NAN. */
static int read_rows(const char *fluid, const char *kind, double rows[ROWS][COLUMNS])
{
    char path[128], line[1024];
    snprintf(path, sizeof(path), "tests/data/fluid/%s-%s.csv", fluid, kind);
    FILE *file = fopen(path, "r");
    assert_non_null(file);
    int count = 0;
    while (fgets(line, sizeof(line), file) != NULL) {
        if (line[0] == '#' || line[0] == 't')
            continue;
        assert_true(count < ROWS);
        char *at = line;
        for (int i = 0; i < COLUMNS; i++) {
            size_t length = strcspn(at, ",\n");
            rows[count][i] = length > 0 ? strtod(at, NULL) : (double)NAN;
            at += length + (at[length] == ',');
        }
        count++;
    }
    fclose(file);
    assert_true(count >= 20);
    return count;
}

static void near(const char *fluid, const char *what, double t, double p, double got,
                 double want, double scale, double tolerance)
{
    if (!(fabs(got - want) <= tolerance * scale))
        fail_msg("%s at %.9g K, %.9g Pa: %s is %.15g, published equation %.15g (%.2g of scale)",
                 fluid, t, p, what, got, want, fabs(got - want) / scale);
}

/* The reach: 1e-9 of density; 1e-9 of the enthalpy scale (R T_c / M at least). */
static const double REACH = 1e-9;
/* The states' values carry 12 digits, the saturation's come from a flash that stops at 1e-9. */
static const double FLASH = 5e-9;

static void test_states_agree_with_the_published_equations(void **state)
{
    (void)state;
    static double rows[ROWS][COLUMNS];
    for (size_t f = 0; f < fluid_count(); f++) {
        const struct fluid *fluid = fluid_at(f);
        const char *name = fluid_name(fluid);
        const struct fluid_limits *limits = fluid_limits(fluid);
        double entropy = limits->gas_constant_j_mol_k / limits->molar_mass_kg_mol;
        int count = read_rows(name, "states", rows);
        for (int i = 0; i < count; i++) {
            const double *r = rows[i];
            struct fluid_state s;
            struct error err = {0};
            if (fluid_at_tp(fluid, r[0], r[1], FLUID_PHASE_ANY, &s, &err) != 0)
                fail_msg("%s", err.text);
            double energy =
                entropy *
                (r[0] > limits->critical_temperature_k ? r[0] : limits->critical_temperature_k);
            near(name, "density", r[0], r[1], s.density_kg_m3, r[2], r[2], REACH);
            near(name, "enthalpy", r[0], r[1], s.enthalpy_j_kg, r[3], energy, REACH);
            near(name, "entropy", r[0], r[1], s.entropy_j_kg_k, r[4], entropy, REACH);
            near(name, "energy", r[0], r[1], s.internal_energy_j_kg, r[5], energy, REACH);
            near(name, "cp", r[0], r[1], s.cp_j_kg_k, r[6], r[6], FLASH);
            near(name, "cv", r[0], r[1], s.cv_j_kg_k, r[7], r[7], FLASH);
            near(name, "sound", r[0], r[1], s.sound_speed_m_s, r[8], r[8], FLASH);
            double transport;
            if (!isnan(r[9])) {
                assert_int_equal(fluid_viscosity(fluid, &s, &transport, NULL), 0);
                near(name, "viscosity", r[0], r[1], transport, r[9], r[9], 1e-6);
                assert_int_equal(fluid_conductivity(fluid, &s, &transport, NULL), 0);
                near(name, "conductivity", r[0], r[1], transport, r[10], r[10], 1e-6);
            }
        }
    }
}

static void test_saturation_agrees_with_the_published_equations(void **state)
{
    (void)state;
    static double rows[ROWS][COLUMNS];
    for (size_t f = 0; f < fluid_count(); f++) {
        const struct fluid *fluid = fluid_at(f);
        const char *name = fluid_name(fluid);
        const struct fluid_limits *limits = fluid_limits(fluid);
        double entropy = limits->gas_constant_j_mol_k / limits->molar_mass_kg_mol;
        double energy = entropy * limits->critical_temperature_k;
        int count = read_rows(name, "saturation", rows);
        for (int i = 0; i < count; i++) {
            const double *r = rows[i];
            struct fluid_saturation s;
            struct error err = {0};
            if (fluid_saturation_at_p(fluid, r[1], &s, &err) != 0)
                fail_msg("%s", err.text);
            near(name, "temperature", r[0], r[1], s.temperature_k, r[0], r[0], REACH);
            near(name, "liquid density", r[0], r[1], s.liquid.density_kg_m3, r[2], r[2], FLASH);
            near(name, "vapour density", r[0], r[1], s.vapour.density_kg_m3, r[3], r[3], FLASH);
            near(name, "liquid enthalpy", r[0], r[1], s.liquid.enthalpy_j_kg, r[4], energy,
                 FLASH);
            near(name, "vapour enthalpy", r[0], r[1], s.vapour.enthalpy_j_kg, r[5], energy,
                 FLASH);
            near(name, "liquid entropy", r[0], r[1], s.liquid.entropy_j_kg_k, r[6], entropy,
                 FLASH);
            near(name, "vapour entropy", r[0], r[1], s.vapour.entropy_j_kg_k, r[7], entropy,
                 FLASH);
            if (!isnan(r[8])) {
                double tension;
                assert_int_equal(fluid_surface_tension(fluid, s.temperature_k, &tension, NULL),
                                 0);
                near(name, "tension", r[0], r[1], tension, r[8], r[8], 1e-6);
            }
            assert_int_equal(fluid_saturation_at_t(fluid, r[0], &s, &err), 0);
            near(name, "pressure", r[0], r[1], s.pressure_pa, r[1], r[1], FLASH);
        }
    }
}

static void test_facts_of_the_trade(void **state)
{
    (void)state;
    /* Normal boiling points near 87 K (argon), 77 K (nitrogen), 90 K (oxygen); liquid argon
     * about 1.4 t/m3: common practice, no source. */
    static const struct {
        const char *name;
        double boiling_k;
    } facts[] = {
        {"argon",    87},
        {"nitrogen", 77},
        {"oxygen",   90}
    };
    struct fluid_saturation s;
    for (size_t i = 0; i < ARRAY_LENGTH(facts); i++) {
        assert_int_equal(fluid_saturation_at_p(fluid_find(facts[i].name), 101325, &s, NULL), 0);
        assert_true(fabs(s.temperature_k - facts[i].boiling_k) < 0.6);
    }
    assert_int_equal(fluid_saturation_at_p(fluid_find("argon"), 101325, &s, NULL), 0);
    assert_true(fabs(s.liquid.density_kg_m3 - 1400) < 10);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_states_agree_with_the_published_equations),
        cmocka_unit_test(test_saturation_agrees_with_the_published_equations),
        cmocka_unit_test(test_facts_of_the_trade),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
