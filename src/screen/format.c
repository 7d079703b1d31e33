/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Quantities as an operator reads them: units of the trade, decimals that the uncertainty
 * allows, and never a number where there is none to believe.
 */
#include "format.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

/* Steps of a unit, from large to small: the first that leaves at least 1 before the point. */
struct steps {
    enum dimension dimension;
    const char *symbol[5];
};
static const struct steps steps[] = {
    {DIMENSION_POWER,         {"MW", "kW", "W", "mW"}                },
    {DIMENSION_MASS_FLOW,     {"kg/s", "g/s", "mg/s", "ug/s", "ng/s"}},
    {DIMENSION_MASS,          {"t", "kg", "g", "mg", "ug"}           },
    {DIMENSION_PRESSURE,      {"MPa", "kPa", "Pa"}                   },
    {DIMENSION_TIME,          {"d", "h", "min", "s", "ms"}           },
    {DIMENSION_PRESSURE_RATE, {"kPa/min", "kPa/h", "Pa/h"}           },
};

struct unit shown_unit(const struct unit *own, double magnitude_si)
{
    struct unit unit = *own;
    if (own->gauge)
        return unit;
    for (size_t i = 0; i < ARRAY_LENGTH(steps); i++) {
        if (steps[i].dimension != own->dimension)
            continue;
        for (size_t k = 0; k < ARRAY_LENGTH(steps[i].symbol); k++) {
            struct unit step;
            if (steps[i].symbol[k] == NULL || unit_parse(steps[i].symbol[k], &step, NULL) != 0)
                break;
            unit = step;
            if (fabs(magnitude_si) / step.scale >= 0.9995)
                break;
        }
        /* Nothing at all is shown in the middle of the scale, not in its smallest step. */
        if (magnitude_si == 0 && unit_parse(steps[i].symbol[1], &unit, NULL) != 0)
            unit = *own;
        return unit;
    }
    return unit;
}

static int decimals_of(struct quantity q, const struct unit *unit)
{
    return quantity_decimals(unit_span_from_si(unit, q.u), 3);
}

void format_value(char *dst, size_t size, struct quantity q, const struct unit *unit)
{
    if (q.quality == QUALITY_BAD || q.quality == QUALITY_MISSING) {
        text_copy(dst, size, "--");
        return;
    }
    if (unit->dimension == DIMENSION_BIT) {
        text_copy(dst, size, q.value != 0 ? "on" : "off");
        return;
    }
    double shown = unit_from_si(unit, q.value);
    if (!(q.u > 0)) { /* a constant of the plant file: as it was written there */
        text_format(dst, size, "%.4g", shown);
        return;
    }
    int decimals = decimals_of(q, unit);
    /* A minus before what rounds to nothing says nothing. */
    if (fabs(shown) < 0.5 * pow(10, -decimals))
        shown = 0;
    text_format(dst, size, "%.*f", decimals, shown);
}

/* A unit that is not written behind the number. */
static bool plain(const struct unit *unit)
{
    return unit->symbol[0] == '\0' || strcmp(unit->symbol, "1") == 0;
}

static void with_mark(char *dst, size_t size, enum quality quality)
{
    size_t length = strlen(dst);
    if (quality != QUALITY_GOOD && strcmp(dst, "--") != 0 && length + 3 < size)
        text_format(dst + length, size - length, " %c", quality_mark(quality));
}

void format_plain(char *dst, size_t size, struct quantity q, const struct unit *own)
{
    struct unit unit = shown_unit(own, q.value);
    char value[48];
    format_value(value, sizeof(value), q, &unit);
    bool bare = strcmp(value, "--") == 0 || plain(&unit);
    text_format(dst, size, "%s%s%s", value, bare ? "" : " ", bare ? "" : unit.symbol);
    with_mark(dst, size, q.quality);
}

static void value_and_u(char *dst, size_t size, struct quantity q, struct unit unit)
{
    char value[48];
    format_value(value, sizeof(value), q, &unit);
    const char *symbol = plain(&unit) ? "" : unit.symbol;
    text_format(dst, size, "%s ± %.*f%s%s", value, decimals_of(q, &unit),
                unit_span_from_si(&unit, q.u), *symbol != '\0' ? " " : "", symbol);
    with_mark(dst, size, q.quality);
}

void format_quantity(char *dst, size_t size, struct quantity q, const struct unit *own)
{
    double magnitude = fabs(q.value) > q.u ? q.value : q.u;
    if (!quantity_usable(q) || !(q.u > 0))
        format_plain(dst, size, q, own);
    else
        value_and_u(dst, size, q, shown_unit(own, magnitude));
}

void format_reading(char *dst, size_t size, struct quantity q, const struct unit *own)
{
    if (quantity_usable(q) && q.u > 0) {
        value_and_u(dst, size, q, *own);
        return;
    }
    char value[48];
    format_value(value, sizeof(value), q, own);
    bool bare = strcmp(value, "--") == 0 || plain(own);
    text_format(dst, size, "%s%s%s", value, bare ? "" : " ", bare ? "" : own->symbol);
    with_mark(dst, size, q.quality);
}

enum style quality_style(enum quality quality)
{
    switch (quality) {
    case QUALITY_GOOD:
    case QUALITY_UNCERTAIN:
        return STYLE_NORMAL;
    case QUALITY_STALE:
        return STYLE_STALE;
    case QUALITY_BAD:
    case QUALITY_MISSING:
    case QUALITY_COUNT:
        break;
    }
    return STYLE_BAD;
}

void format_clock(char *dst, size_t size, int64_t utc_ns)
{
    time_format(dst, size, utc_ns, 0);
    char *t = strchr(dst, 'T');
    if (t != NULL)
        *t = ' ';
}

const struct derived_value *view_derived(const struct view *view, enum derived_id id, int thing)
{
    static const struct derived_value none = {.quantity = {.quality = QUALITY_MISSING}};
    int tag = plant_derived_tag(view->plant, id, thing);
    if (tag < 0 || view->results == NULL || view->results->derived == NULL)
        return &none;
    return &view->results->derived[tag - view->plant->point_count];
}

struct quantity view_quantity(const struct view *view, enum derived_id id, int thing)
{
    return view_derived(view, id, thing)->quantity;
}

struct quantity view_tag(const struct view *view, int tag, const char **reason)
{
    const char *ignored;
    if (reason == NULL)
        reason = &ignored;
    *reason = "";
    if (tag < 0 || view->frame == NULL)
        return quantity_none(QUALITY_MISSING);
    if (plant_tag_is_point(view->plant, tag)) {
        const struct sample *sample = &view->frame->sample[tag];
        if (sample->quality != QUALITY_GOOD)
            *reason = cause_says(sample->cause);
        return (struct quantity){
            .value = sample->value, .u = sample->u, .quality = sample->quality};
    }
    const struct derived_value *derived =
        &view->results->derived[tag - view->plant->point_count];
    *reason = derived->reason;
    return derived->quantity;
}

struct quantity view_ref(const struct view *view, const struct ref *ref)
{
    if (ref->kind == REF_CONSTANT)
        return quantity_good(ref->value, 0);
    return view_tag(view, ref->kind == REF_TAG ? ref->tag : -1, NULL);
}

const char *ref_name(const struct view *view, const struct ref *ref)
{
    if (ref->kind == REF_TAG)
        return plant_tag_name(view->plant, ref->tag);
    return ref->kind == REF_CONSTANT ? "a constant" : "";
}
