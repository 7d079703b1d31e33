/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Oxygen of a well-mixed vessel with a known source, against the closed solution and the check
 * values of tests/data/methods (methods 2.1).
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

static const double FLOW = 2.5, EFFICIENCY = 0.98, SOURCE_MOL_S = 2e-9;

static void run(struct rig *rig, double hours, double liquid_kg, double *fraction)
{
    struct check_value tau = check_value("purif.tau.1"), steady = check_value("purif.c_ss.1");
    struct fluid_saturation line;
    assert_int_equal(fluid_saturation_at_p(fluid_find("argon"), 110000, &line, NULL), 0);
    for (int i = 0; i < (int)(hours * 180); i++) {
        double t = 20.0 * (i + 1);
        *fraction = steady.expected + (1e-9 - steady.expected) * exp(-t / tau.expected);
        rig_set(rig, "PT-1", 110000);
        rig_set(rig, "LT-1", liquid_kg / line.liquid.density_kg_m3 / 100);
        rig_set(rig, "FT-1", FLOW);
        rig_set(rig, "AT-1", *fraction);
        rig_set(rig, "AT-2", *fraction * (1 - EFFICIENCY));
        rig_step(rig, 20);
    }
}

static void test_ingress_and_times_of_a_well_mixed_vessel(void **state)
{
    (void)state;
    struct check_value tau = check_value("purif.tau.1"), time = check_value("purif.t_to.1");
    struct rig rig;
    double fraction = 1e-9;
    rig_open(&rig, "tests/data/engine/purifier.ini");
    run(&rig, 2.5, check_input(&tau, "M_kg"), &fraction);
    assert_close(rig_value(&rig, "store.purity_time_constant"), tau.expected, 1e-5);
    assert_close(rig_value(&rig, "store.oxygen_ingress"), SOURCE_MOL_S * 0.0319988, 0.02);
    assert_close(rig_value(&rig, "store.time_to_purity") + rig.time_s, time.expected, 0.005);
    assert_close(rig_value(&rig, "bed.efficiency"), EFFICIENCY, 1e-9);
    /* In this state the fall of the stock nearly cancels what is taken; u tells. */
    assert_true(rig_derived(&rig, "store.oxygen_ingress")->quantity.u > 0.5e-10);
    rig_close(&rig);
}

static void test_a_lost_analyzer_spoils_all_that_rests_on_it(void **state)
{
    (void)state;
    static const char *const names[] = {"store.oxygen_ingress", "store.purity_time_constant",
                                        "store.time_to_purity", "bed.efficiency"};
    struct rig rig;
    double fraction = 1e-9;
    rig_open(&rig, "tests/data/engine/purifier.ini");
    run(&rig, 0.05, 7e5, &fraction);
    assert_non_null(strstr(rig_derived(&rig, "store.oxygen_ingress")->reason, "filling"));
    run(&rig, 1, 7e5, &fraction);
    rig_spoil(&rig, "AT-2", QUALITY_STALE);
    rig_step(&rig, 20);
    for (size_t i = 0; i < ARRAY_LENGTH(names); i++) {
        assert_int_equal(rig_derived(&rig, names[i])->quantity.quality, QUALITY_BAD);
        assert_non_null(strstr(rig_derived(&rig, names[i])->reason, "AT-2"));
    }
    rig_close(&rig);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_ingress_and_times_of_a_well_mixed_vessel),
        cmocka_unit_test(test_a_lost_analyzer_spoils_all_that_rests_on_it),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
