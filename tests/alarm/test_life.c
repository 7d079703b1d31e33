/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The life cycle of an alarm. States and moves: ANSI/ISA-18.2 and IEC 62682 (normal, active
 * unacknowledged, active acknowledged, returned unacknowledged). That doubt raises and never
 * clears, and how journal entries read, is this project's own rule (alarm.h).
 */
#include "fixture.h"

#include <math.h>

/* ---- every event in every state
 * ----------------------------------------------------------- */

enum event {
    BEYOND,
    BETWEEN,
    BACK,
    DOUBT_BEYOND,
    DOUBT_BACK,
    STALE,
    BAD,
    MISSING,
    NO_NUMBER,
    ACK
};

static void bring_to(struct rig *rig, enum alarm_phase phase)
{
    struct error err = {0};
    rig_feed(rig, 1, 0);
    if (phase != ALARM_NORMAL)
        rig_feed(rig, 1, 15e3);
    if (phase == ALARM_ACKNOWLEDGED)
        assert_int_equal(
            alarm_acknowledge(rig->set, 0, rig->utc_ns, "mara", &rig->journal, &err), 0);
    if (phase == ALARM_RETURNED)
        rig_feed(rig, 1, 0);
    assert_int_equal(rig_phase(rig), phase);
}

static int apply(struct rig *rig, enum event event)
{
    struct quantity *q = &rig->input[0].quantity;
    struct error err = {0};
    switch (event) {
    case BEYOND:
        *q = quantity_good(14001, 0);
        break;
    case BETWEEN:
        *q = quantity_good(13501, 0);
        break;
    case BACK:
        *q = quantity_good(13500, 0);
        break;
    case DOUBT_BEYOND:
        *q = (struct quantity){.value = 14001, .quality = QUALITY_UNCERTAIN};
        break;
    case DOUBT_BACK:
        *q = (struct quantity){.value = 13500, .quality = QUALITY_UNCERTAIN};
        break;
    case STALE:
        *q = (struct quantity){.value = 99e3, .quality = QUALITY_STALE};
        break;
    case BAD:
        *q = quantity_none(QUALITY_BAD);
        break;
    case MISSING:
        *q = quantity_none(QUALITY_MISSING);
        break;
    case NO_NUMBER:
        *q = quantity_good((double)NAN, 0);
        break;
    case ACK:
        rig->journal.count = 0;
        return alarm_acknowledge(rig->set, 0, rig->utc_ns, "mara", &rig->journal, &err);
    }
    rig_step(rig, 1);
    return 0;
}

static void test_every_event_in_every_state_moves_as_the_standard_says(void **unused)
{
    (void)unused;
    static const struct {
        enum alarm_phase from;
        enum event event;
        enum alarm_phase to;
        bool unknown;
        const char *told; /* states of the entries, in order */
    } table[] = {
        {ALARM_NORMAL,       BEYOND,       ALARM_ACTIVE,       false, "active "             },
        {ALARM_NORMAL,       BETWEEN,      ALARM_NORMAL,       false, ""                    },
        {ALARM_NORMAL,       BACK,         ALARM_NORMAL,       false, ""                    },
        {ALARM_NORMAL,       DOUBT_BEYOND, ALARM_ACTIVE,       true,  "unknown active "     },
        {ALARM_NORMAL,       DOUBT_BACK,   ALARM_NORMAL,       true,  "unknown "            },
        {ALARM_NORMAL,       STALE,        ALARM_NORMAL,       true,  "unknown "            },
        {ALARM_NORMAL,       BAD,          ALARM_NORMAL,       true,  "unknown "            },
        {ALARM_NORMAL,       MISSING,      ALARM_NORMAL,       true,  "unknown "            },
        {ALARM_NORMAL,       NO_NUMBER,    ALARM_NORMAL,       true,  "unknown "            },
        {ALARM_ACTIVE,       BEYOND,       ALARM_ACTIVE,       false, ""                    },
        {ALARM_ACTIVE,       BETWEEN,      ALARM_ACTIVE,       false, ""                    },
        {ALARM_ACTIVE,       BACK,         ALARM_RETURNED,     false, "returned "           },
        {ALARM_ACTIVE,       DOUBT_BEYOND, ALARM_ACTIVE,       true,  "unknown "            },
        {ALARM_ACTIVE,       DOUBT_BACK,   ALARM_ACTIVE,       true,  "unknown "            },
        {ALARM_ACTIVE,       STALE,        ALARM_ACTIVE,       true,  "unknown "            },
        {ALARM_ACTIVE,       BAD,          ALARM_ACTIVE,       true,  "unknown "            },
        {ALARM_ACTIVE,       MISSING,      ALARM_ACTIVE,       true,  "unknown "            },
        {ALARM_ACTIVE,       NO_NUMBER,    ALARM_ACTIVE,       true,  "unknown "            },
        {ALARM_ACTIVE,       ACK,          ALARM_ACKNOWLEDGED, false, "acknowledged "       },
        {ALARM_ACKNOWLEDGED, BEYOND,       ALARM_ACKNOWLEDGED, false, ""                    },
        {ALARM_ACKNOWLEDGED, BETWEEN,      ALARM_ACKNOWLEDGED, false, ""                    },
        {ALARM_ACKNOWLEDGED, BACK,         ALARM_NORMAL,       false, "normal "             },
        {ALARM_ACKNOWLEDGED, DOUBT_BEYOND, ALARM_ACKNOWLEDGED, true,  "unknown "            },
        {ALARM_ACKNOWLEDGED, DOUBT_BACK,   ALARM_ACKNOWLEDGED, true,  "unknown "            },
        {ALARM_ACKNOWLEDGED, STALE,        ALARM_ACKNOWLEDGED, true,  "unknown "            },
        {ALARM_ACKNOWLEDGED, BAD,          ALARM_ACKNOWLEDGED, true,  "unknown "            },
        {ALARM_ACKNOWLEDGED, MISSING,      ALARM_ACKNOWLEDGED, true,  "unknown "            },
        {ALARM_ACKNOWLEDGED, NO_NUMBER,    ALARM_ACKNOWLEDGED, true,  "unknown "            },
        {ALARM_RETURNED,     BEYOND,       ALARM_ACTIVE,       false, "active "             },
        {ALARM_RETURNED,     BETWEEN,      ALARM_RETURNED,     false, ""                    },
        {ALARM_RETURNED,     BACK,         ALARM_RETURNED,     false, ""                    },
        {ALARM_RETURNED,     DOUBT_BEYOND, ALARM_ACTIVE,       true,  "unknown active "     },
        {ALARM_RETURNED,     DOUBT_BACK,   ALARM_RETURNED,     true,  "unknown "            },
        {ALARM_RETURNED,     STALE,        ALARM_RETURNED,     true,  "unknown "            },
        {ALARM_RETURNED,     BAD,          ALARM_RETURNED,     true,  "unknown "            },
        {ALARM_RETURNED,     MISSING,      ALARM_RETURNED,     true,  "unknown "            },
        {ALARM_RETURNED,     NO_NUMBER,    ALARM_RETURNED,     true,  "unknown "            },
        {ALARM_RETURNED,     ACK,          ALARM_NORMAL,       false, "acknowledged normal "},
    };
    for (size_t i = 0; i < ARRAY_LENGTH(table); i++) {
        struct rig rig;
        rig_init(&rig);
        rig_alarm(&rig, "store-pressure-high");
        rig_start(&rig);
        bring_to(&rig, table[i].from);
        assert_int_equal(apply(&rig, table[i].event), 0);
        char told[100] = "";
        for (int k = 0; k < rig.journal.count; k++) {
            assert_int_equal(rig.journal.at[k].kind, JOURNAL_ALARM);
            assert_int_equal(rig.journal.at[k].utc_ns, rig.utc_ns);
            assert_string_equal(rig.journal.at[k].subject, "store-pressure-high");
            snprintf(told + strlen(told), sizeof(told) - strlen(told), "%s ",
                     rig.journal.at[k].state);
        }
        if (rig_phase(&rig) != table[i].to ||
            alarm_state(rig.set, 0)->unknown != table[i].unknown ||
            strcmp(told, table[i].told) != 0)
            fail_msg("row %zu: %s, unknown %d, told '%s'", i, alarm_phase_word(rig_phase(&rig)),
                     alarm_state(rig.set, 0)->unknown, told);
        rig_done(&rig);
    }
}

static void test_what_cannot_be_acknowledged_says_why(void **unused)
{
    (void)unused;
    struct rig rig;
    struct error err = {0};
    rig_init(&rig);
    rig_alarm(&rig, "store-pressure-high");
    rig_start(&rig);
    bring_to(&rig, ALARM_NORMAL);
    rig.journal.count = 0;
    assert_int_equal(alarm_acknowledge(rig.set, 0, rig.utc_ns, "mara", &rig.journal, &err),
                     ERR_ARGUMENT);
    assert_non_null(strstr(err.text, "store-pressure-high is normal"));
    assert_int_equal(alarm_acknowledge(rig.set, 1, rig.utc_ns, "mara", &rig.journal, &err),
                     ERR_ARGUMENT);
    assert_non_null(strstr(err.text, "no alarm 1"));
    assert_int_equal(alarm_acknowledge(rig.set, -1, rig.utc_ns, "mara", &rig.journal, NULL),
                     ERR_ARGUMENT);
    rig_feed(&rig, 1, 15e3);
    assert_int_equal(alarm_acknowledge(rig.set, 0, rig.utc_ns, "", &rig.journal, &err),
                     ERR_ARGUMENT);
    assert_non_null(strstr(err.text, "user"));
    assert_int_equal(rig_phase(&rig), ALARM_ACTIVE);
    assert_int_equal(alarm_acknowledge(rig.set, 0, rig.utc_ns, "mara", &rig.journal, &err), 0);
    assert_string_equal(alarm_state(rig.set, 0)->user, "mara");
    assert_int_equal(alarm_acknowledge(rig.set, 0, rig.utc_ns, "ivo", &rig.journal, &err),
                     ERR_ARGUMENT);
    assert_non_null(strstr(err.text, "mara"));
    assert_null(alarm_state(rig.set, 1));
    rig_done(&rig);
}

static void test_a_new_activation_forgets_who_acknowledged_the_last(void **unused)
{
    (void)unused;
    struct rig rig;
    rig_init(&rig);
    rig_alarm(&rig, "store-pressure-high");
    rig_start(&rig);
    bring_to(&rig, ALARM_ACKNOWLEDGED);
    rig_feed(&rig, 1, 0);
    rig_feed(&rig, 1, 16e3);
    assert_string_equal(alarm_state(rig.set, 0)->user, "");
    assert_true(alarm_state(rig.set, 0)->value == 16e3);
    assert_int_equal(alarm_state(rig.set, 0)->active_utc_ns, rig.utc_ns);
    rig_done(&rig);
}

/* ---- conditions
 * -------------------------------------------------------------------------- */

static void test_each_condition_acts_beyond_its_limit_and_returns_by_its_deadband(void **unused)
{
    (void)unused;
    /* Values as they come in, and whether the alarm stands after each. */
    static const struct {
        enum alarm_condition condition;
        double low, high, deadband;
        double value[6];
        bool stands[6];
    } table[] = {
        {ALARM_ABOVE,   0,  10, 2, {10, 10.01, 9, 8.01, 8, 10},   {0, 1, 1, 1, 0, 0}},
        {ALARM_ABOVE,   0,  10, 0, {10, 11, 10, 11, 9, 11},       {0, 1, 0, 1, 0, 1}},
        {ALARM_BELOW,   10, 0,  2, {10, 9.99, 11, 11.99, 12, 10}, {0, 1, 1, 1, 0, 0}},
        {ALARM_OUTSIDE, 10, 20, 2, {20, 20.5, 19, 18, 9, 11.9},   {0, 1, 1, 0, 1, 1}},
        {ALARM_OUTSIDE, 10, 20, 2, {9, 12, 20.5, 18.5, 9, 12},    {1, 0, 1, 1, 1, 0}},
        {ALARM_IS_ON,   0,  0,  0, {0, 1, 1, 0, 1, 0},            {0, 1, 1, 0, 1, 0}},
        {ALARM_IS_OFF,  0,  0,  0, {1, 0, 0, 1, 0, 1},            {0, 1, 1, 0, 1, 0}},
    };
    for (size_t i = 0; i < ARRAY_LENGTH(table); i++) {
        struct rig rig;
        rig_init(&rig);
        struct alarm *alarm = rig_alarm(&rig, "a");
        alarm->condition = table[i].condition;
        alarm->low = table[i].low;
        alarm->high = table[i].high;
        alarm->deadband = table[i].deadband;
        rig_start(&rig);
        for (int k = 0; k < 6; k++) {
            rig_feed(&rig, 1, table[i].value[k]);
            if ((rig_phase(&rig) == ALARM_ACTIVE) != table[i].stands[k])
                fail_msg("row %zu, value %d (%g): %s", i, k, table[i].value[k],
                         alarm_phase_word(rig_phase(&rig)));
        }
        rig_done(&rig);
    }
}

static void test_is_bad_acts_on_every_reading_not_usable_and_is_never_unknown(void **unused)
{
    (void)unused;
    const struct {
        struct quantity quantity;
        bool bad;
    } table[] = {
        {{1, 0, QUALITY_GOOD},           false},
        {{1, 0, QUALITY_UNCERTAIN},      false},
        {{1, 0, QUALITY_STALE},          true },
        {{0, 0, QUALITY_BAD},            true },
        {{0, 0, QUALITY_MISSING},        true },
        {{(double)NAN, 0, QUALITY_GOOD}, true },
        {{HUGE_VAL, 0, QUALITY_GOOD},    true },
    };
    for (size_t i = 0; i < ARRAY_LENGTH(table); i++) {
        struct rig rig;
        rig_init(&rig);
        rig_alarm(&rig, "a")->condition = ALARM_IS_BAD;
        rig_start(&rig);
        rig.input[0].quantity = table[i].quantity;
        rig_step(&rig, 1);
        assert_int_equal(rig_phase(&rig), table[i].bad ? ALARM_ACTIVE : ALARM_NORMAL);
        assert_false(alarm_state(rig.set, 0)->unknown);
        assert_true(isfinite(alarm_state(rig.set, 0)->value));
        rig_done(&rig);
    }
}

static void
test_an_uncertain_balance_raises_nothing_but_low_oxygen_is_never_hidden(void **unused)
{
    (void)unused;
    struct rig rig;
    rig_init(&rig);
    struct alarm *heat = rig_alarm(&rig, "heat-high");
    heat->watch = HEAT_LOAD;
    heat->limit_gauge = false;
    struct alarm *oxygen = rig_alarm(&rig, "oxygen-low");
    oxygen->watch = OXYGEN_LOWEST;
    oxygen->condition = ALARM_BELOW;
    oxygen->low = 0.195;
    oxygen->deadband = 0.002;
    oxygen->limit_gauge = false;
    rig_start(&rig);
    rig.input[0].quantity = (struct quantity){20e3, 0, QUALITY_UNCERTAIN};
    rig.input[1].quantity = (struct quantity){0.17, 0, QUALITY_UNCERTAIN};
    rig_step(&rig, 1);
    assert_int_equal(alarm_state(rig.set, 0)->phase, ALARM_NORMAL);
    assert_true(alarm_state(rig.set, 0)->unknown);
    assert_int_equal(alarm_state(rig.set, 1)->phase, ALARM_ACTIVE);
    rig.input[1].quantity.value = 0.209;
    rig_step(&rig, 1);
    assert_int_equal(alarm_state(rig.set, 1)->phase, ALARM_ACTIVE);
    rig.input[1].quantity.quality = QUALITY_GOOD;
    rig_step(&rig, 1);
    assert_int_equal(alarm_state(rig.set, 1)->phase, ALARM_RETURNED);
    rig_done(&rig);
}

static void test_a_rate_acts_on_a_ramp_of_that_slope_at_any_frame_spacing(void **unused)
{
    (void)unused;
    /* The slope of a least-squares line through points on a line is that line's: exact, so a
     * ramp 1 % either side of the limit must be told apart. */
    static const struct {
        enum alarm_condition condition;
        double slope;
        bool acts;
    } table[] = {
        {ALARM_RISING_FASTER,  10.1,  true },
        {ALARM_RISING_FASTER,  9.9,   false},
        {ALARM_RISING_FASTER,  -10.1, false},
        {ALARM_FALLING_FASTER, -10.1, true },
        {ALARM_FALLING_FASTER, -9.9,  false},
        {ALARM_FALLING_FASTER, 10.1,  false},
    };
    static const double spacing_s[] = {1, 0.25, 3, 1.75};
    for (size_t i = 0; i < ARRAY_LENGTH(table); i++) {
        struct rig rig;
        rig_init(&rig);
        struct alarm *alarm = rig_alarm(&rig, "a");
        alarm->condition = table[i].condition;
        alarm->high = 10;
        alarm->deadband = 1;
        rig_start(&rig);
        double t = 0;
        for (int k = 0; k < 200; k++) {
            double after_s = spacing_s[k % 4];
            t += after_s;
            rig_feed(&rig, after_s, 5000 + table[i].slope * t);
            bool told = t - spacing_s[0] >= ALARM_RATE_TIME_S / 2.0;
            assert_int_equal(alarm_state(rig.set, 0)->unknown, !told);
            assert_int_equal(rig_phase(&rig),
                             told && table[i].acts ? ALARM_ACTIVE : ALARM_NORMAL);
        }
        rig_done(&rig);
    }
}

static void
test_a_rate_returns_by_its_deadband_and_always_when_the_reading_stands_still(void **unused)
{
    (void)unused;
    for (int wide = 0; wide < 2; wide++) {
        struct rig rig;
        rig_init(&rig);
        struct alarm *alarm = rig_alarm(&rig, "a");
        alarm->condition = ALARM_RISING_FASTER;
        alarm->high = 10;
        alarm->deadband = wide ? 500 : 40; /* Pa over 20 s: held to 5 Pa/s, or 2 Pa/s */
        rig_start(&rig);
        double value = 0;
        for (int k = 0; k < 30; k++)
            rig_feed(&rig, 1, value += 11);
        assert_int_equal(rig_phase(&rig), ALARM_ACTIVE);
        for (int k = 0; k < 300; k++) /* settles to a slope inside the deadband */
            rig_feed(&rig, 1, value += 9);
        assert_int_equal(rig_phase(&rig), ALARM_ACTIVE);
        for (int k = 0; k < 300; k++)
            rig_feed(&rig, 1, value);
        assert_int_equal(rig_phase(&rig), ALARM_RETURNED);
        rig_done(&rig);
    }
}

static void
test_a_rate_is_unknown_again_after_a_lost_reading_a_gap_and_a_clock_step(void **unused)
{
    (void)unused;
    for (int how = 0; how < 3; how++) {
        struct rig rig;
        rig_init(&rig);
        struct alarm *alarm = rig_alarm(&rig, "a");
        alarm->condition = ALARM_RISING_FASTER;
        alarm->high = 10;
        rig_start(&rig);
        for (int k = 0; k < 30; k++)
            rig_feed(&rig, 1, 5000);
        assert_false(alarm_state(rig.set, 0)->unknown);
        if (how == 0) {
            rig.input[0].quantity = quantity_none(QUALITY_BAD);
            rig_step(&rig, 1);
        }
        /* A jump of the value over the break is not a rate. */
        rig_feed(&rig, how == 1 ? 3600 : how == 2 ? -3600 : 1, 90000);
        assert_true(alarm_state(rig.set, 0)->unknown);
        for (int k = 0; k < 30; k++)
            rig_feed(&rig, 1, 90000);
        assert_false(alarm_state(rig.set, 0)->unknown);
        assert_int_equal(rig_phase(&rig), ALARM_NORMAL);
        rig_done(&rig);
    }
}

/* ---- delays
 * ------------------------------------------------------------------------------ */

static void test_delays_end_at_the_very_frame(void **unused)
{
    (void)unused;
    struct rig rig;
    rig_init(&rig);
    struct alarm *alarm = rig_alarm(&rig, "a");
    alarm->on_delay_s = 3;
    alarm->off_delay_s = 10;
    rig_start(&rig);
    rig_feed(&rig, 1, 0);
    rig_feed(&rig, 1, 15e3);
    rig_feed(&rig, 1, 15e3);
    rig_feed(&rig, 1.999999999, 15e3);
    assert_int_equal(rig_phase(&rig), ALARM_NORMAL); /* 2.999999999 s */
    rig_feed(&rig, 0.000000001, 15e3);
    assert_int_equal(rig_phase(&rig), ALARM_ACTIVE); /* 3 s */
    assert_int_equal(alarm_state(rig.set, 0)->since_utc_ns, rig.utc_ns);
    for (int k = 0; k < 10; k++) {
        rig_feed(&rig, 1, 0);
        assert_int_equal(rig_phase(&rig), ALARM_ACTIVE); /* back for 0 .. 9 s */
    }
    rig_feed(&rig, 1, 0);
    assert_int_equal(rig_phase(&rig), ALARM_RETURNED); /* 10 s */
    rig_done(&rig);
}

static void test_a_break_starts_a_delay_again(void **unused)
{
    (void)unused;
    static const struct quantity breaks[] = {
        {0,      0, QUALITY_GOOD     },
        {13.9e3, 0, QUALITY_GOOD     }, /* inside, within the deadband */
        {0,      0, QUALITY_BAD      },
        {15e3,   0, QUALITY_STALE    },
        {0,      0, QUALITY_MISSING  },
        {13e3,   0, QUALITY_UNCERTAIN},
    };
    for (size_t i = 0; i < ARRAY_LENGTH(breaks); i++) {
        struct rig rig;
        rig_init(&rig);
        struct alarm *alarm = rig_alarm(&rig, "a");
        alarm->on_delay_s = 3;
        rig_start(&rig);
        for (int k = 0; k < 3; k++)
            rig_feed(&rig, 1, 15e3);
        rig.input[0].quantity = breaks[i];
        rig_step(&rig, 1);
        for (int k = 0; k < 3; k++) {
            rig_feed(&rig, 1, 15e3);
            assert_int_equal(rig_phase(&rig), ALARM_NORMAL);
        }
        rig_feed(&rig, 1, 15e3);
        assert_int_equal(rig_phase(&rig), ALARM_ACTIVE);
        rig_done(&rig);
    }
}

static void test_acknowledging_does_not_start_a_pending_return_again(void **unused)
{
    (void)unused;
    struct rig rig;
    struct error err = {0};
    rig_init(&rig);
    rig_alarm(&rig, "a")->off_delay_s = 5;
    rig_start(&rig);
    rig_feed(&rig, 1, 15e3);
    for (int k = 0; k < 4; k++)
        rig_feed(&rig, 1, 0);
    assert_int_equal(alarm_acknowledge(rig.set, 0, rig.utc_ns, "mara", &rig.journal, &err), 0);
    rig_feed(&rig, 1, 0);
    assert_int_equal(rig_phase(&rig), ALARM_ACKNOWLEDGED);
    rig_feed(&rig, 1, 0);
    assert_int_equal(rig_phase(&rig), ALARM_NORMAL);
    rig_done(&rig);
}

static void test_a_clock_that_steps_back_restarts_delays_and_leaves_no_time_ahead(void **unused)
{
    (void)unused;
    struct rig rig;
    rig_init(&rig);
    rig_alarm(&rig, "a")->on_delay_s = 3;
    rig_alarm(&rig, "b");
    rig_start(&rig);
    rig.input[1].quantity = quantity_good(15e3, 0);
    rig_feed(&rig, 1, 15e3);
    rig_feed(&rig, 2, 15e3);
    rig_feed(&rig, -3600, 15e3);
    assert_int_equal(rig_phase(&rig), ALARM_NORMAL);
    assert_int_equal(alarm_state(rig.set, 1)->phase, ALARM_ACTIVE);
    assert_true(alarm_state(rig.set, 1)->since_utc_ns <= rig.utc_ns);
    assert_true(alarm_state(rig.set, 1)->active_utc_ns <= rig.utc_ns);
    rig_feed(&rig, 2.9, 15e3);
    assert_int_equal(rig_phase(&rig), ALARM_NORMAL);
    rig_feed(&rig, 0.1, 15e3);
    assert_int_equal(rig_phase(&rig), ALARM_ACTIVE);
    rig_done(&rig);
}

/* ---- journal and lists
 * ------------------------------------------------------------------- */

static void test_the_activation_entry_holds_value_limit_unit_and_priority(void **unused)
{
    (void)unused;
    struct rig rig;
    rig_init(&rig);
    struct alarm *alarm = rig_alarm(&rig, "store-pressure-high");
    alarm->consequence = "Relief valve lifts at 25 kPa(g)";
    rig_alarm(&rig, "store-pressure-absolute")->limit_gauge = false;
    struct alarm *fan = rig_alarm(&rig, "fan-off");
    fan->watch = XS;
    fan->condition = ALARM_IS_OFF;
    struct alarm *oxygen = rig_alarm(&rig, "oxygen-low");
    oxygen->watch = AT_402;
    oxygen->condition = ALARM_BELOW;
    oxygen->low = 0.195;
    oxygen->limit_gauge = false;
    rig_start(&rig);
    rig.input[0].quantity = quantity_good(14.34e3, 50);
    rig.input[1].quantity = quantity_good(115.66e3, 0);
    rig.input[2].quantity = quantity_good(0, 0);
    rig.input[3].quantity = quantity_good(0.17612, 0.001);
    rig_step(&rig, 1);
    assert_int_equal(rig.journal.count, 4);
    assert_int_equal(rig.journal.at[0].priority, 2);
    assert_string_equal(rig.journal.at[0].text,
                        "PT-101 14.34 kPa(g), alarm when above 14 kPa(g), priority 2: Relief "
                        "valve lifts at 25 kPa(g)");
    assert_string_equal(rig.journal.at[1].text,
                        "PT-101 115.66 kPa, alarm when above 14 kPa, priority 2");
    assert_string_equal(rig.journal.at[2].text, "XS-401 off, alarm when off, priority 2");
    assert_string_equal(rig.journal.at[3].text,
                        "AT-402 17.61 %, alarm when below 19.5 %, priority 2");
    rig_done(&rig);
}

static void test_unknown_is_told_once_and_once_when_known_again(void **unused)
{
    (void)unused;
    struct rig rig;
    rig_init(&rig);
    rig_alarm(&rig, "a");
    rig_start(&rig);
    rig_feed(&rig, 1, 15e3);
    rig.input[0].quantity = quantity_none(QUALITY_BAD);
    rig_step(&rig, 1);
    assert_int_equal(rig.journal.count, 1);
    assert_string_equal(rig.journal.at[0].state, "unknown");
    assert_non_null(strstr(rig.journal.at[0].text, "PT-101 is bad"));
    for (int k = 0; k < 5; k++) {
        rig.input[0].quantity = quantity_none(k % 2 ? QUALITY_MISSING : QUALITY_BAD);
        rig_step(&rig, 1);
        assert_int_equal(rig.journal.count, 0);
    }
    rig_feed(&rig, 1, 15e3);
    assert_int_equal(rig.journal.count, 1);
    assert_string_equal(rig.journal.at[0].state, "active");
    assert_memory_equal(rig.journal.at[0].text, "known again", 11);
    rig_done(&rig);
}

static void test_hostile_text_is_printable_in_the_journal_and_a_full_one_counts(void **unused)
{
    (void)unused;
    static struct journal_step step;
    step = (struct journal_step){0};
    journal_add(&step, 1, JOURNAL_NOTE, 0, "a\x1b[2J", "no\nte", "x\xff",
                "bell \a, \xc2\x9b 31m");
    assert_string_equal(step.at[0].subject, "a?[2J");
    assert_string_equal(step.at[0].state, "no?te");
    assert_string_equal(step.at[0].user, "x?");
    assert_string_equal(step.at[0].text, "bell ?, ? 31m");
    for (int i = 1; i < JOURNAL_STEP_MAX + 5; i++)
        journal_add(&step, i, JOURNAL_NOTE, 0, NULL, NULL, NULL, "x");
    assert_int_equal(step.count, JOURNAL_STEP_MAX);
    assert_int_equal(step.dropped, 5);
}

static void test_lists_are_in_order_of_class_priority_and_age(void **unused)
{
    (void)unused;
    struct rig rig;
    struct error err = {0};
    rig_init(&rig);
    static const char *const names[] = {"n1", "n2", "unk", "ack", "old3", "new3", "p1", "ret"};
    static const int priority[] = {3, 3, 4, 1, 3, 3, 1, 2};
    for (int i = 0; i < 8; i++)
        rig_alarm(&rig, names[i])->priority = priority[i];
    rig_start(&rig);
    rig_step(&rig, 1);
    rig.input[3].quantity = rig.input[4].quantity = rig.input[7].quantity =
        quantity_good(15e3, 0);
    rig_step(&rig, 1);
    rig.input[5].quantity = rig.input[6].quantity = quantity_good(15e3, 0);
    rig.input[7].quantity = quantity_good(0, 0);
    rig.input[2].quantity = quantity_none(QUALITY_BAD);
    rig_step(&rig, 1);
    assert_int_equal(alarm_acknowledge(rig.set, 3, rig.utc_ns, "mara", &rig.journal, &err), 0);
    assert_int_equal(alarm_unacknowledged(rig.set), 4);
    static const char *const expected[] = {"p1",  "ret", "new3", "old3",
                                           "ack", "unk", "n1",   "n2"};
    int order[8];
    alarm_order(rig.set, order);
    for (int i = 0; i < 8; i++)
        assert_string_equal(rig.alarm[order[i]].name, expected[i]);
    rig_done(&rig);
}

static void
test_an_alarm_that_could_never_act_or_return_is_refused_with_its_place(void **unused)
{
    (void)unused;
    for (int wrong = 0; wrong < 8; wrong++) {
        struct rig rig;
        struct error err = {0};
        rig_init(&rig);
        struct alarm *alarm = rig_alarm(&rig, "a");
        alarm->condition = ALARM_OUTSIDE;
        alarm->low = 13e3;
        switch (wrong) {
        case 0:
            alarm->watch = TAGS;
            break;
        case 1:
            alarm->deadband = -1;
            break;
        case 2:
            alarm->on_delay_s = (double)NAN;
            break;
        case 3:
            alarm->priority = 5;
            break;
        case 4:
            alarm->high = HUGE_VAL;
            break;
        case 5:
            alarm->low = 14e3;
            break;
        case 6: /* 13 .. 14 kPa(g) with 0.5 kPa on each side: only one point is back */
            break;
        default:
            alarm->off_delay_s = -1;
            break;
        }
        assert_int_equal(alarm_set_create(&rig.plant, &rig.set, &err), ERR_CONFIG);
        assert_non_null(strstr(err.text, "test.ini:7: alarm a "));
        assert_null(rig.set);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_every_event_in_every_state_moves_as_the_standard_says),
        cmocka_unit_test(test_what_cannot_be_acknowledged_says_why),
        cmocka_unit_test(test_a_new_activation_forgets_who_acknowledged_the_last),
        cmocka_unit_test(test_each_condition_acts_beyond_its_limit_and_returns_by_its_deadband),
        cmocka_unit_test(test_is_bad_acts_on_every_reading_not_usable_and_is_never_unknown),
        cmocka_unit_test(
            test_an_uncertain_balance_raises_nothing_but_low_oxygen_is_never_hidden),
        cmocka_unit_test(test_a_rate_acts_on_a_ramp_of_that_slope_at_any_frame_spacing),
        cmocka_unit_test(
            test_a_rate_returns_by_its_deadband_and_always_when_the_reading_stands_still),
        cmocka_unit_test(
            test_a_rate_is_unknown_again_after_a_lost_reading_a_gap_and_a_clock_step),
        cmocka_unit_test(test_delays_end_at_the_very_frame),
        cmocka_unit_test(test_a_break_starts_a_delay_again),
        cmocka_unit_test(test_acknowledging_does_not_start_a_pending_return_again),
        cmocka_unit_test(test_a_clock_that_steps_back_restarts_delays_and_leaves_no_time_ahead),
        cmocka_unit_test(test_the_activation_entry_holds_value_limit_unit_and_priority),
        cmocka_unit_test(test_unknown_is_told_once_and_once_when_known_again),
        cmocka_unit_test(test_hostile_text_is_printable_in_the_journal_and_a_full_one_counts),
        cmocka_unit_test(test_lists_are_in_order_of_class_priority_and_age),
        cmocka_unit_test(
            test_an_alarm_that_could_never_act_or_return_is_refused_with_its_place),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
