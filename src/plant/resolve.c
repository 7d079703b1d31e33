/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Drafts to the plant: things find each other, references find their tags, streams their fluid.
 */
#include "points.h"

#include <math.h>
#include <string.h>

static void site_and_things(struct assembly *assembly)
{
    struct plant *plant = assembly->plant;
    struct draft_list *list = assembly->drafts;
    if (list[SECTION_SITE].count == 0) {
        struct place place = {.file = "the plant file", .line = 1};
        if (assembly->name_count > 0)
            place = (struct place){.file = assembly->name[0].place.file, .line = 1};
        problem_add(assembly->problems, PROBLEM_ERROR, place,
                    "there is no [site]; it names the site and its barometer");
    } else {
        plant->site = ((struct site_draft *)list[SECTION_SITE].at)->site;
    }
    plant->link = list[SECTION_LINK].at;
    plant->link_count = list[SECTION_LINK].count;
    plant->vessel = list[SECTION_VESSEL].at;
    plant->vessel_count = list[SECTION_VESSEL].count;
    plant->stream = list[SECTION_STREAM].at;
    plant->stream_count = list[SECTION_STREAM].count;
    plant->condenser = list[SECTION_CONDENSER].at;
    plant->condenser_count = list[SECTION_CONDENSER].count;
    plant->pump = list[SECTION_PUMP].at;
    plant->pump_count = list[SECTION_PUMP].count;
    plant->purifier = list[SECTION_PURIFIER].at;
    plant->purifier_count = list[SECTION_PURIFIER].count;
    plant->drift = list[SECTION_DRIFT].at;
    plant->drift_count = list[SECTION_DRIFT].count;
    plant->shaft = list[SECTION_SHAFT].at;
    plant->shaft_count = list[SECTION_SHAFT].count;
    plant->delivery = list[SECTION_DELIVERY].at;
    plant->delivery_count = list[SECTION_DELIVERY].count;
}

/* ---- pendings
 * -------------------------------------------------------------------------------- */

static void tell_no_name(struct assembly *assembly, const struct pending *pending,
                         const char *what, const char *near)
{
    problem_add(assembly->problems, PROBLEM_ERROR, pending->place,
                "%s: there is no %s '%s'%s%s%s", pending->key->name, what, pending->text,
                near != NULL ? "; did you mean '" : "", near != NULL ? near : "",
                near != NULL ? "'?" : "");
}

static const char *near_tag(const struct plant *plant, const char *text)
{
    const char *best = NULL;
    for (int i = 0; i < plant_tag_count(plant); i++) {
        const char *pair[] = {plant_tag_name(plant, i), best};
        best = text_nearest(text, pair, 2);
    }
    return best;
}

static bool dimension_fits(struct assembly *assembly, const struct pending *pending,
                           const struct unit *unit, const char *text)
{
    if ((pending->key->dimensions & (1u << unit->dimension)) != 0)
        return true;
    int wanted = 0;
    while ((pending->key->dimensions & (1u << wanted)) == 0)
        wanted++;
    problem_add(assembly->problems, PROBLEM_ERROR, pending->place,
                "%s: '%s' is %s; %s is wanted", pending->key->name, text,
                dimension_says(unit->dimension), dimension_says((enum dimension)wanted));
    return false;
}

static void resolve_ref(struct assembly *assembly, const struct pending *pending,
                        const char *text, struct ref *out)
{
    const struct plant *plant = assembly->plant;
    int tag = plant_tag_find(plant, text);
    if (tag >= 0) {
        const struct unit *unit = plant_tag_unit(plant, tag);
        if (dimension_fits(assembly, pending, unit, text))
            *out = (struct ref){.kind = REF_TAG, .tag = tag, .unit = *unit};
        return;
    }
    struct unit unit;
    double value;
    /* A constant begins with a number; a name may too (2PT-1), so the whole must be a quantity.
     */
    if (strchr("0123456789+-.", text[0]) != NULL) {
        struct error err = {0};
        if (unit_parse_value(text, &unit, &value, &err) == 0) {
            if (dimension_fits(assembly, pending, &unit, text))
                *out =
                    (struct ref){.kind = REF_CONSTANT, .tag = -1, .value = value, .unit = unit};
            return;
        }
        if (near_tag(plant, text) == NULL) {
            problem_add(assembly->problems, PROBLEM_ERROR, pending->place, "%s: %s",
                        pending->key->name, err.text);
            return;
        }
    }
    struct pending named = *pending;
    char copy[96];
    text_copy(copy, sizeof(copy), text);
    named.text = copy;
    tell_no_name(assembly, &named, "point or derived quantity", near_tag(plant, text));
}

static void resolve_list(struct assembly *assembly, const struct pending *pending)
{
    struct ref_list *list = pending->target;
    char *items[PLANT_LIST_MAX];
    int count = split_list(pending->text, items, PLANT_LIST_MAX);
    if (count < 0) {
        problem_add(assembly->problems, PROBLEM_ERROR, pending->place,
                    "%s: a list of at most %d names, separated by commas", pending->key->name,
                    PLANT_LIST_MAX);
        return;
    }
    for (int i = 0; i < count; i++) {
        for (int k = 0; k < i; k++)
            if (strcmp(items[i], items[k]) == 0)
                problem_add(assembly->problems, PROBLEM_ERROR, pending->place,
                            "%s: '%s' stands twice", pending->key->name, items[i]);
        resolve_ref(assembly, pending, items[i], &list->at[i]);
    }
    list->count = count;
}

static void resolve_vessel(struct assembly *assembly, const struct pending *pending)
{
    const struct named *named = assembly_name(assembly, pending->text);
    if (named != NULL && named->section == SECTION_VESSEL)
        *(int *)pending->target = named->index;
    else
        tell_no_name(assembly, pending, "vessel",
                     assembly_near(assembly, pending->text, SECTION_VESSEL));
}

static void resolve_end(struct assembly *assembly, const struct pending *pending)
{
    struct thing_ref *end = pending->target;
    if (strcmp(pending->text, "outside") == 0) {
        *end = (struct thing_ref){.kind = THING_OUTSIDE};
        return;
    }
    const struct named *named = assembly_name(assembly, pending->text);
    enum thing_kind kind = named != NULL ? section_kinds[named->section].thing : THING_OUTSIDE;
    if (kind == THING_OUTSIDE || kind == THING_STREAM || kind == THING_DRIFT) {
        tell_no_name(assembly, pending, "thing that a stream can join (or 'outside')",
                     assembly_near(assembly, pending->text, -1));
        return;
    }
    *end = (struct thing_ref){.kind = kind, .index = named->index};
}

/* References before the tags are known (things of things), and after. */
static void resolve_pendings(struct assembly *assembly, bool tags)
{
    for (int i = 0; i < assembly->pending_count; i++) {
        struct pending *pending = &assembly->pending[i];
        switch (pending->kind) {
        case VALUE_REF:
            if (tags)
                resolve_ref(assembly, pending, pending->text, pending->target);
            break;
        case VALUE_REF_LIST:
            if (tags)
                resolve_list(assembly, pending);
            break;
        case VALUE_VESSEL:
            if (!tags)
                resolve_vessel(assembly, pending);
            break;
        case VALUE_END:
            if (!tags)
                resolve_end(assembly, pending);
            break;
        case VALUE_TEXT:
        case VALUE_RAW:
        case VALUE_QUANTITY:
        case VALUE_LIMIT:
        case VALUE_INTEGER:
        case VALUE_REGISTER:
        case VALUE_SHAPE:
        case VALUE_FLUID:
        case VALUE_WORD:
        case VALUE_TIME:
        case VALUE_YES_NO:
        case VALUE_UNIT:
            break;
        }
    }
}

/* ---- things that follow from others
 * ------------------------------------------------------------ */

static void attach(struct assembly *assembly)
{
    struct vessel *vessels = assembly->drafts[SECTION_VESSEL].at;
    struct plant *plant = assembly->plant;
    for (int i = 0; i < plant->vessel_count; i++) {
        vessels[i].condenser = vessels[i].purifier = -1;
        vessels[i].has_heat_budget = vessels[i].heat_budget_w > 0;
        if (vessels[i].window_minimum_s > vessels[i].window_s)
            problem_add(assembly->problems, PROBLEM_ERROR, vessels[i].place,
                        "vessel %s: window_minimum is longer than window", vessels[i].name);
    }
    for (int i = 0; i < plant->condenser_count; i++) {
        struct vessel *vessel = &vessels[plant->condenser[i].vessel];
        if (plant->vessel_count == 0)
            break;
        if (vessel->condenser >= 0)
            problem_add(assembly->problems, PROBLEM_ERROR, plant->condenser[i].place,
                        "vessel %s has a condenser already (%s); one is kept account of",
                        vessel->name, plant->condenser[vessel->condenser].name);
        else
            vessel->condenser = i;
    }
    for (int i = plant->purifier_count - 1; i >= 0 && plant->vessel_count > 0; i--)
        vessels[plant->purifier[i].vessel].purifier = i;
    struct purifier *purifiers = assembly->drafts[SECTION_PURIFIER].at;
    for (int i = 0; i < plant->purifier_count; i++)
        purifiers[i].has_installed = purifiers[i].installed_utc_ns != 0;
}

static const struct fluid *end_fluid(const struct plant *plant, struct thing_ref end)
{
    switch (end.kind) {
    case THING_VESSEL:
        return plant->vessel[end.index].fluid;
    case THING_CONDENSER:
        return plant->vessel_count > 0 ? plant->vessel[plant->condenser[end.index].vessel].fluid
                                       : NULL;
    case THING_PUMP:
        return plant->vessel_count > 0 ? plant->vessel[plant->pump[end.index].vessel].fluid
                                       : NULL;
    case THING_PURIFIER:
        return plant->vessel_count > 0 ? plant->vessel[plant->purifier[end.index].vessel].fluid
                                       : NULL;
    case THING_SHAFT:
        return plant->shaft[end.index].gas;
    case THING_DELIVERY:
        return plant->delivery[end.index].fluid;
    case THING_OUTSIDE:
    case THING_HALL:
    case THING_DRIFT:
    case THING_STREAM:
    case THING_KIND_COUNT:
        break;
    }
    return NULL;
}

static void stream_fluids(struct assembly *assembly)
{
    struct stream *streams = assembly->drafts[SECTION_STREAM].at;
    const struct plant *plant = assembly->plant;
    for (int i = 0; i < plant->stream_count; i++) {
        struct stream *stream = &streams[i];
        const struct fluid *from = end_fluid(plant, stream->from),
                           *to = end_fluid(plant, stream->to);
        if (stream->fluid == NULL)
            stream->fluid = from != NULL ? from : to;
        if (stream->fluid == NULL)
            problem_add(assembly->problems, PROBLEM_ERROR, stream->place,
                        "stream %s joins nothing that holds a fluid; name its fluid",
                        stream->name);
        else if ((from != NULL && from != stream->fluid) || (to != NULL && to != stream->fluid))
            problem_add(assembly->problems, PROBLEM_ERROR, stream->place,
                        "stream %s joins things of different fluids", stream->name);
        if (stream->from.kind == stream->to.kind && stream->from.index == stream->to.index)
            problem_add(assembly->problems, PROBLEM_ERROR, stream->place,
                        "stream %s begins where it ends", stream->name);
    }
}

static int halls(struct assembly *assembly)
{
    struct draft_list *list = &assembly->drafts[SECTION_HALL];
    struct hall_draft *drafts = list->at;
    struct hall *out = arena_take(assembly->arena, (size_t)list->count + 1, sizeof(*out));
    if (out == NULL)
        return ERR_MEMORY;
    for (int i = 0; i < list->count; i++) {
        struct hall *hall = &drafts[i].hall;
        char copy[200], *items[PLANT_LIST_MAX];
        int count = -1;
        if (drafts[i].action_levels != NULL &&
            text_copy(copy, sizeof(copy), drafts[i].action_levels))
            count = split_list(copy, items, PLANT_LIST_MAX);
        for (int k = 0; k < count; k++) {
            struct unit unit;
            struct error err = {0};
            double level;
            if (parse_quantity(items[k], 1u << DIMENSION_NUMBER, &unit, &level, &err) != 0)
                problem_add(assembly->problems, PROBLEM_ERROR, hall->place,
                            "hall %s, action_levels: %s", hall->name, err.text);
            else if (!(level > 0 && level < 0.3))
                problem_add(
                    assembly->problems, PROBLEM_ERROR, hall->place,
                    "hall %s, action_levels: '%s' is no oxygen level of air; write 19.5 %%",
                    hall->name, items[k]);
            else if (hall->action_count > 0 &&
                     level >= hall->action_level[hall->action_count - 1])
                problem_add(assembly->problems, PROBLEM_ERROR, hall->place,
                            "hall %s, action_levels: they go from high to low", hall->name);
            else
                hall->action_level[hall->action_count++] = level;
        }
        if (count < 0)
            problem_add(assembly->problems, PROBLEM_ERROR, hall->place,
                        "hall %s, action_levels: a list of levels, separated by commas",
                        hall->name);
        out[i] = *hall;
    }
    assembly->plant->hall = out;
    assembly->plant->hall_count = list->count;
    return 0;
}

int resolve(struct assembly *assembly)
{
    site_and_things(assembly);
    /* Halls are copied out of their drafts when their references are in; counts come first. */
    assembly->plant->hall_count = assembly->drafts[SECTION_HALL].count;
    struct hall_draft *hall_drafts = assembly->drafts[SECTION_HALL].at;
    struct hall *names = arena_take(assembly->arena, (size_t)assembly->plant->hall_count + 1,
                                    sizeof(struct hall));
    if (names == NULL)
        return ERR_MEMORY;
    for (int i = 0; i < assembly->plant->hall_count; i++)
        names[i] = hall_drafts[i].hall;
    assembly->plant->hall = names;
    resolve_pendings(assembly, false);
    attach(assembly);
    int code = points_finish(assembly);
    if (code == 0)
        code = tags_build(assembly);
    if (code != 0)
        return code;
    resolve_pendings(assembly, true);
    if (assembly->drafts[SECTION_SITE].count > 0)
        assembly->plant->site = ((struct site_draft *)assembly->drafts[SECTION_SITE].at)->site;
    stream_fluids(assembly);
    code = halls(assembly);
    if (code == 0)
        code = alarms_finish(assembly);
    return code;
}
