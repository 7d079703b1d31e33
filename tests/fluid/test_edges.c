/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Where a fluid ends: below the triple point, beyond the validity, in the solid, at and beside
 * the critical point, and inputs that are no state at all. Either a sentence and the output
 * untouched, or a right answer. A fuzz with a fixed seed over all functions and fluids holds
 * the same. Triple and critical points: those of the cited equations.
 */
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>
#include <string.h>
#include <time.h>

#include <cmocka.h>

#include "surface.h"

/* Every function that gives a state, by two numbers; the phase asked for is the third. */
enum ask {
    ASK_TP,
    ASK_RHOT,
    ASK_RHOU,
    ASK_PH,
    ASK_PS,
    ASK_TX,
    ASK_PX,
    ASK_T,
    ASK_P,
    ASK_COUNT
};
static const char *const ask_words[] = {"T,p", "rho,T", "rho,u", "p,h",  "p,s",
                                        "T,x", "p,x",   "sat T", "sat p"};

static int ask(const struct fluid *fluid, enum ask what, double a, double b,
               enum fluid_phase phase, struct fluid_state *out, struct error *err)
{
    struct fluid_saturation line;
    int code;
    switch (what) {
    case ASK_TP:
        return fluid_at_tp(fluid, a, b, phase, out, err);
    case ASK_RHOT:
        return fluid_at_rhot(fluid, a, b, out, err);
    case ASK_RHOU:
        return fluid_at_rhou(fluid, a, b, out, err);
    case ASK_PH:
        return fluid_at_ph(fluid, a, b, out, err);
    case ASK_PS:
        return fluid_at_ps(fluid, a, b, out, err);
    case ASK_TX:
        return fluid_at_tx(fluid, a, b, out, err);
    case ASK_PX:
        return fluid_at_px(fluid, a, b, out, err);
    case ASK_T:
    case ASK_P:
    case ASK_COUNT:
        break;
    }
    code = what == ASK_T ? fluid_saturation_at_t(fluid, a, &line, err)
                         : fluid_saturation_at_p(fluid, a, &line, err);
    if (code == 0)
        *out = b > 0.5 ? line.vapour : line.liquid;
    return code;
}

static bool all_finite(const struct fluid_state *s)
{
    return isfinite(s->temperature_k) && isfinite(s->pressure_pa) &&
           isfinite(s->density_kg_m3) && isfinite(s->enthalpy_j_kg) &&
           isfinite(s->entropy_j_kg_k) && isfinite(s->internal_energy_j_kg) &&
           isfinite(s->cp_j_kg_k) && isfinite(s->cv_j_kg_k) && isfinite(s->sound_speed_m_s) &&
           isfinite(s->dp_dt_pa_k) && isfinite(s->dp_drho_pa_m3_kg) &&
           s->vapour_fraction >= 0 && s->vapour_fraction <= 1;
}

static int calls, answers;

/* An answer that is sound, or a refusal that says why and touches nothing. true: answered. */
static bool sound(const struct fluid *fluid, enum ask what, double a, double b,
                  enum fluid_phase phase, struct fluid_state *out)
{
    struct fluid_state state, before;
    struct error err = {0};
    memset(&state, 0x5a, sizeof(state));
    before = state;
    calls++;
    int code = ask(fluid, what, a, b, phase, &state, &err);
    if (code != 0) {
        if (code != ERR_RANGE || err.code != code || strlen(err.text) < 20 ||
            strstr(err.text, fluid_name(fluid)) == NULL ||
            memcmp(&state, &before, sizeof(state)) != 0)
            fail_msg("%s %s of %.17g, %.17g: code %d '%s'%s", fluid_name(fluid),
                     ask_words[what], a, b, code, err.text,
                     memcmp(&state, &before, sizeof(state)) != 0 ? ", output touched" : "");
        return false;
    }
    answers++;
    const struct fluid_limits *limits = fluid_limits(fluid);
    if (!all_finite(&state) || !(state.density_kg_m3 > 0 && state.pressure_pa > 0) ||
        state.temperature_k < limits->triple_temperature_k ||
        state.temperature_k > limits->max_temperature_k ||
        state.pressure_pa > limits->max_pressure_pa * (1 + 1e-12))
        fail_msg("%s %s of %.17g, %.17g: %.9g K, %.9g Pa, %.9g kg/m3", fluid_name(fluid),
                 ask_words[what], a, b, state.temperature_k, state.pressure_pa,
                 state.density_kg_m3);
    *out = state;
    return true;
}

/* The state's density and temperature alone give its pressure back, and what was asked for
 * stands in it. */
static void reproduces(const struct fluid *fluid, enum ask what, double a, double b,
                       const struct fluid_state *s)
{
    struct fluid_state again;
    struct error err = {0};
    double t = s->temperature_k, rho = s->density_kg_m3, r = entropy_scale(fluid);
    /* A demanded phase may be metastable; by density and temperature it would be two phases. */
    bool stable = what != ASK_TP;
    /* At the limit of pressure a last digit is beyond it. */
    stable = stable && s->pressure_pa < fluid_limits(fluid)->max_pressure_pa * (1 - 1e-9);
    if (stable) {
        if (fluid_at_rhot(fluid, rho, t, &again, &err) != 0)
            fail_msg("%s %s of %.17g, %.17g: %s", fluid_name(fluid), ask_words[what], a, b,
                     err.text);
        /* Where pressure hardly depends on density, energies are as loose as density. */
        double stiff = rho * s->dp_drho_pa_m3_kg + s->pressure_pa + 1e-3 * rho * r * t;
        if (!(fabs(again.pressure_pa - s->pressure_pa) <= 1e-9 * stiff))
            fail_msg("%s %s of %.17g, %.17g: %.15g Pa, by density and temperature %.15g Pa",
                     fluid_name(fluid), ask_words[what], a, b, s->pressure_pa,
                     again.pressure_pa);
    }
    double given[2] = {a, b}, holds[2] = {0, 0}, scale[2] = {a, fabs(b)};
    switch (what) {
    case ASK_TP:
        holds[0] = t;
        holds[1] = s->pressure_pa;
        break;
    case ASK_RHOT:
        holds[0] = rho;
        holds[1] = t;
        break;
    case ASK_RHOU:
        holds[0] = rho;
        holds[1] = s->internal_energy_j_kg;
        scale[1] = energy_scale(fluid, t);
        break;
    case ASK_PH:
        holds[0] = s->pressure_pa;
        holds[1] = s->enthalpy_j_kg;
        scale[1] = energy_scale(fluid, t) + s->cp_j_kg_k * t;
        break;
    case ASK_PS:
        holds[0] = s->pressure_pa;
        holds[1] = s->entropy_j_kg_k;
        scale[1] = r + s->cp_j_kg_k;
        break;
    case ASK_TX:
        holds[0] = t;
        holds[1] = s->vapour_fraction;
        scale[1] = 1;
        break;
    case ASK_PX:
        holds[0] = s->pressure_pa;
        holds[1] = s->vapour_fraction;
        scale[1] = 1;
        break;
    case ASK_T:
    case ASK_P:
    case ASK_COUNT:
        holds[0] = what == ASK_T ? t : s->pressure_pa;
        holds[1] = b;
        break;
    }
    for (int i = 0; i < 2; i++)
        /* The published critical pressure is rounded by up to 1e-4; the state holds its own. */
        if (!(fabs(holds[i] - given[i]) <= 1e-9 * scale[i]) &&
            !(i == 0 && (what == ASK_P || what == ASK_PX) &&
              fabs(given[0] / fluid_limits(fluid)->critical_pressure_pa - 1) < 1e-4))
            fail_msg("%s %s of %.17g, %.17g: the state has %.15g", fluid_name(fluid),
                     ask_words[what], a, b, holds[i]);
}

static void test_senseless_numbers_are_refused_with_a_sentence(void **state)
{
    (void)state;
    static const double numbers[] = {0,     -0.0,        -1,        -1e300,   1e-320,
                                     1e300, (double)NAN, -HUGE_VAL, HUGE_VAL, 90,
                                     1e5,   0.5,         2e9,       1e-9};
    int refused = 0;
    for (size_t f = 0; f < fluid_count(); f++) {
        for (int what = 0; what < ASK_COUNT; what++) {
            for (size_t i = 0; i < ARRAY_LENGTH(numbers); i++) {
                for (size_t k = 0; k < ARRAY_LENGTH(numbers); k++) {
                    struct fluid_state s;
                    bool answered = sound(fluid_at(f), (enum ask)what, numbers[i], numbers[k],
                                          FLUID_PHASE_ANY, &s);
                    refused += !answered;
                    /* Nothing senseless is ever answered. */
                    bool senseless = !(numbers[i] > 0) || numbers[i] > 1e200 ||
                                     isnan(numbers[k]) || isinf(numbers[k]) ||
                                     (what == ASK_TP && !(numbers[k] > 0));
                    if (answered && senseless && what != ASK_T && what != ASK_P)
                        fail_msg("%s %s of %g, %g was answered", fluid_name(fluid_at(f)),
                                 ask_words[what], numbers[i], numbers[k]);
                }
            }
        }
    }
    assert_true(refused > 1000);
}

static void test_below_the_triple_point_and_above_the_limits_nothing_is_told(void **state)
{
    (void)state;
    for (size_t f = 0; f < fluid_count(); f++) {
        const struct fluid *fluid = fluid_at(f);
        const struct fluid_limits *l = fluid_limits(fluid);
        double t3 = l->triple_temperature_k, tc = l->critical_temperature_k;
        struct fluid_state s;
        struct error err = {0};
        assert_false(sound(fluid, ASK_TP, t3 * (1 - 1e-9), 1, FLUID_PHASE_ANY, &s));
        assert_false(sound(fluid, ASK_T, t3 * (1 - 1e-9), 0, FLUID_PHASE_ANY, &s));
        assert_false(sound(fluid, ASK_P, l->triple_pressure_pa * 0.99, 0, FLUID_PHASE_ANY, &s));
        assert_false(sound(fluid, ASK_T, tc * (1 + 1e-9), 0, FLUID_PHASE_ANY, &s));
        assert_false(
            sound(fluid, ASK_P, l->critical_pressure_pa * 1.001, 0, FLUID_PHASE_ANY, &s));
        assert_false(
            sound(fluid, ASK_TP, l->max_temperature_k * (1 + 1e-9), 1e5, FLUID_PHASE_ANY, &s));
        assert_false(sound(fluid, ASK_TP, l->max_temperature_k, l->max_pressure_pa * (1 + 1e-9),
                           FLUID_PHASE_ANY, &s));
        assert_true(sound(fluid, ASK_TP, l->max_temperature_k, l->max_pressure_pa,
                          FLUID_PHASE_ANY, &s));
        assert_true(sound(fluid, ASK_TP, t3, 1, FLUID_PHASE_ANY, &s));
        assert_true(sound(fluid, ASK_T, t3, 0, FLUID_PHASE_ANY, &s));
        /* The sentence says which limit. */
        assert_int_equal(fluid_at_tp(fluid, t3 / 2, 1e5, FLUID_PHASE_ANY, &s, &err), ERR_RANGE);
        assert_non_null(strstr(err.text, "triple"));
        assert_int_equal(
            fluid_at_tp(fluid, 2 * l->max_temperature_k, 1e5, FLUID_PHASE_ANY, &s, &err),
            ERR_RANGE);
        assert_non_null(strstr(err.text, "limit"));
        assert_int_equal(fluid_saturation_at_p(fluid, 2 * l->critical_pressure_pa, NULL, &err),
                         ERR_RANGE);
        assert_non_null(strstr(err.text, "critical"));
    }
}

static void test_the_solid_is_refused_as_solid(void **state)
{
    (void)state;
    for (size_t f = 0; f < fluid_count(); f++) {
        const struct fluid *fluid = fluid_at(f);
        const struct fluid_limits *l = fluid_limits(fluid);
        struct fluid_state s;
        struct error err = {0};
        if (strcmp(fluid_name(fluid), "xenon") == 0)
            continue; /* no melting line is at hand: docs/fluids.md */
        /* Every melting line of these fluids leaves the triple point with at most some ten
         * MPa/K, so 70 MPa half a kelvin above it is far in the solid. */
        double t = l->triple_temperature_k + 0.5, p = 7e7;
        assert_int_equal(fluid_at_tp(fluid, t, p, FLUID_PHASE_ANY, &s, &err), ERR_RANGE);
        if (strstr(err.text, "solid") == NULL)
            fail_msg("%s", err.text);
        struct fluid_saturation line;
        assert_int_equal(fluid_saturation_at_t(fluid, t, &line, NULL), 0);
        assert_int_equal(fluid_at_rhot(fluid, 1.5 * line.liquid.density_kg_m3, t, &s, &err),
                         ERR_RANGE);
        assert_int_equal(fluid_at_rhou(fluid, 1.5 * line.liquid.density_kg_m3,
                                       line.liquid.internal_energy_j_kg, &s, &err),
                         ERR_RANGE);
        /* Its enthalpy at that pressure, colder than the liquid could be. */
        assert_int_equal(
            fluid_at_ph(fluid, p, line.liquid.enthalpy_j_kg - energy_scale(fluid, t), &s, &err),
            ERR_RANGE);
    }
}

static void test_up_to_the_critical_point_answers_stay_sound(void **state)
{
    (void)state;
    static const double signs[] = {-1, 1};
    for (size_t f = 0; f < fluid_count(); f++) {
        const struct fluid *fluid = fluid_at(f);
        const struct fluid_limits *l = fluid_limits(fluid);
        double tc = l->critical_temperature_k, pc = l->critical_pressure_pa;
        double rhoc = l->critical_density_kg_m3, last_apart = HUGE_VAL;
        struct fluid_state s, at;
        assert_true(sound(fluid, ASK_T, tc, 0, FLUID_PHASE_ANY, &at));
        /* The equations' own critical points differ a little from the published figures. */
        assert_true(fabs(at.density_kg_m3 / rhoc - 1) < 0.06);
        assert_true(fabs(at.pressure_pa / pc - 1) < 2e-4);
        assert_true(sound(fluid, ASK_P, pc, 0, FLUID_PHASE_ANY, &s));
        assert_true(sound(fluid, ASK_TP, tc, pc, FLUID_PHASE_ANY, &s));
        assert_true(sound(fluid, ASK_RHOT, rhoc, tc, FLUID_PHASE_ANY, &s));
        for (double e = 1e-3; e > 1e-16; e *= 0.5) {
            struct fluid_state liquid, vapour;
            assert_true(sound(fluid, ASK_T, tc * (1 - e), 0, FLUID_PHASE_ANY, &liquid));
            assert_true(sound(fluid, ASK_T, tc * (1 - e), 1, FLUID_PHASE_ANY, &vapour));
            double apart = liquid.density_kg_m3 - vapour.density_kg_m3;
            if (!(apart >= 0 && apart <= last_apart + 1e-6 * rhoc))
                fail_msg("%s, %g below the critical temperature: densities %.9g apart, "
                         "further from it %.9g",
                         fluid_name(fluid), e, apart, last_apart);
            last_apart = apart;
            for (size_t i = 0; i < 2; i++) {
                for (size_t k = 0; k < 2; k++) {
                    double t = tc * (1 + signs[i] * e), p = pc * (1 + signs[k] * e);
                    if (!sound(fluid, ASK_TP, t, p, FLUID_PHASE_ANY, &s))
                        fail_msg("%s: no state at %.17g K, %.17g Pa", fluid_name(fluid), t, p);
                    reproduces(fluid, ASK_TP, t, p, &s);
                    double h = s.enthalpy_j_kg, entropy = s.entropy_j_kg_k;
                    if (!sound(fluid, ASK_PH, p, h, FLUID_PHASE_ANY, &s))
                        fail_msg("%s: no state at %.17g Pa, %.17g J/kg", fluid_name(fluid), p,
                                 h);
                    assert_true(fabs(s.temperature_k / t - 1) < 1e-6);
                    if (!sound(fluid, ASK_PS, p, entropy, FLUID_PHASE_ANY, &s))
                        fail_msg("%s: no state at %.17g Pa, s %.17g", fluid_name(fluid), p,
                                 entropy);
                    assert_true(fabs(s.temperature_k / t - 1) < 1e-6);
                    double rho = rhoc * (1 + signs[k] * e);
                    assert_true(sound(fluid, ASK_RHOT, rho, t, FLUID_PHASE_ANY, &s));
                    double u = s.internal_energy_j_kg;
                    if (!sound(fluid, ASK_RHOU, rho, u, FLUID_PHASE_ANY, &s))
                        fail_msg("%s: no state at %.17g kg/m3, %.17g J/kg", fluid_name(fluid),
                                 rho, u);
                    if (!(fabs(s.temperature_k / t - 1) < 1e-7))
                        fail_msg("%s: %.17g kg/m3, %.17g J/kg: %.15g K came back as %.15g K",
                                 fluid_name(fluid), rho, u, t, s.temperature_k);
                }
            }
        }
    }
}

/* ---- fuzz -------------------------------------------------------------------------------- */

static uint64_t seed = 20240229;
static double uniform(void) /* xorshift64*: Vigna, ACM Trans. Math. Softw. 42 (2016) 30 */
{
    seed ^= seed >> 12;
    seed ^= seed << 25;
    seed ^= seed >> 27;
    return (double)((seed * UINT64_C(2685821657736338717)) >> 11) * 0x1p-53;
}
static double between(double low, double high)
{
    return low * pow(high / low, uniform());
}

/* Mostly within the validity, often at or beside its ends, sometimes far out. */
static double some(double low, double middle, double high)
{
    double kind = uniform(), small = pow(10, -16 * uniform());
    if (kind < 0.7)
        return between(low, high);
    if (kind < 0.8)
        return middle * (1 + (uniform() < 0.5 ? -small : small));
    if (kind < 0.86)
        return low * (1 + (uniform() < 0.5 ? -small : small));
    if (kind < 0.92)
        return high * (1 + (uniform() < 0.5 ? -small : small));
    if (kind < 0.97)
        return middle * pow(10, 20 * (uniform() - 0.5));
    return kind < 0.98 ? 0 : kind < 0.985 ? -middle : kind < 0.99 ? (double)NAN : HUGE_VAL;
}

static void fuzz_one(const struct fluid *fluid, enum ask what)
{
    const struct fluid_limits *l = fluid_limits(fluid);
    double t = some(l->triple_temperature_k, l->critical_temperature_k, l->max_temperature_k);
    double p = some(l->triple_pressure_pa * 1e-3, l->critical_pressure_pa, l->max_pressure_pa);
    double rho = some(l->critical_density_kg_m3 * 1e-6, l->critical_density_kg_m3,
                      l->critical_density_kg_m3 * 4);
    if (what == ASK_TX || what == ASK_T) /* temperatures that have a line */
        t = some(l->triple_temperature_k, l->critical_temperature_k, l->critical_temperature_k);
    if (what == ASK_PX || what == ASK_P)
        p = some(l->triple_pressure_pa, l->critical_pressure_pa, l->critical_pressure_pa);
    double h = energy_scale(fluid, 0) * (24 * uniform() - 12);
    double s = entropy_scale(fluid) * (60 * uniform() - 20);
    double x = uniform() < 0.9 ? uniform() : 3 * uniform() - 1;
    const double inputs[ASK_COUNT][2] = {
        [ASK_TP] = {t,   p},
          [ASK_RHOT] = {rho, t},
          [ASK_RHOU] = {rho, h},
        [ASK_PH] = {p,   h},
          [ASK_PS] = {p,   s},
          [ASK_TX] = {t,   x},
        [ASK_PX] = {p,   x},
          [ASK_T] = {t,   x},
          [ASK_P] = {p,   x}
    };
    enum fluid_phase phase = FLUID_PHASE_ANY;
    if (uniform() < 0.5)
        phase = uniform() < 0.5 ? FLUID_PHASE_LIQUID : FLUID_PHASE_VAPOUR;
    struct fluid_state found;
    double a = inputs[what][0], b = inputs[what][1];
    if (!sound(fluid, what, a, b, phase, &found))
        return;
    reproduces(fluid, what, a, b, &found);
    double value = 0;
    struct error err = {0};
    int code = fluid_viscosity(fluid, &found, &value, &err);
    assert_true(code == 0 ? isfinite(value) : value == 0 && err.text[0] != '\0');
    code = fluid_conductivity(fluid, &found, &value, &err);
    if (!(code == 0 ? isfinite(value) : err.text[0] != '\0'))
        fail_msg("%s: conductivity %g at %.17g K, %.17g Pa", fluid_name(fluid), value,
                 found.temperature_k, found.pressure_pa);
    code = fluid_surface_tension(fluid, found.temperature_k, &value, &err);
    if (!(code == 0 ? isfinite(value) && value >= 0 : err.text[0] != '\0'))
        fail_msg("%s: surface tension %g at %.17g K", fluid_name(fluid), value,
                 found.temperature_k);
    code = fluid_du_dp(fluid, found.density_kg_m3, found.pressure_pa, &value, &err);
    if (!(code == 0 ? isfinite(value) : err.text[0] != '\0'))
        fail_msg("%s: du/dp %g at %.17g kg/m3, %.17g Pa", fluid_name(fluid), value,
                 found.density_kg_m3, found.pressure_pa);
}

static double processor_s(void)
{
    struct timespec now;
    clock_gettime(CLOCK_PROCESS_CPUTIME_ID, &now);
    return (double)now.tv_sec + 1e-9 * (double)now.tv_nsec;
}

static void test_two_hundred_thousand_random_calls_are_sound_and_none_hangs(void **state)
{
    (void)state;
    enum { CALLS = 200000 };
    calls = answers = 0;
    double began = processor_s(), slowest = 0;
    while (calls < CALLS) {
        double before = processor_s();
        fuzz_one(fluid_at((size_t)calls % fluid_count()),
                 (enum ask)((size_t)calls / fluid_count() % ASK_COUNT));
        double took = processor_s() - before;
        if (took > slowest)
            slowest = took;
    }
    double speed = CALLS / (processor_s() - began);
    print_message("%d calls, %d answered, %.0f a second, slowest %.1f ms\n", calls, answers,
                  speed, slowest * 1e3);
    assert_true(answers > CALLS / 4);
    /* Under the sanitizers some thousand a second, else some ten thousand. */
    assert_true(speed > 2000);
    assert_true(slowest < 0.5);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_senseless_numbers_are_refused_with_a_sentence),
        cmocka_unit_test(test_below_the_triple_point_and_above_the_limits_nothing_is_told),
        cmocka_unit_test(test_the_solid_is_refused_as_solid),
        cmocka_unit_test(test_up_to_the_critical_point_answers_stay_sound),
        cmocka_unit_test(test_two_hundred_thousand_random_calls_are_sound_and_none_hangs),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
