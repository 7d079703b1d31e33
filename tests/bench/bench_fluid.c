/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Time of one property call, argon and nitrogen: median and 99th percentile over many batches
 * of calls, each call with inputs of its own. The reach stands beside.
 */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <time.h>

#include "ullage/fluid.h"

enum { BATCHES = 4000, CALLS = 50 };

/* Inputs about a state of a liquid at rest, moved a little by every call. */
struct bench {
    const struct fluid *fluid;
    double boiling_k, pressure_pa, enthalpy_j_kg, density_kg_m3, energy_j_kg;
    struct fluid_state last;
};

static int tp_liquid(struct bench *b, double away)
{
    return fluid_at_tp(b->fluid, b->boiling_k * (1 + away), 2e5 * (1 + away),
                       FLUID_PHASE_LIQUID, &b->last, NULL);
}

static int tp_vapour(struct bench *b, double away)
{
    return fluid_at_tp(b->fluid, 1.1 * b->boiling_k * (1 + away), 1.1e5 * (1 + away),
                       FLUID_PHASE_ANY, &b->last, NULL);
}

static int tp_liquid_warm(struct bench *b, double away)
{
    return fluid_at_tp_near(b->fluid, b->boiling_k * (1 + away), 2e5 * (1 + away),
                            FLUID_PHASE_LIQUID, &b->last, &b->last, NULL);
}

static int saturation_p(struct bench *b, double away)
{
    struct fluid_saturation line;
    return fluid_saturation_at_p(b->fluid, b->pressure_pa * (1 + away), &line, NULL);
}

static int saturation_t(struct bench *b, double away)
{
    struct fluid_saturation line;
    return fluid_saturation_at_t(b->fluid, b->boiling_k * (1 + away), &line, NULL);
}

static int ph(struct bench *b, double away)
{
    struct fluid_state state;
    return fluid_at_ph(b->fluid, 2e5, b->enthalpy_j_kg * (1 + away), &state, NULL);
}

static int rhou(struct bench *b, double away)
{
    struct fluid_state state;
    return fluid_at_rhou(b->fluid, b->density_kg_m3, b->energy_j_kg * (1 + away), &state, NULL);
}

static const struct {
    const char *name;
    int (*call)(struct bench *, double);
    double reach_us;
} kinds[] = {
    {"(T,p) liquid, cold",    tp_liquid,      1  },
    {"(T,p) vapour, cold",    tp_vapour,      1  },
    {"(T,p) liquid, warm",    tp_liquid_warm, 0.5},
    {"saturation at p, both", saturation_p,   1  },
    {"saturation at T, both", saturation_t,   1  },
    {"(p,h) liquid",          ph,             3  },
    {"(rho,u) closed vessel", rhou,           10 },
};

static double now_us(void)
{
    struct timespec t;
    clock_gettime(CLOCK_MONOTONIC, &t);
    return 1e6 * (double)t.tv_sec + 1e-3 * (double)t.tv_nsec;
}

static int by_size(const void *a, const void *b)
{
    double x = *(const double *)a, y = *(const double *)b;
    return (x > y) - (x < y);
}

static int run(const char *name, double boiling_k)
{
    static double took[BATCHES];
    struct bench bench = {
        .fluid = fluid_find(name), .boiling_k = boiling_k, .pressure_pa = 101325};
    struct fluid_saturation line;
    struct fluid_state liquid, mixture;
    if (fluid_saturation_at_p(bench.fluid, bench.pressure_pa, &line, NULL) != 0 ||
        fluid_at_tp(bench.fluid, boiling_k, 2e5, FLUID_PHASE_LIQUID, &liquid, NULL) != 0 ||
        fluid_at_px(bench.fluid, bench.pressure_pa, 0.001, &mixture, NULL) != 0)
        return 1;
    bench.last = liquid;
    bench.enthalpy_j_kg = liquid.enthalpy_j_kg;
    bench.density_kg_m3 = mixture.density_kg_m3;
    bench.energy_j_kg = mixture.internal_energy_j_kg;
    for (size_t k = 0; k < ARRAY_LENGTH(kinds); k++) {
        for (int i = 0; i < BATCHES; i++) {
            double start = now_us();
            for (int c = 0; c < CALLS; c++)
                if (kinds[k].call(&bench, 1e-4 * (c % 17)) != 0)
                    return 1;
            took[i] = (now_us() - start) / CALLS;
        }
        qsort(took, BATCHES, sizeof(*took), by_size);
        printf("%s %s: median %.3f us, 99th percentile %.3f us (reach %g us)\n", name,
               kinds[k].name, took[BATCHES / 2], took[BATCHES * 99 / 100], kinds[k].reach_us);
    }
    return 0;
}

int main(void)
{
    return run("argon", 87.3) | run("nitrogen", 77.4);
}
