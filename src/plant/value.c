/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Texts of a plant file to values: lists, ranges, uncertainties, shapes, quantities of a kind.
 */
#include "reader.h"

#include <ctype.h>
#include <errno.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

int split_list(char *text, char **items, int max)
{
    int count = 0;
    for (char *at = text;;) {
        char *comma = strchr(at, ',');
        if (comma != NULL)
            *comma = '\0';
        if (count == max)
            return -1;
        items[count] = text_trim(at);
        if (*items[count++] == '\0')
            return -1;
        if (comma == NULL)
            return count;
        at = comma + 1;
    }
}

int parse_quantity(const char *text, unsigned dimensions, struct unit *unit, double *value,
                   struct error *err)
{
    int code = unit_parse_value(text, unit, value, err);
    if (code != 0)
        return code;
    if ((dimensions & (1u << unit->dimension)) != 0)
        return 0;
    char wanted[120] = "";
    for (int d = 0; d < DIMENSION_COUNT; d++)
        if ((dimensions & (1u << d)) != 0)
            text_format(wanted + strlen(wanted), sizeof(wanted) - strlen(wanted), "%s%s",
                        *wanted != '\0' ? " or " : "", dimension_says((enum dimension)d));
    return error_set(err, ERR_FORMAT, "'%s' is %s; %s is wanted", text,
                     dimension_says(unit->dimension), wanted);
}

/* One end of a range; *bare tells that it had no unit of its own. */
static int range_end(const char *text, const struct unit *unit, double *value, bool *bare,
                     struct error *err)
{
    struct unit found;
    *bare = text_to_double(text, value) == 0;
    if (*bare)
        return 0;
    int code = parse_quantity(text, 1u << unit->dimension, &found, value, err);
    if (code == 0 && found.gauge != unit->gauge)
        return error_set(err, ERR_FORMAT,
                         "'%s' is %s, the reading's unit %s is not; use one basis", text,
                         found.gauge ? "gauge" : "absolute", unit->symbol);
    /* Bare ends take this unit, so hand the value on in it. */
    return code;
}

int parse_range(const char *text, const struct unit *unit, double *low, double *high,
                struct error *err)
{
    char copy[160];
    char *dots = text_copy(copy, sizeof(copy), text) ? strstr(copy, "..") : NULL;
    if (dots == NULL)
        return error_set(err, ERR_FORMAT, "'%s' is no range; write low .. high", text);
    *dots = '\0';
    const char *ends[] = {text_trim(copy), text_trim(dots + 2)};
    double value[2];
    bool bare[2];
    for (int i = 0; i < 2; i++) {
        int code = range_end(ends[i], unit, &value[i], &bare[i], err);
        if (code != 0)
            return code;
    }
    /* "-5 .. 60 kPa(g)": the unit behind the second end is meant for both. */
    for (int i = 0; i < 2; i++) {
        if (!bare[i])
            continue;
        struct unit other = *unit;
        double ignored;
        if (!bare[1 - i] && unit_parse_value(ends[1 - i], &other, &ignored, err) != 0)
            return ERR_FORMAT;
        value[i] = unit_to_si(&other, value[i]);
    }
    if (!(value[0] < value[1]))
        return error_set(err, ERR_FORMAT, "'%s' begins at or above its end; swap them", text);
    *low = value[0];
    *high = value[1];
    return 0;
}

/* One part of an uncertainty; adds in quadrature to what is there. */
static int uncertainty_part(char *text, const struct point *point, struct uncertainty *out,
                            struct error *err)
{
    char *of = strstr(text, " of ");
    bool of_span = of != NULL && strcmp(text_trim(of + 4), "span") == 0;
    bool of_reading = of != NULL && strcmp(text_trim(of + 4), "reading") == 0;
    if (of != NULL && !of_span && !of_reading)
        return error_set(err, ERR_FORMAT, "'%s': an uncertainty is 'of reading' or 'of span'",
                         text);
    if (of != NULL)
        *of = '\0';
    struct unit unit;
    double value;
    int code = unit_parse_value(text, &unit, &value, err);
    if (code != 0)
        return code;
    bool relative = unit.dimension == DIMENSION_NUMBER;
    if (of == NULL && relative && point->unit.dimension != DIMENSION_NUMBER)
        of_reading = true; /* a bare 0.5 % is of reading */
    if ((of_span || of_reading) && !relative)
        return error_set(err, ERR_FORMAT, "'%s' of a reading or span is a part of it, in %%",
                         text);
    if (!of_span && !of_reading && unit.dimension != point->unit.dimension)
        return error_set(err, ERR_FORMAT, "'%s' is %s, the reading is %s", text,
                         dimension_says(unit.dimension), dimension_says(point->unit.dimension));
    if (of_span) {
        double span = point->scaled      ? point->span_high - point->span_low
                      : point->has_valid ? point->valid_high - point->valid_low
                                         : 0;
        if (!(span > 0))
            return error_set(err, ERR_FORMAT, "'of span' needs a span or valid range");
        out->of_span = hypot(out->of_span, value * span);
    } else if (of_reading) {
        out->of_reading = hypot(out->of_reading, value);
    } else {
        double absolute = unit_span_to_si(&unit, unit_from_si(&unit, value));
        out->absolute = hypot(out->absolute, absolute);
        value = absolute;
    }
    if (value < 0)
        return error_set(err, ERR_FORMAT, "'%s': a standard uncertainty is not negative", text);
    return 0;
}

int parse_uncertainty(const char *text, const struct point *point, struct uncertainty *out,
                      struct error *err)
{
    char copy[160];
    struct uncertainty sum = {0};
    if (!text_copy(copy, sizeof(copy), text))
        return error_set(err, ERR_FORMAT, "'%.40s...' is too long for an uncertainty", text);
    for (char *at = copy; at != NULL;) {
        /* A '+' between parts stands after white space; one within a number does not. */
        char *plus = strstr(at, " +");
        if (plus != NULL)
            *plus = '\0';
        int code = uncertainty_part(text_trim(at), point, &sum, err);
        if (code != 0)
            return code;
        at = plus != NULL ? plus + 2 : NULL;
    }
    *out = sum;
    return 0;
}

/* ---- shapes
 * ---------------------------------------------------------------------------------- */

static int read_table(const char *path, struct arena *arena, struct shape *shape,
                      struct error *err)
{
    FILE *file = fopen(path, "re");
    if (file == NULL)
        return error_set(err, ERR_CONFIG, "strapping table '%s' cannot be opened: %s", path,
                         strerror(errno));
    double *height = arena_take(arena, PLANT_STRAPPING_MAX, sizeof(double));
    double *volume = arena_take(arena, PLANT_STRAPPING_MAX, sizeof(double));
    char line[256];
    int code = height == NULL || volume == NULL ? ERR_MEMORY : 0, number = 0, count = 0;
    while (code == 0 && fgets(line, sizeof(line), file) != NULL) {
        number++;
        char *text = text_trim(line), *comma = strchr(text, ',');
        if (*text == '\0' || *text == '#' || (number == 1 && isalpha((unsigned char)*text)))
            continue;
        if (comma != NULL)
            *comma = '\0';
        if (count == PLANT_STRAPPING_MAX)
            code = error_set(err, ERR_CONFIG, "%s:%d: more than %d rows", path, number,
                             PLANT_STRAPPING_MAX);
        else if (comma == NULL || text_to_double(text_trim(text), &height[count]) != 0 ||
                 text_to_double(text_trim(comma + 1), &volume[count]) != 0)
            code = error_set(err, ERR_CONFIG, "%s:%d: not 'level in m,volume in m3'", path,
                             number);
        else if (count > 0 &&
                 (height[count] <= height[count - 1] || volume[count] <= volume[count - 1]))
            code = error_set(err, ERR_CONFIG,
                             "%s:%d: level and volume must rise from row to row", path, number);
        else if (count == 0 && (height[0] < 0 || volume[0] < 0))
            code = error_set(err, ERR_CONFIG, "%s:%d: level and volume begin at 0 or above",
                             path, number);
        else
            count++;
    }
    fclose(file);
    if (code != 0)
        return code;
    if (count < 2)
        return error_set(err, ERR_CONFIG, "strapping table '%s' has fewer than two rows", path);
    shape->kind = SHAPE_TABLE;
    shape->count = count;
    shape->table_height_m = height;
    shape->table_volume_m3 = volume;
    return 0;
}

static int parse_lengths(char *text, double *length, int wanted, struct error *err)
{
    int count = 0;
    for (char *at = text; at != NULL;) {
        char *cross = strstr(at, " x ");
        if (cross != NULL)
            *cross = '\0';
        struct unit unit;
        if (count == wanted)
            return error_set(err, ERR_FORMAT, "the shape has a length too many (%d wanted)",
                             wanted);
        int code =
            parse_quantity(text_trim(at), 1u << DIMENSION_LENGTH, &unit, &length[count], err);
        if (code != 0)
            return code;
        if (!(length[count] > 0.001) || length[count] > 1000)
            return error_set(err, ERR_FORMAT, "'%s': a vessel's length is from 1 mm to 1 km",
                             text_trim(at));
        count++;
        at = cross != NULL ? cross + 3 : NULL;
    }
    if (count != wanted)
        return error_set(err, ERR_FORMAT,
                         "the shape lacks a length (%d wanted, joined by ' x ')", wanted);
    return 0;
}

int parse_shape(const char *text, const char *file, struct arena *arena, struct shape *out,
                struct error *err)
{
    static const struct {
        const char *word;
        enum shape_kind kind;
        int lengths;
    } shapes[] = {
        {"box",              SHAPE_BOX,              3},
        {"upright-cylinder", SHAPE_UPRIGHT_CYLINDER, 2},
        {"lying-cylinder",   SHAPE_LYING_CYLINDER,   2},
        {"sphere",           SHAPE_SPHERE,           1},
        {"table",            SHAPE_TABLE,            0},
    };
    char copy[512], path[1024];
    const char *words[ARRAY_LENGTH(shapes)];
    if (!text_copy(copy, sizeof(copy), text))
        return error_set(err, ERR_FORMAT, "'%.40s...' is too long for a shape", text);
    char *rest = copy + strcspn(copy, " \t");
    if (*rest != '\0')
        *rest++ = '\0';
    rest = text_trim(rest);
    for (size_t i = 0; i < ARRAY_LENGTH(shapes); i++) {
        words[i] = shapes[i].word;
        if (strcmp(copy, shapes[i].word) != 0)
            continue;
        struct shape shape = {.kind = shapes[i].kind};
        double length[3] = {0};
        if (shape.kind == SHAPE_TABLE) {
            const char *slash = strrchr(file, '/');
            int folder = *rest != '/' && slash != NULL ? (int)(slash - file) + 1 : 0;
            if (*rest == '\0' || !text_format(path, sizeof(path), "%.*s%s", folder, file, rest))
                return error_set(err, ERR_FORMAT,
                                 "table names a CSV file: table store-strapping.csv");
            int code = read_table(path, arena, &shape, err);
            if (code == 0)
                *out = shape;
            return code;
        }
        int code = parse_lengths(rest, length, shapes[i].lengths, err);
        if (code != 0)
            return code;
        if (shape.kind == SHAPE_BOX) {
            shape.length_m = length[0];
            shape.width_m = length[1];
            shape.height_m = length[2];
        } else {
            shape.diameter_m = length[0];
            shape.height_m = length[1];
            shape.length_m = length[1];
        }
        *out = shape;
        return 0;
    }
    const char *near = text_nearest(copy, words, ARRAY_LENGTH(words));
    return error_set(err, ERR_FORMAT,
                     "'%s' is no shape%s%s; box, upright-cylinder, lying-cylinder, "
                     "sphere or table",
                     copy, near != NULL ? "; did you mean " : "", near != NULL ? near : "");
}
