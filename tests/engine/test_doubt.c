/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Doubt: what is lost, old, still filling or out of time never looks live and good, and its
 * reason names what is missing. Determinism, alarms' bases, trends.
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
#include "rig.h"

static void run(struct rig *rig, struct body *body, int steps)
{
    for (int i = 0; i < steps; i++) {
        rig_tank(rig, body);
        rig_step(rig, 10);
    }
}

static void open_quiet(struct rig *rig, struct body *body, int steps)
{
    rig_open(rig, "tests/data/engine/tank.ini");
    rig_quiet(rig);
    body_fill(body, 1000, 800, 112000);
    run(rig, body, steps);
}

static void test_no_lost_reading_leaves_a_quantity_good_that_rests_on_it(void **state)
{
    (void)state;
    static const struct {
        const char *point;
        const char *derived[12];
    } rests[] = {
        {"PT-1",
         {"tank.liquid_mass", "tank.vapour_mass", "tank.saturation_temperature",
          "tank.subcooling", "tank.heat_load", "tank.heat_excess", "tank.boil_off",
          "tank.mass_unexplained", "tank.mass_change", "tank.pressure_rate", "tank.hold_time"}},
        {"PT-900",
         {"tank.liquid_mass", "tank.vapour_mass", "tank.saturation_temperature",
          "tank.subcooling", "tank.heat_load", "tank.boil_off", "tank.pressure_rate",
          "room.oxygen_pressure", "room.fatality_factor", "room.release"}                     },
        {"LT-1",
         {"tank.liquid_mass", "tank.fill", "tank.heat_load", "tank.boil_off",
          "tank.boil_off_daily", "tank.mass_unexplained", "tank.mass_change"}                 },
        {"TT-4",   {"tank.vapour_mass", "tank.heat_load", "tank.mass_unexplained"}            },
        {"FT-1",   {"tank.heat_load", "tank.boil_off", "tank.mass_unexplained"}               },
        {"TT-5",   {"tank.heat_load", "tank.heat_excess", "tank.hold_time"}                   },
        {"FT-3",   {"coil.duty", "coil.margin", "cold.heat_load", "cold.boil_off"}            },
        {"TT-7",   {"coil.duty", "cold.heat_load"}                                            },
        {"AT-1",
         {"room.oxygen_lowest", "room.oxygen_pressure", "room.fatality_factor", "room.release",
          "room.spread"}                                                                      },
    };
    static const enum quality lost[] = {QUALITY_STALE, QUALITY_BAD, QUALITY_MISSING};
    for (size_t q = 0; q < ARRAY_LENGTH(lost); q++)
        for (size_t p = 0; p < ARRAY_LENGTH(rests); p++) {
            struct rig rig;
            struct body body;
            open_quiet(&rig, &body, 90);
            for (int k = 0; k < 12 && rests[p].derived[k] != NULL; k++)
                if (strcmp(rests[p].derived[k], "tank.hold_time") != 0)
                    rig_value(&rig, rests[p].derived[k]); /* good before */
            for (int step = 0; step < 10; step++) {
                rig_tank(&rig, &body);
                rig_spoil(&rig, rests[p].point, lost[q]);
                rig_step(&rig, 10);
                for (int k = 0; k < 12 && rests[p].derived[k] != NULL; k++) {
                    const struct derived_value *value = rig_derived(&rig, rests[p].derived[k]);
                    if (value->quantity.quality == QUALITY_GOOD)
                        fail_msg("%s is good %d s after %s was lost", rests[p].derived[k],
                                 10 * (step + 1), rests[p].point);
                    if (value->reason[0] == '\0')
                        fail_msg("%s gives no reason", rests[p].derived[k]);
                    if (strcmp(rests[p].derived[k], "tank.hold_time") != 0 &&
                        strstr(value->reason, rests[p].point) == NULL)
                        fail_msg("%s says '%s', not a word of %s", rests[p].derived[k],
                                 value->reason, rests[p].point);
                }
            }
            rig_close(&rig);
        }
}

static void test_a_lost_input_blinds_the_ledgers_that_need_it(void **state)
{
    (void)state;
    struct rig rig;
    struct body body;
    open_quiet(&rig, &body, 90);
    assert_int_not_equal(rig_ledger(&rig, LEDGER_HEAT, 0)->word, LEDGER_BLIND);
    for (int i = 0; i < 5; i++) {
        rig_tank(&rig, &body);
        rig_spoil(&rig, "TT-5", QUALITY_BAD);
        rig_step(&rig, 10);
    }
    /* The vent's temperature is no business of the mass. */
    assert_int_equal(rig_ledger(&rig, LEDGER_HEAT, 0)->word, LEDGER_BLIND);
    assert_int_equal(rig_ledger(&rig, LEDGER_MASS, 0)->word, LEDGER_QUIET);
    assert_non_null(strstr(rig_ledger(&rig, LEDGER_HEAT, 0)->reason, "TT-5"));
    for (int i = 0; i < 5; i++) {
        rig_tank(&rig, &body);
        rig_spoil(&rig, "LT-1", QUALITY_STALE);
        rig_step(&rig, 10);
    }
    assert_int_equal(rig_ledger(&rig, LEDGER_MASS, 0)->word, LEDGER_BLIND);
    assert_int_equal(rig_ledger(&rig, LEDGER_MASS, 1)->word, LEDGER_QUIET);
    rig_close(&rig);
}

static void test_windows_fill_and_say_how_long(void **state)
{
    (void)state;
    struct rig rig;
    struct body body;
    open_quiet(&rig, &body, 19);
    const struct derived_value *value = rig_derived(&rig, "tank.heat_load");
    assert_int_equal(value->quantity.quality, QUALITY_MISSING);
    assert_string_equal(value->reason, "filling: 7 min to go"); /* 10 min less 3 */
    assert_int_equal(rig_ledger(&rig, LEDGER_HEAT, 0)->word, LEDGER_FILLING);
    assert_int_equal(rig_ledger(&rig, LEDGER_PURITY, 0)->word, LEDGER_ABSENT);
    run(&rig, &body, 45);
    rig_value(&rig, "tank.heat_load");
    assert_near(rig_ledger(&rig, LEDGER_HEAT, 0)->window_s, 630, 15);
    rig_close(&rig);
}

static void test_frames_slower_than_the_shortest_window_still_fill_it(void **state)
{
    (void)state;
    /* A frame each quarter of an hour, where ten minutes would be enough and a hall takes five.
     */
    struct rig rig;
    struct body body;
    rig_open(&rig, "tests/data/engine/slow.ini");
    body_fill(&body, 1000, 800, 112000);
    for (int i = 0; i < 30; i++) {
        rig_set(&rig, "PT-1", 112000);
        rig_set(&rig, "LT-1", 8);
        rig_set(&rig, "TT-1", body.line.temperature_k);
        rig_set(&rig, "AT-1", 0.2095);
        rig_step(&rig, 900);
    }
    assert_near(rig_value(&rig, "tank.heat_load"), 0, 1e-3);
    assert_near(rig_value(&rig, "tank.mass_unexplained"), 0, 1e-9);
    assert_near(rig_value(&rig, "tank.pressure_rate"), 0, 1e-9);
    assert_near(rig_value(&rig, "room.release"), 0, 1e-9);
    rig_close(&rig);
}

static void test_a_pause_longer_than_the_shortest_window_starts_it_anew(void **state)
{
    (void)state;
    struct rig rig;
    struct body body;
    open_quiet(&rig, &body, 120);
    rig_tank(&rig, &body);
    rig_step(&rig, 300); /* shorter: the window goes on, with less certainty */
    rig_value(&rig, "tank.heat_load");
    rig_step(&rig, 700);
    assert_int_equal(rig_ledger(&rig, LEDGER_HEAT, 0)->word, LEDGER_FILLING);
    assert_non_null(strstr(rig_derived(&rig, "tank.heat_load")->reason, "filling"));
    rig_close(&rig);
}

static void test_a_clock_that_goes_back_is_told_and_starts_windows_anew(void **state)
{
    (void)state;
    struct rig rig;
    struct body body;
    open_quiet(&rig, &body, 120);
    rig_value(&rig, "tank.heat_load");
    rig_step(&rig, -3600);
    int told = 0;
    for (int i = 0; i < rig.results->journal.count; i++)
        told += rig.results->journal.at[i].kind == JOURNAL_CLOCK;
    assert_int_equal(told, 1);
    assert_int_equal(rig_ledger(&rig, LEDGER_HEAT, 0)->word, LEDGER_FILLING);
    rig_step(&rig, 0); /* an equal time is no time */
    told = 0;
    for (int i = 0; i < rig.results->journal.count; i++)
        told += rig.results->journal.at[i].kind == JOURNAL_CLOCK;
    assert_int_equal(told, 1);
    run(&rig, &body, 80);
    rig_value(&rig, "tank.heat_load");
    rig_close(&rig);
}

static void test_a_hall_with_a_lost_monitor_is_never_well(void **state)
{
    (void)state;
    struct rig rig;
    struct body body;
    open_quiet(&rig, &body, 20);
    rig_set(&rig, "AT-1", 0.1998);
    rig_spoil(&rig, "AT-2", QUALITY_MISSING);
    rig_step(&rig, 10);
    const struct derived_value *lowest = rig_derived(&rig, "room.oxygen_lowest");
    assert_int_equal(lowest->quantity.quality, QUALITY_UNCERTAIN);
    assert_near(lowest->quantity.value, 0.1998, 1e-12);
    assert_non_null(strstr(lowest->reason, "AT-2"));
    assert_true(rig.results->banners.count > 0);
    assert_int_equal(rig_ledger(&rig, LEDGER_AIR, 0)->word, LEDGER_BLIND);
    rig_spoil(&rig, "AT-1", QUALITY_STALE);
    rig_step(&rig, 10);
    assert_int_equal(lowest->quantity.quality, QUALITY_BAD);
    assert_non_null(strstr(rig.results->banners.at[0].text, "UNKNOWN"));
    rig_close(&rig);
}

static void test_oxygen_pressure_and_fatality_follow_the_barometer(void **state)
{
    (void)state;
    struct rig rig;
    struct body body;
    open_quiet(&rig, &body, 2);
    /* methods 7.3: 18 % at 740 mmHg -> 1.514e-7; Dalton. */
    rig_set(&rig, "PT-900", 98658.55);
    rig_set(&rig, "AT-2", 0.18);
    rig_step(&rig, 10);
    assert_close(rig_value(&rig, "room.oxygen_pressure"), 17758.54, 1e-6);
    assert_close(rig_value(&rig, "room.fatality_factor"), 1.513561e-07, 1e-4);
    assert_close(rig_value(&rig, "room.spread"), 0.0295, 1e-9);
    /* dF/F = ln 10 / 1333.2 Pa times u of the pressure, here 98.7 Pa: 17 %. */
    assert_close(rig_derived(&rig, "room.fatality_factor")->quantity.u, 0.17 * 1.5136e-07,
                 0.03);
    rig_close(&rig);
}

static void test_a_release_into_the_room_is_measured(void **state)
{
    (void)state;
    struct rig rig;
    struct body body;
    open_quiet(&rig, &body, 2);
    /* methods 7.4, drawing: V 1000, Q 1, R 0.05 m3/s from fresh air; argon at 293.15 K. */
    double density = 98200 * 0.039948 / (8.314462618 * 293.15);
    for (int i = 1; i <= 60; i++) {
        double oxygen = 0.2095 * (1 - 0.05 * (1 - exp(-10.0 * i / 1000)));
        rig_set(&rig, "AT-1", oxygen);
        rig_set(&rig, "AT-2", oxygen);
        rig_tank(&rig, &body);
        rig_step(&rig, 10);
    }
    assert_close(rig_value(&rig, "room.release"), 0.05 * density, 0.02);
    const struct ledger *air = rig_ledger(&rig, LEDGER_AIR, 0);
    assert_close(air->unexplained.value, 0.05 * density, 0.02);
    double lowest = 0.2095 * (1 - 0.05 * (1 - exp(-0.6)));
    double fall = 0.2095 * 0.05 / 1000 * exp(-0.45); /* in the middle of five minutes */
    assert_close(rig_value(&rig, "room.time_to_action"), (lowest - 0.195) / fall, 0.02);
    rig_close(&rig);
}

static void test_an_alarm_sees_its_quantity_in_the_basis_of_its_limit(void **state)
{
    (void)state;
    struct rig rig;
    struct body body;
    rig_open(&rig, "tests/data/engine/tank.ini");
    rig_quiet(&rig);
    body_fill(&body, 1000, 800,
              111000); /* open_quiet's pressure is the limit to the last digit */
    run(&rig, &body, 1);
    /* The limit is 112 kPa absolute, the gauge reads 13.8 kPa(g) on 98.2: 112.0. */
    rig_set(&rig, "PT-1", 13700);
    rig_step(&rig, 10);
    int alarm = 0;
    assert_string_equal(rig.plant->alarm[alarm].name, "tank-pressure-high");
    assert_int_equal(alarm_state(engine_alarms(rig.engine), alarm)->phase, ALARM_NORMAL);
    rig_set(&rig, "PT-900", 98400);
    rig_step(&rig, 10);
    rig_step(&rig, 10);
    assert_int_equal(alarm_state(engine_alarms(rig.engine), alarm)->phase, ALARM_ACTIVE);
    assert_int_equal(rig.results->unacknowledged, 1);
    struct command command = {.kind = COMMAND_ACKNOWLEDGE, .alarm = alarm, .user = "op"};
    rig.frame.utc_ns += 10 * NS_PER_S;
    rig.results = engine_step(rig.engine, &rig.frame, &command, 1);
    assert_int_equal(rig.results->unacknowledged, 0);
    rig_spoil(&rig, "PT-900", QUALITY_STALE);
    rig.frame.utc_ns += 10 * NS_PER_S;
    rig.results = engine_step(rig.engine, &rig.frame, NULL, 0);
    assert_true(alarm_state(engine_alarms(rig.engine), alarm)->unknown);
    rig_close(&rig);
}

static void test_pressures_become_absolute_with_the_frames_own_barometer(void **state)
{
    (void)state;
    struct rig rig;
    struct body body;
    open_quiet(&rig, &body, 1);
    rig_set(&rig, "PT-1", 8000);
    rig_step(&rig, 10);
    struct quantity p = engine_pressure(rig.engine, &rig.plant->vessel[0].pressure);
    assert_near(p.value, 106200, 1e-9); /* methods 15.2 */
    assert_near(p.u, sqrt(20 * 20 + 20 * 20), 1e-9);
    rig_spoil(&rig, "PT-900", QUALITY_MISSING);
    rig_step(&rig, 10);
    assert_int_equal(engine_pressure(rig.engine, &rig.plant->vessel[0].pressure).quality,
                     QUALITY_MISSING);
    rig_close(&rig);
}

static void test_trends_keep_lows_and_highs_of_good_values(void **state)
{
    (void)state;
    struct rig rig;
    struct body body;
    struct trend_column column[24];
    open_quiet(&rig, &body, 1);
    int tag = rig_tag(&rig, "FT-3");
    for (int minute = 0; minute < 240; minute++)
        for (int k = 0; k < 2; k++) {
            rig_set(&rig, "FT-3", minute + 0.25 * k);
            if (minute >= 100 && minute < 110)
                rig_spoil(&rig, "FT-3", QUALITY_STALE);
            rig_step(&rig, 30);
        }
    engine_trend(rig.engine, tag, 4 * 3600, column, 24);
    /* Readings stand 40 s into minute m (m) and 10 s into the next (m + 0.25); the newest
     * minute is 240, so column i holds minutes 10 i + 1 .. 10 i + 10. */
    for (int i = 1; i < 24; i++) {
        assert_true(column[i].set);
        assert_near(column[i].low, i == 10 ? 110 : 10 * i + 0.25, 1e-9);
        assert_near(column[i].high, i == 9 ? 99.25 : 10 * i + 10, 0.76);
    }
    assert_near(column[12].high, 130, 1e-9);
    engine_trend(rig.engine, rig_tag(&rig, "tank.liquid_mass"), 300, column, 5);
    assert_true(column[4].set && column[4].low > 1e6);
    engine_trend(rig.engine, -1, 300, column, 5);
    assert_false(column[4].set);
    rig_close(&rig);
}

static void test_the_same_frames_give_bit_equal_results(void **state)
{
    (void)state;
    struct rig a, b;
    struct body body;
    rig_open(&a, "tests/data/engine/tank.ini");
    rig_open(&b, "tests/data/engine/tank.ini");
    body_fill(&body, 1000, 800, 112000);
    rig_quiet(&a);
    rig_quiet(&b);
    for (int i = 0; i < 500; i++) {
        double wave = 1e-3 * sin(i * 1.7);
        struct rig *const both[] = {&a, &b};
        for (int k = 0; k < 2; k++) {
            rig_tank(both[k], &body);
            rig_set(both[k], "LT-1", 8 + wave);
            rig_set(both[k], "TT-1", body.line.temperature_k + 0.02 * wave);
            rig_set(both[k], "FT-1", 0.02 * (1 + wave));
            rig_set(both[k], "AT-1", 0.2095 - 0.1 * fabs(wave));
            if (i % 97 == 5)
                rig_spoil(both[k], "PT-1", QUALITY_STALE);
            rig_step(both[k], i % 3 == 0 ? 7 : 10);
        }
        assert_memory_equal(a.results->derived, b.results->derived,
                            (size_t)a.results->derived_count * sizeof(*a.results->derived));
        assert_memory_equal(a.results->ledger, b.results->ledger, sizeof(a.results->ledger));
        assert_int_equal(a.results->journal.count, b.results->journal.count);
    }
    rig_value(&a, "tank.heat_load");
    rig_close(&a);
    rig_close(&b);
}

static void test_a_warm_empty_vessel_has_vapour_and_no_subcooling(void **state)
{
    (void)state;
    struct rig rig;
    struct body body;
    rig_open(&rig, "tests/data/engine/tank.ini");
    rig_quiet(&rig);
    body_fill(&body, 1000, 800, 112000);
    for (int i = 0; i < 100; i++) {
        rig_tank(&rig, &body);
        rig_set(&rig, "LT-1", i % 2 == 0 ? 0.001 : -0.001); /* u of the gauge is 1 mm */
        static const char *const thermometers[] = {"TT-1", "TT-2", "TT-3", "TT-4", "TT-5"};
        for (int k = 0; k < 5; k++)
            rig_set(&rig, thermometers[k], 290);
        rig_step(&rig, 10);
    }
    assert_near(rig_value(&rig, "tank.liquid_mass"), 0, 1e-9);
    /* Ideal gas within 0.1 %: argon, 112 kPa, 290 K. */
    assert_close(rig_value(&rig, "tank.vapour_mass"),
                 112000 * 0.039948 / (8.314462618 * 290) * 1000, 2e-3);
    assert_int_equal(rig_derived(&rig, "tank.subcooling")->quantity.quality, QUALITY_MISSING);
    assert_string_equal(rig_derived(&rig, "tank.boil_off_daily")->reason, "no liquid");
    rig_close(&rig);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_no_lost_reading_leaves_a_quantity_good_that_rests_on_it),
        cmocka_unit_test(test_a_lost_input_blinds_the_ledgers_that_need_it),
        cmocka_unit_test(test_windows_fill_and_say_how_long),
        cmocka_unit_test(test_frames_slower_than_the_shortest_window_still_fill_it),
        cmocka_unit_test(test_a_pause_longer_than_the_shortest_window_starts_it_anew),
        cmocka_unit_test(test_a_clock_that_goes_back_is_told_and_starts_windows_anew),
        cmocka_unit_test(test_a_hall_with_a_lost_monitor_is_never_well),
        cmocka_unit_test(test_oxygen_pressure_and_fatality_follow_the_barometer),
        cmocka_unit_test(test_a_release_into_the_room_is_measured),
        cmocka_unit_test(test_an_alarm_sees_its_quantity_in_the_basis_of_its_limit),
        cmocka_unit_test(test_pressures_become_absolute_with_the_frames_own_barometer),
        cmocka_unit_test(test_trends_keep_lows_and_highs_of_good_values),
        cmocka_unit_test(test_a_warm_empty_vessel_has_vapour_and_no_subcooling),
        cmocka_unit_test(test_the_same_frames_give_bit_equal_results),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
