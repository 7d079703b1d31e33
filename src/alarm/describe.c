/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Limits and values of alarms in words, in the unit of the watched tag and the pressure basis
 * of the limit.
 */
#include "internal.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

bool alarm_is_rate(const struct alarm *alarm)
{
    return alarm->condition == ALARM_RISING_FASTER || alarm->condition == ALARM_FALLING_FASTER;
}

/* " kPa(g)", with the space; empty for a pure number. */
static void symbol_in_basis(char *dst, size_t size, const struct unit *unit, bool gauge)
{
    char symbol[sizeof(unit->symbol)];
    text_copy(symbol, sizeof(symbol), unit->symbol);
    char *basis = strstr(symbol, "(g)");
    if (basis != NULL)
        *basis = '\0';
    bool none = symbol[0] == '\0' || strcmp(symbol, "1") == 0;
    bool shown_gauge = gauge && unit->dimension == DIMENSION_PRESSURE;
    text_format(dst, size, "%s%s%s", none ? "" : " ", none ? "" : symbol,
                shown_gauge ? "(g)" : "");
}

/* Value and, for limits that are rates, per minute; the number alone. */
static double in_unit(const struct unit *unit, const struct alarm *alarm, double value)
{
    return alarm_is_rate(alarm) ? unit_span_from_si(unit, value * 60)
                                : unit_from_si(unit, value);
}

void alarm_limit_text(char *dst, size_t size, const struct plant *plant,
                      const struct alarm *alarm)
{
    const struct unit *unit = plant_tag_shown(plant, alarm->watch);
    char symbol[sizeof(unit->symbol) + 8];
    symbol_in_basis(symbol, sizeof(symbol), unit, alarm->limit_gauge && !alarm_is_rate(alarm));
    double low = in_unit(unit, alarm, alarm->low);
    double high = in_unit(unit, alarm, alarm->high);
    switch (alarm->condition) {
    case ALARM_ABOVE:
        text_format(dst, size, "above %.6g%s", high, symbol);
        break;
    case ALARM_BELOW:
        text_format(dst, size, "below %.6g%s", low, symbol);
        break;
    case ALARM_OUTSIDE:
        text_format(dst, size, "outside %.6g .. %.6g%s", low, high, symbol);
        break;
    case ALARM_IS_BAD:
        text_copy(dst, size, "not to be trusted");
        break;
    case ALARM_IS_ON:
        text_copy(dst, size, "on");
        break;
    case ALARM_IS_OFF:
        text_copy(dst, size, "off");
        break;
    case ALARM_RISING_FASTER:
        text_format(dst, size, "rising faster than %.6g%s per min", high, symbol);
        break;
    case ALARM_FALLING_FASTER:
        text_format(dst, size, "falling faster than %.6g%s per min", high, symbol);
        break;
    }
}

void describe_value(char *dst, size_t size, const struct plant *plant,
                    const struct alarm *alarm, double value, double u)
{
    if (alarm->condition == ALARM_IS_ON || alarm->condition == ALARM_IS_OFF) {
        text_copy(dst, size, value != 0 ? "on" : "off");
        return;
    }
    const struct unit *unit = plant_tag_shown(plant, alarm->watch);
    char symbol[sizeof(unit->symbol) + 8];
    bool rate = alarm_is_rate(alarm);
    symbol_in_basis(symbol, sizeof(symbol), unit, alarm->limit_gauge && !rate);
    double shown = in_unit(unit, alarm, value);
    double u_shown = unit_span_from_si(unit, u);
    if (rate)
        text_format(dst, size, "%+.3g%s per min", shown, symbol);
    else if (u_shown > 0 && fabs(shown) < 1e9)
        text_format(dst, size, "%.*f%s", quantity_decimals(u_shown, 1), shown, symbol);
    else
        text_format(dst, size, "%.5g%s", shown, symbol);
}
