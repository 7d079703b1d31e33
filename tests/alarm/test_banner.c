/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The safety banners in the situations an operator meets. Oxygen lines: 19.5 % is the legal
 * line (OSHA 29 CFR 1910.146, "oxygen deficient" below it); 18 % evacuate and "loss of reading
 * counts as deficient" are common practice (tests/data/methods, methods 7.6). The 0.1 % by
 * which clearing waits is common practice, no source.
 */
#include "fixture.h"

#include <math.h>

struct scene {
    struct rig rig;
    struct banner_list list;
    struct hall_safety hall[HALLS_MAX];
};

static struct hall_safety hall_reads(double oxygen)
{
    return (struct hall_safety){.known = true,
                                .any_usable = true,
                                .oxygen_lowest = oxygen,
                                .u_oxygen_lowest = 0.001,
                                .lowest_point = AT_402};
}

static void scene_init(struct scene *scene)
{
    memset(scene, 0, sizeof(*scene));
    rig_init(&scene->rig);
    scene->rig.plant.hall_count = 1;
    scene->rig.plant.site.rules =
        "Tarn Hollow cryogen rules, part 3, prevail over this display";
    scene->rig.plant.site.emergency = "Leave by the lit route, ring 2222 from the lobby";
    scene->hall[0] = scene->hall[1] = hall_reads(0.209);
}

/* A frame: the alarms, then the banners. */
static void scene_step(struct scene *scene)
{
    struct rig *rig = &scene->rig;
    rig_step(rig, 1);
    rig->journal.count = 0;
    banner_step(&scene->list, &rig->plant, rig->set, scene->hall, rig->utc_ns, &rig->journal);
    for (int i = 0; i < scene->list.count; i++) {
        char printable[sizeof(scene->list.at[i].text)];
        text_printable(printable, sizeof(printable), scene->list.at[i].text);
        assert_string_equal(printable, scene->list.at[i].text);
        assert_true(scene->list.at[i].text[0] != '\0');
        assert_null(strstr(scene->list.at[i].text, "nan"));
        assert_null(strstr(scene->list.at[i].text, "inf"));
        assert_true(scene->list.at[i].since_utc_ns <= rig->utc_ns);
    }
}

static void scene_oxygen(struct scene *scene, double oxygen)
{
    scene->hall[0] = hall_reads(oxygen);
    scene_step(scene);
}

static void expect_starts(const struct scene *scene, int index, enum banner_level level,
                          const char *start)
{
    assert_true(index < scene->list.count);
    assert_int_equal(scene->list.at[index].level, level);
    if (strncmp(scene->list.at[index].text, start, strlen(start)) != 0)
        fail_msg("banner %d is '%s', not '%s...'", index, scene->list.at[index].text, start);
}

static void test_a_good_hall_has_no_banner(void **unused)
{
    (void)unused;
    static struct scene scene;
    scene_init(&scene);
    rig_start(&scene.rig);
    scene_oxygen(&scene, 0.2095);
    scene_oxygen(&scene, 0.195); /* deficient is below 19.5 %, not at it */
    assert_int_equal(scene.list.count, 0);
    assert_int_equal(scene.rig.journal.count, 0);
    rig_done(&scene.rig);
}

static void test_the_lowest_level_passed_names_the_danger_in_the_sites_own_words(void **unused)
{
    (void)unused;
    static struct scene scene;
    scene_init(&scene);
    rig_start(&scene.rig);
    scene_oxygen(&scene, 0.194);
    assert_string_equal(
        scene.list.at[0].text,
        "OXYGEN BELOW 19.5 % IN cold-hall. Leave by the lit route, ring 2222 from "
        "the lobby. Tarn Hollow cryogen rules, part 3, prevail over this display. "
        "(AT-402 19.4 %)");
    int64_t since = scene.list.at[0].since_utc_ns;
    scene_oxygen(&scene, 0.176);
    assert_int_equal(scene.list.count, 1);
    assert_int_equal(scene.list.at[0].level, BANNER_DANGER);
    assert_string_equal(scene.list.at[0].subject, "cold-hall");
    assert_string_equal(
        scene.list.at[0].text,
        "OXYGEN BELOW 18 % IN cold-hall. Leave by the lit route, ring 2222 from "
        "the lobby. Tarn Hollow cryogen rules, part 3, prevail over this display. "
        "(AT-402 17.6 %)");
    assert_int_equal(scene.list.at[0].since_utc_ns, since);
    assert_int_equal(scene.rig.journal.count, 1); /* worse: shown anew, and nothing cleared */
    assert_int_equal(scene.rig.journal.at[0].kind, JOURNAL_BANNER);
    assert_string_equal(scene.rig.journal.at[0].state, "shown");
    assert_string_equal(scene.rig.journal.at[0].subject, "cold-hall");
    rig_done(&scene.rig);
}

static void test_uncertainty_never_softens_a_low_reading_nor_rounds_it_up(void **unused)
{
    (void)unused;
    static struct scene scene;
    scene_init(&scene);
    rig_start(&scene.rig);
    scene.hall[0] = hall_reads(0.19499);
    scene.hall[0].u_oxygen_lowest = 0.05;
    scene_step(&scene);
    expect_starts(&scene, 0, BANNER_DANGER, "OXYGEN BELOW 19.5 % IN cold-hall.");
    assert_non_null(strstr(scene.list.at[0].text, "(AT-402 19.499 %)"));
    rig_done(&scene.rig);
}

static void test_without_site_words_the_banner_defers_in_plain_ones(void **unused)
{
    (void)unused;
    static struct scene scene;
    scene_init(&scene);
    scene.rig.plant.site.rules = scene.rig.plant.site.emergency = NULL;
    rig_start(&scene.rig);
    scene_oxygen(&scene, 0.17);
    expect_starts(&scene, 0, BANNER_DANGER, "OXYGEN BELOW 18 % IN cold-hall. Leave");
    assert_non_null(strstr(scene.list.at[0].text, "Site rules, local codes"));
    assert_non_null(strstr(scene.list.at[0].text, "licensed practice prevail."));
    char line[200];
    banner_advisory(line, sizeof(line), &scene.rig.plant);
    assert_string_equal(line,
                        "ADVISORY ONLY. Site rules, local codes, licensed practice and fixed "
                        "hall alarms prevail.");
    rig_done(&scene.rig);
}

static void test_showing_is_at_once_and_only_clearing_waits_for_the_hysteresis(void **unused)
{
    (void)unused;
    static const struct {
        double oxygen;
        const char *shown; /* NULL: none */
    } table[] = {
        {0.1801, "OXYGEN BELOW 19.5 %"},
        {0.1799, "OXYGEN BELOW 18 %"  },
        {0.1805, "OXYGEN BELOW 18 %"  },
        {0.1811, "OXYGEN BELOW 19.5 %"},
        {0.1955, "OXYGEN BELOW 19.5 %"},
        {0.1961, NULL                 },
        {0.1955, NULL                 },
        {0.1949, "OXYGEN BELOW 19.5 %"},
        {0.209,  NULL                 },
        {0.10,   "OXYGEN BELOW 18 %"  },
        {0.1955, "OXYGEN BELOW 19.5 %"},
        {0.17,   "OXYGEN BELOW 18 %"  },
        {0.209,  NULL                 },
    };
    static struct scene scene;
    scene_init(&scene);
    rig_start(&scene.rig);
    for (size_t i = 0; i < ARRAY_LENGTH(table); i++) {
        scene_oxygen(&scene, table[i].oxygen);
        if (scene.list.count != (table[i].shown != NULL))
            fail_msg("row %zu: %d banners", i, scene.list.count);
        if (table[i].shown != NULL)
            expect_starts(&scene, 0, BANNER_DANGER, table[i].shown);
    }
    assert_string_equal(scene.rig.journal.at[0].state, "cleared");
    rig_done(&scene.rig);
}

static void test_all_monitors_lost_is_unknown_and_never_the_last_good_number(void **unused)
{
    (void)unused;
    static struct scene scene;
    scene_init(&scene);
    rig_start(&scene.rig);
    scene_oxygen(&scene, 0.209);
    scene.hall[0] = (struct hall_safety){.lost = 7, .lowest_point = -1, .oxygen_lowest = 0.209};
    scene_step(&scene);
    assert_int_equal(scene.list.count, 1);
    expect_starts(
        &scene, 0, BANNER_DANGER,
        "OXYGEN UNKNOWN IN cold-hall: treat the hall as deficient until site rules say "
        "otherwise.");
    assert_null(strstr(scene.list.at[0].text, "20.9"));
    /* A reading that is no number is no reading. */
    scene.hall[0] = hall_reads((double)NAN);
    scene_step(&scene);
    expect_starts(&scene, 0, BANNER_DANGER, "OXYGEN UNKNOWN IN cold-hall");
    scene_oxygen(&scene, 0.209);
    assert_int_equal(scene.list.count, 0);
    rig_done(&scene.rig);
}

static void test_one_monitor_lost_is_a_caution_that_names_it(void **unused)
{
    (void)unused;
    static struct scene scene;
    scene_init(&scene);
    rig_start(&scene.rig);
    scene.hall[0].known = false;
    scene.hall[0].lost = 4;
    scene_step(&scene);
    assert_int_equal(scene.list.count, 1);
    expect_starts(&scene, 0, BANNER_CAUTION, "OXYGEN MONITOR NOT GOOD IN cold-hall: AT-403.");
    scene.hall[0].lost = 5;
    scene_step(&scene);
    expect_starts(&scene, 0, BANNER_CAUTION,
                  "OXYGEN MONITOR NOT GOOD IN cold-hall: AT-401, AT-403.");
    /* Low on the others: both stand, danger first. */
    scene.hall[0].oxygen_lowest = 0.19;
    scene_step(&scene);
    assert_int_equal(scene.list.count, 2);
    expect_starts(&scene, 0, BANNER_DANGER, "OXYGEN BELOW 19.5 %");
    expect_starts(&scene, 1, BANNER_CAUTION, "OXYGEN MONITOR NOT GOOD");
    rig_done(&scene.rig);
}

static void test_losing_the_low_monitor_does_not_make_a_hall_look_better(void **unused)
{
    (void)unused;
    static struct scene scene;
    scene_init(&scene);
    rig_start(&scene.rig);
    scene_oxygen(&scene, 0.176);
    int64_t since = scene.list.at[0].since_utc_ns;
    /* AT-402 that read 17.6 % is lost; the others read well. */
    scene.hall[0] = hall_reads(0.207);
    scene.hall[0].lowest_point = AT_401;
    scene.hall[0].known = false;
    scene.hall[0].lost = 2;
    scene_step(&scene);
    assert_int_equal(scene.list.count, 2);
    expect_starts(&scene, 0, BANNER_DANGER,
                  "OXYGEN WAS BELOW 18 % IN cold-hall, NOW IN DOUBT.");
    assert_non_null(strstr(scene.list.at[0].text, "AT-402"));
    assert_non_null(strstr(scene.list.at[0].text, "AT-401 20.7 %"));
    /* Then all are lost, then the others come back: still in doubt. */
    struct hall_safety partly = scene.hall[0];
    scene.hall[0] = (struct hall_safety){.lost = 7, .lowest_point = -1};
    scene_step(&scene);
    assert_int_equal(scene.list.count, 1);
    expect_starts(&scene, 0, BANNER_DANGER,
                  "OXYGEN UNKNOWN IN cold-hall (was below 18 %): treat the hall as deficient");
    scene.hall[0] = partly;
    scene_step(&scene);
    expect_starts(&scene, 0, BANNER_DANGER, "OXYGEN WAS BELOW 18 %");
    assert_int_equal(scene.list.at[0].since_utc_ns, since);
    /* Only all monitors, all good, clear it. */
    scene_oxygen(&scene, 0.207);
    assert_int_equal(scene.list.count, 0);
    rig_done(&scene.rig);
}

static void test_a_banner_alarm_stands_with_its_cause_whether_acknowledged_or_not(void **unused)
{
    (void)unused;
    static struct scene scene;
    struct error err = {0};
    scene_init(&scene);
    struct alarm *alarm = rig_alarm(&scene.rig, "store-pressure-high");
    alarm->banner = true;
    alarm->consequence = "Relief valve lifts at 25 kPa(g)";
    alarm->response = "Check coolant flow FT-301";
    rig_alarm(&scene.rig, "quiet-one"); /* active as well, but banner = no */
    rig_start(&scene.rig);
    scene_step(&scene);
    assert_int_equal(scene.list.count, 0);
    scene.rig.input[0].quantity = scene.rig.input[1].quantity = quantity_good(15e3, 0);
    scene_step(&scene);
    assert_int_equal(scene.list.count, 1);
    assert_int_equal(scene.list.at[0].level, BANNER_CAUTION);
    assert_string_equal(scene.list.at[0].text,
                        "store-pressure-high: PT-101 above 14 kPa(g). Relief valve lifts at 25 "
                        "kPa(g). Check coolant flow FT-301.");
    assert_string_equal(scene.rig.journal.at[0].state, "shown");
    assert_int_equal(
        alarm_acknowledge(scene.rig.set, 0, scene.rig.utc_ns, "mara", &scene.rig.journal, &err),
        0);
    scene_step(&scene);
    assert_int_equal(scene.list.count, 1);
    assert_int_equal(scene.rig.journal.count, 0);
    /* Its source is lost: the cause cannot be told to be gone. */
    scene.rig.input[0].quantity = quantity_none(QUALITY_BAD);
    scene_step(&scene);
    expect_starts(&scene, 0, BANNER_CAUTION,
                  "store-pressure-high: PT-101 above 14 kPa(g), and no longer good.");
    scene.rig.input[0].quantity = quantity_good(0, 0);
    scene_step(&scene);
    assert_int_equal(scene.list.count, 0);
    assert_string_equal(scene.rig.journal.at[0].state, "cleared");
    rig_done(&scene.rig);
}

static void test_a_banner_alarm_that_cannot_be_told_is_shown_as_such(void **unused)
{
    (void)unused;
    static struct scene scene;
    scene_init(&scene);
    struct alarm *alarm = rig_alarm(&scene.rig, "store-pressure-high");
    alarm->banner = true;
    alarm->priority = 1;
    rig_start(&scene.rig);
    scene.rig.input[0].quantity = quantity_none(QUALITY_MISSING);
    scene_step(&scene);
    expect_starts(&scene, 0, BANNER_DANGER,
                  "store-pressure-high CANNOT BE TOLD: PT-101 is not good.");
    rig_done(&scene.rig);
}

static void test_a_lost_monitor_is_told_once_also_when_a_danger_alarm_watches_it(void **unused)
{
    (void)unused;
    static struct scene scene;
    scene_init(&scene);
    static const int watch[] = {OXYGEN_LOWEST, AT_403};
    for (int i = 0; i < 2; i++) {
        struct alarm *alarm = rig_alarm(&scene.rig, i == 0 ? "oxygen-low" : "platform-low");
        alarm->watch = watch[i];
        alarm->condition = ALARM_BELOW;
        alarm->low = 0.195;
        alarm->limit_gauge = false;
        alarm->deadband = 0;
        alarm->priority = 1;
        alarm->banner = true;
    }
    rig_start(&scene.rig);
    scene.rig.input[0].quantity = (struct quantity){0.207, 0.001, QUALITY_UNCERTAIN};
    scene.rig.input[1].quantity = quantity_none(QUALITY_BAD);
    scene.hall[0] = hall_reads(0.207);
    scene.hall[0].known = false;
    scene.hall[0].lost = 4;
    scene_step(&scene);
    assert_int_equal(scene.list.count, 1);
    expect_starts(&scene, 0, BANNER_CAUTION, "OXYGEN MONITOR NOT GOOD IN cold-hall: AT-403.");
    /* Active, the alarm speaks for itself. */
    scene.rig.input[0].quantity.value = scene.hall[0].oxygen_lowest = 0.19;
    scene_step(&scene);
    assert_int_equal(scene.list.count, 3);
    expect_starts(&scene, 0, BANNER_DANGER, "OXYGEN BELOW 19.5 %");
    expect_starts(&scene, 1, BANNER_DANGER, "oxygen-low: ");
    rig_done(&scene.rig);
}

static void test_a_banner_rate_that_is_not_known_yet_says_so(void **unused)
{
    (void)unused;
    static struct scene scene;
    scene_init(&scene);
    struct alarm *alarm = rig_alarm(&scene.rig, "pressure-rising");
    alarm->condition = ALARM_RISING_FASTER;
    alarm->high = 10;
    alarm->banner = true;
    rig_start(&scene.rig);
    scene_step(&scene);
    assert_string_equal(scene.list.at[0].text,
                        "pressure-rising CANNOT BE TOLD: the rate of PT-101 is not known.");
    rig_done(&scene.rig);
}

static void test_the_most_serious_stands_first_and_equals_keep_the_files_order(void **unused)
{
    (void)unused;
    static struct scene scene;
    scene_init(&scene);
    static const int priority[] = {3, 2, 1, 2, 4};
    static const char *const names[] = {"c3", "c2a", "d1", "c2b", "c4"};
    for (int i = 0; i < 5; i++) {
        struct alarm *alarm = rig_alarm(&scene.rig, names[i]);
        alarm->priority = priority[i];
        alarm->banner = true;
    }
    scene.rig.plant.hall_count = 2;
    rig_start(&scene.rig);
    for (int i = 0; i < 5; i++)
        scene.rig.input[i].quantity = quantity_good(15e3, 0);
    scene.hall[0] = hall_reads(0.19);
    scene.hall[0].known = false;
    scene.hall[1] = hall_reads(0.17);
    scene_step(&scene);
    static const char *const expected[] = {"gallery", "cold-hall", "d1", "cold-hall",
                                           "c2a",     "c2b",       "c3", "c4"};
    assert_int_equal(scene.list.count, 8);
    for (int i = 0; i < 8; i++)
        assert_string_equal(scene.list.at[i].subject, expected[i]);
    scene.hall[1] = (struct hall_safety){.lowest_point = -1};
    scene_step(&scene); /* a low reading before an unknown one */
    assert_string_equal(scene.list.at[0].subject, "cold-hall");
    assert_string_equal(scene.list.at[1].subject, "gallery");
    rig_done(&scene.rig);
}

static void test_more_than_the_list_holds_keeps_the_serious_and_counts_the_rest(void **unused)
{
    (void)unused;
    static struct scene scene;
    scene_init(&scene);
    for (int i = 0; i < ALARMS_MAX; i++) {
        struct alarm *alarm = rig_alarm(&scene.rig, "many");
        alarm->priority = i < ALARMS_MAX - 4 ? 3 : 2;
        alarm->banner = true;
    }
    rig_start(&scene.rig);
    for (int i = 0; i < ALARMS_MAX - 4; i++)
        scene.rig.input[i].quantity = quantity_good(15e3, 0);
    scene_step(&scene);
    assert_int_equal(scene.list.count, BANNER_MAX);
    assert_int_equal(scene.list.more, ALARMS_MAX - 4 - BANNER_MAX);
    for (int i = ALARMS_MAX - 4; i < ALARMS_MAX; i++)
        scene.rig.input[i].quantity = quantity_good(15e3, 0);
    scene_step(&scene);
    assert_int_equal(scene.list.more, ALARMS_MAX - BANNER_MAX);
    for (int i = 0; i < 4; i++)
        assert_int_equal(scene.list.at[i].index, ALARMS_MAX - 4 + i);
    for (int i = 0; i < scene.rig.journal.count; i++) /* pushed out is not cleared */
        assert_string_equal(scene.rig.journal.at[i].state, "shown");
    rig_done(&scene.rig);
}

static void
test_hostile_and_endless_site_words_are_neutralised_and_the_reading_survives(void **unused)
{
    (void)unused;
    static struct scene scene;
    static char endless[4000];
    scene_init(&scene);
    scene.rig.hall[0].name = "hall\x1b]0;owned\a";
    /* Two-byte characters, so that a cut in the middle of one would show. */
    for (size_t i = 0; i + 2 < sizeof(endless); i += 2)
        memcpy(endless + i, "\xc3\xa9", 3);
    scene.rig.plant.site.emergency = "Ring\x1b[2J 2222\r\n\xe2\x80\xae";
    scene.rig.plant.site.rules = endless;
    rig_start(&scene.rig);
    scene_oxygen(&scene, 0.17);
    const char *text = scene.list.at[0].text;
    expect_starts(&scene, 0, BANNER_DANGER,
                  "OXYGEN BELOW 18 % IN hall?]0;owned?. Ring?[2J 2222???");
    assert_non_null(strstr(text, "... (AT-402 17.0 %)"));
    assert_true(strlen(text) > 300);
    for (const char *c = text; *c != '\0'; c++)
        assert_true((unsigned char)*c >= 0x20);
    scene.rig.plant.site.emergency = endless;
    scene_step(&scene);
    assert_non_null(strstr(scene.list.at[0].text, "(AT-402 17.0 %)"));
    assert_null(strchr(scene.list.at[0].text + 40, '?')); /* no torn character */
    char line[300];
    banner_advisory(line, sizeof(line), &scene.rig.plant);
    assert_non_null(strstr(line, " and fixed hall alarms prevail."));
    rig_done(&scene.rig);
}

static void test_a_hall_without_monitors_is_noted(void **unused)
{
    (void)unused;
    static struct scene scene;
    scene_init(&scene);
    scene.rig.hall[0].oxygen.count = 0;
    scene.hall[0] = (struct hall_safety){.lowest_point = -1};
    rig_start(&scene.rig);
    scene_step(&scene);
    assert_int_equal(scene.list.count, 1);
    expect_starts(&scene, 0, BANNER_NOTE, "No oxygen monitor is read in cold-hall");
    rig_done(&scene.rig);
}

static void test_since_is_kept_and_never_lies_ahead_of_a_clock_that_stepped_back(void **unused)
{
    (void)unused;
    static struct scene scene;
    scene_init(&scene);
    rig_start(&scene.rig);
    scene_oxygen(&scene, 0.17);
    int64_t since = scene.list.at[0].since_utc_ns;
    for (int i = 0; i < 5; i++)
        scene_oxygen(&scene, 0.16);
    assert_int_equal(scene.list.at[0].since_utc_ns, since);
    scene.rig.utc_ns -= 3600 * NS_PER_S;
    scene_oxygen(&scene, 0.16);
    assert_int_equal(scene.list.at[0].since_utc_ns, scene.rig.utc_ns);
    rig_done(&scene.rig);
}

static void test_the_advisory_line_names_the_rules_of_the_site(void **unused)
{
    (void)unused;
    static const struct {
        const char *rules, *line;
    } table[] = {
        {"Tarn Hollow cryogen rules, part 3, prevail over this display",
         "ADVISORY ONLY. Tarn Hollow cryogen rules, part 3, and fixed hall alarms prevail."                                         },
        {"Part 3 prevails.",                                             "ADVISORY ONLY. Part 3 and fixed hall alarms prevail."     },
        {"House rules",                                                  "ADVISORY ONLY. House rules and fixed hall alarms prevail."},
    };
    for (size_t i = 0; i < ARRAY_LENGTH(table); i++) {
        struct plant plant = {.site.rules = table[i].rules};
        char line[200];
        banner_advisory(line, sizeof(line), &plant);
        assert_string_equal(line, table[i].line);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_a_good_hall_has_no_banner),
        cmocka_unit_test(test_the_lowest_level_passed_names_the_danger_in_the_sites_own_words),
        cmocka_unit_test(test_uncertainty_never_softens_a_low_reading_nor_rounds_it_up),
        cmocka_unit_test(test_without_site_words_the_banner_defers_in_plain_ones),
        cmocka_unit_test(test_showing_is_at_once_and_only_clearing_waits_for_the_hysteresis),
        cmocka_unit_test(test_all_monitors_lost_is_unknown_and_never_the_last_good_number),
        cmocka_unit_test(test_one_monitor_lost_is_a_caution_that_names_it),
        cmocka_unit_test(test_losing_the_low_monitor_does_not_make_a_hall_look_better),
        cmocka_unit_test(test_a_banner_alarm_stands_with_its_cause_whether_acknowledged_or_not),
        cmocka_unit_test(test_a_banner_alarm_that_cannot_be_told_is_shown_as_such),
        cmocka_unit_test(test_a_lost_monitor_is_told_once_also_when_a_danger_alarm_watches_it),
        cmocka_unit_test(test_a_banner_rate_that_is_not_known_yet_says_so),
        cmocka_unit_test(test_the_most_serious_stands_first_and_equals_keep_the_files_order),
        cmocka_unit_test(test_more_than_the_list_holds_keeps_the_serious_and_counts_the_rest),
        cmocka_unit_test(
            test_hostile_and_endless_site_words_are_neutralised_and_the_reading_survives),
        cmocka_unit_test(test_a_hall_without_monitors_is_noted),
        cmocka_unit_test(test_since_is_kept_and_never_lies_ahead_of_a_clock_that_stepped_back),
        cmocka_unit_test(test_the_advisory_line_names_the_rules_of_the_site),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
