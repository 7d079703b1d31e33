/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The fluids by name. A new fluid is its file of figures and a line here.
 */
#include "equation.h"

#include <string.h>

extern const struct fluid fluid_argon, fluid_nitrogen, fluid_oxygen, fluid_helium, fluid_neon,
    fluid_krypton, fluid_xenon, fluid_parahydrogen, fluid_methane;

static const struct fluid *const fluids[] = {
    &fluid_argon,   &fluid_nitrogen, &fluid_oxygen,       &fluid_helium,  &fluid_neon,
    &fluid_krypton, &fluid_xenon,    &fluid_parahydrogen, &fluid_methane,
};

size_t fluid_count(void)
{
    return ARRAY_LENGTH(fluids);
}

const struct fluid *fluid_at(size_t index)
{
    return index < ARRAY_LENGTH(fluids) ? fluids[index] : NULL;
}

const struct fluid *fluid_find(const char *name)
{
    for (size_t i = 0; i < ARRAY_LENGTH(fluids); i++)
        if (strcmp(fluids[i]->name, name) == 0)
            return fluids[i];
    return NULL;
}

const char *fluid_name(const struct fluid *fluid)
{
    return fluid->name;
}

const struct fluid_limits *fluid_limits(const struct fluid *fluid)
{
    return &fluid->limits;
}

const char *fluid_phase_word(enum fluid_phase phase)
{
    static const char *const words[] = {
        [FLUID_PHASE_ANY] = "",
        [FLUID_PHASE_LIQUID] = "liquid",
        [FLUID_PHASE_VAPOUR] = "vapour",
        [FLUID_PHASE_SUPERCRITICAL] = "supercritical",
        [FLUID_PHASE_TWO_PHASE] = "two-phase",
    };
    return words[phase];
}
