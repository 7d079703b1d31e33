/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * A state is the same by whichever pair it is asked for: round trips over the whole surface and
 * through the two-phase region of every fluid; phases demanded across the saturation line; what
 * a state says of its phase. The check is each function against the others, and the lever rule.
 */
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdio.h>
#include <string.h>

#include <cmocka.h>

#include "surface.h"

/* What went out must come back: temperature as sharply as the input fixes it, density so that
 * pressure agrees. */
static void back(const struct fluid *fluid, const char *way, int code, const struct error *err,
                 const struct fluid_state *was, const struct fluid_state *now)
{
    if (code != 0)
        fail_msg("%s %s: %.9g K, %.9g Pa: %s", fluid_name(fluid), way, was->temperature_k,
                 was->pressure_pa, err->text);
    double t = was->temperature_k, rho = was->density_kg_m3;
    double heat = was->cv_j_kg_k * fabs(now->temperature_k - t) / energy_scale(fluid, t);
    double stiff = rho * was->dp_drho_pa_m3_kg + was->pressure_pa;
    double pressure = fabs(now->pressure_pa - was->pressure_pa) / stiff;
    double density = fabs(now->density_kg_m3 - rho) * was->dp_drho_pa_m3_kg / stiff;
    if (!(heat < 1e-11 && pressure < 1e-10 && density < 1e-10))
        fail_msg("%s %s: %.15g K, %.15g Pa, %.15g kg/m3 came back as %.15g, %.15g, %.15g",
                 fluid_name(fluid), way, t, was->pressure_pa, rho, now->temperature_k,
                 now->pressure_pa, now->density_kg_m3);
    if (was->phase != now->phase)
        fail_msg("%s %s: %.9g K, %.9g Pa: %s came back as %s", fluid_name(fluid), way, t,
                 was->pressure_pa, fluid_phase_word(was->phase), fluid_phase_word(now->phase));
    assert_true(now->vapour_fraction == was->vapour_fraction);
}

static void visit_round(const struct fluid *fluid, const struct fluid_state *s)
{
    struct fluid_state now;
    struct error err = {0};
    int code = fluid_at_ph(fluid, s->pressure_pa, s->enthalpy_j_kg, &now, &err);
    back(fluid, "p,h", code, &err, s, &now);
    code = fluid_at_ps(fluid, s->pressure_pa, s->entropy_j_kg_k, &now, &err);
    back(fluid, "p,s", code, &err, s, &now);
    code = fluid_at_rhot(fluid, s->density_kg_m3, s->temperature_k, &now, &err);
    back(fluid, "rho,T", code, &err, s, &now);
    code = fluid_at_rhou(fluid, s->density_kg_m3, s->internal_energy_j_kg, &now, &err);
    back(fluid, "rho,u", code, &err, s, &now);
    code = fluid_at_tp(fluid, s->temperature_k, s->pressure_pa, s->phase, &now, &err);
    back(fluid, "T,p and phase", code, &err, s, &now);
}

static void test_every_pair_of_inputs_names_the_same_state(void **state)
{
    (void)state;
    int count = 0;
    for (size_t f = 0; f < fluid_count(); f++)
        count += surface_each(fluid_at(f), visit_round);
    assert_true(count > 9 * GRID_T * GRID_P / 2);
}

static void two_phase_back(const struct fluid *fluid, const char *way, int code,
                           const struct error *err, const struct fluid_state *was,
                           const struct fluid_state *now, double reach)
{
    if (code != 0)
        fail_msg("%s %s: %.9g K, x %.9g: %s", fluid_name(fluid), way, was->temperature_k,
                 was->vapour_fraction, err->text);
    double t = fabs(now->temperature_k / was->temperature_k - 1);
    double x = fabs(now->vapour_fraction - was->vapour_fraction);
    double rho = fabs(now->density_kg_m3 / was->density_kg_m3 - 1);
    if (!(t < 1e-11 && x < reach && rho < reach * 1e3 && now->saturated))
        fail_msg("%s %s: %.15g K, x %.12g, %.12g kg/m3 came back as %.15g, %.12g, %.12g (%s)",
                 fluid_name(fluid), way, was->temperature_k, was->vapour_fraction,
                 was->density_kg_m3, now->temperature_k, now->vapour_fraction,
                 now->density_kg_m3, fluid_phase_word(now->phase));
    assert_int_equal(now->phase, was->phase);
}

static void test_two_phases_come_back_by_every_pair_of_inputs(void **state)
{
    (void)state;
    static const double part[] = {0, 1e-4, 0.02, 0.4, 0.9, 0.9999, 1};
    static const double temperature[] = {1e-6, 0.05, 0.3, 0.6, 0.85, 0.95, 0.99, 0.998};
    for (size_t f = 0; f < fluid_count(); f++) {
        const struct fluid *fluid = fluid_at(f);
        const struct fluid_limits *limits = fluid_limits(fluid);
        for (size_t i = 0; i < ARRAY_LENGTH(temperature); i++) {
            double t = limits->triple_temperature_k +
                       temperature[i] *
                           (limits->critical_temperature_k - limits->triple_temperature_k);
            for (size_t k = 0; k < ARRAY_LENGTH(part); k++) {
                struct fluid_state s, now;
                struct error err = {0};
                bool edge = part[k] == 0 || part[k] == 1;
                int code = fluid_at_tx(fluid, t, part[k], &s, &err);
                if (code != 0)
                    fail_msg("%s", err.text);
                assert_true(s.saturated && s.vapour_fraction == part[k]);
                assert_int_equal(s.phase, part[k] == 0   ? FLUID_PHASE_LIQUID
                                          : part[k] == 1 ? FLUID_PHASE_VAPOUR
                                                         : FLUID_PHASE_TWO_PHASE);
                if (!edge)
                    assert_true(s.cp_j_kg_k == 0 && s.cv_j_kg_k == 0 &&
                                s.sound_speed_m_s == 0 && s.dp_dt_pa_k == 0 &&
                                s.dp_drho_pa_m3_kg == 0);
                code = fluid_at_px(fluid, s.pressure_pa, part[k], &now, &err);
                two_phase_back(fluid, "p,x", code, &err, &s, &now, 1e-12);
                if (edge)
                    continue; /* on the edge itself a digit decides for one side */
                code = fluid_at_rhot(fluid, s.density_kg_m3, t, &now, &err);
                two_phase_back(fluid, "rho,T", code, &err, &s, &now, 1e-9);
                code =
                    fluid_at_rhou(fluid, s.density_kg_m3, s.internal_energy_j_kg, &now, &err);
                two_phase_back(fluid, "rho,u", code, &err, &s, &now, 1e-9);
                code = fluid_at_ph(fluid, s.pressure_pa, s.enthalpy_j_kg, &now, &err);
                two_phase_back(fluid, "p,h", code, &err, &s, &now, 1e-9);
                code = fluid_at_ps(fluid, s.pressure_pa, s.entropy_j_kg_k, &now, &err);
                two_phase_back(fluid, "p,s", code, &err, &s, &now, 1e-9);
            }
        }
    }
}

static void test_saturation_by_temperature_and_by_pressure_is_one_line(void **state)
{
    (void)state;
    for (size_t f = 0; f < fluid_count(); f++) {
        const struct fluid *fluid = fluid_at(f);
        const struct fluid_limits *limits = fluid_limits(fluid);
        double low = limits->triple_temperature_k, high = limits->critical_temperature_k;
        for (int i = 0; i <= 300; i++) {
            struct fluid_saturation s, back_again;
            double t = i == 300 ? high : low + (high - low) * i / 300;
            struct error err = {0};
            if (fluid_saturation_at_t(fluid, t, &s, &err) != 0 ||
                fluid_saturation_at_p(fluid, s.pressure_pa, &back_again, &err) != 0)
                fail_msg("%s", err.text);
            if (!(fabs(back_again.temperature_k / t - 1) < 1e-11))
                fail_msg("%s: %.15g K, %.15g Pa came back as %.15g K", fluid_name(fluid), t,
                         s.pressure_pa, back_again.temperature_k);
            assert_true(s.liquid.saturated && s.vapour.saturated);
            assert_true(s.liquid.pressure_pa == s.pressure_pa &&
                        s.vapour.pressure_pa == s.pressure_pa);
        }
    }
}

static void test_a_demanded_phase_goes_on_a_little_across_the_line(void **state)
{
    (void)state;
    static const double temperature[] = {0.05, 0.1, 0.3, 0.5, 0.7, 0.9};
    for (size_t f = 0; f < fluid_count(); f++) {
        const struct fluid *fluid = fluid_at(f);
        const struct fluid_limits *limits = fluid_limits(fluid);
        for (size_t i = 0; i < ARRAY_LENGTH(temperature); i++) {
            double t = limits->triple_temperature_k +
                       temperature[i] *
                           (limits->critical_temperature_k - limits->triple_temperature_k);
            struct fluid_saturation s;
            struct fluid_state liquid, vapour, stable;
            assert_int_equal(fluid_saturation_at_t(fluid, t, &s, NULL), 0);
            for (int percent = 1; percent <= (temperature[i] < 0.8 ? 5 : 1); percent++) {
                double below = s.pressure_pa * (1 - 0.01 * percent);
                double above = s.pressure_pa * (1 + 0.01 * percent);
                struct error err = {0};
                if (fluid_at_tp(fluid, t, below, FLUID_PHASE_LIQUID, &liquid, &err) != 0)
                    fail_msg("%s", err.text);
                assert_int_equal(liquid.phase, FLUID_PHASE_LIQUID);
                assert_true(liquid.density_kg_m3 < s.liquid.density_kg_m3 &&
                            liquid.dp_drho_pa_m3_kg > 0 && !liquid.saturated);
                assert_int_equal(fluid_at_tp(fluid, t, below, FLUID_PHASE_ANY, &stable, &err),
                                 0);
                assert_int_equal(stable.phase, FLUID_PHASE_VAPOUR);
                int code = fluid_at_tp(fluid, t, above, FLUID_PHASE_VAPOUR, &vapour, &err);
                if (code != 0)
                    fail_msg("%s", err.text);
                assert_int_equal(vapour.phase, FLUID_PHASE_VAPOUR);
                assert_true(vapour.density_kg_m3 > s.vapour.density_kg_m3 &&
                            vapour.dp_drho_pa_m3_kg > 0 && !vapour.saturated);
                assert_int_equal(fluid_at_tp(fluid, t, above, FLUID_PHASE_ANY, &stable, &err),
                                 0);
                assert_int_equal(stable.phase, FLUID_PHASE_LIQUID);
                /* Of two phases the stable one has the lower Gibbs energy. */
                double g_vapour = vapour.enthalpy_j_kg - t * vapour.entropy_j_kg_k;
                double g_stable = stable.enthalpy_j_kg - t * stable.entropy_j_kg_k;
                assert_true(g_stable < g_vapour);
            }
        }
    }
}

static void test_beyond_its_spinodal_a_phase_is_refused(void **state)
{
    (void)state;
    for (size_t f = 0; f < fluid_count(); f++) {
        const struct fluid *fluid = fluid_at(f);
        const struct fluid_limits *limits = fluid_limits(fluid);
        for (double part = 0.95; part < 0.9995; part += 0.005) {
            double t = part * limits->critical_temperature_k;
            struct fluid_state s = {.density_kg_m3 = 42};
            struct error err = {0};
            /* The spinodals at these temperatures: within a third of the critical pressure
             * (e.g. van der Waals' equation), so vacuum and twice that pressure lie beyond. */
            assert_int_equal(fluid_at_tp(fluid, t, 0.1 * limits->critical_pressure_pa,
                                         FLUID_PHASE_LIQUID, &s, &err),
                             ERR_RANGE);
            assert_non_null(strstr(err.text, "liquid"));
            assert_int_equal(fluid_at_tp(fluid, t, 2 * limits->critical_pressure_pa,
                                         FLUID_PHASE_VAPOUR, &s, &err),
                             ERR_RANGE);
            assert_non_null(strstr(err.text, "vapour"));
            assert_true(s.density_kg_m3 == 42);
        }
        /* No phase of the kind above the critical temperature, none of the other below it. */
        struct fluid_state s;
        double p = limits->critical_pressure_pa, t = limits->critical_temperature_k;
        assert_int_equal(fluid_at_tp(fluid, 1.1 * t, p, FLUID_PHASE_LIQUID, &s, NULL),
                         ERR_RANGE);
        assert_int_equal(fluid_at_tp(fluid, 1.1 * t, p, FLUID_PHASE_VAPOUR, &s, NULL),
                         ERR_RANGE);
        assert_int_equal(fluid_at_tp(fluid, 0.9 * t, p, FLUID_PHASE_SUPERCRITICAL, &s, NULL),
                         ERR_RANGE);
        assert_int_equal(fluid_at_tp(fluid, 0.9 * t, p, FLUID_PHASE_TWO_PHASE, &s, NULL),
                         ERR_RANGE);
    }
}

static void test_a_state_on_the_line_says_saturated(void **state)
{
    (void)state;
    for (size_t f = 0; f < fluid_count(); f++) {
        const struct fluid *fluid = fluid_at(f);
        const struct fluid_limits *limits = fluid_limits(fluid);
        for (double part = 0.001; part < 0.999; part += 0.02) {
            double t = limits->triple_temperature_k +
                       part * (limits->critical_temperature_k - limits->triple_temperature_k);
            struct fluid_saturation line;
            struct fluid_state s;
            assert_int_equal(fluid_saturation_at_t(fluid, t, &line, NULL), 0);
            assert_int_equal(fluid_at_tp(fluid, t, line.pressure_pa, FLUID_PHASE_ANY, &s, NULL),
                             0);
            assert_true(s.saturated);
            assert_int_equal(
                fluid_at_tp(fluid, t, line.pressure_pa * (1 + 1e-6), FLUID_PHASE_ANY, &s, NULL),
                0);
            assert_true(!s.saturated && s.phase == FLUID_PHASE_LIQUID);
            assert_int_equal(
                fluid_at_tp(fluid, t, line.pressure_pa * (1 - 1e-6), FLUID_PHASE_ANY, &s, NULL),
                0);
            assert_true(!s.saturated && s.phase == FLUID_PHASE_VAPOUR);
        }
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_every_pair_of_inputs_names_the_same_state),
        cmocka_unit_test(test_two_phases_come_back_by_every_pair_of_inputs),
        cmocka_unit_test(test_saturation_by_temperature_and_by_pressure_is_one_line),
        cmocka_unit_test(test_a_demanded_phase_goes_on_a_little_across_the_line),
        cmocka_unit_test(test_beyond_its_spinodal_a_phase_is_refused),
        cmocka_unit_test(test_a_state_on_the_line_says_saturated),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
