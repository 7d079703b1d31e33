/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The inputs that name a state of a fluid: "T=87.3K,p=1.2bar" and other pairs, with any unit.
 * Pressures are absolute.
 */
#ifndef ULLAGE_FLUID_INPUT_H
#define ULLAGE_FLUID_INPUT_H

#include "ullage/base.h"
#include "ullage/fluid.h"

enum input_key { INPUT_T, INPUT_P, INPUT_RHO, INPUT_H, INPUT_S, INPUT_X, INPUT_KEYS };

struct fluid_inputs {
    unsigned given;           /* a bit per key */
    double value[INPUT_KEYS]; /* SI */
};

/* ERR_FORMAT with what is wrong and the mend. */
int fluid_inputs_parse(const char *text, struct fluid_inputs *inputs,
                       struct error *err) MUST_CHECK;
/* ERR_ARGUMENT if the inputs given are none that name a state; else as the fluid room says. */
int fluid_inputs_state(const struct fluid *fluid, const struct fluid_inputs *inputs,
                       struct fluid_state *state, struct error *err) MUST_CHECK;
int fluid_inputs_saturation(const struct fluid *fluid, const struct fluid_inputs *inputs,
                            struct fluid_saturation *saturation, struct error *err) MUST_CHECK;

#endif
