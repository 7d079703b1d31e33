/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * References resolved at a frame, and how a point's stated uncertainty splits. A plant file
 * gives one figure, the total standard uncertainty of one reading. Its scatter is seen in the
 * readings themselves (successive differences) and averages out in a window; what is left of
 * the figure is taken as a constant error, and never less than half of its square, since a
 * scatter that comes from the process would else be mistaken for the instrument's.
 */
#include "internal.h"

#include <math.h>

/* 2 % of u an hour: stability over hours against calibration over years (common practice, no
 * source). */
const double input_drift_per_s = 0.02 / 3600;

enum { SCATTER_LEAST = 30, SCATTER_MEMORY = 600 };

void scatter_step(struct engine *engine, const struct frame *frame)
{
    for (int i = 0; i < frame->count; i++) {
        const struct sample *sample = &frame->sample[i];
        struct scatter *scatter = &engine->scatter[i];
        if (sample->quality > QUALITY_UNCERTAIN || sample->read_utc_ns == scatter->read_utc_ns)
            continue;
        if (scatter->read_utc_ns != 0) {
            double step = sample->value - scatter->last;
            if (scatter->count < SCATTER_MEMORY)
                scatter->count++;
            /* A jump is no scatter: more than twice u tells nothing about the constant part. */
            double most = 4 * sample->u * sample->u, square = 0.5 * step * step;
            square = square < most ? square : most;
            if (!(scatter->variance < most))
                scatter->variance = most;
            scatter->variance += (square - scatter->variance) / scatter->count;
        }
        scatter->read_utc_ns = sample->read_utc_ns;
        scatter->last = sample->value;
    }
}

double input_scatter(const struct engine *engine, int tag)
{
    if (tag < 0 || tag >= engine->plant->point_count ||
        engine->scatter[tag].count < SCATTER_LEAST)
        return 0;
    return sqrt(engine->scatter[tag].variance);
}

double input_systematic(const struct engine *engine, int tag, double u)
{
    double scatter = input_scatter(engine, tag);
    double left = u * u - scatter * scatter;
    return left < 0.5 * u * u ? u * sqrt(0.5) : sqrt(left);
}

struct input input_of(const struct engine *engine, const struct ref *ref)
{
    struct input input = {
        .described = ref->kind != REF_NONE, .culprit = -1, .quality = QUALITY_MISSING};
    if (ref->kind == REF_CONSTANT) {
        input.value = ref->value;
        input.quality = QUALITY_GOOD;
    } else if (ref->kind == REF_TAG) {
        struct quantity q = engine_tag(engine, ref->tag, NULL);
        input.quality = q.quality;
        if (q.quality != QUALITY_GOOD)
            input.culprit = ref->tag;
        input.value = q.value;
        input.parts = 1;
        input.part[0] = (struct input_part){
            .tag = ref->tag, .u = q.u, .systematic = input_systematic(engine, ref->tag, q.u)};
    }
    return input;
}

struct input input_pressure(const struct engine *engine, const struct ref *ref)
{
    struct input input = input_of(engine, ref);
    if (!input.described || !ref->unit.gauge)
        return input;
    struct input barometer = input_of(engine, &engine->plant->site.barometer);
    input.value += barometer.value;
    if (barometer.quality > input.quality) {
        input.quality = barometer.quality;
        input.culprit = barometer.culprit;
    }
    if (barometer.parts > 0)
        input.part[input.parts++] = barometer.part[0];
    input.described = barometer.described;
    return input;
}

bool input_usable(const struct input *input)
{
    return input->described && input->quality <= QUALITY_UNCERTAIN;
}

void input_judge(const struct engine *engine, const struct input *input, const char *what,
                 struct verdict *verdict)
{
    enum quality quality = !input->described                     ? QUALITY_MISSING
                           : input->quality <= QUALITY_UNCERTAIN ? input->quality
                                                                 : QUALITY_BAD;
    if (quality <= verdict->quality)
        return;
    if (!input->described)
        verdict_doubt(verdict, quality, "the plant file gives no %s", what);
    else if (input->culprit >= 0 && input->culprit < engine->frame.count)
        verdict_doubt(verdict, quality, "%s is %s: %s",
                      plant_tag_name(engine->plant, input->culprit),
                      quality_word(input->quality),
                      cause_says(engine->frame.sample[input->culprit].cause));
    else
        verdict_doubt(verdict, quality, "%s is %s",
                      input->culprit >= 0 ? plant_tag_name(engine->plant, input->culprit)
                                          : what,
                      quality_word(input->quality));
}

void input_add_u(struct estimate *estimate, double factor, const struct input *input)
{
    for (int i = 0; i < input->parts; i++)
        estimate_add_term(estimate, source_of(SOURCE_POINT, input->part[i].tag),
                          factor * input->part[i].u);
}

void input_add_systematic(struct estimate *estimate, double factor, const struct input *input)
{
    for (int i = 0; i < input->parts; i++)
        estimate_add_term(estimate, source_of(SOURCE_POINT, input->part[i].tag),
                          factor * input->part[i].systematic);
}

void input_estimate(struct estimate *out, const struct input *input)
{
    estimate_exact(out, input->value);
    input_add_u(out, 1, input);
}
