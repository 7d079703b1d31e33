/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * CSV by RFC 4180 (rules 1 to 7 of its section 2; the examples of that section are used), and
 * what is read beyond it.
 */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include <stdlib.h>
#include <string.h>

#include "ullage/base.h"

/* Rows as "line:field|field;" with "!" for a row that cannot be read. */
static void expect_bytes(const char *bytes, size_t length, const char *expected)
{
    FILE *file = tmpfile();
    assert_non_null(file);
    assert_int_equal(fwrite(bytes, 1, length, file), length);
    rewind(file);
    struct csv *csv = csv_create(file);
    assert_non_null(csv);
    char seen[400] = "";
    for (int rows = 0; rows < 100; rows++) {
        struct error err = {0};
        int code = csv_read(csv, &err);
        if (code == 0)
            break;
        size_t used = strlen(seen);
        if (code < 0) {
            assert_int_equal(code, ERR_FORMAT);
            assert_memory_equal(err.text, "line ", 5);
            snprintf(seen + used, sizeof(seen) - used, "!;");
            continue;
        }
        snprintf(seen + used, sizeof(seen) - used, "%ld:", csv_line(csv));
        for (int i = 0; i < csv_count(csv); i++) {
            used = strlen(seen);
            snprintf(seen + used, sizeof(seen) - used, "%s%s", csv_field(csv, i),
                     i + 1 < csv_count(csv) ? "|" : ";");
        }
    }
    assert_string_equal(seen, expected);
    csv_free(csv);
    fclose(file);
}

static void expect(const char *text, const char *expected)
{
    expect_bytes(text, strlen(text), expected);
}

static void test_the_rules_of_the_standard_are_kept(void **unused)
{
    (void)unused;
    expect("aaa,bbb,ccc\r\nzzz,yyy,xxx\r\n", "1:aaa|bbb|ccc;2:zzz|yyy|xxx;");
    expect("aaa,bbb,ccc\r\nzzz,yyy,xxx", "1:aaa|bbb|ccc;2:zzz|yyy|xxx;");
    expect("\"aaa\",\"b\r\nbb\",\"ccc\"\r\nzzz,yyy,xxx", "1:aaa|b\nbb|ccc;3:zzz|yyy|xxx;");
    expect("\"aaa\",\"b\"\"bb\",\"c,c\"", "1:aaa|b\"bb|c,c;");
    expect("a,,\n,,\n", "1:a||;2:||;");
    expect("\"\"\n", "1:;");
}

static void test_more_than_the_standard_is_read(void **unused)
{
    (void)unused;
    expect("\xef\xbb\xbf"
           "a,b\n1,2\n",
           "1:a|b;2:1|2;");
    expect("a,b\r1,2\r", "1:a|b;2:1|2;");
    expect("# note, \"open\n\n  \t\n a ,\t\"b\" \n", "4:a|b;");
    expect("5\" pipe,6 \"x\"\n", "1:5\" pipe|6 \"x\";");
    expect("", "");
    expect("\n\n#", "");
}

static void test_a_row_that_cannot_be_read_costs_that_row_only(void **unused)
{
    (void)unused;
    expect("\"a\"b,c\n1,2\n", "!;2:1|2;");
    expect("1,2\n\"never closed\n3,4\n", "1:1|2;!;");
    expect_bytes("1,\0,3\n4,5\n", 10, "!;2:4|5;");
    expect_bytes("1,\"\0\",3\n4,5\n", 12, "!;2:4|5;");
}

static void test_an_endless_row_is_refused_in_bounded_memory(void **unused)
{
    (void)unused;
    static const char *const patterns[] = {"x", ",", "\"x", " "};
    for (size_t i = 0; i < ARRAY_LENGTH(patterns); i++) {
        FILE *file = tmpfile();
        assert_non_null(file);
        fputs(patterns[i], file);
        for (long k = 0; k < 2L * CSV_ROW_MAX; k++)
            putc(patterns[i][strlen(patterns[i]) - 1], file);
        fputs("\n1,2\n", file);
        rewind(file);
        struct csv *csv = csv_create(file);
        struct error err = {0};
        assert_non_null(csv);
        if (patterns[i][0] != ' ') /* blanks alone are an empty line */
            assert_int_equal(csv_read(csv, &err), ERR_FORMAT);
        assert_int_equal(csv_read(csv, &err), 1);
        assert_string_equal(csv_field(csv, 1), "2");
        assert_string_equal(csv_field(csv, 2), "");
        assert_string_equal(csv_field(csv, -1), "");
        csv_free(csv);
        fclose(file);
    }
}

static void test_columns_are_found_by_name(void **unused)
{
    (void)unused;
    FILE *file = tmpfile();
    assert_non_null(file);
    fputs("time, PT-101 [kPa(g)]\n", file);
    rewind(file);
    struct csv *csv = csv_create(file);
    assert_non_null(csv);
    assert_int_equal(csv_read(csv, NULL), 1);
    assert_int_equal(csv_find(csv, "pt-101 [kPa(g)]"), 1);
    assert_int_equal(csv_find(csv, "PT-102"), -1);
    csv_free(csv);
    fclose(file);
}

static void test_what_is_written_is_read_back_the_same(void **unused)
{
    (void)unused;
    static const char *const texts[] = {"plain", "a,b", "say \"so\"", " edge",
                                        "edge ", "#1",  "two\nlines", ""};
    FILE *file = tmpfile();
    assert_non_null(file);
    for (size_t i = 0; i < ARRAY_LENGTH(texts); i++) {
        if (i > 0)
            putc(',', file);
        csv_write(file, texts[i]);
    }
    rewind(file);
    struct csv *csv = csv_create(file);
    assert_non_null(csv);
    assert_int_equal(csv_read(csv, NULL), 1);
    assert_int_equal(csv_count(csv), ARRAY_LENGTH(texts));
    for (size_t i = 0; i < ARRAY_LENGTH(texts); i++)
        assert_string_equal(csv_field(csv, (int)i), texts[i]);
    csv_free(csv);
    fclose(file);
}

static void test_numbers_are_short_and_read_back_bit_for_bit(void **unused)
{
    (void)unused;
    static const struct {
        double value;
        const char *text;
    } table[] = {
        {0.1,       "0.1"                },
        {1e5,       "100000"             },
        {1.0 / 3,   "0.3333333333333333" },
        {0.1 + 0.2, "0.30000000000000004"},
        {-2.5e-300, "-2.5e-300"          },
        {0,         "0"                  }
    };
    for (size_t i = 0; i < ARRAY_LENGTH(table); i++) {
        char text[40];
        csv_number(text, sizeof(text), table[i].value);
        assert_string_equal(text, table[i].text);
        assert_true(strtod(text, NULL) == table[i].value);
    }
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_the_rules_of_the_standard_are_kept),
        cmocka_unit_test(test_more_than_the_standard_is_read),
        cmocka_unit_test(test_a_row_that_cannot_be_read_costs_that_row_only),
        cmocka_unit_test(test_an_endless_row_is_refused_in_bounded_memory),
        cmocka_unit_test(test_columns_are_found_by_name),
        cmocka_unit_test(test_what_is_written_is_read_back_the_same),
        cmocka_unit_test(test_numbers_are_short_and_read_back_bit_for_bit),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
