/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The plant file: what is right is read, what is wrong is told with its line and the mend, and
 * nothing that a file can hold does harm. The files are made here; the demo's own is read too.
 */
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include <cmocka.h>

#include "ullage/plant.h"

static struct problems problems;
static char folder[] = "/tmp/ullage-plant-XXXXXX";

static const char *write_file(const char *name, const void *bytes, size_t size)
{
    static char path[128];
    snprintf(path, sizeof(path), "%s/%s", folder, name);
    FILE *file = fopen(path, "wb");
    assert_non_null(file);
    assert_int_equal(fwrite(bytes, 1, size, file), size);
    assert_int_equal(fclose(file), 0);
    return path;
}

static int read_bytes(const void *bytes, size_t size, struct plant **out)
{
    *out = NULL;
    return plant_read(write_file("plant.ini", bytes, size), out, &problems);
}

static int read_text(const char *text, struct plant **out)
{
    return read_bytes(text, strlen(text), out);
}

/* A problem in that line whose sentence holds the text. */
static bool told(int line, const char *text)
{
    for (int i = 0; i < problems.count; i++)
        if (problems.at[i].line == line && strstr(problems.at[i].text, text) != NULL)
            return true;
    return false;
}

static void expect(const char *file, int line, const char *text)
{
    struct plant *plant;
    int code = read_text(file, &plant);
    if (code == 0)
        plant_free(plant);
    if (code != 0 && told(line, text))
        return;
    for (int i = 0; i < problems.count; i++)
        print_message("%d: %s\n", problems.at[i].line, problems.at[i].text);
    fail_msg("line %d should be told '%s' (code %d) in:\n%s", line, text, code, file);
}

#define SITE "[site]\nname = Test\nbarometer = 101.3 kPa\n"
#define LINK "[link a]\nhost = 127.0.0.1\n"
#define POINT(name, unit) "[point " name "]\nlink = a\nread = input 0 f32\nunit = " unit "\n"

static void test_demo_file_has_no_problem(void **state)
{
    struct plant *plant;
    (void)state;
    assert_int_equal(plant_read("config/tarn-hollow.ini", &plant, &problems), 0);
    assert_int_equal(problems.count, 0);
    assert_int_equal(plant->vessel_count, 1);
    assert_string_equal(plant->vessel[0].name, "store");
    assert_ptr_equal(plant->vessel[0].fluid, fluid_find("argon"));
    assert_true(fabs(shape_volume_m3(&plant->vessel[0].shape) - 9.0 * 6.5 * 6.0) < 1e-9);
    assert_int_equal(plant->vessel[0].condenser, 0);
    assert_int_equal(plant->vessel[0].purifier, 0);
    int tag = plant_tag_find(plant, "PT-101");
    assert_true(tag >= 0 && plant_tag_is_point(plant, tag));
    assert_true(plant->point[tag].unit.gauge);
    assert_true(plant->vessel[0].relief.gauge);
    assert_true(fabs(plant->vessel[0].relief.value - 25e3) < 1e-9);
    assert_true(plant_tag_find(plant, "store.heat_load") >= plant->point_count);
    assert_int_equal(plant_tag_find(plant, "store.heat_lode"), -1);
    for (int i = 0; i < plant_tag_count(plant); i++)
        assert_int_equal(plant_tag_find(plant, plant_tag_name(plant, i)), i);
    plant_free(plant);
}

static void test_plant_of_one_link_and_one_point_is_a_plant(void **state)
{
    struct plant *plant;
    (void)state;
    assert_int_equal(read_text(SITE LINK POINT("p", "kPa(g)") "u = 0.05 kPa\n", &plant), 0);
    assert_int_equal(plant->link[0].port, 502);
    assert_int_equal(plant->link[0].unit_id, 1);
    assert_true(fabs(plant->point[0].u.absolute - 50) < 1e-9);
    /* A tenth of u or finer: 0.05 kPa gives 0.001 kPa. */
    assert_true(fabs(plant->point[0].resolution - 0.001) < 1e-15);
    assert_true(fabs(point_round(&plant->point[0], 12345.4) - 12345) < 1e-6);
    assert_true(fabs(plant->point[0].stale_s - 5) < 1e-12);
    plant_free(plant);
}

static void test_uncertainty_parts_combine_in_quadrature(void **state)
{
    struct plant *plant;
    (void)state;
    assert_int_equal(
        read_text(
            SITE LINK POINT(
                "f",
                "g/s") "valid = 0 .. 100 g/s\nu = 3 g/s + 4 % of reading + 1 % of span\n"
                       "[point ppm]\nlink = a\nread = input 4 f32\nunit = ppm\nu = 0.5 ppm\n"
                       "[point pct]\nlink = a\nread = input 6 f32\nunit = %\nu = 0.5 %\n"
                       "[point bare]\nlink = a\nread = input 8 f32\nunit = bar\nu = 0.5 %\n",
            &plant),
        0);
    /* 3, 4 % of 100 = 4, 1 % of 100 = 1 g/s: sqrt(26) */
    assert_true(fabs(point_uncertainty(&plant->point[0], 0.1) - sqrt(26) * 1e-3) < 1e-12);
    assert_true(fabs(point_uncertainty(&plant->point[1], 1e-6) - 0.5e-6) < 1e-18);
    /* On a point whose own unit is %, a bare % is absolute; elsewhere of reading. */
    assert_true(fabs(point_uncertainty(&plant->point[2], 0.2) - 0.005) < 1e-12);
    assert_true(fabs(point_uncertainty(&plant->point[3], 2e5) - 1e3) < 1e-9);
    plant_free(plant);
}

static void test_each_slip_is_told_with_line_and_mend(void **state)
{
    (void)state;
    expect("[site]\nname = A\n[vesel x]\n", 3, "did you mean 'vessel'");
    expect(SITE "[link a]\nhots = b\n", 5, "did you mean 'host'");
    expect(SITE "[link a]\nport = 502\n", 4, "lacks 'host'");
    expect(SITE LINK "port = 70000\n", 6, "no whole number from 1 to 65535");
    expect(SITE LINK "host = c\n", 6, "stands twice");
    expect(SITE LINK LINK, 6, "is taken already");
    expect(SITE LINK "[point a]\nlink = a\nread = input 0 f32\nunit = K\n", 6,
           "is taken already");
    expect(SITE LINK "[point p]\nlink = b\nread = input 0 f32\nunit = K\n", 6, "no link 'b'");
    expect(SITE LINK "[point p]\nlink = a\nread = inptu 0 f32\nunit = K\n", 8, "'input'");
    expect(SITE LINK "[point p]\nlink = a\nread = input 65535 f32\nunit = K\n", 8, "65535");
    expect(SITE LINK "[point p]\nlink = a\nread = input 0 f23\nunit = K\n", 8, "'f32'");
    expect(SITE LINK "[point p]\nlink = a\nread = input 0 f32\nunit = kpa\n", 6, "'kPa'");
    expect(SITE LINK "[point p]\nlink = a\nread = discrete 0\nunit = K\n", 6,
           "a bit has no unit");
    expect(SITE LINK POINT("p", "K") "valid = 9 .. 3 K\n", 6, "swap them");
    expect(SITE LINK POINT("p", "K") "u = -1 K\n", 6, "not negative");
    expect(SITE LINK POINT("p", "K") "raw = 0 .. 10\n", 6, "together");
    expect(SITE LINK POINT("p", "kPa(g)") "valid = 0 .. 5 kPa\n", 6, "basis");
    expect(SITE "[vessel v]\nfluid = argn\nshape = sphere 2 m\npressure = 1 bar\n", 5, "argon");
    expect(SITE "[vessel v]\nfluid = argon\nshape = sphere 0 m\npressure = 1 bar\n", 6,
           "length");
    expect(SITE "[vessel v]\nfluid = argon\nshape = box 1 m x 2 m\npressure = 1 bar\n", 6,
           "lacks");
    expect(SITE "[vessel v]\nfluid = argon\nshape = cube 1 m\npressure = 1 bar\n", 6,
           "no shape");
    expect(SITE "[vessel v]\nfluid = argon\nshape = sphere 2 m\npressure = PT-9\n", 7, "PT-9");
    expect(SITE LINK POINT("T",
                           "K") "[vessel v]\nfluid = argon\nshape = sphere 2 m\npressure = T\n",
           13, "a temperature; a pressure is wanted");
    expect(SITE LINK POINT("p", "bar") "[alarm x]\nwatch = q\nabove = 1 bar\n", 10, "no point");
    expect(SITE LINK POINT("p", "bar") "[alarm x]\nwatch = p\nabove = 1 K\n", 10, "a pressure");
    expect(SITE LINK POINT("p", "bar") "[alarm x]\nwatch = p\n", 10, "give one of");
    expect(SITE LINK POINT("p", "bar") "[alarm x]\nwatch = p\nis = on\n", 10, "for bits");
    expect(SITE LINK POINT("p", "bar") "[alarm x]\nwatch = p\nabove = 1 bar\n"
                                       "[alarm y]\nwatch = p\nbelow = 2 bar\n",
           13, "overlap");
    expect(SITE LINK POINT("p", "bar") "[alarm x]\nwatch = p\nabove = 1 bar\npriority = 5\n",
           13, "from 1 to 4");
    expect(SITE LINK
           "[hall h]\nvolume = 3 m3\noxygen = x\ngas = argon\naction_levels = 18 %, 19.5 %\n",
           6, "from high to low");
    expect(SITE "[stream s]\nfrom = outside\nto = outside\nphase = vapour\nflow = 1 g/s\n", 4,
           "name its fluid");
    expect(SITE "[purifier d]\nvessel = nosuch\n", 5, "no vessel 'nosuch'");
    expect("[link a]\nhost = b\n", 1, "there is no [site]");
    expect(SITE "[link]\nhost = b\n", 4, "lacks its name");
    expect(SITE "[link a b]\nhost = b\n", 4, "letters, digits");
    expect(SITE "nonsense\n", 4, "neither [kind name] nor key = value");
    expect(SITE "[link a\nhost = b\n", 4, "ends with ']'");
    expect(SITE LINK "  [point p]\n", 6, "begins at the start of its line");
    expect("name = A\n", 1, "before the first section");
}

static void test_all_problems_come_in_one_run(void **state)
{
    struct plant *plant;
    (void)state;
    assert_int_not_equal(read_text("[site]\nnam = x\n[link a]\nhost = b\nport = x\nfoo = 1\n"
                                   "[vesel v]\n",
                                   &plant),
                         0);
    assert_true(told(1, "lacks 'name'") && told(2, "did you mean 'name'"));
    assert_true(told(5, "no whole number") && told(6, "no key 'foo'") && told(7, "vessel"));
    for (int i = 1; i < problems.count; i++)
        assert_true(problems.at[i - 1].line <= problems.at[i].line);
}

static void test_long_text_goes_on_in_continuation_lines(void **state)
{
    struct plant *plant;
    (void)state;
    assert_int_equal(read_text("[site]\nname = A\nrules = one\n  two ; a comment\n\tthree\n"
                               "barometer = 1 bar\n" LINK "bad = 1\n",
                               &plant),
                     ERR_CONFIG);
    assert_true(told(9, "no key 'bad'")); /* lines are counted through continuations */
    assert_int_equal(
        read_text("[site]\nname = A\nrules = one\n  two ; a comment\n\tthree\n", &plant), 0);
    assert_string_equal(plant->site.rules, "one two three");
    plant_free(plant);
}

static void test_overlong_lines_and_names_are_errors_not_cut(void **state)
{
    char text[1200];
    (void)state;
    int used = snprintf(text, sizeof(text), SITE "rules = ");
    memset(text + used, 'x', 300);
    snprintf(text + used + 300, sizeof(text) - (size_t)used - 300, "\n[link a]\nhots = b\n");
    expect(text, 4, "longer than 198");
    assert_true(told(6, "did you mean 'host'")); /* the line after it is counted right */
    used = snprintf(text, sizeof(text), SITE "[link ");
    memset(text + used, 'n', 60);
    snprintf(text + used + 60, sizeof(text) - (size_t)used - 60, "]\nhost = b\n");
    expect(text, 4, "longer than 49");
    used = snprintf(text, sizeof(text), SITE "[link ");
    memset(text + used, 'n', 42);
    snprintf(text + used + 42, sizeof(text) - (size_t)used - 42, "]\nhost = b\n");
    expect(text, 4, "longer than 40");
}

static void test_hostile_bytes_are_told_and_never_passed_on(void **state)
{
    static const char nul[] = "[site]\nname = A\0B\n";
    static const char escape[] = "[site]\nname = A\x1b[31mB\n";
    static const char broken[] = "[site]\nname = \xff\xfe\n";
    struct plant *plant;
    (void)state;
    assert_int_not_equal(read_bytes(nul, sizeof(nul) - 1, &plant), 0);
    assert_true(told(2, "NUL"));
    assert_int_not_equal(read_bytes(escape, sizeof(escape) - 1, &plant), 0);
    assert_true(told(2, "control character"));
    assert_int_not_equal(read_bytes(broken, sizeof(broken) - 1, &plant), 0);
    assert_true(told(2, "UTF-8"));
    for (int i = 0; i < problems.count; i++)
        for (const char *c = problems.at[i].text; *c != '\0'; c++)
            assert_true((unsigned char)*c >= 0x20);
}

static void test_includes_are_followed_and_loops_are_told(void **state)
{
    struct plant *plant;
    char path[128];
    (void)state;
    write_file("more.ini", LINK, strlen(LINK));
    assert_int_equal(read_text("[site]\nname = A\ninclude = more.ini\n", &plant), 0);
    assert_int_equal(plant->link_count, 1);
    plant_free(plant);
    const char loop[] = "[site]\nname = A\ninclude = plant.ini\n";
    expect(loop, 3, "includes itself");
    expect("[site]\nname = A\ninclude = missing.ini\n", 3, "cannot be opened");
    snprintf(path, sizeof(path), "%s", folder);
    assert_int_not_equal(plant_read(path, &plant, &problems), 0);
    assert_int_not_equal(plant_read("/nonexistent/x.ini", &plant, &problems), 0);
    assert_true(problems.error_count > 0);
}

static void test_ten_thousand_points_are_read_in_a_moment(void **state)
{
    size_t size = 10000 * 80 + 200, used;
    char *text = malloc(size);
    struct plant *plant;
    (void)state;
    assert_non_null(text);
    used = (size_t)snprintf(text, size, SITE LINK);
    for (int i = 0; i < 10000; i++)
        used += (size_t)snprintf(text + used, size - used,
                                 "[point P-%d]\nlink = a\nread = input %d f32\nunit = K\n", i,
                                 2 * i);
    int64_t start = time_mono_ns();
    assert_int_equal(read_bytes(text, used, &plant), 0);
    assert_int_equal(plant->point_count, 10000);
    assert_int_equal(plant_tag_find(plant, "P-7777"), 7777);
    /* A bound against quadratic growth, wide enough for sanitizers and a busy machine. */
    assert_true(time_mono_ns() - start < 10 * NS_PER_S);
    plant_free(plant);
    free(text);
}

static void test_mutated_files_do_no_harm(void **state)
{
    char *text = malloc(1 << 17);
    FILE *file = fopen("config/tarn-hollow.ini", "rb");
    unsigned seed = 12345, read_well = 0;
    const char *given = getenv("ULLAGE_SEED");
    (void)state;
    assert_non_null(text);
    assert_non_null(file);
    if (given != NULL)
        seed = (unsigned)strtoul(given, NULL, 10);
    print_message("seed %u\n", seed);
    size_t size = fread(text, 1, 1 << 16, file);
    fclose(file);
    char *copy = malloc(1 << 17);
    assert_non_null(copy);
    for (int round = 0; round < 300; round++) {
        static const char *const bits[] = {"[",   "]", "=",      "\n",     " ",    ",",
                                           "..",  "-", "1e999",  "\0",     "\x1b", "%",
                                           "(g)", "x", "PT-101", "outside"};
        size_t length = size;
        memcpy(copy, text, size);
        for (int change = 0; change < 1 + round % 8; change++) {
            seed = seed * 1664525u + 1013904223u;
            size_t at = (seed >> 8) % length;
            seed = seed * 1664525u + 1013904223u;
            const char *bit = bits[(seed >> 16) % ARRAY_LENGTH(bits)];
            size_t bytes = *bit == '\0' ? 1 : strlen(bit);
            if (seed & 1) { /* put in, or take out */
                memmove(copy + at + bytes, copy + at, length - at);
                memcpy(copy + at, bit, bytes);
                length += bytes;
            } else {
                size_t gone = 1 + (seed >> 20) % 40;
                gone = gone > length - at ? length - at : gone;
                memmove(copy + at, copy + at + gone, length - at - gone);
                length -= gone;
            }
        }
        struct plant *plant;
        int code = read_bytes(copy, length, &plant);
        assert_true((code == 0) == (problems.error_count == 0));
        if (code == 0) {
            plant_free(plant);
            read_well++;
        }
    }
    print_message("%u of 300 were still right\n", read_well);
    assert_true(read_well < 300);
    free(copy);
    free(text);
}

static int make_folder(void **state)
{
    (void)state;
    return mkdtemp(folder) == NULL;
}

static int remove_folder(void **state)
{
    char command[160];
    (void)state;
    snprintf(command, sizeof(command), "rm -rf '%s'", folder);
    return system(command) != 0;
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_demo_file_has_no_problem),
        cmocka_unit_test(test_plant_of_one_link_and_one_point_is_a_plant),
        cmocka_unit_test(test_uncertainty_parts_combine_in_quadrature),
        cmocka_unit_test(test_each_slip_is_told_with_line_and_mend),
        cmocka_unit_test(test_all_problems_come_in_one_run),
        cmocka_unit_test(test_long_text_goes_on_in_continuation_lines),
        cmocka_unit_test(test_overlong_lines_and_names_are_errors_not_cut),
        cmocka_unit_test(test_hostile_bytes_are_told_and_never_passed_on),
        cmocka_unit_test(test_includes_are_followed_and_loops_are_told),
        cmocka_unit_test(test_ten_thousand_points_are_read_in_a_moment),
        cmocka_unit_test(test_mutated_files_do_no_harm),
    };
    return cmocka_run_group_tests(tests, make_folder, remove_folder);
}
