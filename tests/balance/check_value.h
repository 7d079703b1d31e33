/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Check values by id from tests/data/methods/methods.csv, whose rows carry inputs, expected
 * value, tolerance, source and how far to trust it. Include after cmocka.h.
 */
#ifndef TESTS_BALANCE_CHECK_VALUE_H
#define TESTS_BALANCE_CHECK_VALUE_H

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

struct check_value {
    char id[64], inputs[400];
    double expected, tolerance; /* tolerance is relative */
};

/* One field of RFC 4180; returns what follows the comma. */
static inline const char *check_field(const char *at, char *out, size_t size)
{
    size_t n = 0;
    int quoted = *at == '"';
    if (quoted)
        at++;
    while (*at != '\0' && *at != '\n' && *at != '\r') {
        if (quoted && *at == '"') {
            at++;
            break;
        }
        if (!quoted && *at == ',')
            break;
        if (n + 1 < size)
            out[n++] = *at;
        at++;
    }
    out[n] = '\0';
    return *at == ',' ? at + 1 : at;
}

static inline struct check_value check_value(const char *id)
{
    struct check_value value = {.tolerance = 0};
    char line[2000], field[800];
    FILE *file = fopen("tests/data/methods/methods.csv", "r");
    assert_non_null(file);
    while (value.id[0] == '\0' && fgets(line, sizeof(line), file) != NULL) {
        const char *at = check_field(line, field, sizeof(field));
        if (strcmp(field, id) != 0)
            continue;
        snprintf(value.id, sizeof(value.id), "%s", id);
        at = check_field(at, field, sizeof(field));
        at = check_field(at, value.inputs, sizeof(value.inputs));
        at = check_field(at, field, sizeof(field));
        value.expected = strtod(field, NULL);
        at = check_field(at, field, sizeof(field));
        check_field(at, field, sizeof(field));
        value.tolerance = strtod(field, NULL);
    }
    fclose(file);
    if (value.id[0] == '\0')
        fail_msg("methods.csv has no row %s", id);
    return value;
}

/* An input of a row: "name=1.5" among "a=..;b=..". */
static inline double check_input(const struct check_value *value, const char *name)
{
    size_t length = strlen(name);
    for (const char *at = value->inputs; at != NULL && *at != '\0';
         at = strchr(at, ';') != NULL ? strchr(at, ';') + 1 : NULL)
        if (strncmp(at, name, length) == 0 && at[length] == '=')
            return strtod(at + length + 1, NULL);
    fail_msg("%s has no input %s", value->id, name);
    return 0;
}

static inline void check_result(const struct check_value *value, double got)
{
    if (!(fabs(got - value->expected) <= value->tolerance * fabs(value->expected)))
        fail_msg("%s: got %.9g, expected %.9g within %g", value->id, got, value->expected,
                 value->tolerance);
}

#endif
