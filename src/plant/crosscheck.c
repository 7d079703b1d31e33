/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * What only shows when the whole plant is known: mostly warnings, for a plant file may be
 * written step by step.
 */
#include "reader.h"

#include <stdlib.h>
#include <string.h>

static void warn(struct assembly *assembly, struct place place, const char *what,
                 const char *name, const char *text)
{
    problem_add(assembly->problems, PROBLEM_WARNING, place, "%s %s %s", what, name, text);
}

static int by_device(const void *a, const void *b)
{
    const struct link *const *x = a, *const *y = b;
    int order = strcmp((*x)->host, (*y)->host);
    if (order == 0)
        order = (*x)->port - (*y)->port;
    if (order == 0)
        order = (*x)->unit_id - (*y)->unit_id;
    return order != 0 ? order : (*x)->place.line - (*y)->place.line;
}

static void links(struct assembly *assembly)
{
    const struct plant *plant = assembly->plant;
    size_t count = (size_t)plant->link_count;
    bool *used = calloc(count + 1, sizeof(*used));
    const struct link **sorted = malloc((count + 1) * sizeof(*sorted));
    if (used != NULL && sorted != NULL) {
        for (int i = 0; i < plant->point_count; i++)
            used[plant->point[i].link] = true;
        for (size_t i = 0; i < count; i++) {
            sorted[i] = &plant->link[i];
            if (!used[i])
                warn(assembly, sorted[i]->place, "link", sorted[i]->name, "has no points");
            if (sorted[i]->timeout_s > sorted[i]->period_s)
                warn(assembly, sorted[i]->place, "link", sorted[i]->name,
                     "waits longer for an answer than its period; shorten timeout");
        }
        qsort(sorted, count, sizeof(*sorted), by_device);
        for (size_t i = 1; i < count; i++)
            if (strcmp(sorted[i]->host, sorted[i - 1]->host) == 0 &&
                sorted[i]->port == sorted[i - 1]->port &&
                sorted[i]->unit_id == sorted[i - 1]->unit_id)
                warn(assembly, sorted[i]->place, "link", sorted[i]->name,
                     "is the same device as another link; join them");
    }
    free(used);
    free(sorted);
}

static void vessels(struct assembly *assembly)
{
    const struct plant *plant = assembly->plant;
    for (int i = 0; i < plant->vessel_count; i++) {
        const struct vessel *vessel = &plant->vessel[i];
        if (vessel->level.kind == REF_NONE)
            warn(assembly, vessel->place, "vessel", vessel->name,
                 "has no level; its mass and balances cannot be computed");
        if (vessel->level.kind == REF_TAG && plant_tag_is_point(plant, vessel->level.tag)) {
            const struct point *level = &plant->point[vessel->level.tag];
            double top =
                level->unit.dimension == DIMENSION_NUMBER ? 1 : shape_height_m(&vessel->shape);
            if (level->has_valid &&
                (level->valid_high > top * 1.1 || level->valid_low < -0.1 * top))
                problem_add(
                    assembly->problems, PROBLEM_ERROR, level->place,
                    "point %s: its valid range goes beyond vessel %s, which is %.6g m high",
                    level->name, vessel->name, shape_height_m(&vessel->shape));
        }
        if (!vessel->relief.set)
            warn(assembly, vessel->place, "vessel", vessel->name,
                 "has no relief; its hold time cannot be computed");
        bool gauge = vessel->pressure.unit.gauge || vessel->relief.gauge;
        if (gauge && plant->site.barometer.kind == REF_NONE)
            problem_add(
                assembly->problems, PROBLEM_ERROR, vessel->place,
                "vessel %s has a gauge pressure, but [site] has no barometer; name a point "
                "or a constant",
                vessel->name);
    }
}

static void halls(struct assembly *assembly)
{
    const struct plant *plant = assembly->plant;
    for (int i = 0; i < plant->hall_count; i++) {
        const struct hall *hall = &plant->hall[i];
        if (hall->ventilation.kind == REF_NONE)
            warn(assembly, hall->place, "hall", hall->name,
                 "has no ventilation; a release cannot be reckoned from its monitors");
        if (plant->site.barometer.kind == REF_NONE)
            warn(assembly, hall->place, "hall", hall->name,
                 "has no barometer ([site] barometer); partial pressure cannot be computed");
    }
    if (plant->hall_count == 0 && plant->vessel_count > 0)
        problem_add(assembly->problems, PROBLEM_WARNING, plant->site.place,
                    "no [hall] is described: nothing here watches whether people can breathe");
}

void crosscheck(struct assembly *assembly)
{
    if (assembly->problems->error_count > 0)
        return; /* half-understood things would only add noise */
    links(assembly);
    vessels(assembly);
    halls(assembly);
}
