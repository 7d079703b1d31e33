/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Units. Factors: NIST Special Publication 811 (2008), appendix B.8 and table 6 to 8; the
 * temperatures at which scales meet: -40 degC = -40 degF, and 0 degC = 273.15 K = 32 degF
 * (appendix B.8).
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

static void test_symbols_have_the_factors_of_nist_sp_811(void **state)
{
    (void)state;
    /* Printed with seven digits in appendix B.8 where they are not exact, so 1e-6 there. */
    static const struct {
        const char *symbol;
        enum dimension dimension;
        double factor, relative;
    } rows[] = {
        {"Pa",      DIMENSION_PRESSURE,      1,             0    },
        {"uPa",     DIMENSION_PRESSURE,      1e-6,          1e-15},
        {"mPa",     DIMENSION_PRESSURE,      1e-3,          1e-15},
        {"hPa",     DIMENSION_PRESSURE,      1e2,           0    },
        {"kPa",     DIMENSION_PRESSURE,      1e3,           0    },
        {"MPa",     DIMENSION_PRESSURE,      1e6,           0    },
        {"GPa",     DIMENSION_PRESSURE,      1e9,           0    },
        {"bar",     DIMENSION_PRESSURE,      1e5,           0    },
        {"mbar",    DIMENSION_PRESSURE,      1e2,           1e-15},
        {"psi",     DIMENSION_PRESSURE,      6.894757e3,    1e-7 },
        {"K",       DIMENSION_TEMPERATURE,   1,             0    },
        {"mK",      DIMENSION_TEMPERATURE,   1e-3,          1e-15},
        {"m",       DIMENSION_LENGTH,        1,             0    },
        {"mm",      DIMENSION_LENGTH,        1e-3,          1e-15},
        {"cm",      DIMENSION_LENGTH,        1e-2,          1e-15},
        {"km",      DIMENSION_LENGTH,        1e3,           0    },
        {"m3",      DIMENSION_VOLUME,        1,             0    },
        {"L",       DIMENSION_VOLUME,        1e-3,          1e-15},
        {"kg",      DIMENSION_MASS,          1,             1e-15},
        {"g",       DIMENSION_MASS,          1e-3,          1e-15},
        {"mg",      DIMENSION_MASS,          1e-6,          1e-15},
        {"t",       DIMENSION_MASS,          1e3,           0    },
        {"kt",      DIMENSION_MASS,          1e6,           0    },
        {"s",       DIMENSION_TIME,          1,             0    },
        {"ms",      DIMENSION_TIME,          1e-3,          1e-15},
        {"min",     DIMENSION_TIME,          60,            0    },
        {"h",       DIMENSION_TIME,          3.6e3,         0    },
        {"d",       DIMENSION_TIME,          8.64e4,        0    },
        {"kg/s",    DIMENSION_MASS_FLOW,     1,             1e-15},
        {"g/s",     DIMENSION_MASS_FLOW,     1e-3,          1e-15},
        {"mg/s",    DIMENSION_MASS_FLOW,     1e-6,          1e-15},
        {"ug/s",    DIMENSION_MASS_FLOW,     1e-9,          1e-15},
        {"kg/h",    DIMENSION_MASS_FLOW,     2.777778e-4,   1e-6 },
        {"kg/min",  DIMENSION_MASS_FLOW,     1.666667e-2,   1e-6 },
        {"t/d",     DIMENSION_MASS_FLOW,     1e3 / 8.64e4,  1e-15},
        {"t/h",     DIMENSION_MASS_FLOW,     2.777778e-1,   1e-6 },
        {"m3/s",    DIMENSION_VOLUME_FLOW,   1,             0    },
        {"m3/h",    DIMENSION_VOLUME_FLOW,   2.777778e-4,   1e-6 },
        {"L/min",   DIMENSION_VOLUME_FLOW,   1.666667e-5,   1e-6 },
        {"L/s",     DIMENSION_VOLUME_FLOW,   1e-3,          1e-15},
        {"Nm3/h",   DIMENSION_NORMAL_FLOW,   2.777778e-4,   1e-6 },
        {"W",       DIMENSION_POWER,         1,             0    },
        {"mW",      DIMENSION_POWER,         1e-3,          1e-15},
        {"kW",      DIMENSION_POWER,         1e3,           0    },
        {"MW",      DIMENSION_POWER,         1e6,           0    },
        {"J",       DIMENSION_ENERGY,        1,             0    },
        {"MJ",      DIMENSION_ENERGY,        1e6,           0    },
        {"V/m",     DIMENSION_FIELD,         1,             0    },
        {"V/cm",    DIMENSION_FIELD,         1e2,           1e-15},
        {"kV/cm",   DIMENSION_FIELD,         1e5,           1e-15},
        {"kV/m",    DIMENSION_FIELD,         1e3,           1e-15},
        {"ppm",     DIMENSION_NUMBER,        1e-6,          1e-15},
        {"ppb",     DIMENSION_NUMBER,        1e-9,          1e-15},
        {"ppt",     DIMENSION_NUMBER,        1e-12,         1e-15},
        {"%",       DIMENSION_NUMBER,        1e-2,          1e-15},
        {"1",       DIMENSION_NUMBER,        1,             0    },
        {"",        DIMENSION_NUMBER,        1,             0    },
        {"Hz",      DIMENSION_FREQUENCY,     1,             0    },
        {"kHz",     DIMENSION_FREQUENCY,     1e3,           0    },
        {"rpm",     DIMENSION_FREQUENCY,     1.666667e-2,   1e-6 },
        {"A",       DIMENSION_CURRENT,       1,             0    },
        {"mA",      DIMENSION_CURRENT,       1e-3,          1e-15},
        {"V",       DIMENSION_VOLTAGE,       1,             0    },
        {"kV",      DIMENSION_VOLTAGE,       1e3,           0    },
        {"m/s",     DIMENSION_SPEED,         1,             0    },
        {"mm/us",   DIMENSION_SPEED,         1e3,           1e-15},
        {"Pa/s",    DIMENSION_PRESSURE_RATE, 1,             0    },
        {"kPa/min", DIMENSION_PRESSURE_RATE, 1e3 / 60,      1e-15},
        {"bar/h",   DIMENSION_PRESSURE_RATE, 1e5 / 3600,    1e-15},
        {"1/s",     DIMENSION_RATE,          1,             0    },
        {"1/d",     DIMENSION_RATE,          1 / 8.64e4,    1e-15},
        {"1/h",     DIMENSION_RATE,          2.777778e-4,   1e-6 },
        {"%/d",     DIMENSION_RATE,          1e-2 / 8.64e4, 1e-15},
    };
    for (size_t i = 0; i < ARRAY_LENGTH(rows); i++) {
        struct unit unit;
        struct error err = {0};
        if (unit_parse(rows[i].symbol, &unit, &err) != 0)
            fail_msg("'%s': %s", rows[i].symbol, err.text);
        assert_int_equal(unit.dimension, rows[i].dimension);
        assert_close(unit.scale, rows[i].factor, rows[i].relative);
        assert_false(unit.gauge);
        assert_near(unit_from_si(&unit, unit_to_si(&unit, 7)), 7, 1e-13);
        assert_string_equal(unit.symbol, rows[i].symbol[0] != '\0' ? rows[i].symbol : "1");
    }
}

static void test_temperature_scales_meet_where_they_should(void **state)
{
    (void)state;
    struct unit celsius, fahrenheit;
    assert_int_equal(unit_parse("degC", &celsius, NULL), 0);
    assert_int_equal(unit_parse("degF", &fahrenheit, NULL), 0);
    assert_near(unit_to_si(&celsius, 0), 273.15, 0);
    assert_near(unit_to_si(&fahrenheit, 32), 273.15, 1e-12);
    assert_near(unit_to_si(&fahrenheit, -40), unit_to_si(&celsius, -40), 1e-12);
    assert_near(unit_to_si(&fahrenheit, -459.67), 0, 1e-12);
    assert_near(unit_from_si(&celsius, 87.302), -185.848, 1e-12);
    /* A difference has no offset: NIST SP 811, 8.5. */
    assert_near(unit_span_to_si(&celsius, 0.1), 0.1, 0);
    assert_near(unit_span_to_si(&fahrenheit, 1.8), 1, 1e-15);
    assert_near(unit_span_from_si(&fahrenheit, 1), 1.8, 1e-15);
}

static void test_gauge_belongs_to_pressures_only(void **state)
{
    (void)state;
    static const char *const good[] = {"Pa(g)", "kPa(g)", "bar(g)", "mbar(g)", "psi(g)"};
    for (size_t i = 0; i < ARRAY_LENGTH(good); i++) {
        struct unit unit;
        assert_int_equal(unit_parse(good[i], &unit, NULL), 0);
        assert_true(unit.gauge);
        assert_int_equal(unit.dimension, DIMENSION_PRESSURE);
        assert_near(unit.offset, 0, 0);
        assert_string_equal(unit.symbol, good[i]);
    }
    static const char *const bad[] = {"K(g)",     "m(g)",     "(g)",  "1(g)",
                                      "bar/h(g)", "bar(g)/h", "kg(g)"};
    for (size_t i = 0; i < ARRAY_LENGTH(bad); i++) {
        struct unit unit;
        assert_int_equal(unit_parse(bad[i], &unit, NULL), ERR_FORMAT);
    }
}

static void test_an_unknown_unit_is_told_with_the_nearest_known(void **state)
{
    (void)state;
    static const struct {
        const char *text, *near;
    } rows[] = {
        {"KPa",    "kPa"  },
        {"mbr",    "mbar" },
        {"dgeC",   "degC" },
        {"Nm3/hr", "Nm3/h"},
        {"pbb",    "ppb"  },
    };
    for (size_t i = 0; i < ARRAY_LENGTH(rows); i++) {
        struct unit unit = {.scale = 42};
        struct error err = {0};
        char wanted[24];
        snprintf(wanted, sizeof(wanted), "'%s'?", rows[i].near);
        assert_int_equal(unit_parse(rows[i].text, &unit, &err), ERR_FORMAT);
        assert_non_null(strstr(err.text, wanted));
        assert_near(unit.scale, 42, 0);
    }
    static const char *const bad[] = {
        "furlong",  "kpsi",   "mdegC", "k",    "/",        "/s",
        "kg/",      "kg//s",  "kg/m",  "m/kg", "Nm3",      "cbar",
        "kg/s/s",   "degC/s", "1/1",   "W/m",  "Kg/s",     "kilogram-of-something",
        "\x1b[31m", "kPa ",   " kPa",  "k%",   "m\xc2\xb3"};
    for (size_t i = 0; i < ARRAY_LENGTH(bad); i++) {
        struct unit unit;
        struct error err = {0};
        if (unit_parse(bad[i], &unit, &err) != ERR_FORMAT)
            fail_msg("'%s' was taken as a unit", bad[i]);
        assert_null(strchr(err.text, '\x1b'));
    }
}

static void test_every_dimension_has_words_and_an_si_unit_that_parses(void **state)
{
    (void)state;
    for (int i = 0; i < DIMENSION_COUNT; i++) {
        enum dimension dimension = (enum dimension)i;
        struct unit si = unit_si(dimension), unit;
        assert_true(strlen(dimension_says(dimension)) > 2);
        assert_near(unit_to_si(&si, 3), 3, 0);
        assert_int_equal(si.dimension, dimension);
        if (dimension == DIMENSION_BIT) {
            assert_string_equal(si.symbol, "");
            continue;
        }
        assert_int_equal(unit_parse(si.symbol, &unit, NULL), 0);
        assert_int_equal(unit.dimension, dimension);
        assert_close(unit.scale, 1, 1e-15);
    }
}

static void test_values_parse_with_their_unit(void **state)
{
    (void)state;
    static const struct {
        const char *text;
        enum dimension dimension;
        double si, tolerance;
    } rows[] = {
        {"12.5 kPa(g)",  DIMENSION_PRESSURE,    12500,       0    },
        {"-186 degC",    DIMENSION_TEMPERATURE, 87.15,       1e-12},
        {"3 ppb",        DIMENSION_NUMBER,      3e-9,        1e-23},
        {"0.5 1/d",      DIMENSION_RATE,        0.5 / 86400, 1e-20},
        {"2.4m3/s",      DIMENSION_VOLUME_FLOW, 2.4,         0    },
        {"1e3 Pa",       DIMENSION_PRESSURE,    1000,        0    },
        {"1e-3Pa",       DIMENSION_PRESSURE,    0.001,       0    },
        {"  7  K  ",     DIMENSION_TEMPERATURE, 7,           0    },
        {"42",           DIMENSION_NUMBER,      42,          0    },
        {"0.5%",         DIMENSION_NUMBER,      0.005,       1e-18},
        {"+.5 m",        DIMENSION_LENGTH,      0.5,         0    },
        {"14.69595 psi", DIMENSION_PRESSURE,    101325,      0.05 }, /* one atmosphere */
    };
    for (size_t i = 0; i < ARRAY_LENGTH(rows); i++) {
        struct unit unit;
        double si = 0;
        struct error err = {0};
        if (unit_parse_value(rows[i].text, &unit, &si, &err) != 0)
            fail_msg("'%s': %s", rows[i].text, err.text);
        assert_int_equal(unit.dimension, rows[i].dimension);
        assert_near(si, rows[i].si, rows[i].tolerance);
    }
}

static void test_values_that_are_none_are_told_and_change_nothing(void **state)
{
    (void)state;
    static const char *const bad[] = {
        "",         "kPa",          "nan",       "nan kPa", "NaN",      "inf",       "-inf kPa",
        "infinity", "0x10",         "0x1p3 Pa",  "1e",      "1e400 Pa", "1e308 GPa", "5 kPa x",
        "5 kPa 3",  "1.2.3 Pa",     "--5 Pa",    "5,2 kPa", "5 parsec", "1 2 Pa",    ". Pa",
        "- Pa",     "5 kPa(g) (g)", "\xff 5 Pa", "5 \xff",  "5 e",      "1e5e5 Pa",  "1+1 Pa",
    };
    for (size_t i = 0; i < ARRAY_LENGTH(bad); i++) {
        struct unit unit = {.scale = 42};
        double si = 42;
        struct error err = {0};
        if (unit_parse_value(bad[i], &unit, &si, &err) != ERR_FORMAT)
            fail_msg("'%s' was taken as a value", bad[i]);
        assert_near(si, 42, 0);
        assert_near(unit.scale, 42, 0);
        assert_true(strlen(err.text) > 0);
    }
    char longer[5000];
    memset(longer, '1', sizeof(longer) - 1);
    longer[sizeof(longer) - 1] = '\0';
    struct unit unit;
    double si;
    struct error err = {0};
    assert_int_equal(unit_parse_value(longer, &unit, &si, &err), ERR_FORMAT);
    assert_non_null(strstr(err.text, "too long"));
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_symbols_have_the_factors_of_nist_sp_811),
        cmocka_unit_test(test_temperature_scales_meet_where_they_should),
        cmocka_unit_test(test_gauge_belongs_to_pressures_only),
        cmocka_unit_test(test_an_unknown_unit_is_told_with_the_nearest_known),
        cmocka_unit_test(test_every_dimension_has_words_and_an_si_unit_that_parses),
        cmocka_unit_test(test_values_parse_with_their_unit),
        cmocka_unit_test(test_values_that_are_none_are_told_and_change_nothing),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
