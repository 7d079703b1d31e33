/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Formulas against the check values of tests/data/methods/methods.csv (source beside each row),
 * and contents against geometry, densities and numerical derivatives.
 */
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include <cmocka.h>

#include "../near.h"
#include "check_value.h"
#include "ullage/balance.h"

static const struct fluid *argon(void)
{
    return fluid_find("argon");
}

/* ---- heat
 * ------------------------------------------------------------------------------------- */

static void test_heat_of_a_vent_at_steady_pressure(void **state)
{
    (void)state;
    static const char *const ids[] = {"heat.boiloff.1", "heat.boiloff.2"};
    for (int i = 0; i < 2; i++) {
        struct check_value row = check_value(ids[i]);
        check_result(&row,
                     heat_of_vent_w(check_input(&row, "m_vent_kg_s"), check_input(&row, "h_fg"),
                                    check_input(&row, "rho_l"), check_input(&row, "rho_v"),
                                    check_input(&row, "dh_superheat")));
    }
}

static void test_superheat_of_argon_vapour(void **state)
{
    (void)state;
    struct check_value row = check_value("heat.superheat_ar.1");
    struct enthalpy warm, cold;
    double p = check_input(&row, "p_Pa");
    assert_int_equal(enthalpy_at(argon(), check_input(&row, "T_K"), p, FLUID_PHASE_VAPOUR,
                                 false, &warm, NULL),
                     0);
    assert_int_equal(enthalpy_at(argon(), 0, p, FLUID_PHASE_VAPOUR, true, &cold, NULL), 0);
    check_result(&row, warm.value_j_kg - cold.value_j_kg);
}

static double contents_mass(double volume, double fill, double pressure)
{
    struct fluid_saturation line;
    assert_int_equal(fluid_saturation_at_p(argon(), pressure, &line, NULL), 0);
    return volume * (fill * line.liquid.density_kg_m3 + (1 - fill) * line.vapour.density_kg_m3);
}

static void test_pressure_rate_and_hold_time_of_a_closed_vessel(void **state)
{
    (void)state;
    static const char *const ids[] = {"heat.selfpress.1", "heat.selfpress.2"};
    for (int i = 0; i < 2; i++) {
        struct check_value row = check_value(ids[i]);
        double volume = check_input(&row, "V_m3"), p = check_input(&row, "p_Pa"), rate;
        double mass = contents_mass(volume, check_input(&row, "fill"), p);
        assert_int_equal(heat_closed_pressure_rate(argon(), mass, volume, p,
                                                   check_input(&row, "Q_W"), &rate, NULL),
                         0);
        check_result(&row, rate);
    }
    struct check_value row = check_value("heat.holdtime.1");
    double volume = check_input(&row, "V_m3"), from = check_input(&row, "p1_Pa"), energy;
    double mass = contents_mass(volume, check_input(&row, "fill"), from);
    assert_int_equal(heat_closed_energy_j(argon(), mass, volume, from,
                                          check_input(&row, "p2_Pa"), &energy, NULL),
                     0);
    check_result(&row, energy / check_input(&row, "Q_W"));
    struct error err;
    assert_int_equal(
        heat_closed_energy_j(argon(), 1390 * volume, volume, from, 2e6, &energy, &err),
        ERR_RANGE); /* it would be full of liquid first */
}

/* ---- contents
 * --------------------------------------------------------------------------------- */

static const struct shape tank = {
    .kind = SHAPE_BOX, .length_m = 10, .width_m = 8, .height_m = 10};

static void test_mass_of_a_prismatic_vessel(void **state)
{
    (void)state;
    struct check_value row = check_value("level.mass.1");
    struct contents_input input = {.pressure_pa = 110000,
                                   .level_m = check_input(&row, "h_m"),
                                   .liquid_saturated = true,
                                   .vapour_saturated = true};
    struct contents contents;
    assert_int_equal(contents_at(argon(), &tank, &input, &contents, NULL), 0);
    /* The row's densities are those of argon at 1.1 bar, printed to five figures. */
    assert_close(contents.liquid.density_kg_m3, check_input(&row, "rho_l"), 5e-6);
    assert_close(contents.vapour.density_kg_m3, check_input(&row, "rho_v"), 5e-5);
    assert_close(contents.mass_kg.value, row.expected, 5e-6);
    assert_near(contents.liquid_volume_m3.value, 704, 1e-9);
}

static double read_property(const struct contents_input *input, int which, double reference)
{
    struct contents contents;
    struct contents_property energy;
    assert_int_equal(contents_at(argon(), &tank, input, &contents, NULL), 0);
    contents_energy(&contents, reference, &energy);
    const double value[] = {contents.liquid_mass_kg.value, contents.vapour_mass_kg.value,
                            contents.mass_kg.value, energy.value};
    return value[which];
}

static void test_derivatives_agree_with_differences(void **state)
{
    (void)state;
    const double reference = -116000;
    for (int saturated = 0; saturated < 4; saturated++) {
        struct contents_input at = {.pressure_pa = 112000,
                                    .level_m = 7.3,
                                    .liquid_temperature_k = 88.1,
                                    .vapour_temperature_k = 97,
                                    .liquid_saturated = (saturated & 1) != 0,
                                    .vapour_saturated = (saturated & 2) != 0};
        struct contents contents;
        struct contents_property energy;
        assert_int_equal(contents_at(argon(), &tank, &at, &contents, NULL), 0);
        contents_energy(&contents, reference, &energy);
        const struct contents_property *const property[] = {
            &contents.liquid_mass_kg, &contents.vapour_mass_kg, &contents.mass_kg, &energy};
        static const double step[] = {20, 1e-4, 1e-3, 1e-2};
        for (int which = 0; which < 4; which++)
            for (int k = 0; k < CONTENTS_VARIABLES; k++) {
                struct contents_input low = at, high = at;
                double *const of_low[] = {&low.pressure_pa, &low.level_m,
                                          &low.liquid_temperature_k, &low.vapour_temperature_k};
                double *const of_high[] = {&high.pressure_pa, &high.level_m,
                                           &high.liquid_temperature_k,
                                           &high.vapour_temperature_k};
                *of_low[k] -= step[k];
                *of_high[k] += step[k];
                double difference = (read_property(&high, which, reference) -
                                     read_property(&low, which, reference)) /
                                    (2 * step[k]);
                double scale = fabs(difference) + 1e-7 * fabs(property[which]->value) / step[k];
                assert_near(property[which]->d[k], difference, 2e-4 * scale);
            }
    }
}

static void test_a_liquid_a_little_above_saturation_stays_a_liquid(void **state)
{
    (void)state;
    struct contents_input input = {.pressure_pa = 110000,
                                   .level_m = 8,
                                   .liquid_temperature_k = 88.15, /* 0.06 K above */
                                   .vapour_temperature_k = 88.05};
    struct contents contents;
    assert_int_equal(contents_at(argon(), &tank, &input, &contents, NULL), 0);
    assert_true(contents.liquid.density_kg_m3 > 1380 && contents.vapour.density_kg_m3 < 7);
    assert_false(contents.vapour_doubtful);
    input.liquid_temperature_k = 300; /* no liquid at all */
    struct error err;
    assert_int_equal(contents_at(argon(), &tank, &input, &contents, &err), ERR_RANGE);
    input.level_m = 0; /* empty: nobody asks */
    assert_int_equal(contents_at(argon(), &tank, &input, &contents, &err), 0);
}

/* ---- hall
 * ------------------------------------------------------------------------------------- */

static void test_fatality_factor(void **state)
{
    (void)state;
    static const char *const ids[] = {"odh.fatality.1", "odh.fatality.2", "odh.fatality.3",
                                      "odh.fatality.4"};
    for (size_t i = 0; i < ARRAY_LENGTH(ids); i++) {
        struct check_value row = check_value(ids[i]);
        check_result(
            &row, hall_fatality_factor(check_input(&row, "x_O2") * check_input(&row, "p_Pa")));
    }
    assert_true(hall_fatality_factor(0.1801 * 101325) == 0);
    assert_true(hall_fatality_factor(0.1799 * 101325) > 0);
    assert_true(hall_fatality_factor(0) == 1);
}

static void test_oxygen_of_a_mixed_room_in_three_cases(void **state)
{
    (void)state;
    static const struct {
        const char *id;
        enum hall_ventilation ventilation;
    } rows[] = {
        {"odh.blow.1",    HALL_VENTILATION_SUPPLY },
        {"odh.exhaust.1", HALL_VENTILATION_EXHAUST},
        {"odh.off.1",     HALL_VENTILATION_OFF    }
    };
    for (size_t i = 0; i < ARRAY_LENGTH(rows); i++) {
        struct check_value row = check_value(rows[i].id);
        double fan =
            rows[i].ventilation == HALL_VENTILATION_OFF ? 0 : check_input(&row, "Q_m3_s");
        check_result(&row, hall_oxygen_after(rows[i].ventilation, check_input(&row, "V_m3"),
                                             fan, check_input(&row, "R_m3_s"), 0.2095,
                                             check_input(&row, "t_s")));
    }
}

static void test_release_is_found_again_from_the_oxygen_it_leaves(void **state)
{
    (void)state;
    /* The forward solution (methods 7.4) differentiated numerically, handed to the inverse. */
    static const struct {
        enum hall_ventilation ventilation;
        double fan, release;
    } cases[] = {
        {HALL_VENTILATION_SUPPLY,  1, 0.5},
        {HALL_VENTILATION_EXHAUST, 1, 0.5},
        {HALL_VENTILATION_EXHAUST, 1, 2  },
        {HALL_VENTILATION_OFF,     0, 0.5},
        {HALL_VENTILATION_EXHAUST, 0, 0.1}
    };
    for (size_t i = 0; i < ARRAY_LENGTH(cases); i++) {
        double x[3];
        for (int k = 0; k < 3; k++)
            x[k] = hall_oxygen_after(cases[i].ventilation, 1000, cases[i].fan, cases[i].release,
                                     0.2095, 300 + 0.01 * (k - 1));
        struct hall_air air;
        hall_release(cases[i].ventilation, 1000, cases[i].fan, 0.2095, x[1],
                     (x[2] - x[0]) / 0.02, &air);
        assert_close(air.release_m3_s, cases[i].release, 1e-6);
        assert_near(air.in_m3_s - air.out_m3_s - air.stored_m3_s, air.release_m3_s, 1e-12);
    }
}

/* ---- purity, pumps, shafts, deliveries
 * -------------------------------------------------------- */

static void test_lifetime_and_drift_velocity(void **state)
{
    (void)state;
    static const char *const rule[] = {"attach.tau_rule.1", "attach.tau_rule.2",
                                       "attach.tau_rule.3"};
    for (size_t i = 0; i < ARRAY_LENGTH(rule); i++) {
        struct check_value row = check_value(rule[i]);
        check_result(&row, purity_lifetime_s(check_input(&row, "x_O2_mol")));
    }
    /* The published pairs lie within the stated uncertainty of the rule, at two of it. */
    static const char *const pairs[] = {"attach.tau_pub_b.1", "attach.tau_pub_c.1"};
    for (size_t i = 0; i < ARRAY_LENGTH(pairs); i++) {
        struct check_value row = check_value(pairs[i]);
        assert_close(purity_lifetime_s(check_input(&row, "x_O2_mol")), row.expected,
                     2 * 0.01 * PURITY_LIFETIME_U_PERCENT);
    }
    static const char *const fit[] = {"drift.mobility_fit.1", "drift.mobility_fit.2",
                                      "drift.mobility_fit.3", "drift.mobility_fit.4",
                                      "drift.mobility_fit.5"};
    for (size_t i = 0; i < ARRAY_LENGTH(fit); i++) {
        struct check_value row = check_value(fit[i]);
        check_result(&row,
                     purity_velocity_m_s(check_input(&row, "E_V_m"), check_input(&row, "T_K")));
    }
    /* The other published fit lies within the stated model spread, at two of it. */
    struct check_value walkowiak = check_value("drift.walkowiak.2");
    assert_close(purity_velocity_m_s(50000, 87.3), walkowiak.expected,
                 2 * 0.01 * PURITY_VELOCITY_U_PERCENT);
}

static void test_cleaning_of_a_well_mixed_tank(void **state)
{
    (void)state;
    struct check_value tau = check_value("purif.tau.1"), steady = check_value("purif.c_ss.1");
    struct check_value time = check_value("purif.t_to.1");
    double seconds;
    check_result(&tau,
                 purity_time_constant_s(check_input(&tau, "M_kg"), check_input(&tau, "F_kg_s"),
                                        check_input(&tau, "eps")));
    check_result(&steady, purity_steady_fraction(check_input(&steady, "S_mol_s"),
                                                 check_input(&steady, "F_kg_s"),
                                                 check_input(&steady, "eps"), 0.039948));
    assert_int_equal(
        purity_time_to_s(check_input(&time, "x0_mol"), check_input(&time, "xss_mol"),
                         check_input(&time, "x_mol"), check_input(&time, "tau_s"), &seconds),
        0);
    check_result(&time, seconds);
    /* Never below what enters. */
    assert_int_equal(purity_time_to_s(1e-9, 5e-10, 4e-10, 1000, &seconds), ERR_RANGE);
}

static void test_suction_head(void **state)
{
    (void)state;
    static const char *const ids[] = {"npsh.available.1", "npsh.available.2"};
    for (size_t i = 0; i < ARRAY_LENGTH(ids); i++) {
        struct check_value row = check_value(ids[i]);
        check_result(&row,
                     pump_npsh_m(check_input(&row, "p_surface_Pa"),
                                 check_input(&row, "p_vap_Pa"), check_input(&row, "rho_kg_m3"),
                                 check_input(&row, "z_m") - check_input(&row, "hf_m")));
    }
}

static void test_gas_column_friction_and_least_work(void **state)
{
    (void)state;
    static const char *const ids[] = {"shaft.static.1", "shaft.static.2", "shaft.static.3"};
    double foot;
    for (size_t i = 0; i < ARRAY_LENGTH(ids); i++) {
        struct check_value row = check_value(ids[i]);
        assert_int_equal(shaft_foot_pa(check_input(&row, "p1_Pa"),
                                       check_input(&row, "M_kg_mol"), check_input(&row, "h_m"),
                                       check_input(&row, "T_K"), 0, 0, 0, &foot),
                         0);
        check_result(&row, foot);
    }
    struct check_value flow = check_value("shaft.flow_down.1");
    assert_int_equal(shaft_foot_pa(check_input(&flow, "p1_Pa"), check_input(&flow, "M_kg_mol"),
                                   check_input(&flow, "h_m"), check_input(&flow, "T_K"),
                                   check_input(&flow, "m_kg_s"), check_input(&flow, "D_m"),
                                   check_input(&flow, "f"), &foot),
                     0);
    check_result(&flow, foot);
    assert_int_equal(shaft_foot_pa(200000, 0.028, 100, 293, 100, 0.05, 0.02, &foot), ERR_RANGE);
    struct check_value churchill = check_value("fric.churchill.1");
    check_result(&churchill, shaft_friction_factor(check_input(&churchill, "Re"),
                                                   check_input(&churchill, "eD")));
    struct check_value laminar = check_value("fric.laminar.1");
    assert_close(shaft_friction_factor(check_input(&laminar, "Re"), 0), laminar.expected, 1e-3);
    static const struct {
        const char *id, *fluid;
    } liquids[] = {
        {"liq.wmin_ar.eos", "argon"   },
        {"liq.wmin_n2.eos", "nitrogen"},
        {"liq.wmin_o2.eos", "oxygen"  }
    };
    for (size_t i = 0; i < ARRAY_LENGTH(liquids); i++) {
        struct check_value row = check_value(liquids[i].id);
        double work;
        assert_int_equal(shaft_liquefaction_j_kg(
                             fluid_find(liquids[i].fluid), check_input(&row, "T0_K"),
                             check_input(&row, "p_Pa"), check_input(&row, "T0_K"), &work, NULL),
                         0);
        check_result(&row, work);
    }
}

static void test_conformity_of_a_delivery(void **state)
{
    (void)state;
    struct check_value row = check_value("deliver.pc.1");
    check_result(&row,
                 delivery_conformity(check_input(&row, "limit"), check_input(&row, "reading"),
                                     check_input(&row, "u")));
    assert_true(delivery_conformity(1, 1.1, 0) == 0 && delivery_conformity(1, 0.9, 0) == 1);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_heat_of_a_vent_at_steady_pressure),
        cmocka_unit_test(test_superheat_of_argon_vapour),
        cmocka_unit_test(test_pressure_rate_and_hold_time_of_a_closed_vessel),
        cmocka_unit_test(test_mass_of_a_prismatic_vessel),
        cmocka_unit_test(test_derivatives_agree_with_differences),
        cmocka_unit_test(test_a_liquid_a_little_above_saturation_stays_a_liquid),
        cmocka_unit_test(test_fatality_factor),
        cmocka_unit_test(test_oxygen_of_a_mixed_room_in_three_cases),
        cmocka_unit_test(test_release_is_found_again_from_the_oxygen_it_leaves),
        cmocka_unit_test(test_lifetime_and_drift_velocity),
        cmocka_unit_test(test_cleaning_of_a_well_mixed_tank),
        cmocka_unit_test(test_suction_head),
        cmocka_unit_test(test_gas_column_friction_and_least_work),
        cmocka_unit_test(test_conformity_of_a_delivery),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
