/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Air of a hall in two zones, each well mixed: a low one into which a cold release falls, and
 * the rest, which the fan moves. Volumes are at the hall's temperature and constant pressure,
 * so what comes in drives the same out: a balance of oxygen, nothing else.
 */
#include "model.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

/* Air changes an hour when the description gives no flow to go by; lag of a monitor. */
static const double CHANGES_PER_H = 2.7, LAG_S = 10;

/* Height in a description such as "Pit, 0.2 m"; large if it tells none. */
static double told_height(const struct plant *plant, const struct ref *ref)
{
    const char *says = ref->kind == REF_TAG ? plant_tag_says(plant, ref->tag) : "";
    for (const char *at = says; *at != '\0'; at++) {
        if (*at < '0' || *at > '9')
            continue;
        char *end;
        double height = strtod(at, &end);
        if (strcmp(end, " m") == 0)
            return height;
        at = end - 1;
    }
    return 1e9;
}

void hall_model_init(struct hall_model *hall, const struct hall *described)
{
    *hall = (struct hall_model){
        .described = described,
        .low_part = 0.03,
        .exchange_s = 80,
        .low = described->fresh_air_oxygen,
        .main = described->fresh_air_oxygen,
        .ventilation_m3_s = described->volume_m3 * CHANGES_PER_H / 3600,
        .fan = true,
        .low_monitor = -1,
        .temperature_k = 293.15,
        .lag_s = LAG_S,
    };
    if (described->temperature.kind == REF_CONSTANT)
        hall->temperature_k = described->temperature.value;
    for (int i = 0; i < PLANT_LIST_MAX; i++)
        hall->monitor[i] = described->fresh_air_oxygen;
}

void hall_model_place(struct hall_model *hall, const struct plant *plant)
{
    double lowest = 1e8;
    hall->low_monitor = hall->described->oxygen.count - 1;
    for (int i = 0; i < hall->described->oxygen.count; i++) {
        double height = told_height(plant, &hall->described->oxygen.at[i]);
        if (height < lowest) {
            lowest = height;
            hall->low_monitor = i;
        }
    }
}

static void flows(const struct hall_model *hall, double *fresh, double *out)
{
    double fan = hall->fan ? hall->ventilation_m3_s : 0, release = hall->release_m3_s;
    /* Drawing: the fan's flow leaves, and what is not release is replaced by fresh air; if the
     * release is more than the fan, the rest leaves by the doors. Blowing: fresh air comes in,
     * both leave. */
    if (hall->described->mode == HALL_EXHAUST)
        *fresh = fan > release ? fan - release : 0;
    else
        *fresh = fan;
    *out = *fresh + release;
}

void hall_model_step(struct hall_model *hall, double span_s)
{
    double low_m3 = hall->low_part * hall->described->volume_m3;
    double main_m3 = hall->described->volume_m3 - low_m3;
    double exchange = low_m3 / hall->exchange_s, release = hall->release_m3_s, fresh, out;
    flows(hall, &fresh, &out);
    /* Short steps: a hundredth of the fastest time. */
    double fastest = low_m3 / (exchange + release + 1e-12);
    int steps = (int)ceil(span_s / (0.01 * fastest));
    if (steps < 1)
        steps = 1;
    if (steps > 100000)
        steps = 100000;
    double h = span_s / steps;
    for (int i = 0; i < steps; i++) {
        double low_rate = (exchange * (hall->main - hall->low) - release * hall->low) / low_m3;
        double main_rate = ((exchange + release) * hall->low - exchange * hall->main +
                            fresh * hall->described->fresh_air_oxygen - out * hall->main) /
                           main_m3;
        hall->low += low_rate * h;
        hall->main += main_rate * h;
    }
    double follow = -expm1(-span_s / hall->lag_s);
    for (int i = 0; i < hall->described->oxygen.count; i++) {
        double there = i == hall->low_monitor ? hall->low : hall->main;
        hall->monitor[i] += follow * (there - hall->monitor[i]);
    }
    hall->released_kg += hall->release_kg_s * span_s;
}
