/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * What an operator may rely on, whatever the numbers: nothing old looks live, no oxygen reading
 * is made to look better, sums add up, and an acknowledgement is for the alarm that was shown.
 */
#include "fixture.h"

#include <math.h>

#include "../../src/screen/canvas.h"
#include "../../src/screen/panel.h"

struct picture {
    struct fixture *fixture;
    struct screen *screen;
    struct canvas *canvas;
    char *text;
};

static void draw(struct picture *picture)
{
    size_t size = 0;
    free(picture->text);
    screen_draw(picture->screen, &picture->fixture->view, picture->canvas);
    FILE *out = open_memstream(&picture->text, &size);
    assert_non_null(out);
    canvas_write(picture->canvas, out);
    assert_int_equal(fclose(out), 0);
}

static struct picture picture_open(void (*situation)(struct fixture *), const char *panel)
{
    struct picture picture = {.fixture = fixture_open("tests/data/screen/store.ini")};
    situation(picture.fixture);
    assert_int_equal(screen_create(&picture.screen, NULL), 0);
    assert_int_equal(screen_panel(picture.screen, panel, NULL), 0);
    assert_int_equal(canvas_create(80, 24, false, &picture.canvas, NULL), 0);
    draw(&picture);
    return picture;
}

static void picture_close(struct picture *picture)
{
    free(picture->text);
    canvas_free(picture->canvas);
    screen_free(picture->screen);
    fixture_close(picture->fixture);
}

static void expect(const struct picture *picture, const char *text)
{
    if (strstr(picture->text, text) == NULL)
        fail_msg("'%s' is not in\n%s", text, picture->text);
}

static void expect_not(const struct picture *picture, const char *text)
{
    if (strstr(picture->text, text) != NULL)
        fail_msg("'%s' is in\n%s", text, picture->text);
}

/* Row and column at which an ASCII text stands. */
static void find(const struct picture *picture, const char *text, int *row, int *column)
{
    for (*row = 0; *row < canvas_rows(picture->canvas); ++*row)
        for (*column = 0; *column < canvas_columns(picture->canvas); ++*column) {
            size_t i = 0;
            for (; text[i] != '\0'; i++) {
                const struct cell *cell = canvas_cell(picture->canvas, *row, *column + (int)i);
                if (cell == NULL || cell->rune != (unsigned char)text[i])
                    break;
            }
            if (text[i] == '\0')
                return;
        }
    *row = *column = 0;
    fail_msg("'%s' stands nowhere in\n%s", text, picture->text);
}

static enum style style_of(const struct picture *picture, const char *text)
{
    int row, column;
    find(picture, text, &row, &column);
    return canvas_cell(picture->canvas, row, column)->style;
}

static enum screen_request press(struct picture *picture, uint32_t key, struct command *command)
{
    enum screen_request request =
        screen_key(picture->screen, &picture->fixture->view, key, command);
    draw(picture);
    return request;
}

/* ---- old and lost values
 * ------------------------------------------------------------------------ */

static void test_a_stale_reading_is_dim_marked_and_tells_its_age(void **unused)
{
    (void)unused;
    struct picture picture = picture_open(fixture_lost_link, "ledgers");
    expect(&picture, "oxygen 38.2 ± 2.8 ppt ~ (1 min 35 s old)");
    assert_int_equal(style_of(&picture, "38.2"), STYLE_STALE);
    assert_int_equal(style_of(&picture, "455.32"), STYLE_NORMAL);
    expect(&picture, "links 3/4");
    assert_int_equal(screen_panel(picture.screen, "points", NULL), 0);
    draw(&picture);
    expect(&picture, "stale     1 min 35 s");
    assert_int_equal(style_of(&picture, "38.2"), STYLE_STALE);
    picture_close(&picture);
}

static void test_when_the_source_has_stopped_nothing_looks_live(void **unused)
{
    (void)unused;
    for (int i = 0; screen_panel_name(i) != NULL; i++) {
        const char *panel = screen_panel_name(i);
        if (strcmp(panel, "help") == 0 || strcmp(panel, "banners") == 0)
            continue;
        struct picture picture = picture_open(fixture_quiet, panel);
        picture.fixture->view.stale = true; /* though every reading was good */
        picture.fixture->view.stale_s = 95;
        draw(&picture);
        expect(&picture, "STALE 1 min 35 s");
        expect(&picture, "NOTHING HERE IS LIVE");
        assert_int_equal(canvas_cell(picture.canvas, 0, 0)->style, STYLE_DANGER);
        expect_not(&picture, "quiet");
        expect_not(&picture, " well");
        expect_not(&picture, "◆");
        for (int row = 4; row < 22; row++)
            for (int column = 0; column < 80; column++) {
                const struct cell *cell = canvas_cell(picture.canvas, row, column);
                if (cell->rune != ' ' &&
                    (cell->style == STYLE_NORMAL || cell->style == STYLE_STRONG))
                    fail_msg("%s: a live looking cell at row %d, column %d in\n%s", panel, row,
                             column, picture.text);
            }
        picture_close(&picture);
    }
}

static void test_a_bad_or_missing_value_is_never_a_number(void **unused)
{
    (void)unused;
    struct unit kilowatt;
    assert_int_equal(unit_parse("kW", &kilowatt, NULL), 0);
    static const enum quality lost[] = {QUALITY_BAD, QUALITY_MISSING};
    for (size_t i = 0; i < ARRAY_LENGTH(lost); i++) {
        char text[80];
        const struct quantity q = {.value = 5390, .u = 130, .quality = lost[i]};
        format_quantity(text, sizeof(text), q, &kilowatt);
        assert_string_equal(text, "--");
        format_plain(text, sizeof(text), q, &kilowatt);
        assert_string_equal(text, "--");
        format_reading(text, sizeof(text), q, &kilowatt);
        assert_string_equal(text, "--");
    }
}

static void test_unknown_oxygen_is_danger_and_no_monitor_is_called_well(void **unused)
{
    (void)unused;
    struct picture picture = picture_open(fixture_oxygen_unknown, "hall");
    expect(&picture, "O2 UNKNOWN");
    expect(&picture, "device reports a fault; last read 41 s ago");
    expect_not(&picture, " well");
    expect_not(&picture, "█");
    assert_int_equal(style_of(&picture, "O2 UNKNOWN"), STYLE_DANGER);
    assert_int_equal(style_of(&picture, "!! OXYGEN UNKNOWN"), STYLE_DANGER);
    picture_close(&picture);
}

static void test_oxygen_just_below_a_level_never_rounds_up_to_it(void **unused)
{
    (void)unused;
    struct picture picture = picture_open(fixture_quiet, "hall");
    fixture_point(picture.fixture, "AT-402", 17.9996, 0.5);
    fixture_set(picture.fixture, "cold-hall.oxygen_lowest", 0.179996, 0.005);
    draw(&picture);
    expect(&picture, "17.9996 %");
    expect(&picture, "BELOW 18 %");
    expect_not(&picture, " 18.0 %");
    picture_close(&picture);
}

/* ---- numbers
 * ------------------------------------------------------------------------------------ */

/* JCGM 100:2008, 7.2.6: u to at most two significant digits, the value rounded to the same. */
static void test_no_digit_is_shown_that_the_uncertainty_makes_meaningless(void **unused)
{
    (void)unused;
    const struct unit watt = unit_si(DIMENSION_POWER), kilogram = unit_si(DIMENSION_MASS);
    static const struct {
        double value, u;
        bool mass;
        const char *text;
    } known[] = {
        {5391.7,   134,    false, "5.39 ± 0.13 kW"     },
        {5391.7,   47,     false, "5.39 ± 0.05 kW"     },
        {5391.7,   2000,   false, "5.4 ± 2.0 kW"       },
        {-0.004,   130,    false, "0.00 ± 0.13 kW"     },
        {455320.4, 290,    true,  "455.32 ± 0.29 t"    },
        {0.1,      0.0351, true,  "100 ± 35 g"         },
        {12345e9,  1e9,    false, "1.234e+07 ± 1000 MW"},
    };
    for (size_t i = 0; i < ARRAY_LENGTH(known); i++) {
        char text[80];
        format_quantity(text, sizeof(text), quantity_good(known[i].value, known[i].u),
                        known[i].mass ? &kilogram : &watt);
        assert_string_equal(text, known[i].text);
    }
    char text[80];
    format_quantity(text, sizeof(text),
                    (struct quantity){.value = 5391.7, .u = 134, .quality = QUALITY_UNCERTAIN},
                    &watt);
    assert_string_equal(text, "5.39 ± 0.13 kW ?");
}

static double number_after(const char *text, const char *label)
{
    const char *at = strstr(text, label);
    if (at == NULL)
        fail_msg("'%s' is not in\n%s", label, text);
    return strtod(at + strlen(label), NULL);
}

static void test_the_terms_of_a_ledger_add_up_as_they_are_shown(void **unused)
{
    (void)unused;
    srand(41);
    struct picture picture = picture_open(fixture_quiet, "ledgers");
    for (int turn = 0; turn < 2000; turn++) {
        double scale = pow(10, rand() % 9 - 3);
        double in = rand() % 100000 / 1e4 * scale, out = rand() % 100000 / 1e4 * scale;
        double stored = (rand() % 20000 - 10000) / 1e4 * scale;
        double u = (1 + rand() % 1000) * 1e-4 * scale;
        fixture_sum(picture.fixture, LEDGER_HEAT, 0, in, out, stored, u);
        draw(&picture);
        double sum = number_after(picture.text, " in ") - number_after(picture.text, " out ") -
                     number_after(picture.text, " stored ");
        double rest = number_after(picture.text, "=");
        if (fabs(sum - rest) > 1e-9 * (fabs(sum) + 1))
            fail_msg("%.9g is not %.9g in\n%s", sum, rest, picture.text);
        assert_int_equal(canvas_lost(picture.canvas), 0);
    }
    picture_close(&picture);
}

static void test_the_needle_stands_where_its_own_uncertainty_puts_it(void **unused)
{
    (void)unused;
    static const struct {
        double z;
        const char *needle, *word;
    } known[] = {
        {0,   "[    :  ◆  :    ]", "quiet"  },
        {2,   "[    :  |  ◆    ]", "quiet"  },
        {-2,  "[    ◆  |  :    ]", "quiet"  },
        {2.6, "[    :  |  :◆   ]", "watch"  },
        {5,   "[    :  |  :   ◆]", "watch"  },
        {-90, "[◆   :  |  :    ]", "finding"},
    };
    struct picture picture = picture_open(fixture_quiet, "ledgers");
    for (size_t i = 0; i < ARRAY_LENGTH(known); i++) {
        fixture_sum(picture.fixture, LEDGER_HEAT, 0, 6000 + 128 * known[i].z, 6000, 0, 128);
        draw(&picture);
        char expected[64];
        text_format(expected, sizeof(expected), "%s %s", known[i].needle, known[i].word);
        expect(&picture, expected);
    }
    picture_close(&picture);
}

static void test_a_trend_spans_its_own_range_and_leaves_gaps_blank(void **unused)
{
    (void)unused;
    const struct trend_column column[] = {
        {1.0, 1.0, true },
        {0,   0,   false},
        {4.4, 4.6, true },
        {8.0, 8.0, true }
    };
    struct canvas *canvas = NULL;
    double low, high;
    assert_int_equal(canvas_create(10, 1, false, &canvas, NULL), 0);
    assert_true(trend_draw(column, 4, canvas, 0, 2, &low, &high));
    static const uint32_t runes[] = {' ', ' ', 0x2581, ' ', 0x2584, 0x2588, ' '};
    for (size_t i = 0; i < ARRAY_LENGTH(runes); i++)
        assert_int_equal(canvas_cell(canvas, 0, (int)i)->rune, runes[i]);
    assert_true(low == 1.0 && high == 8.0);
    canvas_clear(canvas);
    assert_false(trend_draw(column + 1, 1, canvas, 0, 2, &low, &high));
    assert_int_equal(canvas_cell(canvas, 0, 2)->rune, ' ');
    canvas_free(canvas);
}

static void
test_an_open_finding_stands_under_its_ledger_and_a_closed_one_does_not(void **unused)
{
    (void)unused;
    struct picture picture = picture_open(fixture_finding, "ledgers");
    expect(&picture, "since 2026-11-30 22:41:07Z: heat load 1280 W more than budget");
    expect_not(&picture, "within its uncertainty again");
    picture.fixture->journal[1] = picture.fixture->journal[0];
    text_copy(picture.fixture->journal[1].state, sizeof(picture.fixture->journal[1].state),
              "closed");
    draw(&picture);
    expect_not(&picture, "heat load 1280 W more than budget");
    picture_close(&picture);
}

/* ---- alarms
 * ------------------------------------------------------------------------------------- */

static void test_an_acknowledgement_is_for_the_alarm_that_was_shown_as_chosen(void **unused)
{
    (void)unused;
    struct picture picture = picture_open(fixture_quiet, "alarms");
    struct fixture *fixture = picture.fixture;
    struct command command = {0};
    fixture_point(fixture, "PT-101", 15.2, 0.05);
    fixture_alarms(fixture, 500);
    draw(&picture);
    expect(&picture, "▸2 ACTIVE        store-pressure-high");
    /* Between the picture and the key a more serious one takes the first row. */
    fixture_set(fixture, "cold-hall.oxygen_lowest", 0.19, 0.001);
    fixture_alarms(fixture, 400);
    assert_int_equal(screen_key(picture.screen, &fixture->view, 'a', &command), SCREEN_COMMAND);
    assert_int_equal(command.kind, COMMAND_ACKNOWLEDGE);
    assert_string_equal(fixture->plant->alarm[command.alarm].name, "store-pressure-high");
    draw(&picture);
    expect(&picture, "store-pressure-high acknowledged");
    expect(&picture, "▸1 ACTIVE        hall-oxygen-low");
    /* One that the operator has chosen keeps the choice when it moves. */
    press(&picture, SCREEN_KEY_DOWN, &command);
    expect(&picture, "▸2 ACTIVE        store-pressure-high");
    fixture_point(fixture, "XS-401", 0, 0);
    fixture_alarms(fixture, 300);
    draw(&picture);
    expect(&picture, "▸2 ACTIVE        store-pressure-high");
    picture_close(&picture);
}

static void test_the_highest_priority_is_never_acknowledged_in_bulk(void **unused)
{
    (void)unused;
    struct picture picture = picture_open(fixture_hall_danger, "alarms");
    struct command command = {0};
    assert_int_equal(press(&picture, 'A', &command), SCREEN_COMMAND);
    assert_int_equal(command.kind, COMMAND_ACKNOWLEDGE_ALL);
    assert_int_equal(command.alarm, 1); /* those of priority > 1 */
    expect(&picture, "1 acknowledged; priority 1 only one by one, with a");
    press(&picture, 'x', &command);
    expect_not(&picture, "acknowledged;");
    picture_close(&picture);
}

static void test_a_key_typed_ahead_of_the_picture_acknowledges_nothing(void **unused)
{
    (void)unused;
    struct picture picture = picture_open(fixture_hall_danger, "ledgers");
    struct command command = {0};
    screen_key(picture.screen, &picture.fixture->view, '5', &command);
    assert_int_equal(press(&picture, 'a', &command), SCREEN_REDRAW);
    expect(&picture, "no alarm was shown as chosen yet");
    assert_int_equal(press(&picture, 'a', &command), SCREEN_COMMAND);
    assert_string_equal(picture.fixture->plant->alarm[command.alarm].name, "hall-oxygen-low");
    picture_close(&picture);
}

static void test_where_nothing_waits_no_command_is_made(void **unused)
{
    (void)unused;
    struct picture picture = picture_open(fixture_quiet, "alarms");
    struct command command = {0};
    assert_int_equal(press(&picture, 'a', &command), SCREEN_REDRAW);
    expect(&picture, "nothing to acknowledge");
    assert_int_equal(press(&picture, 'A', &command), SCREEN_REDRAW);
    expect(&picture, "nothing to acknowledge");
    picture_close(&picture);
    picture = picture_open(fixture_hall_danger, "alarms");
    picture.fixture->view.mode = VIEW_REPLAY;
    assert_int_equal(press(&picture, 'a', &command), SCREEN_REDRAW);
    expect(&picture, "this is a record");
    assert_int_equal(press(&picture, 'A', &command), SCREEN_REDRAW);
    picture_close(&picture);
}

/* ---- around the panel
 * --------------------------------------------------------------------------- */

static void test_the_advisory_line_stands_on_every_panel_in_every_situation(void **unused)
{
    (void)unused;
    for (size_t i = 0; i < ARRAY_LENGTH(situations); i++)
        for (int k = 0; screen_panel_name(k) != NULL; k++) {
            struct picture picture = picture_open(situations[i].set, screen_panel_name(k));
            expect(&picture, "ADVISORY ONLY. Tarn Hollow cryogen rules, part 3, and fixed hall "
                             "alarms prevail.");
            assert_int_equal(canvas_lost(picture.canvas), 0);
            picture_close(&picture);
        }
}

static void test_a_terminal_too_small_says_so_and_still_tells_the_danger(void **unused)
{
    (void)unused;
    struct picture picture = picture_open(fixture_hall_danger, "ledgers");
    static const int sizes[][2] = {
        {79,  24 },
        {80,  23 },
        {40,  12 },
        {1,   1  },
        {3,   200},
        {500, 1  }
    };
    for (size_t i = 0; i < ARRAY_LENGTH(sizes); i++) {
        canvas_free(picture.canvas);
        assert_int_equal(canvas_create(sizes[i][0], sizes[i][1], false, &picture.canvas, NULL),
                         0);
        draw(&picture);
        if (sizes[i][0] < 40)
            continue;
        expect(&picture, "ADVISORY ONLY.");
        expect(&picture, "is too small; 80x24");
        if (sizes[i][1] > 10)
            expect(&picture, "OXYGEN BELOW 18 % IN cold-hall.");
    }
    picture_close(&picture);
}

static void test_banners_beyond_the_room_are_counted_and_listed(void **unused)
{
    (void)unused;
    struct picture picture = picture_open(fixture_hall_danger, "ledgers");
    for (int i = 0; i < 7; i++)
        fixture_banner(picture.fixture, BANNER_CAUTION, "extra", "extra: one more statement.");
    picture.fixture->results.banners.more = 3;
    draw(&picture);
    expect(&picture, "!  and 10 more; key b lists them all");
    struct command command;
    press(&picture, 'b', &command);
    expect(&picture, "danger, cold-hall, since 2026-11-30 23:55:07Z");
    press(&picture, SCREEN_KEY_END, &command);
    expect(&picture, "and 3 less serious ones");
    picture_close(&picture);
}

static void test_a_banner_too_long_for_its_room_shows_that_it_goes_on(void **unused)
{
    (void)unused;
    struct picture picture = picture_open(fixture_quiet, "ledgers");
    char text[320] = "OXYGEN BELOW 18 % IN cold-hall.";
    while (strlen(text) < 300)
        strcat(text, " On and on.");
    fixture_banner(picture.fixture, BANNER_DANGER, "cold-hall", text);
    draw(&picture);
    expect(&picture, "!! OXYGEN BELOW 18 % IN cold-hall.");
    expect(&picture, " …\n");
    assert_int_equal(canvas_lost(picture.canvas), 0);
    picture_close(&picture);
}

static void test_every_panel_and_key_of_the_help_can_be_reached(void **unused)
{
    (void)unused;
    struct picture picture = picture_open(fixture_quiet, "help");
    canvas_free(picture.canvas);
    assert_int_equal(canvas_create(100, 60, false, &picture.canvas, NULL), 0);
    draw(&picture);
    struct command command;
    static const struct {
        char key;
        const char *text;
    } keys[] = {
        {'1', "HEAT"                      },
        {'4', "action levels"             },
        {'5', "what it waits for"         },
        {'7', "journal"                   },
        {'8', "PT-101"                    },
        {'b', "No safety statement stands"},
    };
    for (size_t i = 0; i < ARRAY_LENGTH(keys); i++) {
        char line[8];
        text_format(line, sizeof(line), "\n   %c ", keys[i].key);
        expect(&picture, line);
        assert_int_equal(press(&picture, (uint32_t)keys[i].key, &command), SCREEN_REDRAW);
        expect(&picture, keys[i].text);
        assert_int_equal(press(&picture, '?', &command), SCREEN_REDRAW);
        assert_int_equal(press(&picture, SCREEN_KEY_ESCAPE, &command), SCREEN_REDRAW);
        expect(&picture, keys[i].text);
        press(&picture, '?', &command);
    }
    press(&picture, '8', &command);
    press(&picture, 'w', &command);
    expect(&picture, "PT-900 = 104.81");
    press(&picture, 'w', &command);
    expect(&picture, "▸PT-900");
    assert_int_equal(press(&picture, 'x', &command), SCREEN_NONE);
    assert_int_equal(press(&picture, 'q', &command), SCREEN_QUIT);
    picture_close(&picture);
}

static void test_a_panel_that_is_not_there_is_refused_with_the_nearest(void **unused)
{
    (void)unused;
    struct screen *screen = NULL;
    struct error err = {0};
    assert_int_equal(screen_create(&screen, NULL), 0);
    assert_int_equal(screen_panel(screen, "ledgres", &err), ERR_ARGUMENT);
    assert_non_null(strstr(err.text, "'ledgers'"));
    assert_int_equal(screen_panel(screen, "nonsense-beyond-guessing", &err), ERR_ARGUMENT);
    assert_non_null(strstr(err.text, "ledgers hall alarms"));
    screen_free(screen);
    screen_free(NULL);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_a_stale_reading_is_dim_marked_and_tells_its_age),
        cmocka_unit_test(test_when_the_source_has_stopped_nothing_looks_live),
        cmocka_unit_test(test_a_bad_or_missing_value_is_never_a_number),
        cmocka_unit_test(test_unknown_oxygen_is_danger_and_no_monitor_is_called_well),
        cmocka_unit_test(test_oxygen_just_below_a_level_never_rounds_up_to_it),
        cmocka_unit_test(test_no_digit_is_shown_that_the_uncertainty_makes_meaningless),
        cmocka_unit_test(test_the_terms_of_a_ledger_add_up_as_they_are_shown),
        cmocka_unit_test(test_the_needle_stands_where_its_own_uncertainty_puts_it),
        cmocka_unit_test(test_a_trend_spans_its_own_range_and_leaves_gaps_blank),
        cmocka_unit_test(
            test_an_open_finding_stands_under_its_ledger_and_a_closed_one_does_not),
        cmocka_unit_test(test_an_acknowledgement_is_for_the_alarm_that_was_shown_as_chosen),
        cmocka_unit_test(test_the_highest_priority_is_never_acknowledged_in_bulk),
        cmocka_unit_test(test_a_key_typed_ahead_of_the_picture_acknowledges_nothing),
        cmocka_unit_test(test_where_nothing_waits_no_command_is_made),
        cmocka_unit_test(test_the_advisory_line_stands_on_every_panel_in_every_situation),
        cmocka_unit_test(test_a_terminal_too_small_says_so_and_still_tells_the_danger),
        cmocka_unit_test(test_banners_beyond_the_room_are_counted_and_listed),
        cmocka_unit_test(test_a_banner_too_long_for_its_room_shows_that_it_goes_on),
        cmocka_unit_test(test_every_panel_and_key_of_the_help_can_be_reached),
        cmocka_unit_test(test_a_panel_that_is_not_there_is_refused_with_the_nearest),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
