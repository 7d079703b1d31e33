/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Thermodynamics itself as the check: what the first and second law say of derivatives holds
 * for states computed independently, over the whole surface of every fluid. Sources: any text
 * of thermodynamics, e.g. Span, Multiparameter Equations of State (2000), chapter 3; Maxwell's
 * relations; Clapeyron's equation. Slopes are central differences of fourth order.
 */
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdio.h>
#include <string.h>

#include <cmocka.h>

#include "surface.h"

static double slope(const double f[4], double step)
{
    return (f[0] - 8 * f[1] + 8 * f[2] - f[3]) / (12 * step);
}
static const int AROUND[] = {-2, -1, 1, 2};

/* Four states around one along a straight path; false where a path leaves the phase or the
 * validity, so that there is no slope to take. */
static bool rhot_around(const struct fluid *fluid, const struct fluid_state *s, double drho,
                        double dt, struct fluid_state out[4])
{
    for (int i = 0; i < 4; i++)
        if (fluid_at_rhot(fluid, s->density_kg_m3 + AROUND[i] * drho,
                          s->temperature_k + AROUND[i] * dt, &out[i], NULL) != 0 ||
            out[i].phase == FLUID_PHASE_TWO_PHASE)
            return false;
    return true;
}
static bool tp_around(const struct fluid *fluid, const struct fluid_state *s, double dt,
                      double dp, struct fluid_state out[4])
{
    for (int i = 0; i < 4; i++)
        if (fluid_at_tp(fluid, s->temperature_k + AROUND[i] * dt,
                        s->pressure_pa + AROUND[i] * dp, s->phase, &out[i], NULL) != 0)
            return false;
    return true;
}
static bool ps_around(const struct fluid *fluid, const struct fluid_state *s, double dp,
                      struct fluid_state out[4])
{
    for (int i = 0; i < 4; i++)
        if (fluid_at_ps(fluid, s->pressure_pa + AROUND[i] * dp, s->entropy_j_kg_k, &out[i],
                        NULL) != 0 ||
            out[i].phase == FLUID_PHASE_TWO_PHASE)
            return false;
    return true;
}

#define SLOPE(states, member, step)                                                            \
    slope((const double[]){(states)[0].member, (states)[1].member, (states)[2].member,         \
                           (states)[3].member},                                                \
          step)

/* Worst miss by identity, and how many were compared. */
static int compared[16];

static void same(const struct fluid *fluid, const struct fluid_state *s, int which,
                 const char *what, double left, double right, double scale, double tolerance)
{
    compared[which]++;
    if (!(fabs(left - right) <= tolerance * scale))
        fail_msg("%s at %.9g K, %.9g Pa (%.6g kg/m3, %s): %s: %.12g against %.12g (%.2g)",
                 fluid_name(fluid), s->temperature_k, s->pressure_pa, s->density_kg_m3,
                 fluid_phase_word(s->phase), what, left, right, fabs(left - right) / scale);
}

/* A step small against the distance to the critical point, where slopes change quickly. */
static double step_of(const struct fluid *fluid, const struct fluid_state *s)
{
    double distance = critical_distance(fluid, s);
    return 1e-3 * (distance < 0.5 ? 2 * distance : 1);
}

static const double TOLERANCE = 1e-6;

static void visit_density_temperature(const struct fluid *fluid, const struct fluid_state *s)
{
    struct fluid_state a[4];
    double t = s->temperature_k, rho = s->density_kg_m3, h = step_of(fluid, s);
    double r = entropy_scale(fluid);
    /* In a stiff liquid pressure is a small difference: its own slope is the scale. */
    double stiff = rho * s->dp_drho_pa_m3_kg + s->pressure_pa;
    if (rhot_around(fluid, s, rho * h, 0, a)) {
        same(fluid, s, 0, "(dp/drho)_T", SLOPE(a, pressure_pa, rho * h), s->dp_drho_pa_m3_kg,
             s->dp_drho_pa_m3_kg, TOLERANCE);
        same(fluid, s, 1, "p = rho^2 (da/drho)_T",
             rho * rho *
                 (SLOPE(a, internal_energy_j_kg, rho * h) -
                  t * SLOPE(a, entropy_j_kg_k, rho * h)),
             s->pressure_pa, stiff, TOLERANCE);
        same(fluid, s, 2, "(ds/drho)_T = -(dp/dT)_rho / rho^2",
             rho * rho * SLOPE(a, entropy_j_kg_k, rho * h), -s->dp_dt_pa_k, rho * r, TOLERANCE);
    }
    if (rhot_around(fluid, s, 0, t * h, a)) {
        same(fluid, s, 3, "(dp/dT)_rho", SLOPE(a, pressure_pa, t * h), s->dp_dt_pa_k,
             fabs(s->dp_dt_pa_k) + rho * r, TOLERANCE);
        same(fluid, s, 4, "cv = (du/dT)_rho", SLOPE(a, internal_energy_j_kg, t * h),
             s->cv_j_kg_k, s->cv_j_kg_k, TOLERANCE);
        same(fluid, s, 5, "cv = T (ds/dT)_rho", t * SLOPE(a, entropy_j_kg_k, t * h),
             s->cv_j_kg_k, s->cv_j_kg_k, TOLERANCE);
    }
}

static void visit_pressure_temperature(const struct fluid *fluid, const struct fluid_state *s)
{
    struct fluid_state a[4];
    double t = s->temperature_k, rho = s->density_kg_m3, h = step_of(fluid, s);
    double dp = h * fmin(s->pressure_pa, rho * s->dp_drho_pa_m3_kg);
    double volume_slope = 0;
    bool has_volume = false;
    same(fluid, s, 6, "cp - cv = T (dp/dT)^2 / (rho^2 dp/drho)", s->cp_j_kg_k - s->cv_j_kg_k,
         t * s->dp_dt_pa_k * s->dp_dt_pa_k / (rho * rho * s->dp_drho_pa_m3_kg), s->cp_j_kg_k,
         1e-12);
    same(fluid, s, 7, "h = u + p/rho", s->enthalpy_j_kg,
         s->internal_energy_j_kg + s->pressure_pa / rho, energy_scale(fluid, t), 1e-13);
    double dt = h * t * fmin(1, s->dp_drho_pa_m3_kg * rho / (t * s->dp_dt_pa_k));
    if (dt > 0 && tp_around(fluid, s, dt, 0, a)) {
        same(fluid, s, 8, "cp = (dh/dT)_p", SLOPE(a, enthalpy_j_kg, dt), s->cp_j_kg_k,
             s->cp_j_kg_k, TOLERANCE);
        double stiff = rho * s->dp_drho_pa_m3_kg;
        same(fluid, s, 13, "expansion -(1/rho)(drho/dT)_p", fluid_expansion_1_k(s),
             -SLOPE(a, density_kg_m3, dt) / rho, 1 / t + s->dp_dt_pa_k / stiff, TOLERANCE);
        volume_slope = -SLOPE(a, density_kg_m3, dt) / (rho * rho);
        has_volume = true;
        same(fluid, s, 9, "(drho/dT)_p = -(dp/dT)_rho / (dp/drho)_T",
             SLOPE(a, density_kg_m3, dt), -s->dp_dt_pa_k / s->dp_drho_pa_m3_kg,
             rho / t + fabs(s->dp_dt_pa_k / s->dp_drho_pa_m3_kg), TOLERANCE);
    }
    /* A liquid near its triple pressure hardly feels a step of pressure that small. */
    if (has_volume && s->pressure_pa > 1e-3 * rho * s->dp_drho_pa_m3_kg &&
        tp_around(fluid, s, 0, dp, a)) {
        same(fluid, s, 10, "(ds/dp)_T = -(dv/dT)_p", SLOPE(a, entropy_j_kg_k, dp),
             -volume_slope, fabs(volume_slope) + 1 / (rho * t), TOLERANCE);
        same(fluid, s, 11, "(dh/dp)_T = v - T (dv/dT)_p", SLOPE(a, enthalpy_j_kg, dp),
             1 / rho - t * volume_slope, 1 / rho + fabs(t * volume_slope), TOLERANCE);
        double softness = SLOPE(a, density_kg_m3, dp) / rho;
        same(fluid, s, 14, "compressibility (1/rho)(drho/dp)_T", fluid_compressibility_1_pa(s),
             softness, softness, TOLERANCE);
    }
    double square = s->sound_speed_m_s * s->sound_speed_m_s;
    dp = h * fmin(s->pressure_pa, rho * square);
    if (s->pressure_pa > 1e-3 * rho * square && ps_around(fluid, s, dp, a))
        same(fluid, s, 12, "w^2 = (dp/drho)_s", 1 / SLOPE(a, density_kg_m3, dp), square, square,
             TOLERANCE);
}

static void visit_whole(const struct fluid *fluid, const struct fluid_state *s)
{
    if (critical_distance(fluid, s) < 0.0015)
        return; /* too near for a difference; the edges' tests go there */
    visit_density_temperature(fluid, s);
    visit_pressure_temperature(fluid, s);
}

static void test_derivatives_agree_with_differences_of_independent_states(void **state)
{
    (void)state;
    int count = 0;
    memset(compared, 0, sizeof(compared));
    for (size_t f = 0; f < fluid_count(); f++)
        count += surface_each(fluid_at(f), visit_whole);
    assert_true(count > 9 * GRID_T * GRID_P / 2);
    for (int i = 0; i <= 14; i++)
        if (compared[i] < count / 2)
            fail_msg("identity %d was compared at %d of %d states only", i, compared[i], count);
}

/* Temperatures along the saturation line, closer and closer to the critical one. */
enum { LINE_POINTS = 40 };
static double line_temperature(const struct fluid *fluid, int i)
{
    const struct fluid_limits *limits = fluid_limits(fluid);
    double span = limits->critical_temperature_k - limits->triple_temperature_k;
    return limits->critical_temperature_k - span * 0.9999 * pow(10, -3.0 * i / LINE_POINTS);
}

static void test_both_phases_have_equal_gibbs_energy_and_pressure(void **state)
{
    (void)state;
    for (size_t f = 0; f < fluid_count(); f++) {
        const struct fluid *fluid = fluid_at(f);
        for (int i = 0; i < LINE_POINTS; i++) {
            struct fluid_saturation s;
            double t = line_temperature(fluid, i);
            assert_int_equal(fluid_saturation_at_t(fluid, t, &s, NULL), 0);
            double l = s.liquid.enthalpy_j_kg - t * s.liquid.entropy_j_kg_k;
            double v = s.vapour.enthalpy_j_kg - t * s.vapour.entropy_j_kg_k;
            if (!(fabs(l - v) <= 1e-11 * entropy_scale(fluid) * t))
                fail_msg("%s at %.9g K: Gibbs energies %.15g and %.15g", fluid_name(fluid), t,
                         l, v);
            /* Each phase by itself: from its density and temperature a hair off the line. */
            struct fluid_state again;
            assert_int_equal(
                fluid_at_tp(fluid, t, s.pressure_pa, FLUID_PHASE_LIQUID, &again, NULL), 0);
            assert_true(fabs(again.density_kg_m3 / s.liquid.density_kg_m3 - 1) < 1e-9);
            assert_int_equal(
                fluid_at_tp(fluid, t, s.pressure_pa, FLUID_PHASE_VAPOUR, &again, NULL), 0);
            assert_true(fabs(again.density_kg_m3 / s.vapour.density_kg_m3 - 1) < 1e-9);
        }
    }
}

static void test_the_slope_of_the_saturation_line_is_clapeyrons(void **state)
{
    (void)state;
    for (size_t f = 0; f < fluid_count(); f++) {
        const struct fluid *fluid = fluid_at(f);
        double critical = fluid_limits(fluid)->critical_temperature_k;
        for (int i = 1; i < LINE_POINTS; i++) {
            struct fluid_saturation s, around[4];
            double t = line_temperature(fluid, i), step = 1e-2 * (critical - t);
            if (t - 2 * step < fluid_limits(fluid)->triple_temperature_k)
                step = 0.4 * (t - fluid_limits(fluid)->triple_temperature_k);
            assert_int_equal(fluid_saturation_at_t(fluid, t, &s, NULL), 0);
            for (int k = 0; k < 4; k++)
                assert_int_equal(
                    fluid_saturation_at_t(fluid, t + AROUND[k] * step, &around[k], NULL), 0);
            double want = SLOPE(around, pressure_pa, step);
            double clapeyron = (s.vapour.enthalpy_j_kg - s.liquid.enthalpy_j_kg) /
                               (t * (1 / s.vapour.density_kg_m3 - 1 / s.liquid.density_kg_m3));
            if (!(fabs(s.dp_dt_pa_k / want - 1) <= 2e-6))
                fail_msg("%s at %.9g K: dp/dT %.12g, by differences %.12g", fluid_name(fluid),
                         t, s.dp_dt_pa_k, want);
            if (!(fabs(clapeyron / want - 1) <= 2e-6))
                fail_msg("%s at %.9g K: latent heat's dp/dT %.12g, by differences %.12g",
                         fluid_name(fluid), t, clapeyron, want);
        }
    }
}

/* Energy of a rigid vessel at a pressure, from the saturation line and the lever rule alone. */
static double vessel_energy(const struct fluid *fluid, double density, double pressure)
{
    struct fluid_saturation s;
    assert_int_equal(fluid_saturation_at_p(fluid, pressure, &s, NULL), 0);
    double v_l = 1 / s.liquid.density_kg_m3, v_v = 1 / s.vapour.density_kg_m3;
    double x = (1 / density - v_l) / (v_v - v_l);
    assert_true(x >= 0 && x <= 1);
    return (1 - x) * s.liquid.internal_energy_j_kg + x * s.vapour.internal_energy_j_kg;
}

static void test_the_heat_a_closed_vessel_takes_per_pascal_is_its_energys_slope(void **state)
{
    (void)state;
    static const double fill[] = {0.002, 0.1, 0.5, 0.9, 0.995}; /* of the way in density */
    for (size_t f = 0; f < fluid_count(); f++) {
        const struct fluid *fluid = fluid_at(f);
        for (int i = 2; i < LINE_POINTS; i++) {
            struct fluid_saturation s;
            assert_int_equal(fluid_saturation_at_t(fluid, line_temperature(fluid, i), &s, NULL),
                             0);
            double gap = 1 - s.pressure_pa / fluid_limits(fluid)->critical_pressure_pa;
            for (size_t k = 0; k < ARRAY_LENGTH(fill); k++) {
                double rho = s.vapour.density_kg_m3 +
                             fill[k] * (s.liquid.density_kg_m3 - s.vapour.density_kg_m3);
                double step = s.pressure_pa * 2e-4 * fmin(1, 10 * gap), got, energy[4];
                for (int n = 0; n < 4; n++)
                    energy[n] = vessel_energy(fluid, rho, s.pressure_pa + AROUND[n] * step);
                double want = slope(energy, step);
                assert_int_equal(fluid_du_dp(fluid, rho, s.pressure_pa, &got, NULL), 0);
                if (!(fabs(got / want - 1) <= 1e-5))
                    fail_msg("%s, %.6g kg/m3 at %.9g Pa: du/dp %.12g, by differences %.12g",
                             fluid_name(fluid), rho, s.pressure_pa, got, want);
            }
        }
    }
}

static void test_stable_states_are_stable(void **state)
{
    (void)state;
    for (size_t f = 0; f < fluid_count(); f++) {
        const struct fluid *fluid = fluid_at(f);
        for (int i = 0; i < GRID_T; i++) {
            double density = 0;
            for (int k = 1; k < 200; k++) { /* denser where pressed harder */
                const struct fluid_limits *limits = fluid_limits(fluid);
                double low = limits->triple_pressure_pa * 1e-3, high = limits->max_pressure_pa;
                double p = low * pow(high / low, k / 200.0);
                struct fluid_state s;
                if (fluid_at_tp(fluid, grid_temperature(fluid, i), p, FLUID_PHASE_ANY, &s,
                                NULL) != 0)
                    break;
                if (!(s.density_kg_m3 > density && s.dp_drho_pa_m3_kg > 0 && s.cv_j_kg_k > 0 &&
                      s.cp_j_kg_k >= s.cv_j_kg_k && s.sound_speed_m_s > 0))
                    fail_msg("%s at %.9g K, %.9g Pa: %.9g kg/m3 after %.9g, cv %.6g, cp %.6g",
                             fluid_name(fluid), s.temperature_k, p, s.density_kg_m3, density,
                             s.cv_j_kg_k, s.cp_j_kg_k);
                density = s.density_kg_m3;
            }
        }
    }
}

static void test_enthalpy_and_entropy_rise_along_an_isobar(void **state)
{
    (void)state;
    for (size_t f = 0; f < fluid_count(); f++) {
        const struct fluid *fluid = fluid_at(f);
        const struct fluid_limits *limits = fluid_limits(fluid);
        for (int k = 0; k < GRID_P; k++) {
            double enthalpy = -HUGE_VAL, entropy = -HUGE_VAL, density = HUGE_VAL;
            for (int i = 0; i <= 200; i++) {
                double low = limits->triple_temperature_k, high = limits->max_temperature_k;
                double t = low * pow(high / low, i / 200.0);
                struct fluid_state s;
                if (fluid_at_tp(fluid, t < high ? t : high, grid_pressure(fluid, k),
                                FLUID_PHASE_ANY, &s, NULL) != 0)
                    continue;
                if (!(s.enthalpy_j_kg > enthalpy && s.entropy_j_kg_k > entropy))
                    fail_msg("%s at %.9g K, %.9g Pa: enthalpy or entropy falls",
                             fluid_name(fluid), s.temperature_k, s.pressure_pa);
                /* Helium is densest a little above its lambda point. */
                if (strcmp(fluid_name(fluid), "helium") != 0 && !(s.density_kg_m3 < density))
                    fail_msg("%s at %.9g K, %.9g Pa: density rises", fluid_name(fluid),
                             s.temperature_k, s.pressure_pa);
                enthalpy = s.enthalpy_j_kg;
                entropy = s.entropy_j_kg_k;
                density = s.density_kg_m3;
            }
            assert_true(enthalpy > -HUGE_VAL);
        }
    }
}

static void test_along_the_saturation_line_phases_approach(void **state)
{
    (void)state;
    for (size_t f = 0; f < fluid_count(); f++) {
        const struct fluid *fluid = fluid_at(f);
        struct fluid_saturation last, s;
        assert_int_equal(fluid_saturation_at_t(fluid, line_temperature(fluid, 0), &last, NULL),
                         0);
        for (int i = 1; i < LINE_POINTS; i++, last = s) {
            assert_int_equal(fluid_saturation_at_t(fluid, line_temperature(fluid, i), &s, NULL),
                             0);
            assert_true(s.pressure_pa > last.pressure_pa && s.dp_dt_pa_k > 0);
            assert_true(s.vapour.density_kg_m3 > last.vapour.density_kg_m3);
            assert_true(s.liquid.density_kg_m3 < last.liquid.density_kg_m3);
            assert_true(s.vapour.entropy_j_kg_k < last.vapour.entropy_j_kg_k);
            assert_true(s.liquid.entropy_j_kg_k > last.liquid.entropy_j_kg_k);
        }
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_derivatives_agree_with_differences_of_independent_states),
        cmocka_unit_test(test_both_phases_have_equal_gibbs_energy_and_pressure),
        cmocka_unit_test(test_the_slope_of_the_saturation_line_is_clapeyrons),
        cmocka_unit_test(test_the_heat_a_closed_vessel_takes_per_pascal_is_its_energys_slope),
        cmocka_unit_test(test_stable_states_are_stable),
        cmocka_unit_test(test_enthalpy_and_entropy_rise_along_an_isobar),
        cmocka_unit_test(test_along_the_saturation_line_phases_approach),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
