/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Text. UTF-8 well-formedness: The Unicode Standard, chapter 3, table 3-7, and RFC 3629.
 * Bidirectional controls: Unicode Standard Annex 9. Control sets C0 and C1: ECMA-48.
 */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>
#include <string.h>

#include <cmocka.h>

#include "ullage/base.h"

#include "../near.h"

static void test_copy_and_format_say_when_they_cut(void **state)
{
    (void)state;
    char dst[5];
    assert_true(text_copy(dst, sizeof(dst), "four"));
    assert_string_equal(dst, "four");
    assert_false(text_copy(dst, sizeof(dst), "fiver"));
    assert_string_equal(dst, "five");
    assert_true(text_copy(dst, 1, ""));
    assert_false(text_copy(dst, 1, "a"));
    assert_string_equal(dst, "");
    assert_true(text_format(dst, sizeof(dst), "%d", 1234));
    assert_false(text_format(dst, sizeof(dst), "%d", 12345));
    assert_string_equal(dst, "1234");
}

static void test_runes_follow_table_3_7_of_unicode(void **state)
{
    (void)state;
    /* First and last of each row of the table, and their neighbours outside. */
    static const struct {
        const char *bytes;
        size_t length;
        uint32_t rune;
    } rows[] = {
        {"A",                1, 0x41    },
        {"\x7f",             1, 0x7F    },
        {"\xc2\x80",         2, 0x80    },
        {"\xdf\xbf",         2, 0x7FF   },
        {"\xe0\xa0\x80",     3, 0x800   },
        {"\xed\x9f\xbf",     3, 0xD7FF  },
        {"\xee\x80\x80",     3, 0xE000  },
        {"\xef\xbf\xbf",     3, 0xFFFF  },
        {"\xf0\x90\x80\x80", 4, 0x10000 },
        {"\xf4\x8f\xbf\xbf", 4, 0x10FFFF},
        {"\x80",             0, 0       }, /* a continuation alone */
        {"\xc0\x80",         0, 0       }, /* overlong */
        {"\xc1\xbf",         0, 0       },
        {"\xe0\x9f\xbf",     0, 0       },
        {"\xf0\x8f\xbf\xbf", 0, 0       },
        {"\xed\xa0\x80",     0, 0       }, /* a surrogate */
        {"\xed\xbf\xbf",     0, 0       },
        {"\xf4\x90\x80\x80", 0, 0       }, /* beyond U+10FFFF */
        {"\xf5\x80\x80\x80", 0, 0       },
        {"\xfe",             0, 0       },
        {"\xff",             0, 0       },
        {"\xc3",             0, 0       }, /* cut short by the end */
        {"\xe2\x82",         0, 0       },
        {"\xf0\x9f\x98",     0, 0       },
        {"\xe2\x28\xa1",     0, 0       }, /* a wrong byte inside */
    };
    for (size_t i = 0; i < ARRAY_LENGTH(rows); i++) {
        uint32_t rune = 0;
        assert_int_equal(text_rune(rows[i].bytes, &rune), rows[i].length);
        assert_int_equal(rune, rows[i].rune);
    }
}

static void test_printable_lets_no_control_or_override_through(void **state)
{
    (void)state;
    static const struct {
        const char *raw, *safe;
    } rows[] = {
        {"plain ASCII ~",                               "plain ASCII ~"},
        {"\xc2\xb0 \xc2\xb1 \xe2\x82\x82 \xe6\xb0\xae",
         "\xc2\xb0 \xc2\xb1 \xe2\x82\x82 \xe6\xb0\xae"                 },
        {"\x1b[31mred\x1b[0m",                          "?[31mred?[0m" }, /* ESC */
        {"a\tb\nc\rd\be\x07",                           "a?b?c?d?e?"   },
        {"\x7f",                                        "?"            },
        {"\xc2\x9b"
         "31m",                                "?31m"         }, /* CSI as C1 */
        {"\xc2\x80\xc2\x9f\xc2\xa0",                    "??\xc2\xa0"   },
        {"ok\xe2\x80\xaetxt",                           "ok?txt"       }, /* U+202E, override */
        {"\xe2\x80\xaa\xe2\x80\xac",                    "??"           },
        {"\xe2\x81\xa6\xe2\x81\xa9",                    "??"           }, /* isolates */
        {"\xe2\x80\x8f\xd8\x9c",                        "??"           }, /* marks */
        {"\xe2\x80\xa8",                                "?"            }, /* line separator */
        {"\xff\xfe"
         "a\xc3",                              "??a?"         },
        {"\xe2\x82"
         "x",                                  "??x"          },
        {"\xed\xa0\x80",                                "???"          },
        {"",                                            ""             },
    };
    for (size_t i = 0; i < ARRAY_LENGTH(rows); i++) {
        char dst[64];
        text_printable(dst, sizeof(dst), rows[i].raw);
        assert_string_equal(dst, rows[i].safe);
    }
}

static void test_printable_holds_for_every_pair_of_bytes(void **state)
{
    (void)state;
    for (int a = 1; a < 256; a++) {
        for (int b = 0; b < 256; b++) {
            char raw[] = {(char)a, (char)b, 'z', '\0'}, dst[8];
            text_printable(dst, sizeof(dst), raw);
            for (const char *s = dst; *s != '\0';) {
                uint32_t rune = 0;
                size_t length = text_rune(s, &rune);
                assert_true(length > 0);
                assert_true(rune >= 0x20 && (rune < 0x7F || rune >= 0xA0));
                s += length;
            }
        }
    }
}

static void test_printable_never_cuts_a_rune_in_half(void **state)
{
    (void)state;
    char dst[4];
    text_printable(dst, sizeof(dst), "ab\xc2\xb0");
    assert_string_equal(dst, "ab");
    text_printable(dst, 1, "x");
    assert_string_equal(dst, "");
}

static void test_trim_keeps_the_inside(void **state)
{
    (void)state;
    char text[] = " \t a b \r\n", nothing[] = "  ", empty[] = "";
    assert_string_equal(text_trim(text), "a b");
    assert_string_equal(text_trim(nothing), "");
    assert_string_equal(text_trim(empty), "");
}

static void test_double_takes_decimal_numbers_only(void **state)
{
    (void)state;
    static const struct {
        const char *text;
        double value;
    } good[] = {
        {"0",      0   },
        {"-0.5",   -0.5},
        {"+3",     3   },
        {".25",    0.25},
        {"1.",     1   },
        {"1e3",    1000},
        {"1E-3",   1e-3},
        {"2.5e+2", 250 },
        {"0100",   100 },
        {"1e-400", 0   },
    };
    for (size_t i = 0; i < ARRAY_LENGTH(good); i++) {
        double value = -99;
        assert_int_equal(text_to_double(good[i].text, &value), 0);
        assert_near(value, good[i].value, 0);
    }
    static const char *const bad[] = {"",     " 1",       "1 ",   "nan", "NaN",   "inf",
                                      "-inf", "infinity", "0x10", "1e",  "1e+",   "1.2.3",
                                      "--1",  "+-1",      "1-2",  "e5",  ".",     "-",
                                      "1,5",  "1_0",      "1d3",  "1f",  "0x1p3", "+ 1"};
    for (size_t i = 0; i < ARRAY_LENGTH(bad); i++) {
        double value = -99;
        assert_int_equal(text_to_double(bad[i], &value), ERR_FORMAT);
        assert_near(value, -99, 0);
    }
    double value = -99;
    assert_int_equal(text_to_double("1e400", &value), ERR_RANGE);
    assert_int_equal(text_to_double("-1e400", &value), ERR_RANGE);
    assert_near(value, -99, 0);
}

static void test_long_takes_decimal_and_hex_within_bounds(void **state)
{
    (void)state;
    long value = -99;
    assert_int_equal(text_to_long("0x1F", 0, 100, &value), 0);
    assert_int_equal(value, 31);
    assert_int_equal(text_to_long("010", 0, 100, &value), 0); /* no octal */
    assert_int_equal(value, 10);
    assert_int_equal(text_to_long("-5", -5, 5, &value), 0);
    assert_int_equal(value, -5);
    assert_int_equal(text_to_long("65535", 0, 65535, &value), 0);
    value = -99;
    assert_int_equal(text_to_long("65536", 0, 65535, &value), ERR_RANGE);
    assert_int_equal(text_to_long("-6", -5, 5, &value), ERR_RANGE);
    assert_int_equal(text_to_long("99999999999999999999", INT64_MIN, INT64_MAX, &value),
                     ERR_RANGE);
    static const char *const bad[] = {"",    " 1",  "1 ", "0x", "0xg",
                                      "1.0", "1e3", "x",  "-",  "+-1"};
    for (size_t i = 0; i < ARRAY_LENGTH(bad); i++)
        assert_int_equal(text_to_long(bad[i], -100, 100, &value), ERR_FORMAT);
    assert_int_equal(value, -99);
}

static void test_distance_matches_textbook_pairs(void **state)
{
    (void)state;
    /* kitten/sitting and Saturday/Sunday are the usual textbook pairs of Levenshtein's
     * distance; CA/ABC is 3 by optimal string alignment (no edit between swapped neighbours).
     */
    assert_int_equal(text_distance("kitten", "sitting"), 3);
    assert_int_equal(text_distance("Saturday", "Sunday"), 3);
    assert_int_equal(text_distance("CA", "ABC"), 3);
    assert_int_equal(text_distance("levle", "level"), 1);
    assert_int_equal(text_distance("kPa", "KPA"), 0);
    assert_int_equal(text_distance("", "abc"), 3);
    assert_int_equal(text_distance("abc", ""), 3);
}

static void test_distance_bears_any_length(void **state)
{
    (void)state;
    char longer[4000];
    memset(longer, 'a', sizeof(longer) - 1);
    longer[sizeof(longer) - 1] = '\0';
    assert_int_equal(text_distance(longer, longer), 0);
    assert_true(text_distance(longer, "a") > 3000);
}

static void test_nearest_finds_the_slip_but_not_the_stranger(void **state)
{
    (void)state;
    static const char *const words[] = {"pressure", NULL, "temperature", "level", "p"};
    assert_string_equal(text_nearest("presure", words, ARRAY_LENGTH(words)), "pressure");
    assert_string_equal(text_nearest("Levle", words, ARRAY_LENGTH(words)), "level");
    assert_string_equal(text_nearest("temprature", words, ARRAY_LENGTH(words)), "temperature");
    assert_null(text_nearest("humidity", words, ARRAY_LENGTH(words)));
    assert_null(text_nearest("level", words, 0));
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_copy_and_format_say_when_they_cut),
        cmocka_unit_test(test_runes_follow_table_3_7_of_unicode),
        cmocka_unit_test(test_printable_lets_no_control_or_override_through),
        cmocka_unit_test(test_printable_holds_for_every_pair_of_bytes),
        cmocka_unit_test(test_printable_never_cuts_a_rune_in_half),
        cmocka_unit_test(test_trim_keeps_the_inside),
        cmocka_unit_test(test_double_takes_decimal_numbers_only),
        cmocka_unit_test(test_long_takes_decimal_and_hex_within_bounds),
        cmocka_unit_test(test_distance_matches_textbook_pairs),
        cmocka_unit_test(test_distance_bears_any_length),
        cmocka_unit_test(test_nearest_finds_the_slip_but_not_the_stranger),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
