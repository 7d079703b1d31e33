/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Random numbers for readings: splitmix64 (Steele, Lea, Flood, OOPSLA 2014), normal by the
 * polar method (Marsaglia, Bray 1964). Seeded, so that a simulated day can be had again.
 */
#include "model.h"

#include <math.h>

void random_seed(struct random *random, uint64_t seed)
{
    *random = (struct random){.state = seed};
}

static uint64_t next(struct random *random)
{
    uint64_t z = (random->state += UINT64_C(0x9E3779B97F4A7C15));
    z = (z ^ (z >> 30)) * UINT64_C(0xBF58476D1CE4E5B9);
    z = (z ^ (z >> 27)) * UINT64_C(0x94D049BB133111EB);
    return z ^ (z >> 31);
}

double random_uniform(struct random *random)
{
    return ((double)(next(random) >> 12) + 0.5) * 0x1p-52;
}

double random_normal(struct random *random)
{
    if (random->spare_set) {
        random->spare_set = false;
        return random->spare;
    }
    double a, b, square;
    do {
        a = 2 * random_uniform(random) - 1;
        b = 2 * random_uniform(random) - 1;
        square = a * a + b * b;
    } while (square >= 1);
    double factor = sqrt(-2 * log(square) / square);
    random->spare = b * factor;
    random->spare_set = true;
    return a * factor;
}
