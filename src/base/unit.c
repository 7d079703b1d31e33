/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Units: symbols, with SI prefixes where the trade uses them, to SI. A quotient ("kg/h",
 * "kPa/min", "V/cm", "1/d") is read from its two halves. Factors: NIST SP 811 (2008), appendix
 * B.
 */
#include "ullage/base.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

struct symbol {
    const char *name;
    enum dimension dimension;
    double scale, offset;
    const char *prefixes; /* those that may stand before it */
};

static const struct symbol symbols[] = {
    {"1",    DIMENSION_NUMBER,      1,                 0,            ""      },
    {"%",    DIMENSION_NUMBER,      1e-2,              0,            ""      },
    {"ppm",  DIMENSION_NUMBER,      1e-6,              0,            ""      },
    {"ppb",  DIMENSION_NUMBER,      1e-9,              0,            ""      },
    {"ppt",  DIMENSION_NUMBER,      1e-12,             0,            ""      },
    {"Pa",   DIMENSION_PRESSURE,    1,                 0,            "umhkMG"},
    {"bar",  DIMENSION_PRESSURE,    1e5,               0,            "um"    },
    {"psi",  DIMENSION_PRESSURE,    6894.757293168361, 0,            ""      },
    {"K",    DIMENSION_TEMPERATURE, 1,                 0,            "um"    },
    {"degC", DIMENSION_TEMPERATURE, 1,                 273.15,       ""      },
    {"degF", DIMENSION_TEMPERATURE, 1 / 1.8,           459.67 / 1.8, ""      },
    {"m",    DIMENSION_LENGTH,      1,                 0,            "numck" },
    {"m3",   DIMENSION_VOLUME,      1,                 0,            ""      },
    {"L",    DIMENSION_VOLUME,      1e-3,              0,            "um"    },
    {"g",    DIMENSION_MASS,        1e-3,              0,            "pnumkM"},
    {"t",    DIMENSION_MASS,        1e3,               0,            "k"     },
    {"s",    DIMENSION_TIME,        1,                 0,            "num"   },
    {"min",  DIMENSION_TIME,        60,                0,            ""      },
    {"h",    DIMENSION_TIME,        3600,              0,            ""      },
    {"d",    DIMENSION_TIME,        86400,             0,            ""      },
    {"W",    DIMENSION_POWER,       1,                 0,            "umkMG" },
    {"J",    DIMENSION_ENERGY,      1,                 0,            "mkMG"  },
    {"V",    DIMENSION_VOLTAGE,     1,                 0,            "umkM"  },
    {"A",    DIMENSION_CURRENT,     1,                 0,            "numk"  },
    {"Hz",   DIMENSION_FREQUENCY,   1,                 0,            "mkM"   },
    {"rpm",  DIMENSION_FREQUENCY,   1.0 / 60,          0,            ""      },
    {"Nm3",  DIMENSION_NORMAL_FLOW, 1,                 0,            ""      },
};

static const struct {
    enum dimension above, below, result;
} quotients[] = {
    {DIMENSION_MASS,        DIMENSION_TIME,   DIMENSION_MASS_FLOW    },
    {DIMENSION_VOLUME,      DIMENSION_TIME,   DIMENSION_VOLUME_FLOW  },
    {DIMENSION_NORMAL_FLOW, DIMENSION_TIME,   DIMENSION_NORMAL_FLOW  },
    {DIMENSION_VOLTAGE,     DIMENSION_LENGTH, DIMENSION_FIELD        },
    {DIMENSION_LENGTH,      DIMENSION_TIME,   DIMENSION_SPEED        },
    {DIMENSION_PRESSURE,    DIMENSION_TIME,   DIMENSION_PRESSURE_RATE},
    {DIMENSION_NUMBER,      DIMENSION_TIME,   DIMENSION_RATE         },
};

static const struct {
    const char *says, *si;
} dimensions[] = {
    [DIMENSION_NUMBER] = {"a pure number",        "1"    },
    [DIMENSION_PRESSURE] = {"a pressure",           "Pa"   },
    [DIMENSION_TEMPERATURE] = {"a temperature",        "K"    },
    [DIMENSION_LENGTH] = {"a length",             "m"    },
    [DIMENSION_VOLUME] = {"a volume",             "m3"   },
    [DIMENSION_MASS] = {"a mass",               "kg"   },
    [DIMENSION_TIME] = {"a time",               "s"    },
    [DIMENSION_MASS_FLOW] = {"a mass flow",          "kg/s" },
    [DIMENSION_VOLUME_FLOW] = {"a volume flow",        "m3/s" },
    [DIMENSION_NORMAL_FLOW] = {"a normal volume flow", "Nm3/s"},
    [DIMENSION_POWER] = {"a power",              "W"    },
    [DIMENSION_ENERGY] = {"an energy",            "J"    },
    [DIMENSION_FIELD] = {"an electric field",    "V/m"  },
    [DIMENSION_FREQUENCY] = {"a frequency",          "Hz"   },
    [DIMENSION_CURRENT] = {"a current",            "A"    },
    [DIMENSION_VOLTAGE] = {"a voltage",            "V"    },
    [DIMENSION_SPEED] = {"a speed",              "m/s"  },
    [DIMENSION_PRESSURE_RATE] = {"a pressure rate",      "Pa/s" },
    [DIMENSION_RATE] = {"a rate",               "1/s"  },
    [DIMENSION_BIT] = {"a bit",                ""     },
};
_Static_assert(ARRAY_LENGTH(dimensions) == DIMENSION_COUNT, "each dimension has its words");

/* The symbols that a sentence suggests; the full set also has prefixes and quotients. */
static const char *const known[] = {
    "Pa",      "kPa",    "MPa",  "bar",  "mbar", "psi",     "Pa(g)", "kPa(g)", "bar(g)",
    "mbar(g)", "psi(g)", "K",    "degC", "degF", "m",       "mm",    "cm",     "m3",
    "L",       "kg",     "g",    "t",    "s",    "ms",      "min",   "h",      "d",
    "kg/s",    "g/s",    "mg/s", "kg/h", "t/d",  "m3/s",    "m3/h",  "L/min",  "Nm3/h",
    "W",       "kW",     "V/m",  "V/cm", "ppm",  "ppb",     "ppt",   "%",      "Hz",
    "rpm",     "A",      "V",    "m/s",  "Pa/s", "kPa/min", "1/s",   "1/d",    "1",
};

const char *dimension_says(enum dimension dimension)
{
    return dimensions[dimension].says;
}

static double prefix_scale(char prefix)
{
    switch (prefix) {
    case 'p':
        return 1e-12;
    case 'n':
        return 1e-9;
    case 'u':
        return 1e-6;
    case 'm':
        return 1e-3;
    case 'c':
        return 1e-2;
    case 'h':
        return 1e2;
    case 'k':
        return 1e3;
    case 'M':
        return 1e6;
    default:
        return 1e9;
    }
}

static bool simple(const char *name, struct unit *out)
{
    for (size_t i = 0; i < ARRAY_LENGTH(symbols); i++) {
        const struct symbol *symbol = &symbols[i];
        bool whole = strcmp(name, symbol->name) == 0;
        bool prefixed = !whole && name[0] != '\0' && strcmp(name + 1, symbol->name) == 0 &&
                        strchr(symbol->prefixes, name[0]) != NULL;
        if (!whole && !prefixed)
            continue;
        out->dimension = symbol->dimension;
        out->scale = symbol->scale * (prefixed ? prefix_scale(name[0]) : 1);
        out->offset = symbol->offset;
        return true;
    }
    return false;
}

static bool quotient(const char *symbol, const char *slash, struct unit *out)
{
    char above[16];
    struct unit a = {0}, b = {0};
    size_t length = (size_t)(slash - symbol);
    if (length == 0 || length >= sizeof(above))
        return false;
    memcpy(above, symbol, length);
    above[length] = '\0';
    if (!simple(above, &a) || !simple(slash + 1, &b))
        return false;
    for (size_t i = 0; i < ARRAY_LENGTH(quotients); i++) {
        if (quotients[i].above != a.dimension || quotients[i].below != b.dimension)
            continue;
        out->dimension = quotients[i].result;
        out->scale = a.scale / b.scale;
        return true;
    }
    return false;
}

int unit_parse(const char *symbol, struct unit *out, struct error *err)
{
    struct unit unit = {.scale = 1};
    if (*symbol == '\0')
        symbol = "1";
    char name[sizeof(unit.symbol)];
    bool fits = text_copy(unit.symbol, sizeof(unit.symbol), symbol);
    text_copy(name, sizeof(name), symbol);
    size_t length = strlen(name);
    bool gauge = length > 3 && strcmp(name + length - 3, "(g)") == 0;
    if (gauge)
        name[length - 3] = '\0';
    const char *slash = strchr(name, '/');
    bool found = fits && (slash != NULL ? quotient(name, slash, &unit) : simple(name, &unit));
    /* A bare normal volume is no quantity of the trade's plant files; only its flow is. */
    if (found && slash == NULL && unit.dimension == DIMENSION_NORMAL_FLOW)
        found = false;
    if (found && gauge && unit.dimension != DIMENSION_PRESSURE)
        found = false;
    if (!found) {
        const char *near = text_nearest(symbol, known, ARRAY_LENGTH(known));
        if (near != NULL)
            return error_set(err, ERR_FORMAT, "'%s' is no known unit; did you mean '%s'?",
                             symbol, near);
        return error_set(err, ERR_FORMAT, "'%s' is no known unit", symbol);
    }
    unit.gauge = gauge;
    *out = unit;
    return 0;
}

struct unit unit_si(enum dimension dimension)
{
    struct unit unit = {.dimension = dimension, .scale = 1};
    text_copy(unit.symbol, sizeof(unit.symbol), dimensions[dimension].si);
    return unit;
}

double unit_to_si(const struct unit *unit, double value)
{
    return value * unit->scale + unit->offset;
}

double unit_from_si(const struct unit *unit, double value_si)
{
    return (value_si - unit->offset) / unit->scale;
}

double unit_span_to_si(const struct unit *unit, double span)
{
    return span * unit->scale;
}

double unit_span_from_si(const struct unit *unit, double span_si)
{
    return span_si / unit->scale;
}

int unit_parse_value(const char *text, struct unit *unit, double *value_si, struct error *err)
{
    char copy[96];
    if (!text_copy(copy, sizeof(copy), text))
        return error_set(err, ERR_FORMAT, "'%.40s...' is too long for a quantity", text);
    char *start = text_trim(copy);
    /* The number ends where no character of a number follows; an 'e' belongs to it only before
     * a digit or sign, so that "5 e" or "3em" is not half read. */
    size_t length = 0;
    for (;;) {
        char c = start[length];
        char next = c != '\0' ? start[length + 1] : '\0';
        bool exponent = (c == 'e' || c == 'E') && length > 0 &&
                        strchr("0123456789.", start[length - 1]) != NULL &&
                        ((next >= '0' && next <= '9') || next == '+' || next == '-');
        bool sign = (c == '+' || c == '-') &&
                    (length == 0 || start[length - 1] == 'e' || start[length - 1] == 'E');
        if (!((c >= '0' && c <= '9') || c == '.' || exponent || sign))
            break;
        length++;
    }
    char symbol[96];
    text_copy(symbol, sizeof(symbol), text_trim(start + length));
    start[length] = '\0';
    double value;
    int code = text_to_double(start, &value);
    if (code == ERR_RANGE)
        return error_set(err, ERR_FORMAT, "'%s' is beyond what can be computed with", text);
    if (code != 0)
        return error_set(err, ERR_FORMAT, "'%s' does not begin with a number", text);
    struct unit found;
    code = unit_parse(symbol, &found, err);
    if (code != 0)
        return code;
    double si = unit_to_si(&found, value);
    if (!isfinite(si))
        return error_set(err, ERR_FORMAT, "'%s' is beyond what can be computed with", text);
    *unit = found;
    *value_si = si;
    return 0;
}
