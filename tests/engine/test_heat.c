/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Heat, mass and boil-off of a tank whose readings follow from conservation of mass and energy
 * and the equation of state alone, against the check values of tests/data/methods.
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

#include "../balance/check_value.h"
#include "../near.h"
#include "rig.h"
#include "ullage/balance.h"

static const double STEP_S = 10;

/* One step of a body that heat enters and saturated vapour leaves. */
static void body_step(struct body *body, double heat_w, double vent_kg_s)
{
    body->energy_j += (heat_w - vent_kg_s * body->line.vapour.enthalpy_j_kg) * STEP_S;
    body->mass_kg -= vent_kg_s * STEP_S;
    body_settle(body);
}

static void test_boil_off_calorimetry_at_steady_pressure(void **state)
{
    (void)state;
    struct check_value row = check_value("heat.boiloff.1");
    double vent = check_input(&row, "m_vent_kg_s");
    struct rig rig;
    struct body body;
    rig_open(&rig, "tests/data/engine/tank.ini");
    rig_quiet(&rig);
    body_fill(&body, 1000, 800, 110000);
    for (int i = 0; i < 400; i++) {
        body_step(&body, row.expected, vent);
        rig_tank(&rig, &body);
        rig_set(&rig, "FT-1", vent);
        rig_step(&rig, STEP_S);
    }
    /* The check value's heat indeed keeps the pressure. */
    assert_near(body.line.pressure_pa, 110000, 1);
    assert_close(rig_value(&rig, "tank.heat_load"), row.expected, 5e-4);
    assert_near(rig_value(&rig, "tank.heat_excess"), row.expected - 3000, 2);
    double evaporated =
        heat_evaporated_kg_s(vent, check_input(&row, "rho_l"), check_input(&row, "rho_v"));
    assert_close(rig_value(&rig, "tank.boil_off"), evaporated, 1e-4);
    assert_close(rig_value(&rig, "tank.boil_off_daily"), evaporated / body.liquid_kg, 1e-4);
    assert_near(rig_value(&rig, "tank.mass_unexplained"), 0, 1e-6);
    assert_close(rig_value(&rig, "tank.mass_change"), -vent, 1e-4);
    assert_close(rig_value(&rig, "tank.liquid_mass"), body.liquid_kg, 1e-7);
    assert_close(rig_value(&rig, "tank.vapour_mass"), body.mass_kg - body.liquid_kg, 1e-6);
    assert_close(rig_value(&rig, "tank.fill"), body.liquid_m3 / 1000, 1e-9);
    assert_close(rig_value(&rig, "tank.saturation_temperature"), body.line.temperature_k, 1e-9);
    assert_near(rig_value(&rig, "tank.subcooling"), 0, 1e-6);
    rig_close(&rig);
}

static void test_superheat_of_the_vent_is_heat_of_the_envelope(void **state)
{
    (void)state;
    struct check_value row = check_value("heat.boiloff.2");
    struct check_value cold = check_value("heat.boiloff.1");
    double vent = check_input(&row, "m_vent_kg_s");
    struct rig rig;
    struct body body;
    struct fluid_state warm;
    rig_open(&rig, "tests/data/engine/tank.ini");
    rig_quiet(&rig);
    body_fill(&body, 1000, 800, 110000);
    assert_int_equal(
        fluid_at_ph(body.fluid, 110000,
                    body.line.vapour.enthalpy_j_kg + check_input(&row, "dh_superheat"), &warm,
                    NULL),
        0);
    for (int i = 0; i < 400; i++) {
        body_step(&body, cold.expected, vent);
        rig_tank(&rig, &body);
        rig_set(&rig, "FT-1", vent);
        rig_set(&rig, "TT-5", warm.temperature_k);
        rig_step(&rig, STEP_S);
    }
    assert_close(rig_value(&rig, "tank.heat_load"), row.expected, 5e-4);
    rig_close(&rig);
}

static void test_closed_vessel_pressurises_and_tells_its_hold_time(void **state)
{
    (void)state;
    struct check_value rate = check_value("heat.selfpress.1"),
                       hold = check_value("heat.holdtime.1");
    double heat = check_input(&rate, "Q_W");
    struct rig rig;
    struct body body;
    rig_open(&rig, "tests/data/engine/tank.ini");
    rig_quiet(&rig);
    body_fill(&body, check_input(&rate, "V_m3"),
              check_input(&rate, "V_m3") * check_input(&rate, "fill"),
              check_input(&rate, "p_Pa"));
    for (int i = 0; i < 200; i++) {
        body_step(&body, heat, 0);
        rig_tank(&rig, &body);
        rig_step(&rig, STEP_S);
    }
    assert_close(rig_value(&rig, "tank.heat_load"), heat, 1e-3);
    check_result(&rate, rig_value(&rig, "tank.pressure_rate"));
    check_result(&hold, rig_value(&rig, "tank.hold_time") + rig.time_s);
    assert_near(rig_value(&rig, "tank.boil_off"), 0, 2e-4); /* vapour grows by a little */
    rig_close(&rig);
}

static double pressure_after(const struct body *body, double gone)
{
    struct body next = *body;
    next.mass_kg -= gone;
    next.energy_j -= gone * body->line.vapour.enthalpy_j_kg;
    body_settle(&next);
    return next.line.pressure_pa;
}

/* Saturated vapour that must leave for the body to be at a pressure; secant, nearly linear. */
static double vent_to(const struct body *body, double pressure_pa)
{
    double gone = 0, before = 1, miss_before = pressure_after(body, before) - pressure_pa;
    for (int i = 0; i < 4; i++) {
        double miss = pressure_after(body, gone) - pressure_pa;
        if (fabs(miss) < 1e-7 || miss == miss_before)
            break;
        double next = gone - miss * (gone - before) / (miss - miss_before);
        before = gone;
        miss_before = miss;
        gone = next;
    }
    return gone;
}

static void test_a_falling_barometer_does_not_look_like_heat(void **state)
{
    (void)state;
    /* methods 4.1: 7e5 kg, -100 Pa/h at constant gauge pressure, no heat at all: boil-off
     * without the storage term overstates the heat by 1.908 kW. */
    struct rig rig;
    struct body body;
    rig_open(&rig, "tests/data/engine/tank.ini");
    rig_quiet(&rig);
    body_fill(&body, 1000, 980, 110000); /* little vapour: the text speaks of the liquid */
    double gone = 0, latent = 0;
    for (int i = 0; i < 720; i++) {
        double barometer = 98200 - 100.0 / 3600 * (i + 1) * STEP_S;
        double vent = vent_to(&body, 11800 + barometer) / STEP_S;
        body_step(&body, 0, vent);
        rig_set(&rig, "PT-900", barometer);
        rig_tank(&rig, &body);
        rig_set(&rig, "FT-1", vent);
        rig_step(&rig, STEP_S);
        gone += vent * STEP_S;
        latent = body.line.vapour.enthalpy_j_kg - body.line.liquid.enthalpy_j_kg;
    }
    double naive = gone / (720 * STEP_S) * latent;
    /* 1 %: the text leaves out the vapour that stays where liquid was (rho_v/rho_l twice). */
    assert_close(naive * 7e5 / body.liquid_kg, 1908, 0.01);
    assert_near(rig_value(&rig, "tank.heat_load"), 0, 5);
    assert_close(rig_value(&rig, "tank.pressure_rate"), -100.0 / 3600, 1e-3);
    rig_close(&rig);
}

static void test_a_lost_thermometer_does_not_look_like_heat(void **state)
{
    (void)state;
    struct check_value row = check_value("heat.boiloff.1");
    double vent = check_input(&row, "m_vent_kg_s");
    struct rig rig;
    struct body body;
    rig_open(&rig, "tests/data/engine/tank.ini");
    rig_quiet(&rig);
    body_fill(&body, 1000, 800, 110000);
    for (int i = 0; i < 600; i++) {
        body_step(&body, row.expected, vent);
        rig_tank(&rig, &body);
        rig_set(&rig, "FT-1", vent);
        rig_set(&rig, "TT-2", body.line.temperature_k + 0.03);
        if (i >= 300 && i < 400)
            rig_spoil(&rig, "TT-2", QUALITY_STALE);
        rig_step(&rig, STEP_S);
        if (i == 399) {
            const struct derived_value *value = rig_derived(&rig, "tank.heat_load");
            assert_int_equal(value->quantity.quality, QUALITY_UNCERTAIN);
            assert_non_null(strstr(value->reason, "TT-2"));
            /* The bare mean of the others would have fallen by 10 mK: 12 MJ in an hour. */
            assert_close(value->quantity.value, row.expected, 2e-3);
        }
    }
    assert_close(rig_value(&rig, "tank.heat_load"), row.expected, 2e-3);
    rig_close(&rig);
}

static void test_condenser_duty_and_a_cooling_that_no_stream_carries(void **state)
{
    (void)state;
    struct check_value row = check_value("heat.condenser_ln2.1");
    struct rig rig;
    struct body body;
    rig_open(&rig, "tests/data/engine/tank.ini");
    rig_quiet(&rig);
    body_fill(&body, 1000, 800, 110000);
    for (int i = 0; i < 120; i++) {
        rig_tank(&rig, &body);
        rig_step(&rig, STEP_S);
    }
    double duty = rig_value(&rig, "coil.duty");
    assert_close(duty, row.expected, 1e-4);
    assert_near(rig_value(&rig, "coil.margin"), 12000 - duty, 1e-6);
    /* The vessel stands still, so all that the coolant takes up has come in. Its vapour is
     * condensed at the same rate as it evaporates. */
    assert_close(rig_value(&rig, "cold.heat_load"), duty, 1e-6);
    assert_close(rig_value(&rig, "cold.boil_off"), duty / 160542, 1e-3);
    assert_int_equal(rig_ledger(&rig, LEDGER_HEAT, 1)->word, LEDGER_ABSENT); /* no budget */
    rig_close(&rig);
}

static void test_what_is_not_metered_is_taken_from_its_other_side(void **state)
{
    (void)state;
    /* A tank that stands still: what came in is what the condenser condenses of the metered
     * vapour (its condensate taken as saturated), less the pump, whatever the coolant's own
     * figure says. What circulates through pump and purifier is inside. */
    struct rig rig;
    struct fluid_saturation argon, nitrogen;
    rig_open(&rig, "tests/data/engine/loop.ini");
    assert_int_equal(fluid_saturation_at_p(fluid_find("argon"), 110000, &argon, NULL), 0);
    assert_int_equal(fluid_saturation_at_p(fluid_find("nitrogen"), 300000, &nitrogen, NULL), 0);
    for (int i = 0; i < 120; i++) {
        rig_set(&rig, "PT-1", 110000);
        rig_set(&rig, "LT-1", 8);
        rig_set(&rig, "FT-1", 0.03);
        rig_set(&rig, "FT-2", 2.5);
        rig_set(&rig, "JT-2", 800);
        rig_set(&rig, "FT-3", 0.05);
        rig_set(&rig, "PT-3", 300000);
        rig_set(&rig, "TT-6", nitrogen.temperature_k);
        rig_set(&rig, "PT-4", 250000);
        rig_set(&rig, "TT-7", 95);
        rig_step(&rig, STEP_S);
    }
    double latent = argon.vapour.enthalpy_j_kg - argon.liquid.enthalpy_j_kg;
    assert_close(rig_value(&rig, "tank.heat_load"), 0.03 * latent - 800, 1e-6);
    assert_near(rig_value(&rig, "tank.mass_unexplained"), 0, 1e-12);
    assert_near(rig_ledger(&rig, LEDGER_MASS, 0)->out.value, 0, 1e-12);
    assert_close(rig_value(&rig, "tank.boil_off"), 0.03, 1e-9);
    rig_close(&rig);
}

static void test_ledgers_add_up_to_the_last_bit(void **state)
{
    (void)state;
    struct rig rig;
    struct body body;
    rig_open(&rig, "tests/data/engine/tank.ini");
    rig_quiet(&rig);
    body_fill(&body, 1000, 700, 115000);
    for (int i = 0; i < 200; i++) {
        body_step(&body, 4321 + 100 * sin(i / 7.0), 0.0123);
        rig_tank(&rig, &body);
        rig_set(&rig, "FT-1", 0.0123);
        rig_set(&rig, "AT-2", 0.2095 - 1e-5 * i);
        rig_step(&rig, STEP_S);
    }
    int usable = 0;
    for (int i = 0; i < rig.results->ledger_count; i++) {
        const struct ledger *ledger = &rig.results->ledger[i];
        if (!quantity_usable(ledger->unexplained))
            continue;
        usable++;
        assert_true(ledger->unexplained.value ==
                    ledger->in.value - ledger->out.value - ledger->stored.value);
    }
    assert_int_equal(usable, 5); /* heat and mass of two vessels, the room's air */
    /* An excess of heat is a negative rest. */
    assert_true(-rig_value(&rig, "tank.heat_excess") ==
                rig_ledger(&rig, LEDGER_HEAT, 0)->unexplained.value);
    rig_close(&rig);
}

static void test_the_budget_of_an_uncertainty_adds_up_and_is_sorted(void **state)
{
    (void)state;
    struct rig rig;
    struct body body;
    struct budget budget;
    rig_open(&rig, "tests/data/engine/tank.ini");
    rig_quiet(&rig);
    body_fill(&body, 1000, 700, 115000);
    for (int i = 0; i < 200; i++) {
        rig_tank(&rig, &body);
        rig_set(&rig, "FT-1", 0.02);
        rig_step(&rig, STEP_S);
    }
    static const char *const names[] = {"tank.heat_load", "tank.liquid_mass", "coil.duty",
                                        "tank.boil_off", "room.fatality_factor"};
    for (size_t n = 0; n < ARRAY_LENGTH(names); n++) {
        double squares = 0, u = rig_derived(&rig, names[n])->quantity.u;
        engine_budget(rig.engine, rig_tag(&rig, names[n]), &budget);
        for (int i = 0; i < budget.count; i++) {
            squares += budget.row[i].u * budget.row[i].u;
            assert_true(i == 0 || budget.row[i].u <= budget.row[i - 1].u);
            assert_true(budget.row[i].tag >= 0 || budget.row[i].says[0] != '\0');
        }
        assert_near(sqrt(squares), u, 1e-12 * u);
    }
    /* 1 mm of 100 m2, 0.02 % of density (JCGM 100, eq. 10). */
    engine_budget(rig.engine, rig_tag(&rig, "tank.liquid_mass"), &budget);
    assert_int_equal(budget.row[0].tag, -1);
    assert_close(budget.row[0].u, 0.0002 * body.liquid_kg, 1e-6);
    assert_int_equal(budget.row[1].tag, rig_tag(&rig, "LT-1"));
    assert_close(budget.row[1].u, 0.1 * body.line.liquid.density_kg_m3, 1e-6);
    engine_budget(rig.engine, rig_tag(&rig, "PT-1"), &budget);
    assert_int_equal(budget.count, 0);
    rig_close(&rig);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_boil_off_calorimetry_at_steady_pressure),
        cmocka_unit_test(test_superheat_of_the_vent_is_heat_of_the_envelope),
        cmocka_unit_test(test_closed_vessel_pressurises_and_tells_its_hold_time),
        cmocka_unit_test(test_a_falling_barometer_does_not_look_like_heat),
        cmocka_unit_test(test_a_lost_thermometer_does_not_look_like_heat),
        cmocka_unit_test(test_condenser_duty_and_a_cooling_that_no_stream_carries),
        cmocka_unit_test(test_what_is_not_metered_is_taken_from_its_other_side),
        cmocka_unit_test(test_ledgers_add_up_to_the_last_bit),
        cmocka_unit_test(test_the_budget_of_an_uncertainty_adds_up_and_is_sorted),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
