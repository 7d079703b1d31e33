/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Sections to drafts: names, known keys, and every value that can be understood by itself. What
 * names another thing is put on a list of pendings, for things may be named before they stand.
 */
#include "reader.h"

#include <ctype.h>
#include <stdlib.h>
#include <string.h>

static int by_name(const void *a, const void *b)
{
    return strcmp(((const struct named *)a)->name, ((const struct named *)b)->name);
}

const struct named *assembly_name(const struct assembly *assembly, const char *name)
{
    struct named key = {.name = name};
    if (assembly->name_count == 0)
        return NULL;
    return bsearch(&key, assembly->name, (size_t)assembly->name_count, sizeof(key), by_name);
}

const char *assembly_near(const struct assembly *assembly, const char *name, int section)
{
    const char *best = NULL;
    for (int i = 0; i < assembly->name_count; i++) {
        if (section >= 0 && (int)assembly->name[i].section != section)
            continue;
        const char *pair[] = {assembly->name[i].name, best};
        best = text_nearest(name, pair, 2);
    }
    return best;
}

static const struct section_kind *kind_of(const struct assembly *assembly,
                                          const struct source_section *section, int *id)
{
    const char *names[SECTION_COUNT];
    for (int i = 0; i < SECTION_COUNT; i++) {
        names[i] = section_kinds[i].name;
        if (strcmp(section->kind, section_kinds[i].name) == 0) {
            *id = i;
            return &section_kinds[i];
        }
    }
    const char *near = text_nearest(section->kind, names, SECTION_COUNT);
    problem_add(assembly->problems, PROBLEM_ERROR, section->place,
                "there is no kind of section '%s'%s%s%s", section->kind,
                near != NULL ? "; did you mean '" : "", near != NULL ? near : "",
                near != NULL ? "'?" : "");
    return NULL;
}

static bool name_good(const struct assembly *assembly, const struct source_section *section,
                      const struct section_kind *kind)
{
    if (!kind->named) {
        if (section->name != NULL && *section->name != '\0')
            problem_add(assembly->problems, PROBLEM_ERROR, section->place,
                        "[%s] has no name in its header", kind->name);
        return section->name == NULL || *section->name == '\0';
    }
    if (section->name == NULL || *section->name == '\0') {
        problem_add(assembly->problems, PROBLEM_ERROR, section->place,
                    "[%s] lacks its name; write [%s NAME]", kind->name, kind->name);
        return false;
    }
    size_t length = strlen(section->name);
    for (size_t i = 0; i < length; i++) {
        char c = section->name[i];
        if (isalnum((unsigned char)c) || c == '-' || c == '_')
            continue;
        problem_add(assembly->problems, PROBLEM_ERROR, section->place,
                    "'%s': a name holds letters, digits, - and _ only", section->name);
        return false;
    }
    if (length > NAME_LENGTH_MAX || strcmp(section->name, "outside") == 0) {
        problem_add(assembly->problems, PROBLEM_ERROR, section->place,
                    "'%s' cannot be a name: %s", section->name,
                    length > NAME_LENGTH_MAX ? "longer than 40 characters"
                                             : "it has a meaning");
        return false;
    }
    return true;
}

static int pend(struct assembly *assembly, const struct key *key, const struct source_key *from,
                void *target)
{
    if (assembly->pending_count == assembly->pending_room) {
        int room = assembly->pending_room > 0 ? 2 * assembly->pending_room : 256;
        void *grown = realloc(assembly->pending, (size_t)room * sizeof(struct pending));
        if (grown == NULL)
            return ERR_MEMORY;
        assembly->pending = grown;
        assembly->pending_room = room;
    }
    assembly->pending[assembly->pending_count++] = (struct pending){.kind = key->kind,
                                                                    .key = key,
                                                                    .text = from->value,
                                                                    .place = from->place,
                                                                    .target = target};
    return 0;
}

static int parse_words(const struct key *key, const char *text, int *out, struct error *err)
{
    char copy[120], *items[8];
    text_copy(copy, sizeof(copy), key->words);
    int count = split_list(copy, items, 8);
    for (int i = 0; i < count; i++)
        if (strcmp(items[i], text) == 0) {
            *out = i;
            return 0;
        }
    return error_set(err, ERR_FORMAT, "'%s' is none of: %s", text, key->words);
}

static int parse_fluid(const char *text, const struct fluid **out, struct error *err)
{
    const char *names[32];
    size_t count = fluid_count() < ARRAY_LENGTH(names) ? fluid_count() : ARRAY_LENGTH(names);
    *out = fluid_find(text);
    if (*out != NULL)
        return 0;
    for (size_t i = 0; i < count; i++)
        names[i] = fluid_name(fluid_at(i));
    const char *near = text_nearest(text, names, count);
    return error_set(err, ERR_FORMAT, "'%s' is no fluid known here%s%s", text,
                     near != NULL ? "; did you mean " : "", near != NULL ? near : "");
}

static int parse_bounded(const struct key *key, const char *text, double *out,
                         struct error *err)
{
    struct unit unit;
    double value;
    int code = parse_quantity(text, key->dimensions, &unit, &value, err);
    if (code != 0)
        return code;
    if (unit.gauge)
        return error_set(err, ERR_FORMAT, "'%s': no gauge pressure here", text);
    if (value < key->low || value > key->high)
        return error_set(err, ERR_FORMAT, "'%s' is outside %.6g to %.6g %s", text,
                         unit_from_si(&unit, key->low), unit_from_si(&unit, key->high),
                         unit.symbol);
    *out = value;
    return 0;
}

static int parse_limit(const char *text, struct limit *out, struct error *err)
{
    struct unit unit;
    double value;
    int code = parse_quantity(text, 1u << DIMENSION_PRESSURE, &unit, &value, err);
    if (code == 0)
        *out = (struct limit){.set = true, .value = value, .gauge = unit.gauge};
    return code;
}

/* One value into its place in the draft. */
static int take_value(struct assembly *assembly, const struct key *key,
                      const struct source_key *from, void *target, struct error *err)
{
    long number;
    int code;
    switch (key->kind) {
    case VALUE_TEXT:
    case VALUE_RAW: {
        char *text = arena_text(assembly->arena, from->value);
        if (text == NULL)
            return ERR_MEMORY;
        text_printable(text, strlen(text) + 1, from->value);
        *(const char **)target = text;
        return 0;
    }
    case VALUE_QUANTITY:
        return parse_bounded(key, from->value, target, err);
    case VALUE_LIMIT:
        return parse_limit(from->value, target, err);
    case VALUE_INTEGER:
        code = text_to_long(from->value, (long)key->low, (long)key->high, &number);
        if (code != 0)
            return error_set(err, code, "'%s' is no whole number from %.0f to %.0f",
                             from->value, key->low, key->high);
        *(int *)target = (int)number;
        return 0;
    case VALUE_REF:
    case VALUE_REF_LIST:
    case VALUE_VESSEL:
    case VALUE_END:
        return pend(assembly, key, from, target);
    case VALUE_REGISTER:
        return register_parse(from->value, target, err);
    case VALUE_SHAPE:
        return parse_shape(from->value, from->place.file, assembly->arena, target, err);
    case VALUE_FLUID:
        return parse_fluid(from->value, target, err);
    case VALUE_WORD: {
        int index = 0;
        code = parse_words(key, from->value, &index, err);
        if (code == 0)
            *(int *)target = index;
        return code;
    }
    case VALUE_TIME:
        return time_parse(from->value, target, err);
    case VALUE_YES_NO:
        if (strcmp(from->value, "yes") != 0 && strcmp(from->value, "no") != 0)
            return error_set(err, ERR_FORMAT, "'%s' is neither yes nor no", from->value);
        *(bool *)target = strcmp(from->value, "yes") == 0;
        return 0;
    case VALUE_UNIT:
        return unit_parse(from->value, target, err);
    }
    return ERR_ARGUMENT;
}
_Static_assert(sizeof(enum stream_phase) == sizeof(int) &&
                   sizeof(enum hall_mode) == sizeof(int),
               "an enumeration is stored through an int");

static int take_key(struct assembly *assembly, const struct key *key,
                    const struct source_key *from, unsigned char *draft)
{
    struct error err = {0};
    int code;
    if (*from->value == '\0')
        code = error_set(&err, ERR_FORMAT, "it has no value");
    else
        code = take_value(assembly, key, from, draft + key->offset, &err);
    if (code != 0 && code != ERR_MEMORY)
        problem_add(assembly->problems, PROBLEM_ERROR, from->place, "%s: %s", key->name,
                    err.text);
    return code == ERR_MEMORY ? code : 0;
}

static const struct key *find_key(const struct assembly *assembly,
                                  const struct section_kind *kind,
                                  const struct source_key *from)
{
    const char *names[KEYS_IN_SECTION_MAX];
    for (int i = 0; i < kind->key_count; i++) {
        names[i] = kind->key[i].name;
        if (strcmp(from->name, kind->key[i].name) == 0)
            return &kind->key[i];
    }
    char shown[64];
    text_printable(shown, sizeof(shown), from->name);
    const char *near = text_nearest(from->name, names, (size_t)kind->key_count);
    problem_add(assembly->problems, PROBLEM_ERROR, from->place, "[%s] has no key '%s'%s%s%s",
                kind->name, shown, near != NULL ? "; did you mean '" : "",
                near != NULL ? near : "", near != NULL ? "'?" : "");
    return NULL;
}

static int fill_draft(struct assembly *assembly, const struct section_kind *kind,
                      const struct source_section *section, unsigned char *draft)
{
    bool given[KEYS_IN_SECTION_MAX] = {false};
    for (int i = 0; i < section->key_count; i++) {
        const struct key *key = find_key(assembly, kind, &section->key[i]);
        if (key == NULL)
            continue;
        given[key - kind->key] = true;
        int code = take_key(assembly, key, &section->key[i], draft);
        if (code != 0)
            return code;
    }
    for (int i = 0; i < kind->key_count; i++) {
        const struct key *key = &kind->key[i];
        if (given[i])
            continue;
        if (key->required)
            problem_add(assembly->problems, PROBLEM_ERROR, section->place,
                        "[%s%s%s] lacks '%s': %s", kind->name, section->name != NULL ? " " : "",
                        section->name != NULL ? section->name : "", key->name, key->help);
        if (key->fallback == NULL)
            continue;
        struct source_key fallback = {.name = key->name, .place = section->place};
        fallback.value = arena_text(assembly->arena, key->fallback);
        int code =
            fallback.value == NULL ? ERR_MEMORY : take_key(assembly, key, &fallback, draft);
        if (code != 0)
            return code;
    }
    return 0;
}

/* Names once over all kinds; the second of two is the one that is wrong. */
static void tell_doubles(struct assembly *assembly)
{
    int kept = 0;
    for (int i = 0; i < assembly->name_count; i++) {
        if (kept > 0 && strcmp(assembly->name[kept - 1].name, assembly->name[i].name) == 0) {
            const struct named *a = &assembly->name[kept - 1], *b = &assembly->name[i];
            bool later =
                strcmp(a->place.file, b->place.file) == 0 && a->place.line > b->place.line;
            problem_add(
                assembly->problems, PROBLEM_ERROR, later ? a->place : b->place,
                "the name '%s' is taken already (%s:%d); a name is used once over all kinds",
                b->name, (later ? b : a)->place.file, (later ? b : a)->place.line);
            continue;
        }
        assembly->name[kept++] = assembly->name[i];
    }
    assembly->name_count = kept;
}

int assemble(struct assembly *assembly, const struct source *source)
{
    int count[SECTION_COUNT] = {0};
    for (int i = 0; i < source->count; i++)
        for (int k = 0; k < SECTION_COUNT; k++)
            count[k] += strcmp(source->section[i]->kind, section_kinds[k].name) == 0;
    for (int k = 0; k < SECTION_COUNT; k++) {
        assembly->drafts[k].at =
            arena_take(assembly->arena, (size_t)count[k] + 1, section_kinds[k].size);
        if (assembly->drafts[k].at == NULL)
            return ERR_MEMORY;
    }
    assembly->name =
        arena_take(assembly->arena, (size_t)source->count + 1, sizeof(struct named));
    if (assembly->name == NULL)
        return ERR_MEMORY;
    for (int i = 0; i < source->count; i++) {
        const struct source_section *section = source->section[i];
        int id = 0;
        const struct section_kind *kind = kind_of(assembly, section, &id);
        if (kind == NULL || !name_good(assembly, section, kind))
            continue;
        struct draft_list *list = &assembly->drafts[id];
        if (id == SECTION_SITE && list->count == 1) {
            problem_add(assembly->problems, PROBLEM_ERROR, section->place,
                        "[site] stands twice; keep one");
            continue;
        }
        unsigned char *draft = (unsigned char *)list->at + (size_t)list->count * kind->size;
        if (kind->named) {
            struct draft_head *head = (void *)draft;
            head->name = section->name;
            head->place = section->place;
            assembly->name[assembly->name_count++] = (struct named){
                .name = section->name,
                .section = (enum section_id)id,
                .index = list->count,
                .place = section->place,
            };
        }
        int code = fill_draft(assembly, kind, section, draft);
        if (code != 0)
            return code;
        if (id == SECTION_SITE)
            ((struct site_draft *)(void *)draft)->site.place = section->place;
        list->count++;
    }
    qsort(assembly->name, (size_t)assembly->name_count, sizeof(struct named), by_name);
    tell_doubles(assembly);
    return 0;
}
