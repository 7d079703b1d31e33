/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The saturation line read from tables is the solution of the equation itself: equal pressure
 * and Gibbs energy of both phases (the condition of phase equilibrium), evaluated here from the
 * states' own properties; and the full Newton solution, started from the auxiliary equations.
 */
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>

#include <cmocka.h>

#include "../../src/fluid/equation.h"

enum { PROBES = 1500 };

/* Full solution, without the table. */
static bool solve(const struct fluid *fluid, double temperature, double *liquid, double *vapour)
{
    struct isotherm isotherm;
    isotherm_set(&isotherm, fluid, temperature);
    *liquid = ancillary_liquid_mol_m3(fluid, temperature) / fluid->reduce_density_mol_m3;
    *vapour = ancillary_vapour_mol_m3(fluid, temperature) / fluid->reduce_density_mol_m3;
    return saturation_solve(&isotherm, liquid, vapour) == 0;
}

static void test_tables_hold_the_full_solution(void **state)
{
    (void)state;
    for (size_t f = 0; f < fluid_count(); f++) {
        const struct fluid *fluid = fluid_at(f);
        assert_non_null(fluid->line);
        double low = fluid->limits.triple_temperature_k, high = fluid->line->end_temperature_k;
        assert_true(high > 0.999 * fluid->limits.critical_temperature_k);
        for (int i = 0; i < PROBES; i++) {
            double temperature = low + (high - low) * (i + 0.37) / PROBES, liquid, vapour;
            struct line_point at;
            assert_true(line_at_temperature(fluid, temperature, &at));
            assert_true(solve(fluid, temperature, &liquid, &vapour));
            /* The full solution's own rounding grows as the gap closes. */
            double gap = liquid - vapour, tolerance = 5e-12 + 1e-12 / (gap * gap);
            double miss = fabs(at.liquid / liquid - 1) + fabs(at.vapour / vapour - 1);
            if (!(miss < tolerance))
                fail_msg("%s at %.12g K: table off by %.2g", fluid_name(fluid), temperature,
                         miss);
        }
    }
}

static void test_both_phases_have_one_pressure_and_one_gibbs_energy(void **state)
{
    (void)state;
    for (size_t f = 0; f < fluid_count(); f++) {
        const struct fluid *fluid = fluid_at(f);
        const struct fluid_limits *limits = fluid_limits(fluid);
        double low = limits->triple_temperature_k, high = limits->critical_temperature_k;
        for (int i = 0; i < PROBES; i++) {
            /* Evenly, then ever nearer to the critical point: the last is 1e-6 of it away. */
            double part = i % 2 ? (double)i / PROBES : 1 - pow(1e-6, (double)i / PROBES);
            double temperature = low + (high - low) * part;
            struct fluid_saturation s, again;
            struct error err = {0};
            if (fluid_saturation_at_t(fluid, temperature, &s, &err) != 0)
                fail_msg("%s", err.text);
            struct isotherm isotherm;
            struct fluid_state l, v;
            isotherm_set(&isotherm, fluid, temperature);
            state_fill(&isotherm, molar_density(fluid, s.liquid.density_kg_m3), &l);
            state_fill(&isotherm, molar_density(fluid, s.vapour.density_kg_m3), &v);
            double scale =
                limits->gas_constant_j_mol_k / limits->molar_mass_kg_mol * temperature;
            double gibbs_l = l.enthalpy_j_kg - temperature * l.entropy_j_kg_k;
            double gibbs_v = v.enthalpy_j_kg - temperature * v.entropy_j_kg_k;
            if (!(fabs(gibbs_l - gibbs_v) < 1e-9 * scale))
                fail_msg("%s at %.12g K: Gibbs energies apart by %.2g", fluid_name(fluid),
                         temperature, fabs(gibbs_l - gibbs_v) / scale);
            /* A stiff liquid shows a pressure for the last digits of its density. */
            double stiff = 1e-11 * l.density_kg_m3 * l.dp_drho_pa_m3_kg;
            if (!(fabs(l.pressure_pa - v.pressure_pa) < 1e-9 * v.pressure_pa + stiff))
                fail_msg("%s at %.12g K: pressures apart by %.2g", fluid_name(fluid),
                         temperature, l.pressure_pa / v.pressure_pa - 1);
            assert_true(fabs(s.pressure_pa / v.pressure_pa - 1) < 1e-9);
            if (s.pressure_pa > limits->critical_pressure_pa)
                continue; /* its published value is rounded */
            if (fluid_saturation_at_p(fluid, s.pressure_pa, &again, &err) != 0)
                fail_msg("%s", err.text);
            if (!(fabs(again.temperature_k / temperature - 1) < 1e-9))
                fail_msg("%s at %.12g K: from its pressure %.12g K", fluid_name(fluid),
                         temperature, again.temperature_k);
        }
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_tables_hold_the_full_solution),
        cmocka_unit_test(test_both_phases_have_one_pressure_and_one_gibbs_energy),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
