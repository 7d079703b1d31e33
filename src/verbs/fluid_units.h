/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The units in which a person wants a table of fluid properties: "kPa,degC,kJ/kg".
 */
#ifndef ULLAGE_FLUID_UNITS_H
#define ULLAGE_FLUID_UNITS_H

#include "ullage/base.h"

enum { FLUID_UNITS_MAX = 12 };

/* value_si = value * scale + offset, in place of the unit si. */
struct fluid_unit {
    char si[16], symbol[16];
    double scale, offset;
};
struct fluid_units {
    int count;
    struct fluid_unit unit[FLUID_UNITS_MAX];
};

/* A list with commas. ERR_FORMAT with what is wrong and the mend. */
int fluid_units_parse(const char *text, struct fluid_units *units,
                      struct error *err) MUST_CHECK;
/* The unit to show in place of an SI unit; the SI unit itself if nothing else was asked for. */
struct fluid_unit fluid_units_shown(const struct fluid_units *units, const char *si);

#endif
