/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Alarms: from their draft, when the tags and their units are known; and limits on one tag that
 * contradict each other.
 */
#include "points.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

static void complain(struct assembly *assembly, const struct alarm *alarm, const char *key,
                     const char *text)
{
    problem_add(assembly->problems, PROBLEM_ERROR, alarm->place, "alarm %s, %s: %s",
                alarm->name, key, text);
}

static int find_watch(struct assembly *assembly, struct alarm_draft *draft)
{
    const struct plant *plant = assembly->plant;
    if (draft->watch == NULL)
        return -1;
    int tag = plant_tag_find(plant, draft->watch);
    if (tag >= 0)
        return tag;
    const char *best = NULL;
    for (int i = 0; i < plant_tag_count(plant); i++) {
        const char *pair[] = {plant_tag_name(plant, i), best};
        best = text_nearest(draft->watch, pair, 2);
    }
    problem_add(assembly->problems, PROBLEM_ERROR, draft->alarm.place,
                "alarm %s: there is no point or derived quantity '%s'%s%s%s", draft->alarm.name,
                draft->watch, best != NULL ? "; did you mean '" : "", best != NULL ? best : "",
                best != NULL ? "'?" : "");
    return -1;
}

static void take_level(struct assembly *assembly, struct alarm *alarm, const struct unit *unit,
                       const char *key, const char *text, double *limit)
{
    struct error err = {0};
    struct unit found;
    if (unit->dimension == DIMENSION_BIT)
        complain(assembly, alarm, key, "a bit is watched by is = on or is = off");
    else if (parse_quantity(text, 1u << unit->dimension, &found, limit, &err) != 0)
        complain(assembly, alarm, key, err.text);
    else
        alarm->limit_gauge = found.gauge;
}

static void take_is(struct assembly *assembly, struct alarm *alarm, const struct unit *unit,
                    const char *text)
{
    bool bit = unit->dimension == DIMENSION_BIT;
    if (strcmp(text, "bad") == 0)
        alarm->condition = ALARM_IS_BAD;
    else if (strcmp(text, "on") == 0 && bit)
        alarm->condition = ALARM_IS_ON;
    else if (strcmp(text, "off") == 0 && bit)
        alarm->condition = ALARM_IS_OFF;
    else
        complain(assembly, alarm, "is",
                 bit ? "bad, on or off" : "bad (on and off are for bits)");
}

/* "2 kPa per h": a span of the watched unit per s, min, h or d. */
static void take_rate(struct assembly *assembly, struct alarm *alarm, const struct unit *unit,
                      const char *key, const char *text)
{
    char copy[96];
    struct error err = {0};
    struct unit found, time;
    double span, per;
    char *word = text_copy(copy, sizeof(copy), text) ? strstr(copy, " per ") : NULL;
    if (word != NULL)
        *word = '\0';
    char one[24] = "";
    if (word == NULL || !text_format(one, sizeof(one), "1 %s", text_trim(word + 5)) ||
        unit_parse_value(one, &time, &per, &err) != 0 || time.dimension != DIMENSION_TIME) {
        complain(assembly, alarm, key, "write a change per s, min or h: 2 kPa per h");
        return;
    }
    if (parse_quantity(text_trim(copy), 1u << unit->dimension, &found, &span, &err) != 0) {
        complain(assembly, alarm, key, err.text);
        return;
    }
    alarm->high = unit_span_to_si(&found, unit_from_si(&found, span)) / per;
    if (!(alarm->high > 0))
        complain(assembly, alarm, key, "the rate is a number above 0");
}

static void take_condition(struct assembly *assembly, struct alarm_draft *draft,
                           const struct unit *unit)
{
    struct alarm *alarm = &draft->alarm;
    const char *given[] = {draft->above, draft->below,  draft->outside,
                           draft->is,    draft->rising, draft->falling};
    int count = 0;
    for (size_t i = 0; i < ARRAY_LENGTH(given); i++)
        count += given[i] != NULL;
    if (count != 1) {
        complain(assembly, alarm, "condition",
                 "give one of above, below, outside, is, rising_faster, falling_faster");
        return;
    }
    if (draft->above != NULL) {
        alarm->condition = ALARM_ABOVE;
        take_level(assembly, alarm, unit, "above", draft->above, &alarm->high);
    } else if (draft->below != NULL) {
        alarm->condition = ALARM_BELOW;
        take_level(assembly, alarm, unit, "below", draft->below, &alarm->low);
    } else if (draft->outside != NULL) {
        struct error err = {0};
        alarm->condition = ALARM_OUTSIDE;
        alarm->limit_gauge = unit->gauge;
        if (parse_range(draft->outside, unit, &alarm->low, &alarm->high, &err) != 0)
            complain(assembly, alarm, "outside", err.text);
    } else if (draft->is != NULL) {
        take_is(assembly, alarm, unit, draft->is);
    } else {
        alarm->condition = draft->rising != NULL ? ALARM_RISING_FASTER : ALARM_FALLING_FASTER;
        take_rate(assembly, alarm, unit,
                  draft->rising != NULL ? "rising_faster" : "falling_faster",
                  draft->rising != NULL ? draft->rising : draft->falling);
    }
}

static void take_deadband(struct assembly *assembly, struct alarm_draft *draft,
                          const struct unit *unit)
{
    struct alarm *alarm = &draft->alarm;
    struct error err = {0};
    struct unit found;
    double value;
    if (draft->deadband == NULL)
        return;
    if (parse_quantity(draft->deadband, 1u << unit->dimension, &found, &value, &err) != 0) {
        complain(assembly, alarm, "deadband", err.text);
        return;
    }
    alarm->deadband = unit_span_to_si(&found, unit_from_si(&found, value));
    if (alarm->deadband < 0)
        complain(assembly, alarm, "deadband", "it is not negative");
    if (alarm->condition == ALARM_OUTSIDE && 2 * alarm->deadband >= alarm->high - alarm->low)
        complain(assembly, alarm, "deadband",
                 "twice the deadband fills the range, so the alarm would never return");
}

/* Low and high alarms of one tag must leave room between them. */
static int by_watch(const void *a, const void *b)
{
    const struct alarm *const *x = a, *const *y = b;
    if ((*x)->watch != (*y)->watch)
        return (*x)->watch < (*y)->watch ? -1 : 1;
    return (*x)->place.line - (*y)->place.line;
}

static int tell_overlaps(struct assembly *assembly, const struct alarm *alarms, int count)
{
    const struct alarm **sorted = malloc(((size_t)count + 1) * sizeof(*sorted));
    if (sorted == NULL)
        return ERR_MEMORY;
    for (int i = 0; i < count; i++)
        sorted[i] = &alarms[i];
    qsort(sorted, (size_t)count, sizeof(*sorted), by_watch);
    for (int first = 0, next; first < count; first = next) {
        const struct alarm *high = NULL, *low = NULL;
        for (next = first; next < count && sorted[next]->watch == sorted[first]->watch;
             next++) {
            const struct alarm *a = sorted[next];
            if (a->condition == ALARM_ABOVE && (high == NULL || a->high < high->high))
                high = a;
            if (a->condition == ALARM_BELOW && (low == NULL || a->low > low->low))
                low = a;
        }
        if (high == NULL || low == NULL || sorted[first]->watch < 0 ||
            high->limit_gauge != low->limit_gauge || high->high > low->low)
            continue;
        const struct alarm *later = high->place.line > low->place.line ? high : low;
        problem_add(
            assembly->problems, PROBLEM_ERROR, later->place,
            "alarms %s (above) and %s (below) overlap: every value of %s is in one of them; "
            "put the lower limit below the upper",
            high->name, low->name, plant_tag_name(assembly->plant, high->watch));
    }
    free(sorted);
    return 0;
}

int alarms_finish(struct assembly *assembly)
{
    struct draft_list *list = &assembly->drafts[SECTION_ALARM];
    struct alarm_draft *drafts = list->at;
    struct alarm *alarms =
        arena_take(assembly->arena, (size_t)list->count + 1, sizeof(struct alarm));
    if (alarms == NULL)
        return ERR_MEMORY;
    for (int i = 0; i < list->count; i++) {
        drafts[i].alarm.watch = find_watch(assembly, &drafts[i]);
        if (drafts[i].alarm.watch >= 0) {
            const struct unit *unit = plant_tag_unit(assembly->plant, drafts[i].alarm.watch);
            take_condition(assembly, &drafts[i], unit);
            take_deadband(assembly, &drafts[i], unit);
        }
        alarms[i] = drafts[i].alarm;
    }
    assembly->plant->alarm = alarms;
    assembly->plant->alarm_count = list->count;
    return tell_overlaps(assembly, alarms, list->count);
}
