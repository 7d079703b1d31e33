/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The canvas: whatever text comes, each row stays as wide as the canvas, and nothing but what
 * can be shown gets through.
 */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include <locale.h>
#include <stdlib.h>
#include <string.h>
#include <wchar.h>

#include "../../src/screen/canvas.h"

static struct canvas *canvas_of(int columns, int rows, bool ascii)
{
    struct canvas *canvas = NULL;
    assert_int_equal(canvas_create(columns, rows, ascii, &canvas, NULL), 0);
    return canvas;
}

/* The canvas as text, to be freed. */
static char *text_of(const struct canvas *canvas, bool styles)
{
    char *text = NULL;
    size_t size = 0;
    FILE *out = open_memstream(&text, &size);
    assert_non_null(out);
    if (styles)
        canvas_write_styles(canvas, out);
    else
        canvas_write(canvas, out);
    assert_int_equal(fclose(out), 0);
    return text;
}

static void expect_text(const struct canvas *canvas, const char *expected)
{
    char *text = text_of(canvas, false);
    assert_string_equal(text, expected);
    free(text);
}

static void test_a_canvas_of_an_impossible_size_is_refused_with_the_limits(void **unused)
{
    (void)unused;
    static const int sizes[][2] = {
        {0,   5  },
        {5,   0  },
        {-1,  -1 },
        {501, 5  },
        {5,   201}
    };
    for (size_t i = 0; i < ARRAY_LENGTH(sizes); i++) {
        struct canvas *canvas = NULL;
        struct error err = {0};
        assert_int_equal(canvas_create(sizes[i][0], sizes[i][1], false, &canvas, &err),
                         ERR_ARGUMENT);
        assert_non_null(strstr(err.text, "500x200"));
        assert_null(canvas);
    }
    canvas_free(NULL);
}

static void test_text_is_clipped_at_the_edges_and_its_end_is_told(void **unused)
{
    (void)unused;
    struct canvas *canvas = canvas_of(6, 2, false);
    assert_int_equal(canvas_text(canvas, 0, 3, STYLE_NORMAL, "abcdef"), 9);
    assert_int_equal(canvas_text(canvas, 1, -2, STYLE_NORMAL, "xyz"), 1);
    assert_int_equal(canvas_text(canvas, 2, 0, STYLE_NORMAL, "below"), 5);
    assert_int_equal(canvas_text(canvas, -1, 0, STYLE_NORMAL, "above"), 5);
    expect_text(canvas, "   abc\nz\n");
    assert_int_equal(canvas_lost(canvas), 3);
    canvas_clear(canvas);
    expect_text(canvas, "\n\n");
    assert_int_equal(canvas_lost(canvas), 0);
    canvas_free(canvas);
}

static void test_outside_the_clip_nothing_is_drawn(void **unused)
{
    (void)unused;
    struct canvas *canvas = canvas_of(8, 3, false);
    const struct area area = {.row = 1, .column = 2, .rows = 1, .columns = 4};
    canvas_clip(canvas, &area);
    for (int row = 0; row < 3; row++)
        canvas_text(canvas, row, 0, STYLE_NORMAL, "abcdefgh");
    expect_text(canvas, "\n  cdef\n\n");
    canvas_clip(canvas, NULL);
    canvas_text(canvas, 2, 0, STYLE_NORMAL, "abcdefgh");
    expect_text(canvas, "\n  cdef\nabcdefgh\n");
    canvas_free(canvas);
}

static void test_control_characters_and_broken_utf8_never_reach_a_cell(void **unused)
{
    (void)unused;
    struct canvas *canvas = canvas_of(20, 1, false);
    /* An escape code, a C1 control (CSI as one rune), an override of direction, lone bytes. */
    canvas_text(canvas, 0, 0, STYLE_NORMAL,
                "a\033[2Jb\xC2\x9B"
                "c\xE2\x80\xAE"
                "d\xFF\xC3");
    expect_text(canvas, "a?[2Jb?c?d??\n");
    canvas_free(canvas);
}

static void test_a_wide_character_is_never_halved(void **unused)
{
    (void)unused;
    struct canvas *canvas = canvas_of(6, 1, false);
    assert_int_equal(canvas_text(canvas, 0, 1, STYLE_NORMAL, "液a"), 4);
    assert_int_equal(canvas_cell(canvas, 0, 2)->rune, 0);
    expect_text(canvas, " 液a\n");
    canvas_text(canvas, 0, 2, STYLE_NORMAL, "b"); /* on its right half */
    expect_text(canvas, "  ba\n");
    canvas_clear(canvas);
    canvas_text(canvas, 0, 1, STYLE_NORMAL, "液");
    canvas_text(canvas, 0, 1, STYLE_NORMAL, "b"); /* on its left half */
    expect_text(canvas, " b\n");
    canvas_clear(canvas);
    canvas_text(canvas, 0, 2, STYLE_NORMAL, "液");
    canvas_text(canvas, 0, 1, STYLE_NORMAL, "氩"); /* over its left half */
    expect_text(canvas, " 氩\n");
    canvas_clear(canvas);
    canvas_text(canvas, 0, 5, STYLE_NORMAL, "液"); /* no room for the right half */
    expect_text(canvas, "\n");
    canvas_free(canvas);
}

static void test_a_combining_mark_takes_no_column(void **unused)
{
    (void)unused;
    struct canvas *canvas = canvas_of(6, 1, false);
    assert_int_equal(canvas_text(canvas, 0, 0, STYLE_NORMAL, "e\xCC\x81x"), 2);
    expect_text(canvas, "ex\n");
    canvas_free(canvas);
}

/* Unicode Standard Annex 11, East Asian Width: U+4E00 W, U+FF21 F, U+AC00 W, U+1F600 W are two
 * columns; U+00B1 (ambiguous outside East Asian text), U+0041, U+25C6 one. U+0301 is a mark. */
static void test_widths_follow_the_unicode_annex(void **unused)
{
    (void)unused;
    static const struct {
        uint32_t rune;
        int width;
    } known[] = {
        {0x41,    1},
        {0xB1,    1},
        {0x301,   0},
        {0x2588,  1},
        {0x25C6,  1},
        {0x4E00,  2},
        {0xAC00,  2},
        {0xFF21,  2},
        {0x1F600, 2},
    };
    for (size_t i = 0; i < ARRAY_LENGTH(known); i++)
        assert_int_equal(rune_width(known[i].rune), known[i].width);
}

/* The C library's table is an independent one. Where it knows a rune of the blocks that plants
 * are named in, ours says the same. */
static void test_widths_agree_with_the_c_library_for_letters_and_drawing(void **unused)
{
    (void)unused;
    if (setlocale(LC_CTYPE, "C.UTF-8") == NULL)
        skip();
    static const uint32_t ranges[][2] = {
        {0x20,   0x7E  }, /* ASCII */
        {0xA1,   0x17F }, /* Latin */
        {0x300,  0x36F }, /* marks */
        {0x370,  0x3FF }, /* Greek */
        {0x400,  0x482 }, /* Cyrillic */
        {0x2190, 0x21FF}, /* arrows */
        {0x2500, 0x25FC}, /* drawing, blocks, shapes */
        {0x3041, 0x30FF}, /* kana */
        {0x4E00, 0x9FFF}, /* unified ideographs */
        {0xAC00, 0xD7A3}, /* Hangul */
        {0xFF01, 0xFF60}, /* full width */
    };
    int compared = 0;
    for (size_t i = 0; i < ARRAY_LENGTH(ranges); i++)
        for (uint32_t rune = ranges[i][0]; rune <= ranges[i][1]; rune++) {
            int theirs = wcwidth((wchar_t)rune);
            if (theirs < 0 || rune == 0xAD || (theirs == 0 && rune > 0x36F))
                continue; /* not assigned, soft hyphen, marks inside other blocks */
            compared++;
            if (rune_width(rune) != theirs)
                fail_msg("U+%04X is %d wide, not %d", (unsigned)rune, theirs, rune_width(rune));
        }
    assert_true(compared > 30000);
    setlocale(LC_CTYPE, "C");
}

static void test_ascii_keeps_the_meaning_and_nothing_else_gets_through(void **unused)
{
    (void)unused;
    struct canvas *canvas = canvas_of(30, 1, true);
    assert_int_equal(canvas_text(canvas, 0, 0, STYLE_NORMAL, "5.39 ± 0.13 µ[|◆:]液é…"), 22);
    expect_text(canvas, "5.39 +- 0.13 u[|o:]?"
                        "?>\n");
    assert_int_equal(canvas_width(canvas, "5.39 ± 0.13 µ[|◆:]液é…"), 22);
    canvas_free(canvas);
}

static void test_what_does_not_fit_gives_way_to_an_ellipsis(void **unused)
{
    (void)unused;
    struct canvas *canvas = canvas_of(12, 3, false);
    canvas_fit(canvas, 0, 0, 12, STYLE_NORMAL, "twelve chars");
    canvas_fit(canvas, 1, 0, 8, STYLE_NORMAL, "too long for it");
    canvas_fit(canvas, 2, 0, 4, STYLE_NORMAL, "液氩液氩");
    expect_text(canvas, "twelve chars\ntoo lon…\n液…\n");
    assert_int_equal(canvas_lost(canvas), 0);
    canvas_free(canvas);
}

static void test_the_style_plane_has_a_mark_for_every_cell(void **unused)
{
    (void)unused;
    struct canvas *canvas = canvas_of(4, 2, false);
    canvas_text(canvas, 0, 1, STYLE_DANGER, "ab");
    canvas_text(canvas, 1, 0, STYLE_STALE, "c");
    char *text = text_of(canvas, true);
    assert_string_equal(text, ".DD.\n~...\n");
    free(text);
    canvas_free(canvas);
}

static void test_wrapping_breaks_at_blanks_and_always_goes_on(void **unused)
{
    (void)unused;
    struct canvas *canvas = canvas_of(40, 2, false);
    assert_int_equal(wrap_length(canvas, "in 6.64 kW", 7), 7);
    assert_int_equal(wrap_length(canvas, "in 6.64 kW", 6), 2);
    assert_int_equal(wrap_length(canvas, "unbreakable", 4), 4);
    assert_int_equal(wrap_length(canvas, "液氩", 3), 3); /* one of them, three bytes */
    assert_int_equal(wrap_length(canvas, "液", 1), 3);   /* or it would never end */
    assert_int_equal(wrap_length(canvas, "", 4), 0);
    canvas_free(canvas);
}

/* Any text at any place, seeded: a wide rune is followed by its right half, a right half
 * follows one, so each row is exactly as wide as the canvas; in ASCII every cell is printable
 * ASCII. */
static void test_any_text_anywhere_leaves_whole_rows(void **unused)
{
    (void)unused;
    static const char *const bits[] = {"a",    "±",    "液", "氩", "e\xCC\x81",
                                       "\033", "\xFF", "◆",  " ",  "\xF0\x9F\x98\x80"};
    srand(20261130);
    for (int ascii = 0; ascii < 2; ascii++) {
        struct canvas *canvas = canvas_of(17, 3, ascii != 0);
        for (int turn = 0; turn < 20000; turn++) {
            char text[64] = "";
            for (int i = rand() % 8; i >= 0; i--)
                strcat(text, bits[(size_t)rand() % ARRAY_LENGTH(bits)]);
            canvas_text(canvas, rand() % 5 - 1, rand() % 24 - 4,
                        (enum style)(rand() % STYLE_COUNT), text);
            for (int row = 0; row < 3; row++)
                for (int column = 0; column < 17; column++) {
                    uint32_t rune = canvas_cell(canvas, row, column)->rune;
                    uint32_t next =
                        column + 1 < 17 ? canvas_cell(canvas, row, column + 1)->rune : ' ';
                    bool wide = rune != 0 && rune_width(rune) == 2;
                    assert_int_equal(wide, next == 0);
                    assert_true(column > 0 || rune != 0);
                    if (ascii != 0)
                        assert_true(rune >= 0x20 && rune < 0x7F);
                }
        }
        canvas_free(canvas);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_a_canvas_of_an_impossible_size_is_refused_with_the_limits),
        cmocka_unit_test(test_text_is_clipped_at_the_edges_and_its_end_is_told),
        cmocka_unit_test(test_outside_the_clip_nothing_is_drawn),
        cmocka_unit_test(test_control_characters_and_broken_utf8_never_reach_a_cell),
        cmocka_unit_test(test_a_wide_character_is_never_halved),
        cmocka_unit_test(test_a_combining_mark_takes_no_column),
        cmocka_unit_test(test_widths_follow_the_unicode_annex),
        cmocka_unit_test(test_widths_agree_with_the_c_library_for_letters_and_drawing),
        cmocka_unit_test(test_ascii_keeps_the_meaning_and_nothing_else_gets_through),
        cmocka_unit_test(test_what_does_not_fit_gives_way_to_an_ellipsis),
        cmocka_unit_test(test_the_style_plane_has_a_mark_for_every_cell),
        cmocka_unit_test(test_wrapping_breaks_at_blanks_and_always_goes_on),
        cmocka_unit_test(test_any_text_anywhere_leaves_whole_rows),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
