/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Time. RFC 3339, section 5.8, has the examples and their meaning in UTC; the calendar is
 * compared with the C library's gmtime_r, which counts its own way.
 */
#include <time.h>

#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>
#include <string.h>

#include <cmocka.h>

#include "ullage/base.h"

#include "../near.h"

static int64_t parsed(const char *text)
{
    int64_t ns = 0;
    struct error err = {0};
    if (time_parse(text, &ns, &err) != 0)
        fail_msg("'%s': %s", text, err.text);
    return ns;
}

static void test_examples_of_rfc_3339_parse(void **state)
{
    (void)state;
    /* Seconds since the epoch by GNU date -u -d; the RFC itself equates the second pair, and
     * says of the leap second that it is the one inserted at the end of 1990. */
    assert_int_equal(parsed("1985-04-12T23:20:50.52Z"), INT64_C(482196050520000000));
    assert_int_equal(parsed("1996-12-19T16:39:57-08:00"), parsed("1996-12-20T00:39:57Z"));
    assert_int_equal(parsed("1996-12-20T00:39:57Z"), 851042397 * NS_PER_S);
    assert_int_equal(parsed("1990-12-31T23:59:60Z"), 662688000 * NS_PER_S);
    assert_int_equal(parsed("1990-12-31T15:59:60-08:00"), parsed("1990-12-31T23:59:60Z"));
    assert_int_equal(parsed("1937-01-01T12:00:27.87+00:20"), INT64_C(-1041337172130000000));
}

static void test_other_spellings_of_a_moment_agree(void **state)
{
    (void)state;
    const int64_t noon = parsed("2026-11-30T12:00:00Z");
    assert_int_equal(parsed("2026-11-30t12:00:00z"), noon);
    assert_int_equal(parsed("2026-11-30 12:00:00Z"), noon);
    assert_int_equal(parsed("2026-11-30T12:00Z"), noon);
    assert_int_equal(parsed("2026-11-30T13:00:00+0100"), noon);
    assert_int_equal(parsed("2026-12-01T02:00:00+14:00"), noon);
    assert_int_equal(parsed("2026-11-30T12:00:00-00:00"), noon);
    assert_int_equal(parsed("2026-11-30T12:00:00,5Z"), noon + NS_PER_S / 2);
    assert_int_equal(parsed("2026-11-30T12:00:00.0000000019Z"), noon + 1);
    assert_int_equal(parsed("2026-11-30"), noon - 43200 * NS_PER_S);
}

static void test_what_is_no_time_is_told_and_changes_nothing(void **state)
{
    (void)state;
    static const char *const bad[] = {
        "",
        "now",
        "2026",
        "2026-11",
        "2026-13-01",
        "2026-00-10",
        "2026-11-31",
        "2026-11-00",
        "2026-02-29",
        "1900-02-29",
        "2026-11-30T24:00:00Z",
        "2026-11-30T23:60:00Z",
        "2026-11-30T23:59:61Z",
        "2026-11-30T12:00:00", /* no offset: whose clock? */
        "2026-11-30T12:00:00+24:00",
        "2026-11-30T12:00:00+01:60",
        "2026-11-30T12:00:00+1",
        "2026-11-30T12:00:00Zulu",
        "2026-11-30T12:00:00.Z",
        "2026-11-30T12:00.5Z", /* half a minute or half a second? */
        "2026-11-30T1:00:00Z",
        "-026-11-30",
        "26-11-30",
        "2026/11/30",
        " 2026-11-30",
        "2026-11-30 ",
        "0001-01-01",
        "1677-01-01",
        "2263-01-01",
        "9999-12-31T23:59:59Z",
    };
    for (size_t i = 0; i < ARRAY_LENGTH(bad); i++) {
        int64_t ns = 42;
        struct error err = {0};
        if (time_parse(bad[i], &ns, &err) != ERR_FORMAT)
            fail_msg("'%s' was taken as a time", bad[i]);
        assert_int_equal(ns, 42);
        assert_int_equal(err.code, ERR_FORMAT);
        assert_true(strlen(err.text) > 0);
        assert_int_equal(time_parse(bad[i], &ns, NULL), ERR_FORMAT);
    }
    int64_t ns;
    assert_int_equal(time_parse("2000-02-29", &ns, NULL), 0);
    assert_int_equal(time_parse("2024-02-29", &ns, NULL), 0);
}

static void test_format_agrees_with_the_c_library_over_the_whole_range(void **state)
{
    (void)state;
    /* A step of a prime number of seconds visits each hour, day and month of 585 years. */
    for (int64_t s = -INT64_C(9223372000); s < INT64_C(9223372000); s += 1000003) {
        struct tm tm;
        time_t moment = (time_t)s;
        char expected[40], text[40];
        assert_non_null(gmtime_r(&moment, &tm));
        assert_true(strftime(expected, sizeof(expected), "%Y-%m-%dT%H:%M:%SZ", &tm) > 0);
        time_format(text, sizeof(text), s * NS_PER_S, 0);
        assert_string_equal(text, expected);
        assert_int_equal(parsed(text), s * NS_PER_S);
    }
}

static void test_format_cuts_decimals_and_never_rounds_into_the_next_second(void **state)
{
    (void)state;
    char text[31];
    time_format(text, sizeof(text), 1999999999, 3);
    assert_string_equal(text, "1970-01-01T00:00:01.999Z");
    time_format(text, sizeof(text), -1, 9);
    assert_string_equal(text, "1969-12-31T23:59:59.999999999Z");
    time_format(text, sizeof(text), 2147483647 * NS_PER_S, 0);
    assert_string_equal(text, "2038-01-19T03:14:07Z");
}

static void test_ends_of_the_range_come_back(void **state)
{
    (void)state;
    static const int64_t ends[] = {INT64_MIN + 2 * NS_PER_S, -1, 0, INT64_MAX - 2 * NS_PER_S};
    for (size_t i = 0; i < ARRAY_LENGTH(ends); i++) {
        char text[31];
        time_format(text, sizeof(text), ends[i], 9);
        assert_int_equal(parsed(text), ends[i]);
    }
    char text[31];
    /* 2^63 ns after the epoch, by GNU date -u -d @9223372036. */
    time_format(text, sizeof(text), INT64_MAX, 9);
    assert_string_equal(text, "2262-04-11T23:47:16.854775807Z");
    time_format(text, sizeof(text), INT64_MIN, 9);
    assert_string_equal(text, "1677-09-21T00:12:43.145224192Z");
}

static void test_seconds_and_nanoseconds_convert_and_saturate(void **state)
{
    (void)state;
    assert_near(time_ns_to_s(1500000000), 1.5, 0);
    assert_near(time_ns_to_s(-1500000000), -1.5, 0);
    assert_int_equal(time_s_to_ns(1.5), 1500000000);
    assert_int_equal(time_s_to_ns(-0.25), -250000000);
    assert_int_equal(time_s_to_ns(1e300), INT64_MAX);
    assert_int_equal(time_s_to_ns(-1e300), INT64_MIN);
    assert_int_equal(time_s_to_ns((double)NAN), INT64_MIN);
}

static void test_clocks_run_forward(void **state)
{
    (void)state;
    int64_t before = time_mono_ns();
    assert_true(time_mono_ns() >= before);
    /* The C library's own clock, to the second. */
    assert_near(time_ns_to_s(time_utc_ns()), (double)time(NULL), 2);
}

static void test_spans_parse_with_or_without_space(void **state)
{
    (void)state;
    static const struct {
        const char *text;
        double span_s;
    } good[] = {
        {"20s",     20     },
        {"10min",   600    },
        {"4h",      14400  },
        {"90d",     7776000},
        {"400 ms",  0.4    },
        {" 1.5 h ", 5400   },
    };
    for (size_t i = 0; i < ARRAY_LENGTH(good); i++) {
        double span_s = 0;
        assert_int_equal(time_parse_span(good[i].text, &span_s, NULL), 0);
        assert_close(span_s, good[i].span_s, 1e-15);
    }
    static const char *const bad[] = {"",         "20", "20 m",   "-4h",  "0s",
                                      "4h 10min", "h",  "1e99 d", "5 kPa"};
    for (size_t i = 0; i < ARRAY_LENGTH(bad); i++) {
        double span_s = 42;
        struct error err = {0};
        assert_int_equal(time_parse_span(bad[i], &span_s, &err), ERR_FORMAT);
        assert_near(span_s, 42, 0);
        assert_true(strlen(err.text) > 0);
    }
}

static void test_spans_print_in_two_parts_at_most(void **state)
{
    (void)state;
    /* The examples of base.h, then the edges between forms. */
    static const struct {
        double span_s;
        const char *text;
    } rows[] = {
        {31 * 3600.0,       "31 h"            },
        {2 * 86400 + 14400, "2 d 4 h"         },
        {250,               "4 min 10 s"      },
        {0.85,              "850 ms"          },
        {0,                 "0 ms"            },
        {0.9996,            "1 s"             },
        {59.4,              "59 s"            },
        {59.6,              "1 min"           },
        {3599,              "1 h"             },
        {3600,              "1 h"             },
        {5400,              "1 h 30 min"      },
        {86399,             "24 h"            },
        {2 * 86400 - 1,     "2 d"             },
        {90 * 86400.0,      "90 d"            },
        {-250,              "-4 min 10 s"     },
        {1e300,             "over 10000 years"},
    };
    for (size_t i = 0; i < ARRAY_LENGTH(rows); i++) {
        char text[40];
        time_format_span(text, sizeof(text), rows[i].span_s);
        assert_string_equal(text, rows[i].text);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_examples_of_rfc_3339_parse),
        cmocka_unit_test(test_other_spellings_of_a_moment_agree),
        cmocka_unit_test(test_what_is_no_time_is_told_and_changes_nothing),
        cmocka_unit_test(test_format_agrees_with_the_c_library_over_the_whole_range),
        cmocka_unit_test(test_format_cuts_decimals_and_never_rounds_into_the_next_second),
        cmocka_unit_test(test_ends_of_the_range_come_back),
        cmocka_unit_test(test_seconds_and_nanoseconds_convert_and_saturate),
        cmocka_unit_test(test_clocks_run_forward),
        cmocka_unit_test(test_spans_parse_with_or_without_space),
        cmocka_unit_test(test_spans_print_in_two_parts_at_most),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
