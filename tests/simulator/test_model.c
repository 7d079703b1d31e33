/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The simulated plant against physics: conservation, a closed vessel's pressure, a hall's air,
 * the boil-off of a known heat; and its readings against their stated uncertainty.
 */
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdlib.h>
#include <string.h>

#include <cmocka.h>

#include "../../src/simulator/model.h"

static void near(const char *what, double got, double want, double tolerance)
{
    if (!(fabs(got - want) <= tolerance * fabs(want)))
        fail_msg("%s: %.9g is not %.9g", what, got, want);
}

static struct vessel box(double volume_m3)
{
    struct vessel vessel = {.name = "v", .fluid = fluid_find("argon"), .condenser = -1};
    vessel.shape = (struct shape){
        .kind = SHAPE_BOX, .length_m = volume_m3 / 10, .width_m = 1, .height_m = 10};
    return vessel;
}

/* A closed vessel: no cooling, no vent. */
static void close_in(struct vessel_model *vessel, double heat_w)
{
    vessel->leak_w = heat_w;
    vessel->cooling_limit_w = 0;
    vessel->set_pa = 1e9;
}

static void test_closed_vessel_rises_as_computed(void **state)
{
    const struct vessel described = box(1000);
    struct vessel_model vessel;
    struct error err;
    (void)state;
    /* methods.md 4.2 (closed homogeneous vessel; computed from the equation of state): argon,
     * 1000 m3, 95 % liquid, 1.10 bar, 5 kW: 0.03869 Pa/s. */
    assert_int_equal(vessel_model_init(&vessel, &described, 110e3, 0.95, &err), 0);
    close_in(&vessel, 5000);
    for (int i = 0; i < 100; i++)
        assert_int_equal(vessel_model_step(&vessel, 1, 101325, true, &err), 0);
    near("pressure rate", (vessel.line.pressure_pa - 110e3) / 100, 0.03869, 2e-4);
    /* The same, 50 % liquid: 0.06983 Pa/s. */
    assert_int_equal(vessel_model_init(&vessel, &described, 110e3, 0.5, &err), 0);
    close_in(&vessel, 5000);
    for (int i = 0; i < 100; i++)
        assert_int_equal(vessel_model_step(&vessel, 1, 101325, true, &err), 0);
    near("pressure rate", (vessel.line.pressure_pa - 110e3) / 100, 0.06983, 2e-4);
    /* From 1.10 to 1.25 bar at 95 %: 369 108 s. */
    assert_int_equal(vessel_model_init(&vessel, &described, 110e3, 0.95, &err), 0);
    close_in(&vessel, 5000);
    double time = 0;
    for (; vessel.line.pressure_pa < 125e3; time += 60)
        assert_int_equal(vessel_model_step(&vessel, 60, 101325, true, &err), 0);
    near("time", time, 369108, 3e-4);
}

static void test_mass_and_energy_are_conserved(void **state)
{
    const struct vessel described = box(300);
    struct vessel_model vessel;
    struct error err;
    (void)state;
    assert_int_equal(vessel_model_init(&vessel, &described, 115e3, 0.7, &err), 0);
    double mass = vessel.mass_kg, energy = vessel.energy_j;
    vessel.leak_w = 4000;
    vessel.cooling_limit_w = 10000;
    vessel.integral_w = 4000;
    vessel.set_pa = 13e3;
    for (int i = 0; i < 20000; i++)
        assert_int_equal(vessel_model_step(&vessel, 1, 101325, false, &err), 0);
    near("mass", vessel.mass_kg, mass + vessel.mass_in_kg, 1e-12);
    near("energy", vessel.energy_j, energy + vessel.energy_in_j, 1e-9);
    near("phases", vessel.liquid_kg + vessel.vapour_kg, vessel.mass_kg, 1e-12);
    double held = vessel.liquid_kg * vessel.line.liquid.internal_energy_j_kg +
                  vessel.vapour_kg * vessel.line.vapour.internal_energy_j_kg;
    near("energy of the phases", held, vessel.energy_j, 1e-9);
}

static void test_steady_boil_off_carries_the_heat(void **state)
{
    const struct vessel described = box(1000);
    struct vessel_model vessel;
    struct error err;
    (void)state;
    /* methods.md 4.1: 0.02 kg/s of saturated vapour vented at 1.1 bar is 3225.3 W. The heat is
     * given here, and the flow must come out. */
    assert_int_equal(vessel_model_init(&vessel, &described, 110e3, 0.8, &err), 0);
    vessel.leak_w = vessel.integral_w = 3225.3;
    vessel.cooling_limit_w = 1e5;
    vessel.set_pa = 110e3 - 101325;
    for (int i = 0; i < 20000; i++)
        assert_int_equal(vessel_model_step(&vessel, 1, 101325, false, &err), 0);
    near("pressure held", vessel.line.pressure_pa, 110e3, 1e-4);
    near("vent", vessel.vent_kg_s, 0.02, 2e-3);
}

static double hall_after(enum hall_mode mode, bool fan, double t)
{
    const struct hall described = {.volume_m3 = 1000,
                                   .mode = mode,
                                   .gas = fluid_find("argon"),
                                   .fresh_air_oxygen = 0.2095};
    struct hall_model hall;
    hall_model_init(&hall, &described);
    hall.low_part = 0.001; /* one well-mixed room, as the closed forms have it */
    hall.exchange_s = 0.5;
    hall.ventilation_m3_s = 1;
    hall.fan = fan;
    hall.release_m3_s = 0.5;
    for (double at = 0; at < t; at += 1)
        hall_model_step(&hall, 1);
    return hall.main;
}

static void test_hall_air_follows_the_closed_forms(void **state)
{
    (void)state;
    /* methods.md 7.4: V 1000 m3, Q 1 m3/s, R 0.5 m3/s, 600 s. */
    near("blown in", hall_after(HALL_SUPPLY, true, 600), 0.168059, 1e-3);
    near("drawn out", hall_after(HALL_EXHAUST, true, 600), 0.162238, 1e-3);
    near("off", hall_after(HALL_EXHAUST, false, 600), 0.155201, 1e-3);
    near("blown in, at last", hall_after(HALL_SUPPLY, true, 20000), 0.139667, 1e-3);
    near("drawn out, at last", hall_after(HALL_EXHAUST, true, 20000), 0.104750, 1e-3);
}

static void test_standard_atmosphere_underground(void **state)
{
    (void)state;
    /* methods.md 15.1: -2000 m 127 780 Pa (US Standard Atmosphere 1976, printed), within the
     * weather that is laid over it (340 Pa). */
    assert_true(fabs(weather_pa(-2000, 0) - 127780) < 400);
    assert_true(fabs(weather_pa(0, 0) - 101325) < 400);
}

/* ---- readings
 * ------------------------------------------------------------------------------------ */

static struct plant *demo_plant(void)
{
    static struct problems problems;
    struct plant *plant = NULL;
    assert_int_equal(plant_read("config/tarn-hollow.ini", &plant, &problems), 0);
    return plant;
}

static struct simulator *make(const struct plant *plant, uint64_t seed, const char *upset)
{
    struct simulator *simulator = NULL;
    struct error err;
    const struct simulator_options options = {
        .seed = seed, .upset = upset != NULL ? upset_find(upset) : NULL, .upset_start_s = 600};
    if (simulator_create(plant, &options, &simulator, &err) != 0)
        fail_msg("%s", err.text);
    return simulator;
}

static void test_same_seed_gives_the_same_day_and_another_does_not(void **state)
{
    struct plant *plant = demo_plant();
    struct arena *arena = arena_create();
    struct frame frame[3];
    (void)state;
    for (int i = 0; i < 3; i++) {
        struct simulator *simulator = make(plant, i < 2 ? 7 : 8, NULL);
        assert_int_equal(frame_init(&frame[i], plant, arena), 0);
        for (int k = 0; k < 50; k++)
            assert_int_equal(simulator_step(simulator, 1, NULL), 0);
        simulator_frame(simulator, NS_PER_S, &frame[i]);
        simulator_free(simulator);
    }
    size_t bytes = (size_t)plant->point_count * sizeof(struct sample);
    assert_memory_equal(frame[0].sample, frame[1].sample, bytes);
    assert_memory_not_equal(frame[0].sample, frame[2].sample, bytes);
    arena_free(arena);
    plant_free(plant);
}

static void test_readings_scatter_as_their_stated_uncertainty(void **state)
{
    enum { SEEDS = 300 };
    struct plant *plant = demo_plant();
    struct arena *arena = arena_create();
    struct frame frame;
    double squares = 0;
    int count = 0;
    (void)state;
    assert_int_equal(frame_init(&frame, plant, arena), 0);
    for (int seed = 0; seed < SEEDS; seed++) {
        struct simulator *simulator = make(plant, (uint64_t)seed, NULL);
        simulator_frame(simulator, NS_PER_S, &frame);
        for (int i = 0; i < plant->point_count; i++) {
            double truth;
            assert_int_equal(simulator_true_value(simulator, i, &truth), 0);
            if (plant->point[i].read.type == REGISTER_BIT)
                continue;
            assert_int_equal(frame.sample[i].quality, QUALITY_GOOD);
            double z =
                (frame.sample[i].value - truth) / point_uncertainty(&plant->point[i], truth);
            squares += z * z;
            count++;
        }
        simulator_free(simulator);
    }
    /* The mean of z squared over n values is 1 within about 3 sqrt(2/n) (chi-square). */
    assert_true(fabs(squares / count - 1) < 3.5 * sqrt(2.0 / count));
    arena_free(arena);
    plant_free(plant);
}

static void test_hours_of_every_upset_run_through(void **state)
{
    struct plant *plant = demo_plant();
    size_t upsets;
    const struct upset *list = upset_list(&upsets);
    (void)state;
    for (size_t u = 0; u < upsets; u++) {
        struct simulator *simulator = make(plant, 1, list[u].name);
        struct error err;
        /* Some hours of each. */
        for (int i = 0; i < 3; i++)
            if (simulator_step(simulator, 3600, &err) != 0)
                fail_msg("%s: %s", list[u].name, err.text);
        for (int tag = 0; tag < plant_tag_count(plant); tag++) {
            double value;
            if (simulator_true_value(simulator, tag, &value) == 0 && !isfinite(value))
                fail_msg("%s: %s is no number", list[u].name, plant_tag_name(plant, tag));
        }
        simulator_free(simulator);
    }
    plant_free(plant);
}

static void test_upsets_do_what_they_say(void **state)
{
    struct plant *plant = demo_plant();
    double value, before;
    (void)state;
    struct simulator *simulator = make(plant, 1, "hall-release");
    assert_int_equal(simulator_step(simulator, 500, NULL), 0);
    assert_int_equal(simulator_true_value(
                         simulator, plant_tag_find(plant, "cold-hall.oxygen_lowest"), &value),
                     0);
    near("before", value, 0.2095, 1e-6);
    assert_int_equal(simulator_step(simulator, 1800, NULL), 0);
    assert_int_equal(simulator_true_value(
                         simulator, plant_tag_find(plant, "cold-hall.oxygen_lowest"), &value),
                     0);
    assert_true(value < 0.195);
    assert_int_equal(
        simulator_true_value(simulator, plant_tag_find(plant, "cold-hall.release"), &value), 0);
    near("release", value, 0.150, 1e-12);
    simulator_free(simulator);

    simulator = make(plant, 1, "cooling-lost");
    assert_int_equal(simulator_step(simulator, 599, NULL), 0);
    before = simulator->vessel[0].line.pressure_pa;
    assert_int_equal(simulator_step(simulator, 3600, NULL), 0);
    assert_true(simulator->vessel[0].line.pressure_pa > before + 100);
    assert_true(simulator->vessel[0].duty_w == 0);
    simulator_free(simulator);
    plant_free(plant);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_closed_vessel_rises_as_computed),
        cmocka_unit_test(test_mass_and_energy_are_conserved),
        cmocka_unit_test(test_steady_boil_off_carries_the_heat),
        cmocka_unit_test(test_hall_air_follows_the_closed_forms),
        cmocka_unit_test(test_standard_atmosphere_underground),
        cmocka_unit_test(test_same_seed_gives_the_same_day_and_another_does_not),
        cmocka_unit_test(test_readings_scatter_as_their_stated_uncertainty),
        cmocka_unit_test(test_hours_of_every_upset_run_through),
        cmocka_unit_test(test_upsets_do_what_they_say),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
