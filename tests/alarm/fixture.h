/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * A small plant built by hand for the tests of the alarm room: a pressure, a running bit, three
 * oxygen monitors in one hall, a derived heat load, and as many alarms as a test asks for.
 */
#ifndef ULLAGE_TEST_ALARM_FIXTURE_H
#define ULLAGE_TEST_ALARM_FIXTURE_H

#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "ullage/alarm.h"

enum { PT, XS, AT_401, AT_402, AT_403, POINTS };
enum { HEAT_LOAD = POINTS, OXYGEN_LOWEST, TAGS };
enum { ALARMS_MAX = 40, HALLS_MAX = 2 };

struct rig {
    struct plant plant;
    struct point point[POINTS];
    struct derived derived[TAGS - POINTS];
    struct hall hall[HALLS_MAX];
    struct alarm alarm[ALARMS_MAX];
    struct alarm_input input[ALARMS_MAX];
    struct alarm_set *set;
    struct journal_step journal;
    int64_t utc_ns;
};

static inline struct unit rig_unit(const char *symbol)
{
    struct unit unit = {0};
    struct error err = {0};
    if (*symbol == '\0')
        unit.dimension = DIMENSION_BIT;
    else
        assert_int_equal(unit_parse(symbol, &unit, &err), 0);
    return unit;
}

static inline struct ref rig_ref(int tag)
{
    return (struct ref){.kind = REF_TAG, .tag = tag};
}

static inline void rig_init(struct rig *rig)
{
    memset(rig, 0, sizeof(*rig));
    static const char *const names[] = {"PT-101", "XS-401", "AT-401", "AT-402", "AT-403"};
    static const char *const units[] = {"kPa(g)", "", "%", "%", "%"};
    for (int i = 0; i < POINTS; i++)
        rig->point[i] = (struct point){.name = names[i], .unit = rig_unit(units[i])};
    rig->derived[0] = (struct derived){.name = "store.heat_load",
                                       .kind = THING_VESSEL,
                                       .id = DERIVED_VESSEL_HEAT_LOAD,
                                       .unit = rig_unit("W")};
    rig->derived[1] = (struct derived){.name = "cold-hall.oxygen_lowest",
                                       .kind = THING_HALL,
                                       .id = DERIVED_HALL_OXYGEN_LOWEST,
                                       .unit = rig_unit("%")};
    for (int i = 0; i < TAGS - POINTS; i++)
        rig->derived[i].shown = rig->derived[i].unit;
    /* OSHA 29 CFR 1910.146: deficient below 19.5 %; 18 % evacuate: common practice,
     * methods 7.6.
     */
    rig->hall[0] = (struct hall){
        .name = "cold-hall",
        .oxygen = {.count = 3, .at = {rig_ref(AT_401), rig_ref(AT_402), rig_ref(AT_403)}},
        .action_count = 2,
        .action_level = {0.195,      0.18                                                     },
    };
    rig->hall[1] = rig->hall[0];
    rig->hall[1].name = "gallery";
    rig->plant = (struct plant){
        .site = {.name = "Tarn Hollow cold store", .frame_s = 1},
        .point_count = POINTS,
        .derived_count = TAGS - POINTS,
        .point = rig->point,
        .derived = rig->derived,
        .hall = rig->hall,
        .alarm = rig->alarm,
    };
    rig->utc_ns = INT64_C(1796083200) * NS_PER_S;
}

/* An alarm above 14 kPa(g), deadband 0.5 kPa, no delays; the test changes what it wants. */
static inline struct alarm *rig_alarm(struct rig *rig, const char *name)
{
    struct alarm *alarm = &rig->alarm[rig->plant.alarm_count++];
    *alarm = (struct alarm){
        .name = name,
        .place = {.file = "test.ini", .line = 7},
        .watch = PT,
        .condition = ALARM_ABOVE,
        .high = 14e3,
        .limit_gauge = true,
        .deadband = 500,
        .priority = 2,
    };
    return alarm;
}

static inline void rig_start(struct rig *rig)
{
    struct error err = {0};
    assert_int_equal(alarm_set_create(&rig->plant, &rig->set, &err), 0);
    for (int i = 0; i < rig->plant.alarm_count; i++)
        rig->input[i].quantity = quantity_good(0, 0);
}

static inline void rig_done(struct rig *rig)
{
    alarm_set_free(rig->set);
    rig->set = NULL;
}

/* One frame, after_s seconds later; the journal holds what that frame wrote. */
static inline void rig_step(struct rig *rig, double after_s)
{
    rig->utc_ns += time_s_to_ns(after_s);
    rig->journal.count = rig->journal.dropped = 0;
    alarm_step(rig->set, rig->utc_ns, rig->input, &rig->journal);
}

static inline void rig_feed(struct rig *rig, double after_s, double value)
{
    rig->input[0].quantity = quantity_good(value, 0);
    rig_step(rig, after_s);
}

static inline enum alarm_phase rig_phase(const struct rig *rig)
{
    return alarm_state(rig->set, 0)->phase;
}

#endif
