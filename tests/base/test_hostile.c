/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * What comes from outside may be anything: random bytes, and random mixtures of the pieces that
 * the parsers know, through every parser of base. What they promise (base.h): a refusal changes
 * nothing and has a sentence; what is taken is finite; what is printed is printable. SEED=n
 * repeats a run.
 */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include <cmocka.h>

#include "ullage/base.h"
#include "../near.h"

enum { ROUNDS = 60000 };

static uint64_t generator;

/* xorshift64* (Vigna 2016). */
static uint32_t next(uint32_t below)
{
    generator ^= generator >> 12;
    generator ^= generator << 25;
    generator ^= generator >> 27;
    return (uint32_t)((generator * UINT64_C(2685821657736338717)) >> 33) % below;
}

static void make_text(char *text, size_t size)
{
    static const char *const pieces[] = {
        "1",   "-",    "+",   ".",    "e",       "0x",       "nan",          "inf",
        " ",   "kPa",  "(g)", "/",    "m3",      "%",        "degC",         "s",
        "T",   "Z",    ":",   "2026", "-11",     "-30",      "9999",         "00",
        "60",  "e308", "Nm",  "\t",   "\x1b[2J", "\xc2\x9b", "\xff",         "\xe2\x80\xae",
        "µ",   "°C",   "1/d", "12:3", "E-",      "psi",      "123456789012", ",",
        "min", "d",
    };
    size_t used = 0;
    text[0] = '\0';
    bool bytes = next(4) == 0;
    for (uint32_t left = next(12); left > 0; left--) {
        char one[2] = {(char)(1 + next(255)), '\0'};
        const char *piece = bytes ? one : pieces[next(ARRAY_LENGTH(pieces))];
        if (used + strlen(piece) >= size)
            break;
        text_copy(text + used, size - used, piece);
        used += strlen(piece);
    }
}

static int seed(void **state)
{
    (void)state;
    const char *given = getenv("SEED");
    long number = 20261130;
    if (given != NULL && text_to_long(given, 1, INT32_MAX, &number) != 0)
        return -1;
    print_message("# SEED=%ld\n", number);
    generator = (uint64_t)number;
    return 0;
}

static void expect_printable(const char *text)
{
    while (*text != '\0') {
        uint32_t rune = 0;
        size_t length = text_rune(text, &rune);
        if (length == 0 || rune < 0x20 || (rune >= 0x7F && rune < 0xA0) || rune == 0x202E)
            fail_msg("rune U+%04X or a broken one came through", (unsigned)rune);
        text += length;
    }
}

static void test_any_text_as_a_value_with_unit(void **state)
{
    (void)state;
    int taken = 0;
    for (int i = 0; i < ROUNDS; i++) {
        char text[160];
        struct unit unit = {.scale = 42};
        struct error err = {0};
        double si = 42;
        make_text(text, sizeof(text));
        if (unit_parse_value(text, &unit, &si, &err) == 0) {
            taken++;
            assert_true(isfinite(si));
            assert_true(unit.scale > 0 && unit.dimension < DIMENSION_COUNT);
            /* What is taken once is taken again from its printed form, to the same value. */
            char again[64];
            double si_again;
            snprintf(again, sizeof(again), "%.17g %s", unit_from_si(&unit, si), unit.symbol);
            assert_int_equal(unit_parse_value(again, &unit, &si_again, NULL), 0);
            assert_near(si_again, si, 1e-14 * (fabs(si) + fabs(unit.offset)));
        } else {
            assert_near(si, 42, 0);
            assert_near(unit.scale, 42, 0);
            assert_true(err.text[0] != '\0');
            expect_printable(err.text);
        }
    }
    assert_true(taken > ROUNDS / 200); /* the mixture does reach the inside of the parser */
}

static void test_any_text_as_a_time_or_span(void **state)
{
    (void)state;
    for (int i = 0; i < ROUNDS; i++) {
        char text[160], again[40];
        struct error err = {0};
        int64_t ns = 42, ns_again = 0;
        double span_s = 42;
        make_text(text, sizeof(text));
        /* A date that is nearly right reaches further than pieces at random. */
        if (next(2) == 0)
            snprintf(text, sizeof(text), "%04u-%02u-%02uT%02u:%02u:%02u.%u%c%02u:%02u",
                     (unsigned)next(2400), (unsigned)next(14), (unsigned)next(33),
                     (unsigned)next(26), (unsigned)next(62), (unsigned)next(63),
                     (unsigned)next(1000000), "Z+-"[next(3)], (unsigned)next(25),
                     (unsigned)next(62));
        if (time_parse(text, &ns, &err) == 0) {
            time_format(again, sizeof(again), ns, 9);
            assert_int_equal(time_parse(again, &ns_again, NULL), 0);
            assert_int_equal(ns_again, ns);
        } else {
            assert_int_equal(ns, 42);
            expect_printable(err.text);
        }
        if (time_parse_span(text, &span_s, &err) == 0)
            assert_true(span_s > 0 && isfinite(span_s));
        else
            assert_near(span_s, 42, 0);
        time_format_span(again, sizeof(again), (double)ns);
        assert_true(again[0] != '\0');
    }
}

static void test_any_text_as_a_number_or_for_the_screen(void **state)
{
    (void)state;
    for (int i = 0; i < ROUNDS; i++) {
        char text[160], safe[160], twice[160], cut[9];
        double number = 42;
        long whole = 42;
        make_text(text, sizeof(text));
        if (text_to_double(text, &number) == 0)
            assert_true(isfinite(number));
        else
            assert_near(number, 42, 0);
        if (text_to_long(text, -1000, 1000, &whole) == 0)
            assert_in_range(whole + 1000, 0, 2000);
        else
            assert_int_equal(whole, 42);
        text_printable(safe, sizeof(safe), text);
        expect_printable(safe);
        text_printable(twice, sizeof(twice), safe);
        assert_string_equal(twice, safe);
        text_printable(cut, sizeof(cut), text);
        expect_printable(cut);
        assert_memory_equal(cut, safe, strlen(cut));
        assert_int_equal(text_distance(text, text), 0);
        assert_int_equal(text_distance(text, safe), text_distance(safe, text));
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_any_text_as_a_value_with_unit),
        cmocka_unit_test(test_any_text_as_a_time_or_span),
        cmocka_unit_test(test_any_text_as_a_number_or_for_the_screen),
    };
    return cmocka_run_group_tests(tests, seed, NULL);
}
