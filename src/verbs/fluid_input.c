/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Reading the inputs of a state from text. A number without a unit is refused where it could be
 * misread: a wrong unit gives a plausible wrong state.
 */
#include "fluid_input.h"

#include <string.h>

static const char *const input_names[] = {"T", "p", "rho", "h", "s", "x"};
_Static_assert(ARRAY_LENGTH(input_names) == INPUT_KEYS, "each input has its name");

/* Units that only a fluid needs; the trade's others are base's. */
static const struct {
    enum input_key key;
    const char *symbol;
    double scale;
} fluid_units[] = {
    {INPUT_RHO, "kg/m3",     1   },
    {INPUT_RHO, "g/cm3",     1000},
    {INPUT_H,   "J/kg",      1   },
    {INPUT_H,   "kJ/kg",     1000},
    {INPUT_S,   "J/(kg K)",  1   },
    {INPUT_S,   "kJ/(kg K)", 1000},
    {INPUT_S,   "J/kg/K",    1   },
    {INPUT_S,   "kJ/kg/K",   1000},
};

static int parse_fluid_unit(enum input_key key, const char *text, double *value,
                            struct error *err)
{
    size_t length = strspn(text, "0123456789.eE+-");
    char number[64], *end;
    if (length >= sizeof(number))
        return error_set(err, ERR_FORMAT, "%s=%.40s... is no number with a unit",
                         input_names[key], text);
    memcpy(number, text, length);
    number[length] = '\0';
    char symbol[32];
    bool fits = text_copy(symbol, sizeof(symbol), text + length);
    end = text_trim(symbol);
    const char *first = NULL;
    for (size_t i = 0; i < ARRAY_LENGTH(fluid_units); i++) {
        if (fluid_units[i].key != key)
            continue;
        if (first == NULL)
            first = fluid_units[i].symbol;
        if (!fits || strcmp(fluid_units[i].symbol, end) != 0)
            continue;
        if (text_to_double(number, value) != 0)
            return error_set(err, ERR_FORMAT, "%s=%s does not begin with a number",
                             input_names[key], text);
        *value *= fluid_units[i].scale;
        return 0;
    }
    return error_set(err, ERR_FORMAT, "%s=%s needs a number with its unit: %s or k%s",
                     input_names[key], text, first, key == INPUT_RHO ? "g/m3" : first);
}

static int parse_base_unit(enum input_key key, const char *text, double *value,
                           struct error *err)
{
    static const enum dimension dimensions[] = {
        [INPUT_T] = DIMENSION_TEMPERATURE, [INPUT_P] = DIMENSION_PRESSURE,
        [INPUT_RHO] = DIMENSION_NUMBER,    [INPUT_H] = DIMENSION_NUMBER,
        [INPUT_S] = DIMENSION_NUMBER,      [INPUT_X] = DIMENSION_NUMBER};
    struct unit unit;
    int code = unit_parse_value(text, &unit, value, err);
    if (code != 0)
        return error_context(err, "%s", input_names[key]);
    if (unit.dimension != dimensions[key])
        return error_set(err, ERR_FORMAT, "%s=%s is %s; write %s", input_names[key], text,
                         dimension_says(unit.dimension),
                         key == INPUT_T   ? "a temperature: T=87.3K"
                         : key == INPUT_P ? "a pressure: p=1.2bar"
                                          : "a pure number: x=0.2");
    if (unit.gauge)
        return error_set(
            err, ERR_FORMAT,
            "p=%s is above the barometer, which is not known here; add it and write "
            "the absolute pressure: p=1.2bar",
            text);
    return 0;
}

static int parse_input(char *text, struct fluid_inputs *inputs, struct error *err)
{
    char *equals = strchr(text, '=');
    if (equals == NULL)
        return error_set(err, ERR_FORMAT, "'%s' is no NAME=VALUE; write T=87.3K,p=1.2bar",
                         text);
    *equals = '\0';
    const char *name = text_trim(text), *value = text_trim(equals + 1);
    for (int i = 0; i < INPUT_KEYS; i++) {
        enum input_key key = (enum input_key)i;
        /* T and t, p and P mean the same here; no other name differs by case alone. */
        if (text_distance(name, input_names[i]) != 0)
            continue;
        if ((inputs->given >> i & 1u) != 0)
            return error_set(err, ERR_FORMAT, "%s is given twice", input_names[i]);
        inputs->given |= 1u << i;
        if (key == INPUT_RHO || key == INPUT_H || key == INPUT_S)
            return parse_fluid_unit(key, value, &inputs->value[i], err);
        return parse_base_unit(key, value, &inputs->value[i], err);
    }
    return error_set(err, ERR_FORMAT, "there is no input '%s'; known are T p rho h s x", name);
}

int fluid_inputs_parse(const char *text, struct fluid_inputs *inputs, struct error *err)
{
    char copy[200];
    *inputs = (struct fluid_inputs){0};
    if (!text_copy(copy, sizeof(copy), text))
        return error_set(err, ERR_FORMAT, "'%.40s...' is too long", text);
    for (char *part = copy; part != NULL;) {
        char *comma = strchr(part, ',');
        if (comma != NULL)
            *comma = '\0';
        int code = parse_input(part, inputs, err);
        if (code != 0)
            return code;
        part = comma != NULL ? comma + 1 : NULL;
    }
    return 0;
}

#define GIVEN(a, b) (1u << INPUT_##a | 1u << INPUT_##b)

int fluid_inputs_state(const struct fluid *fluid, const struct fluid_inputs *inputs,
                       struct fluid_state *state, struct error *err)
{
    const double *value = inputs->value;
    switch (inputs->given) {
    case GIVEN(T, P):
        return fluid_at_tp(fluid, value[INPUT_T], value[INPUT_P], FLUID_PHASE_ANY, state, err);
    case GIVEN(P, H):
        return fluid_at_ph(fluid, value[INPUT_P], value[INPUT_H], state, err);
    case GIVEN(P, S):
        return fluid_at_ps(fluid, value[INPUT_P], value[INPUT_S], state, err);
    case GIVEN(RHO, T):
        return fluid_at_rhot(fluid, value[INPUT_RHO], value[INPUT_T], state, err);
    case GIVEN(T, X):
        return fluid_at_tx(fluid, value[INPUT_T], value[INPUT_X], state, err);
    case GIVEN(P, X):
        return fluid_at_px(fluid, value[INPUT_P], value[INPUT_X], state, err);
    default:
        return error_set(err, ERR_ARGUMENT,
                         "a state takes two inputs: T,p  p,h  p,s  rho,T  T,x  or p,x");
    }
}

int fluid_inputs_saturation(const struct fluid *fluid, const struct fluid_inputs *inputs,
                            struct fluid_saturation *saturation, struct error *err)
{
    if (inputs->given == 1u << INPUT_T)
        return fluid_saturation_at_t(fluid, inputs->value[INPUT_T], saturation, err);
    if (inputs->given == 1u << INPUT_P)
        return fluid_saturation_at_p(fluid, inputs->value[INPUT_P], saturation, err);
    return error_set(err, ERR_ARGUMENT, "saturation takes one input: p=1bar or T=90K");
}
