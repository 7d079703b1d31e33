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

const struct unit format_percent = {
    .symbol = "%", .dimension = DIMENSION_NUMBER, .scale = 0.01};

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

/* Numbers too long for their place are told by magnitude rather than cut. */
static const double longest_number = 1e7;

static void format_number(char *dst, size_t size, double shown, int decimals)
{
    /* A minus before what rounds to nothing says nothing. */
    if (decimals <= 6 && fabs(shown) < 0.5 * pow(10, -decimals))
        shown = 0;
    if (fabs(shown) >= longest_number || decimals > 6)
        text_format(dst, size, "%.4g", shown);
    else
        text_format(dst, size, "%.*f", decimals, shown);
}

void format_value(char *dst, size_t size, struct quantity q, const struct unit *unit)
{
    if (q.quality == QUALITY_BAD || q.quality == QUALITY_MISSING)
        text_copy(dst, size, "--");
    else if (unit->dimension == DIMENSION_BIT)
        text_copy(dst, size, q.value != 0 ? "on" : "off");
    else if (!(q.u > 0)) /* a constant of the plant file: as it was written there */
        text_format(dst, size, "%.6g", unit_from_si(unit, q.value));
    else
        format_number(dst, size, unit_from_si(unit, q.value),
                      quantity_decimals(unit_span_from_si(unit, q.u), 3));
}

/* Value, uncertainty if asked for and known, unit, and the quality's mark. */
static void format_in(char *dst, size_t size, struct quantity q, const struct unit *unit,
                      bool with_u)
{
    char value[48], u[64] = "", mark[3] = "";
    format_value(value, sizeof(value), q, unit);
    if (strcmp(value, "--") == 0) {
        text_copy(dst, size, value);
        return;
    }
    double u_shown = unit_span_from_si(unit, q.u);
    if (with_u && q.u > 0 && unit->dimension != DIMENSION_BIT) {
        text_copy(u, sizeof(u), " ± ");
        format_number(u + strlen(u), sizeof(u) - strlen(u), u_shown,
                      quantity_decimals(u_shown, 3));
    }
    if (q.quality != QUALITY_GOOD)
        text_format(mark, sizeof(mark), " %c", quality_mark(q.quality));
    bool bare = unit->symbol[0] == '\0' || strcmp(unit->symbol, "1") == 0;
    text_format(dst, size, "%s%s%s%s%s", value, u, bare ? "" : " ", bare ? "" : unit->symbol,
                mark);
}

/* Also by u, so that what is zero within its uncertainty is not told in a tiny unit. */
static struct unit unit_of(struct quantity q, const struct unit *own)
{
    return shown_unit(own, fmax(fabs(q.value), 10 * q.u));
}

void format_plain(char *dst, size_t size, struct quantity q, const struct unit *own)
{
    struct unit unit = unit_of(q, own);
    format_in(dst, size, q, &unit, false);
}

void format_quantity(char *dst, size_t size, struct quantity q, const struct unit *own)
{
    struct unit unit = unit_of(q, own);
    format_in(dst, size, q, &unit, true);
}

void format_reading(char *dst, size_t size, struct quantity q, const struct unit *own)
{
    format_in(dst, size, q, own, true);
}

void format_tag(char *dst, size_t size, const struct view *view, int tag, bool with_u)
{
    static const char *const verdicts[] = {"accept", "hold", "reject"};
    struct quantity q = view_tag(view, tag, NULL);
    struct unit unit = *plant_tag_shown(view->plant, tag);
    if (!plant_tag_is_point(view->plant, tag)) {
        enum derived_id id = view->plant->derived[tag - view->plant->point_count].id;
        if (id == DERIVED_DELIVERY_VERDICT && quantity_usable(q) && q.value >= 0 &&
            q.value < 3) {
            text_copy(dst, size, verdicts[(int)q.value]);
            return;
        }
        unit = unit_of(q, &unit);
    }
    format_in(dst, size, q, &unit, with_u);
}

void format_age(char *dst, size_t size, const struct view *view, int tag)
{
    char span[32];
    *dst = '\0';
    if (!view_age(view, tag, span, sizeof(span)) ||
        view_tag(view, tag, NULL).quality != QUALITY_STALE)
        return;
    text_format(dst, size, " (%s old)", span);
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

/* ---- what the view says
 * ------------------------------------------------------------------------ */

/* When the source has stopped nothing is live, whatever it was when it was read. */
struct quantity view_as_of_now(const struct view *view, struct quantity q)
{
    if (view->stale && quantity_usable(q))
        q.quality = QUALITY_STALE;
    return q;
}

bool view_age(const struct view *view, int tag, char *dst, size_t size)
{
    *dst = '\0';
    if (!plant_tag_is_point(view->plant, tag) || view->frame->sample[tag].read_utc_ns == 0)
        return false;
    double age_s = fmax(frame_age_s(view->frame, tag), view->stale ? view->stale_s : 0);
    if (age_s < 1)
        text_copy(dst, size, "0 s");
    else
        time_format_span(dst, size, floor(age_s));
    return true;
}

struct quantity view_quantity(const struct view *view, enum derived_id id, int thing)
{
    return view_tag(view, plant_derived_tag(view->plant, id, thing), NULL);
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
        return view_as_of_now(view, (struct quantity){.value = sample->value,
                                                      .u = sample->u,
                                                      .quality = sample->quality});
    }
    const struct derived_value *derived =
        &view->results->derived[tag - view->plant->point_count];
    *reason = derived->reason;
    return view_as_of_now(view, derived->quantity);
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
