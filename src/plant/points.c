/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Points: from their draft, when the links are known; and the uncertainty and rounding of a
 * reading.
 */
#include <math.h>
#include <string.h>

#include "points.h"

double point_uncertainty(const struct point *point, double value_si)
{
    double reading = point->u.of_reading * (value_si - point->unit.offset);
    return sqrt(point->u.absolute * point->u.absolute + reading * reading +
                point->u.of_span * point->u.of_span);
}

double point_round(const struct point *point, double value_si)
{
    if (!(point->resolution > 0))
        return value_si;
    double own = unit_from_si(&point->unit, value_si);
    double rounded = point->resolution * round(own / point->resolution);
    return isfinite(rounded) ? unit_to_si(&point->unit, rounded) : value_si;
}

static void complain(struct assembly *assembly, const struct point_draft *draft,
                     const char *key, const char *text)
{
    problem_add(assembly->problems, PROBLEM_ERROR, draft->point.place, "point %s, %s: %s",
                draft->point.name, key, text);
}

static void take_unit(struct assembly *assembly, struct point_draft *draft)
{
    struct point *point = &draft->point;
    struct error err = {0};
    if (point->read.type == REGISTER_BIT) {
        point->unit = unit_si(DIMENSION_BIT);
        if (draft->unit != NULL)
            complain(assembly, draft, "unit", "a bit has no unit; take the key out");
        return;
    }
    point->unit = unit_si(DIMENSION_NUMBER);
    if (draft->unit == NULL)
        complain(assembly, draft, "unit", "a reading needs its unit ('1' for a pure number)");
    else if (unit_parse(draft->unit, &point->unit, &err) != 0)
        complain(assembly, draft, "unit", err.text);
}

static void take_ranges(struct assembly *assembly, struct point_draft *draft)
{
    struct point *point = &draft->point;
    struct error err = {0};
    const struct unit raw_unit = unit_si(DIMENSION_NUMBER);
    bool bit = point->read.type == REGISTER_BIT;
    if (bit && (draft->valid != NULL || draft->raw != NULL || draft->span != NULL)) {
        complain(assembly, draft, "valid, raw, span", "a bit is on or off; take them out");
        return;
    }
    if (draft->valid != NULL) {
        if (parse_range(draft->valid, &point->unit, &point->valid_low, &point->valid_high,
                        &err) != 0)
            complain(assembly, draft, "valid", err.text);
        else
            point->has_valid = true;
    }
    if ((draft->raw == NULL) != (draft->span == NULL)) {
        complain(assembly, draft, draft->raw == NULL ? "raw" : "span",
                 "raw and span are given together or not at all");
        return;
    }
    if (draft->raw == NULL)
        return;
    int code = parse_range(draft->raw, &raw_unit, &point->raw_low, &point->raw_high, &err);
    if (code != 0)
        complain(assembly, draft, "raw", err.text);
    else if ((code = parse_range(draft->span, &point->unit, &point->span_low, &point->span_high,
                                 &err)) != 0)
        complain(assembly, draft, "span", err.text);
    point->scaled = code == 0;
}

static void take_uncertainty(struct assembly *assembly, struct point_draft *draft)
{
    struct point *point = &draft->point;
    struct error err = {0};
    if (point->read.type == REGISTER_BIT) {
        if (draft->u != NULL)
            complain(assembly, draft, "u", "a bit has no uncertainty; take the key out");
        return;
    }
    if (draft->u != NULL) {
        if (parse_uncertainty(draft->u, point, &point->u, &err) != 0)
            complain(assembly, draft, "u", err.text);
        return;
    }
    if (point->scaled)
        point->u.of_span = 0.01 * (point->span_high - point->span_low);
    else if (point->has_valid)
        point->u.of_span = 0.01 * (point->valid_high - point->valid_low);
    else
        point->u.of_reading = 0.01;
}

/* A tenth of u or finer, as a power of ten of the point's own unit; the smallest u of the range
 * decides, so that no reading is rounded coarser than a tenth of its own. Unscaled integers
 * keep their counts. */
static void take_resolution(struct point *point)
{
    bool count = point->read.type != REGISTER_F32 && point->read.type != REGISTER_F64;
    if (point->read.type == REGISTER_BIT || (count && !point->scaled))
        return;
    double fixed = hypot(point->u.absolute, point->u.of_span);
    double low = fixed;
    if (!(low > 0) && point->u.of_reading > 0) {
        /* Of reading only: what counts as a small reading is a thousandth of the range. */
        double range =
            point->has_valid ? fmax(fabs(point->valid_low), fabs(point->valid_high)) : 0;
        low = point->u.of_reading * 1e-3 * range;
    }
    double own = unit_span_from_si(&point->unit, low) / 10;
    if (own > 0 && isfinite(own))
        point->resolution = pow(10, floor(log10(own)));
}

static void take_fault(struct assembly *assembly, struct point_draft *draft)
{
    struct error err = {0};
    if (draft->fault == NULL)
        return;
    if (register_parse(draft->fault, &draft->point.fault, &err) != 0)
        complain(assembly, draft, "fault", err.text);
    else if (draft->point.fault.type != REGISTER_BIT)
        complain(assembly, draft, "fault", "a fault is a bit: discrete 12, or input 3 u16.5");
    else
        draft->point.has_fault = true;
}

static void take_link(struct assembly *assembly, struct point_draft *draft)
{
    struct point *point = &draft->point;
    const struct link *links = assembly->drafts[SECTION_LINK].at;
    point->link = 0;
    if (draft->link == NULL)
        return;
    const struct named *named = assembly_name(assembly, draft->link);
    if (named == NULL || named->section != SECTION_LINK) {
        const char *near = assembly_near(assembly, draft->link, SECTION_LINK);
        problem_add(assembly->problems, PROBLEM_ERROR, point->place,
                    "point %s: there is no link '%s'%s%s%s", point->name, draft->link,
                    near != NULL ? "; did you mean '" : "", near != NULL ? near : "",
                    near != NULL ? "'?" : "");
        return;
    }
    point->link = named->index;
    const struct link *link = &links[named->index];
    bool bits = point->read.table == TABLE_COIL || point->read.table == TABLE_DISCRETE;
    if (!bits && register_words(&point->read) > link->block)
        complain(assembly, draft, "read",
                 "the value is larger than its link's block; raise block");
    point->stale_s = 5 * link->period_s;
    if (draft->stale != NULL) {
        struct unit unit;
        struct error err = {0};
        double stale;
        if (parse_quantity(draft->stale, 1u << DIMENSION_TIME, &unit, &stale, &err) != 0)
            complain(assembly, draft, "stale", err.text);
        else if (!(stale >= link->period_s))
            complain(assembly, draft, "stale",
                     "it is shorter than its link's period, so every reading would be stale");
        else
            point->stale_s = stale;
    }
}

int points_finish(struct assembly *assembly)
{
    struct draft_list *list = &assembly->drafts[SECTION_POINT];
    struct point_draft *drafts = list->at;
    struct point *points =
        arena_take(assembly->arena, (size_t)list->count + 1, sizeof(struct point));
    if (points == NULL)
        return ERR_MEMORY;
    for (int i = 0; i < list->count; i++) {
        take_unit(assembly, &drafts[i]);
        take_ranges(assembly, &drafts[i]);
        take_uncertainty(assembly, &drafts[i]);
        take_resolution(&drafts[i].point);
        take_fault(assembly, &drafts[i]);
        take_link(assembly, &drafts[i]);
        points[i] = drafts[i].point;
    }
    assembly->plant->point = points;
    assembly->plant->point_count = list->count;
    return 0;
}
