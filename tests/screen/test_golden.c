/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Pictures against those in tests/golden, text and style plane, in the situations that an
 * operator meets. 'make golden' (ULLAGE_GOLDEN=write) writes them anew; the difference is to be
 * reviewed like code. Whatever the files say, no picture may lose a rune at an edge.
 */
#include "fixture.h"

#include <errno.h>

#include "../../src/screen/canvas.h"

enum { ALL, SMALL }; /* sizes */
struct size {
    int columns, rows;
    bool ascii;
};
static const struct size sizes[] = {
    {80,  24, false},
    {80,  24, true },
    {100, 30, false},
    {100, 30, true },
    {200, 60, false},
    {200, 60, true },
};

/* The style plane without the marks of normal cells at the ends of rows. */
static void write_styles(const struct canvas *canvas, FILE *out)
{
    char *text = NULL;
    size_t size = 0;
    FILE *plane = open_memstream(&text, &size);
    assert_non_null(plane);
    canvas_write_styles(canvas, plane);
    assert_int_equal(fclose(plane), 0);
    for (char *row = strtok(text, "\n"); row != NULL; row = strtok(NULL, "\n")) {
        size_t length = strlen(row);
        while (length > 0 && row[length - 1] == '.')
            length--;
        fprintf(out, "%.*s\n", (int)length, row);
    }
    free(text);
}

static void write_picture(struct screen *screen, const struct view *view,
                          const struct size *size, FILE *out)
{
    struct canvas *canvas = NULL;
    assert_int_equal(canvas_create(size->columns, size->rows, size->ascii, &canvas, NULL), 0);
    screen_draw(screen, view, canvas);
    fprintf(out, "== %dx%d %s\n", size->columns, size->rows, size->ascii ? "ascii" : "utf-8");
    canvas_write(canvas, out);
    if (!size->ascii) {
        fprintf(out, "== %dx%d styles\n", size->columns, size->rows);
        write_styles(canvas, out);
    }
    if (canvas_lost(canvas) != 0)
        fail_msg("%d runes are lost at %dx%d", canvas_lost(canvas), size->columns, size->rows);
    canvas_free(canvas);
}

static char *file_text(const char *path)
{
    char *text = NULL;
    size_t size = 0;
    FILE *file = fopen(path, "r");
    if (file == NULL)
        fail_msg("%s: %s; make golden writes it", path, strerror(errno));
    FILE *copy = open_memstream(&text, &size);
    assert_non_null(copy);
    for (int c = fgetc(file); c != EOF; c = fgetc(file))
        fputc(c, copy);
    fclose(file);
    assert_int_equal(fclose(copy), 0);
    return text;
}

/* Line by line, so that a difference is told where it is. */
static void compare(const char *path, const char *drawn, const char *golden)
{
    int line = 1;
    while (*drawn != '\0' || *golden != '\0') {
        size_t a = strcspn(drawn, "\n"), b = strcspn(golden, "\n");
        if (a != b || memcmp(drawn, golden, a) != 0)
            fail_msg("%s:%d differs (make golden rewrites it, then review)\n  is    |%.*s|\n"
                     "  golden|%.*s|",
                     path, line, (int)a, drawn, (int)b, golden);
        drawn += a + (drawn[a] == '\n');
        golden += b + (golden[b] == '\n');
        line++;
    }
}

static void check_picture(const struct view *view, const char *panel, const char *name,
                          const uint32_t *keys, int which)
{
    char path[160], *drawn = NULL;
    size_t size = 0;
    struct screen *screen = NULL;
    struct command command;
    assert_int_equal(screen_create(&screen, NULL), 0);
    assert_int_equal(screen_panel(screen, panel, NULL), 0);
    text_format(path, sizeof(path), "tests/golden/%s-%s.txt", panel, name);
    FILE *out = open_memstream(&drawn, &size);
    assert_non_null(out);
    size_t count = which == ALL ? ARRAY_LENGTH(sizes) : 2;
    for (size_t i = 0; i < count; i++) {
        /* Keys act on what has been drawn. */
        for (const uint32_t *key = keys; i == 0 && key != NULL && *key != 0; key++) {
            struct canvas *canvas = NULL;
            assert_int_equal(canvas_create(80, 24, false, &canvas, NULL), 0);
            screen_draw(screen, view, canvas);
            screen_key(screen, view, *key, &command);
            canvas_free(canvas);
        }
        write_picture(screen, view, &sizes[i], out);
    }
    assert_int_equal(fclose(out), 0);
    const char *mode = getenv("ULLAGE_GOLDEN");
    if (mode != NULL && strcmp(mode, "write") == 0) {
        FILE *file = fopen(path, "w");
        assert_non_null(file);
        fputs(drawn, file);
        assert_int_equal(fclose(file), 0);
    }
    char *golden = file_text(path);
    compare(path, drawn, golden);
    free(golden);
    free(drawn);
    screen_free(screen);
}

static void check_situation(const char *situation, const char *panel, int which)
{
    struct fixture *fixture = fixture_open("tests/data/screen/store.ini");
    for (size_t i = 0; i < ARRAY_LENGTH(situations); i++)
        if (strcmp(situations[i].name, situation) == 0)
            situations[i].set(fixture);
    check_picture(&fixture->view, panel, situation, NULL, which);
    fixture_close(fixture);
}

static void test_ledgers_in_every_situation_and_size(void **unused)
{
    (void)unused;
    for (size_t i = 0; i < ARRAY_LENGTH(situations); i++)
        check_situation(situations[i].name, "ledgers", ALL);
}

static void test_the_hall_when_well_in_danger_unknown_and_without_a_source(void **unused)
{
    (void)unused;
    check_situation("quiet", "hall", ALL);
    check_situation("hall-danger", "hall", ALL);
    check_situation("oxygen-unknown", "hall", ALL);
    check_situation("stale-source", "hall", SMALL);
}

static void test_the_lists(void **unused)
{
    (void)unused;
    check_situation("hall-danger", "alarms", ALL);
    check_situation("oxygen-unknown", "alarms", SMALL);
    check_situation("lost-link", "links", ALL);
    check_situation("lost-link", "points", ALL);
    check_situation("hall-danger", "banners", ALL);
    check_situation("quiet", "banners", SMALL);
    check_situation("quiet", "help", ALL);
}

static void test_where_a_derived_number_and_a_reading_come_from(void **unused)
{
    (void)unused;
    struct fixture *fixture = fixture_open("tests/data/screen/store.ini");
    fixture_lost_link(fixture);
    const uint32_t heat[] = {'w', 0};
    check_picture(&fixture->view, "ledgers", "why-heat-load", heat, SMALL);
    uint32_t oxygen[16];
    int tag = fixture_tag(fixture, "AT-201");
    assert_true(tag < 14);
    for (int i = 0; i < tag; i++)
        oxygen[i] = SCREEN_KEY_DOWN;
    oxygen[tag] = 'w';
    oxygen[tag + 1] = 0;
    check_picture(&fixture->view, "points", "why-oxygen", oxygen, SMALL);
    fixture_close(fixture);
}

static void test_before_the_first_frame_it_says_so(void **unused)
{
    (void)unused;
    struct fixture *fixture = fixture_open("tests/data/screen/store.ini");
    fixture->view.ready = false;
    fixture->view.utc_ns = 0;
    check_picture(&fixture->view, "ledgers", "waiting", NULL, SMALL);
    fixture_close(fixture);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_ledgers_in_every_situation_and_size),
        cmocka_unit_test(test_the_hall_when_well_in_danger_unknown_and_without_a_source),
        cmocka_unit_test(test_the_lists),
        cmocka_unit_test(test_where_a_derived_number_and_a_reading_come_from),
        cmocka_unit_test(test_before_the_first_frame_it_says_so),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
