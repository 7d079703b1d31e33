/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Private to the room: a plant file as a list of sections with their keys, before any of it is
 * understood; and the tables that say which keys there are.
 */
#ifndef ULLAGE_PLANT_READER_H
#define ULLAGE_PLANT_READER_H

#include "ullage/plant.h"

enum { NAME_LENGTH_MAX = 40, KEYS_IN_SECTION_MAX = 48 };

/* ---- source.c: lines to sections ------------------------------------------------------------
 */

struct source_key {
    const char *name;
    char *value; /* continuation lines joined by a space */
    struct place place;
};

struct source_section {
    const char *kind, *name; /* name is NULL where the header has none */
    struct place place;
    int key_count;
    struct source_key key[KEYS_IN_SECTION_MAX];
};

struct source {
    struct arena *arena;
    int count, room;
    struct source_section **section;
};
/* Reads a file and what it includes. Problems are gathered; a negative code only when the first
 * file cannot be read or memory is short. The list itself (not the texts) is freed by
 * source_done. */
int source_read(const char *path, struct arena *arena, struct source *out,
                struct problems *problems);
void source_done(struct source *source);

/* ---- problems.c
 * ------------------------------------------------------------------------------ */

void problem_add(struct problems *problems, enum problem_level level, struct place place,
                 const char *fmt, ...) PRINTF_LIKE(4, 5);
void problems_sort(struct problems *problems);

/* ---- keys.c: which sections and keys there are
 * ------------------------------------------------ */

enum value_kind {
    VALUE_TEXT,
    VALUE_RAW,      /* text that is understood later, when more is known */
    VALUE_QUANTITY, /* double, SI */
    VALUE_LIMIT,    /* struct limit */
    VALUE_INTEGER,
    VALUE_REF, /* struct ref */
    VALUE_REF_LIST,
    VALUE_REGISTER,
    VALUE_SHAPE,
    VALUE_FLUID,
    VALUE_WORD, /* an enumeration */
    VALUE_TIME, /* int64_t UTC ns */
    VALUE_YES_NO,
    VALUE_UNIT,
    VALUE_VESSEL, /* int: index of a vessel */
    VALUE_END     /* struct thing_ref: a thing or outside */
};

/* One key. low and high bound a quantity (SI) or an integer; dimensions is a set of 1 <<
 * dimension. */
struct key {
    const char *name;
    enum value_kind kind;
    size_t offset; /* in the section's draft */
    unsigned dimensions;
    double low, high;
    bool required;
    const char *fallback; /* as it would stand in the file; NULL: none */
    const char *words;    /* VALUE_WORD: comma separated, in the enum's order */
    const char *help;
};

struct section_kind {
    const char *name;
    enum thing_kind thing; /* THING_OUTSIDE for what is no thing */
    size_t size;           /* of the draft */
    const struct key *key;
    int key_count;
    bool named;
    const char *help;
};

enum section_id {
    SECTION_SITE,
    SECTION_LINK,
    SECTION_POINT,
    SECTION_VESSEL,
    SECTION_STREAM,
    SECTION_CONDENSER,
    SECTION_PUMP,
    SECTION_PURIFIER,
    SECTION_DRIFT,
    SECTION_HALL,
    SECTION_SHAFT,
    SECTION_DELIVERY,
    SECTION_ALARM,
    SECTION_COUNT
};
extern const struct section_kind section_kinds[SECTION_COUNT];

/* Drafts: the described thing first, then texts that need more than their own line. */
struct site_draft {
    struct site site;
    const char *include;
};
struct point_draft {
    struct point point;
    const char *link, *valid, *u, *raw, *span, *stale, *fault, *unit;
};
struct hall_draft {
    struct hall hall;
    const char *action_levels;
};
struct drift_draft {
    struct drift drift;
};
struct alarm_draft {
    struct alarm alarm;
    const char *watch, *above, *below, *outside, *is, *rising, *falling, *deadband;
};
/* Every draft but the site's begins with these. */
struct draft_head {
    const char *name, *says;
    struct place place;
};

/* ---- value.c: texts to values
 * ------------------------------------------------------------------ */

/* Splits at commas, trims; at most max. Returns the count, or -1 if there are more or one is
 * empty. */
int split_list(char *text, char **items, int max);
/* "a .. b", each a quantity of the unit's dimension, in SI of that unit's basis. A bare number
 * takes the unit of the other end, or default_unit. 0 or ERR_FORMAT. */
int parse_range(const char *text, const struct unit *unit, double *low, double *high,
                struct error *err);
/* "0.05 kPa", "0.2 % of reading + 0.1 % of span". */
int parse_uncertainty(const char *text, const struct point *point, struct uncertainty *out,
                      struct error *err);
int parse_shape(const char *text, const char *file, struct arena *arena, struct shape *out,
                struct error *err);
/* A quantity of one of the dimensions in the set; gauge only where a limit or reference allows.
 */
int parse_quantity(const char *text, unsigned dimensions, struct unit *unit, double *value,
                   struct error *err);

/* ---- assemble.c, resolve.c, crosscheck.c
 * -------------------------------------------------------- */

struct draft_list {
    int count;
    void *at; /* count drafts of the kind's size */
};

/* A text that names a tag, or a constant in its place, to be put into *target. */
struct pending {
    enum value_kind kind;
    const struct key *key;
    char *text;
    struct place place;
    void *target;
};

struct assembly {
    struct arena *arena;
    struct problems *problems;
    struct plant *plant;
    struct draft_list drafts[SECTION_COUNT];
    int pending_count, pending_room;
    struct pending *pending;
    int name_count;
    struct named {
        const char *name;
        enum section_id section;
        int index;
        struct place place;
    } * name; /* sorted */
};

/* Sections to drafts: every key that stands on its own is understood. */
int assemble(struct assembly *assembly, const struct source *source);
/* Drafts to the plant: points, tags, references, alarms. */
int resolve(struct assembly *assembly);
/* What only shows when the whole is known; mostly warnings. */
void crosscheck(struct assembly *assembly);
const struct named *assembly_name(const struct assembly *assembly, const char *name);
const char *assembly_near(const struct assembly *assembly, const char *name, int section);

#endif
