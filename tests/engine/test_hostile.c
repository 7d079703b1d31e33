/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Senseless readings: whatever arrives, results stay finite, a number that is not usable is
 * zero and gives its reason, and the engine finds back. Random by a fixed generator; the seed
 * is in the message of a failure.
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

static uint64_t state_of;

static double uniform(void)
{
    state_of = state_of * UINT64_C(6364136223846793005) + UINT64_C(1442695040888963407);
    return (double)(state_of >> 11) / 9007199254740992.0;
}

/* A value that a point of this dimension may show, likely or not. */
static double wild(const struct point *point)
{
    static const double extremes[] = {0,     1,     -1,   1e-12, 1e6,  -1e6, 1e15,
                                      -1e15, 1e300, 87.3, 110e3, 0.21, 1e-9, 300};
    if (point->unit.dimension == DIMENSION_BIT)
        return uniform() < 0.5;
    return uniform() < 0.5 ? extremes[(int)(uniform() * ARRAY_LENGTH(extremes))]
                           : (uniform() - 0.3) * pow(10, 12 * uniform() - 6);
}

static double likely(const struct point *point)
{
    switch ((int)point->unit.dimension) {
    case DIMENSION_PRESSURE:
        return (point->unit.gauge ? 0 : 98000) + 30000 * uniform();
    case DIMENSION_TEMPERATURE:
        return uniform() < 0.8 ? 86 + 4 * uniform() : 300 * uniform();
    case DIMENSION_LENGTH:
        return 6 * uniform();
    case DIMENSION_NUMBER:
        return uniform() < 0.5 ? 0.2 + 0.02 * uniform() : 1e-9 * uniform();
    case DIMENSION_BIT:
        return 1;
    default:
        return 0.1 * uniform();
    }
}

static void fill(struct rig *rig, double madness)
{
    for (int i = 0; i < rig->frame.count; i++) {
        const struct point *point = &rig->plant->point[i];
        double value = uniform() < madness ? wild(point) : likely(point);
        enum quality quality =
            uniform() < madness ? (enum quality)(uniform() * QUALITY_COUNT) : QUALITY_GOOD;
        bool none = quality == QUALITY_BAD || quality == QUALITY_MISSING;
        rig->frame.sample[i] =
            (struct sample){.value = none ? 0 : value,
                            .u = none ? 0 : point_uncertainty(point, value),
                            .quality = quality,
                            .cause = quality == QUALITY_GOOD ? CAUSE_NONE : CAUSE_OUT_OF_RANGE};
    }
}

static void expect_sound(const struct rig *rig, uint64_t seed, int step)
{
    const struct results *results = rig->results;
    for (int i = 0; i < results->derived_count; i++) {
        const struct derived_value *value = &results->derived[i];
        const struct quantity q = value->quantity;
        const char *name = rig->plant->derived[i].name;
        if (!isfinite(q.value) || !isfinite(q.u) || q.u < 0)
            fail_msg("seed %llu step %d: %s = %g +- %g", (unsigned long long)seed, step, name,
                     q.value, q.u);
        if (!quantity_usable(q) && (q.value != 0 || q.u != 0 || value->reason[0] == '\0'))
            fail_msg("seed %llu step %d: %s is %s, %g, '%s'", (unsigned long long)seed, step,
                     name, quality_word(q.quality), q.value, value->reason);
        if (q.quality == QUALITY_UNCERTAIN && value->reason[0] == '\0')
            fail_msg("seed %llu step %d: %s is uncertain without a reason",
                     (unsigned long long)seed, step, name);
    }
    for (int i = 0; i < results->ledger_count; i++) {
        const struct ledger *ledger = &results->ledger[i];
        const struct quantity of[] = {ledger->in, ledger->out, ledger->stored,
                                      ledger->unexplained};
        for (int k = 0; k < 4; k++)
            if (!isfinite(of[k].value) || !isfinite(of[k].u))
                fail_msg("seed %llu step %d: ledger %d", (unsigned long long)seed, step, i);
        bool settled = ledger->word <= LEDGER_FINDING;
        if (settled != quantity_usable(ledger->unexplained) && ledger->word != LEDGER_ABSENT)
            fail_msg("seed %llu step %d: ledger %d says %s with %s", (unsigned long long)seed,
                     step, i, ledger_word_text(ledger->word),
                     quality_word(ledger->unexplained.quality));
    }
}

static void test_senseless_readings_leave_sound_results(void **state)
{
    (void)state;
    static const char *const plants[] = {"tests/data/engine/tank.ini", "config/tarn-hollow.ini",
                                         "tests/data/e2e/dewar.ini"};
    static const double madness[] = {0.5, 0.05, 0.005, 0};
    for (size_t p = 0; p < ARRAY_LENGTH(plants); p++)
        for (size_t m = 0; m < ARRAY_LENGTH(madness); m++) {
            uint64_t seed = 1000 * p + m + 1;
            struct rig rig;
            state_of = seed;
            rig_open(&rig, plants[p]);
            for (int i = 0; i < 400; i++) {
                fill(&rig, madness[m]);
                rig_step(&rig, uniform() < 0.003 ? -50 : 20 * uniform() + 0.001);
                expect_sound(&rig, seed, i);
            }
            rig_close(&rig);
        }
}

static void test_the_engine_finds_back_to_good_after_nonsense(void **state)
{
    (void)state;
    struct rig rig;
    struct body body;
    state_of = 77;
    rig_open(&rig, "tests/data/engine/tank.ini");
    for (int i = 0; i < 200; i++) {
        fill(&rig, 0.7);
        rig_step(&rig, 10);
    }
    rig_quiet(&rig);
    body_fill(&body, 1000, 800, 112000);
    rig_step(&rig, 700); /* a pause: what stood before it is out of the window */
    for (int i = 0; i < 120; i++) {
        rig_tank(&rig, &body);
        rig_step(&rig, 10);
    }
    assert_near(rig_value(&rig, "tank.mass_unexplained"), 0, 1e-6);
    assert_near(rig_value(&rig, "tank.heat_load"), 0, 1);
    assert_near(rig_value(&rig, "room.release"), 0, 1e-9);
    rig_close(&rig);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_senseless_readings_leave_sound_results),
        cmocka_unit_test(test_the_engine_finds_back_to_good_after_nonsense),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
