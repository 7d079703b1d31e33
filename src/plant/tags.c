/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Tags: points, then derived quantities, in one row of numbers, and finding them by name.
 */
#include "points.h"

#include <stdlib.h>
#include <string.h>

static const struct {
    enum thing_kind kind;
    const char *word, *unit, *says;
} quantities[] = {
#define X(kind, id, word, unit, says) {THING_##kind, word, unit, says},
    DERIVED_LIST(X)
#undef X
};
_Static_assert(ARRAY_LENGTH(quantities) == DERIVED_ID_COUNT,
               "each derived quantity has its row");

const char *thing_kind_word(enum thing_kind kind)
{
    static const char *const words[] = {
        [THING_OUTSIDE] = "outside",     [THING_VESSEL] = "vessel",
        [THING_CONDENSER] = "condenser", [THING_PUMP] = "pump",
        [THING_PURIFIER] = "purifier",   [THING_DRIFT] = "drift",
        [THING_HALL] = "hall",           [THING_SHAFT] = "shaft",
        [THING_DELIVERY] = "delivery",   [THING_STREAM] = "stream",
    };
    _Static_assert(ARRAY_LENGTH(words) == THING_KIND_COUNT, "each kind has its word");
    return words[kind];
}

static int kind_count(const struct plant *plant, enum thing_kind kind)
{
    switch (kind) {
    case THING_VESSEL:
        return plant->vessel_count;
    case THING_CONDENSER:
        return plant->condenser_count;
    case THING_PUMP:
        return plant->pump_count;
    case THING_PURIFIER:
        return plant->purifier_count;
    case THING_DRIFT:
        return plant->drift_count;
    case THING_HALL:
        return plant->hall_count;
    case THING_SHAFT:
        return plant->shaft_count;
    case THING_DELIVERY:
        return plant->delivery_count;
    case THING_STREAM:
        return plant->stream_count;
    case THING_OUTSIDE:
    case THING_KIND_COUNT:
        break;
    }
    return 0;
}

static const char *thing_name(const struct plant *plant, enum thing_kind kind, int index)
{
    switch (kind) {
    case THING_VESSEL:
        return plant->vessel[index].name;
    case THING_CONDENSER:
        return plant->condenser[index].name;
    case THING_PUMP:
        return plant->pump[index].name;
    case THING_PURIFIER:
        return plant->purifier[index].name;
    case THING_DRIFT:
        return plant->drift[index].name;
    case THING_HALL:
        return plant->hall[index].name;
    case THING_SHAFT:
        return plant->shaft[index].name;
    case THING_DELIVERY:
        return plant->delivery[index].name;
    case THING_STREAM:
        return plant->stream[index].name;
    case THING_OUTSIDE:
    case THING_KIND_COUNT:
        break;
    }
    return "outside";
}

static bool thing_has(const struct plant *plant, enum derived_id id, int thing)
{
    bool of_purifier = id == DERIVED_VESSEL_OXYGEN_INGRESS ||
                       id == DERIVED_VESSEL_PURITY_TIME_CONSTANT ||
                       id == DERIVED_VESSEL_TIME_TO_PURITY;
    return !of_purifier || plant->vessel[thing].purifier >= 0;
}

/* Parts of a whole are read in %, save what is a number by its nature. */
static struct unit shown_unit_of(enum derived_id id, const struct unit *unit)
{
    struct unit shown = *unit;
    bool number = id == DERIVED_HALL_FATALITY_FACTOR || id == DERIVED_DELIVERY_VERDICT ||
                  id == DERIVED_DELIVERY_GUARDED_MARGIN;
    if (number)
        shown.symbol[0] = '\0';
    else if (unit->dimension == DIMENSION_NUMBER && unit_parse("%", &shown, NULL) != 0)
        shown = *unit;
    else if (unit->dimension == DIMENSION_RATE && unit_parse("%/d", &shown, NULL) != 0)
        shown = *unit;
    return shown;
}

/* A tag with its name, for sorting; qsort has no context. */
struct tag_name {
    const char *name;
    int tag;
};

static int by_name(const void *a, const void *b)
{
    return strcmp(((const struct tag_name *)a)->name, ((const struct tag_name *)b)->name);
}

static int index_names(struct assembly *assembly)
{
    struct plant *plant = assembly->plant;
    size_t count = (size_t)plant_tag_count(plant);
    struct tag_name *names = malloc((count + 1) * sizeof(*names));
    int *index = arena_take(assembly->arena, count + 1, sizeof(*index));
    if (names == NULL || index == NULL) {
        free(names);
        return ERR_MEMORY;
    }
    for (size_t i = 0; i < count; i++)
        names[i] = (struct tag_name){.name = plant_tag_name(plant, (int)i), .tag = (int)i};
    qsort(names, count, sizeof(*names), by_name);
    for (size_t i = 0; i < count; i++)
        index[i] = names[i].tag;
    free(names);
    plant->tag_by_name = index;
    return 0;
}

int tags_build(struct assembly *assembly)
{
    struct plant *plant = assembly->plant;
    size_t room = 1;
    for (int q = 0; q < DERIVED_ID_COUNT; q++)
        room += (size_t)kind_count(plant, quantities[q].kind);
    struct derived *derived = arena_take(assembly->arena, room, sizeof(*derived));
    if (derived == NULL)
        return ERR_MEMORY;
    int count = 0;
    for (int k = 0; k < THING_KIND_COUNT; k++)
        for (int t = 0; t < kind_count(plant, (enum thing_kind)k); t++)
            for (int q = 0; q < DERIVED_ID_COUNT; q++) {
                if ((int)quantities[q].kind != k || !thing_has(plant, (enum derived_id)q, t))
                    continue;
                char name[120];
                text_format(name, sizeof(name), "%s.%s",
                            thing_name(plant, (enum thing_kind)k, t), quantities[q].word);
                struct derived *d = &derived[count++];
                *d = (struct derived){.kind = (enum thing_kind)k,
                                      .thing = t,
                                      .id = (enum derived_id)q,
                                      .says = quantities[q].says};
                d->name = arena_text(assembly->arena, name);
                if (d->name == NULL || unit_parse(quantities[q].unit, &d->unit, NULL) != 0)
                    return ERR_MEMORY;
                d->shown = shown_unit_of(d->id, &d->unit);
            }
    plant->derived = derived;
    plant->derived_count = count;
    return index_names(assembly);
}

int plant_tag_count(const struct plant *plant)
{
    return plant->point_count + plant->derived_count;
}

int plant_tag_find(const struct plant *plant, const char *name)
{
    int low = 0, high = plant_tag_count(plant) - 1;
    while (low <= high) {
        int middle = low + (high - low) / 2, tag = plant->tag_by_name[middle];
        int order = strcmp(name, plant_tag_name(plant, tag));
        if (order == 0)
            return tag;
        if (order < 0)
            high = middle - 1;
        else
            low = middle + 1;
    }
    return -1;
}

const char *plant_tag_name(const struct plant *plant, int tag)
{
    return plant_tag_is_point(plant, tag) ? plant->point[tag].name
                                          : plant->derived[tag - plant->point_count].name;
}

const char *plant_tag_says(const struct plant *plant, int tag)
{
    const char *says = plant_tag_is_point(plant, tag)
                           ? plant->point[tag].says
                           : plant->derived[tag - plant->point_count].says;
    return says != NULL ? says : "";
}

const struct unit *plant_tag_unit(const struct plant *plant, int tag)
{
    return plant_tag_is_point(plant, tag) ? &plant->point[tag].unit
                                          : &plant->derived[tag - plant->point_count].unit;
}

const struct unit *plant_tag_shown(const struct plant *plant, int tag)
{
    return plant_tag_is_point(plant, tag) ? &plant->point[tag].unit
                                          : &plant->derived[tag - plant->point_count].shown;
}

bool plant_tag_is_point(const struct plant *plant, int tag)
{
    return tag < plant->point_count;
}

int plant_derived_tag(const struct plant *plant, enum derived_id id, int thing)
{
    for (int i = 0; i < plant->derived_count; i++)
        if (plant->derived[i].id == id && plant->derived[i].thing == thing)
            return plant->point_count + i;
    return -1;
}
