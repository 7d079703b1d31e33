/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Units of the reader's choice. What base knows (pressure, temperature, speed) is read there;
 * the rest only a fluid has.
 */
#include "fluid_units.h"

#include <string.h>

static const struct fluid_unit known[] = {
    {"kg/m3",    "kg/m3",     1,    0},
    {"kg/m3",    "g/cm3",     1e3,  0},
    {"J/kg",     "J/kg",      1,    0},
    {"J/kg",     "kJ/kg",     1e3,  0},
    {"J/(kg K)", "J/(kg K)",  1,    0},
    {"J/(kg K)", "kJ/(kg K)", 1e3,  0},
    {"Pa s",     "Pa s",      1,    0},
    {"Pa s",     "mPa s",     1e-3, 0},
    {"Pa s",     "uPa s",     1e-6, 0},
    {"W/(m K)",  "W/(m K)",   1,    0},
    {"W/(m K)",  "mW/(m K)",  1e-3, 0},
    {"N/m",      "N/m",       1,    0},
    {"N/m",      "mN/m",      1e-3, 0},
};

static int parse_one(const char *text, struct fluid_unit *out, struct error *err)
{
    for (size_t i = 0; i < ARRAY_LENGTH(known); i++) {
        if (strcmp(known[i].symbol, text) == 0) {
            *out = known[i];
            return 0;
        }
    }
    struct unit unit;
    struct error base_err;
    int code = text[0] == '\0' ? ERR_FORMAT : unit_parse(text, &unit, &base_err);
    if (code != 0 ||
        (unit.dimension != DIMENSION_PRESSURE && unit.dimension != DIMENSION_SPEED &&
         unit.dimension != DIMENSION_TEMPERATURE))
        return error_set(
            err, ERR_FORMAT,
            "'%.30s' is no unit of this table; known are those of pressure (kPa, bar), "
            "temperature (degC), density (g/cm3), energy (kJ/kg), heat capacity (kJ/(kg K)), "
            "speed, viscosity (uPa s), conductivity (mW/(m K)), tension (mN/m)",
            text);
    if (unit.gauge)
        return error_set(
            err, ERR_FORMAT,
            "'%.30s' counts from the barometer, which is not known here; leave out "
            "the (g)",
            text);
    *out = (struct fluid_unit){.scale = unit.scale, .offset = unit.offset};
    text_copy(out->si, sizeof(out->si), unit_si(unit.dimension).symbol);
    text_copy(out->symbol, sizeof(out->symbol), unit.symbol);
    return 0;
}

int fluid_units_parse(const char *text, struct fluid_units *units, struct error *err)
{
    char copy[200];
    *units = (struct fluid_units){0};
    if (!text_copy(copy, sizeof(copy), text))
        return error_set(err, ERR_FORMAT, "'%.40s...' is too long", text);
    for (char *part = copy; part != NULL;) {
        char *comma = strchr(part, ',');
        if (comma != NULL)
            *comma = '\0';
        struct fluid_unit unit;
        int code = parse_one(text_trim(part), &unit, err);
        if (code != 0)
            return code;
        for (int i = 0; i < units->count; i++)
            if (strcmp(units->unit[i].si, unit.si) == 0)
                return error_set(err, ERR_FORMAT,
                                 "%s and %s are for the same column; leave one out",
                                 units->unit[i].symbol, unit.symbol);
        /* One of each kind: there are fewer kinds than places. */
        units->unit[units->count++] = unit;
        part = comma != NULL ? comma + 1 : NULL;
    }
    return 0;
}

struct fluid_unit fluid_units_shown(const struct fluid_units *units, const char *si)
{
    struct fluid_unit shown = {.scale = 1};
    for (int i = 0; i < units->count; i++)
        if (strcmp(units->unit[i].si, si) == 0)
            return units->unit[i];
    text_copy(shown.symbol, sizeof(shown.symbol), si);
    return shown;
}
