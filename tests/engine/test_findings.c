/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Findings in the journal: a loss of liquid from the tank is told once, with every explanation
 * that fits, closes when it has stopped, and is neither told nor closed on lost readings.
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

struct told {
    int opened, closed, others;
    char text[200];
};

static void listen(const struct rig *rig, struct told *told)
{
    for (int i = 0; i < rig->results->journal.count; i++) {
        const struct journal_entry *entry = &rig->results->journal.at[i];
        if (entry->kind != JOURNAL_FINDING)
            continue;
        if (strcmp(entry->subject, "MASS tank") != 0) {
            told->others++;
        } else if (strcmp(entry->state, "opened") == 0) {
            told->opened++;
            snprintf(told->text, sizeof(told->text), "%s", entry->text);
        } else {
            told->closed++;
        }
    }
}

/* Liquid leaves unmetered: mass and its enthalpy, so the heat balance is not
 * touched. A fixed ripple
 * stands for noise. */
static void leak(struct rig *rig, struct body *body, double leak_kg_s, int steps,
                 const char *lost, struct told *told)
{
    for (int i = 0; i < steps; i++) {
        body->mass_kg -= leak_kg_s * 10;
        body->energy_j -= leak_kg_s * 10 * body->line.liquid.enthalpy_j_kg;
        body->energy_j += 3000 * 10; /* the budget's heat */
        body_settle(body);
        rig_tank(rig, body);
        double ripple = (i * 7 % 11 - 5) / 5.0;
        rig_set(rig, "LT-1", body->liquid_m3 / 100 + 0.0007 * ripple);
        rig_set(rig, "TT-1", body->line.temperature_k + 0.01 * ripple);
        if (lost != NULL)
            rig_spoil(rig, lost, QUALITY_STALE);
        rig_step(rig, 10);
        listen(rig, told);
    }
}

static void test_a_loss_is_told_once_with_all_that_explains_it(void **state)
{
    (void)state;
    struct rig rig;
    struct body body;
    struct told told = {0};
    rig_open(&rig, "tests/data/engine/tank.ini");
    rig_quiet(&rig);
    body_fill(&body, 1000, 800, 112000);
    leak(&rig, &body, 0, 400, NULL, &told);
    assert_int_equal(told.opened + told.closed + told.others, 0);
    leak(&rig, &body, 0.5, 300, NULL, &told);
    assert_int_equal(told.opened, 1);
    assert_int_equal(told.closed, 0);
    assert_int_equal(told.others, 0);
    /* The true loss, a meter and the gauge that may lie. */
    assert_non_null(strstr(told.text, "lost"));
    assert_non_null(strstr(told.text, "LT-1"));
    assert_non_null(strstr(told.text, "FT-1"));
    assert_close(rig_value(&rig, "tank.mass_unexplained"), 0.5, 0.02);
    leak(&rig, &body, 0.5, 60, "LT-1", &told); /* blind: nothing is told, nothing closed */
    assert_int_equal(rig_ledger(&rig, LEDGER_MASS, 0)->word, LEDGER_BLIND);
    assert_int_equal(told.opened + told.closed, 1);
    leak(&rig, &body, 0, 800, NULL, &told);
    assert_int_equal(told.opened, 1);
    assert_int_equal(told.closed, 1);
    assert_int_equal(told.others, 0);
    rig_close(&rig);
}

static void test_a_gauge_that_jumps_is_no_lasting_finding(void **state)
{
    (void)state;
    struct rig rig;
    struct body body;
    struct told told = {0};
    rig_open(&rig, "tests/data/engine/tank.ini");
    rig_quiet(&rig);
    body_fill(&body, 1000, 800, 112000);
    leak(&rig, &body, 0, 400, NULL, &told);
    rig_set(&rig, "AT-1", 0.19); /* for half a minute only */
    for (int i = 0; i < 3; i++) {
        rig_step(&rig, 10);
        listen(&rig, &told);
    }
    rig_set(&rig, "AT-1", 0.2095);
    leak(&rig, &body, 0, 100, NULL, &told);
    assert_int_equal(told.opened + told.closed + told.others, 0);
    rig_close(&rig);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_a_loss_is_told_once_with_all_that_explains_it),
        cmocka_unit_test(test_a_gauge_that_jumps_is_no_lasting_finding),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
