/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Vessel shapes against published and computed volumes, and level against volume.
 */
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>

#include <cmocka.h>

#include "ullage/plant.h"

/* clang-format off */
static const double heights[] = {0, 0.5, 1, 2}, volumes[] = {0.1, 1, 3, 9};
static const struct shape shapes[] = {
    {.kind = SHAPE_BOX, .length_m = 9, .width_m = 6.5, .height_m = 6},
    {.kind = SHAPE_UPRIGHT_CYLINDER, .diameter_m = 2.4, .height_m = 9},
    {.kind = SHAPE_LYING_CYLINDER, .diameter_m = 3, .length_m = 12},
    {.kind = SHAPE_SPHERE, .diameter_m = 5},
    {.kind = SHAPE_TABLE, .count = 4, .table_height_m = heights, .table_volume_m3 = volumes},
};
/* clang-format on */

static void near(double got, double want, double tolerance)
{
    if (!(fabs(got - want) <= tolerance))
        fail_msg("%.10g is not %.10g", got, want);
}

static void test_volumes_agree_with_worked_examples(void **state)
{
    const struct shape ball = {.kind = SHAPE_SPHERE, .diameter_m = 1};
    (void)state;
    /* methods.csv level.hcyl: D 3 m, L 12 m (computed from the segment formula). */
    near(shape_volume_at_m3(&shapes[2], 1.5), 42.4115, 5e-5);
    near(shape_volume_at_m3(&shapes[2], 0.9), 21.4022, 5e-5);
    /* methods.csv level.sphere_cap: D 1, h 0.7 (a general-purpose fluids library's value). */
    near(shape_volume_at_m3(&ball, 0.7), 0.4105014, 5e-8);
    near(shape_volume_m3(&shapes[0]), 351, 1e-9);
    near(shape_volume_at_m3(&shapes[4], 0.75), 2, 1e-12);
}

static void test_level_and_volume_are_inverse_and_held(void **state)
{
    (void)state;
    for (size_t i = 0; i < ARRAY_LENGTH(shapes); i++) {
        double height = shape_height_m(&shapes[i]);
        for (int k = 0; k <= 20; k++) {
            double level = height * k / 20;
            near(shape_level_at_m(&shapes[i], shape_volume_at_m3(&shapes[i], level)), level,
                 1e-7 * height);
        }
        near(shape_volume_at_m3(&shapes[i], height * 2), shape_volume_m3(&shapes[i]), 1e-9);
        near(shape_level_at_m(&shapes[i], 1e9), height, 1e-12);
    }
}

static void test_surface_is_the_slope_of_volume(void **state)
{
    (void)state;
    for (size_t i = 0; i < ARRAY_LENGTH(shapes); i++) {
        double height = shape_height_m(&shapes[i]), step = 1e-5 * height;
        for (int k = 1; k < 20; k++) {
            double level = height * (k + 0.37) / 20.6;
            double slope = (shape_volume_at_m3(&shapes[i], level + step) -
                            shape_volume_at_m3(&shapes[i], level - step)) /
                           (2 * step);
            near(shape_surface_at_m2(&shapes[i], level), slope, 1e-5 * slope);
        }
    }
}

static void test_registers_are_read_and_written_alike(void **state)
{
    /* clang-format off */
    static const char *const good[] = {"input 0 f32", "holding 16 u16.5", "discrete 12 bit",
                                       "input 40 f64 DCBA", "coil 0 bit", "input 2 i16"};
    static const char *const bad[] = {"",          "input",       "input 0",        "input x f32",
                                      "input -1 u16", "discrete 1 f32", "input 1 bit", "input 1 u16.16",
                                      "input 65534 f64", "input 1 f32 ACBD", "input 1 f32 ABCD x"};
    /* clang-format on */
    struct register_ref ref;
    struct error err;
    char text[48];
    (void)state;
    for (size_t i = 0; i < ARRAY_LENGTH(good); i++) {
        assert_int_equal(register_parse(good[i], &ref, &err), 0);
        register_format(text, sizeof(text), &ref);
        assert_string_equal(text, good[i]);
    }
    assert_int_equal(register_parse("holding 0x10 u16.3", &ref, &err), 0);
    assert_int_equal(ref.address, 16);
    assert_int_equal(ref.bit, 3);
    for (size_t i = 0; i < ARRAY_LENGTH(bad); i++) {
        err.text[0] = '\0';
        assert_int_not_equal(register_parse(bad[i], &ref, &err), 0);
        assert_true(err.text[0] != '\0');
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_volumes_agree_with_worked_examples),
        cmocka_unit_test(test_level_and_volume_are_inverse_and_held),
        cmocka_unit_test(test_surface_is_the_slope_of_volume),
        cmocka_unit_test(test_registers_are_read_and_written_alike),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
