/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * A value with its standard uncertainty and whether to believe it.
 */
#include "ullage/base.h"

#include <math.h>

#define X(id, word, mark) [QUALITY_##id] = {word, mark},
static const struct {
    const char *word;
    char mark;
} qualities[] = {QUALITY_LIST(X)};
#undef X

const char *quality_word(enum quality quality)
{
    return qualities[quality].word;
}

char quality_mark(enum quality quality)
{
    return qualities[quality].mark;
}

enum quality quality_worse(enum quality a, enum quality b)
{
    return a > b ? a : b;
}

struct quantity quantity_good(double value, double u)
{
    return (struct quantity){.value = value, .u = u, .quality = QUALITY_GOOD};
}

struct quantity quantity_none(enum quality quality)
{
    return (struct quantity){.quality = quality};
}

bool quantity_usable(struct quantity q)
{
    return q.quality == QUALITY_GOOD || q.quality == QUALITY_UNCERTAIN;
}

int quantity_decimals(double u, int fallback)
{
    if (!(u > 0) || !isfinite(u))
        return fallback;
    /* Two significant digits of u where its first is 1 or 2, else one; common practice of
     * stating uncertainties (JCGM 100:2008, 7.2.6 asks for at most two). */
    double exponent = floor(log10(u));
    double lead = u / pow(10, exponent);
    double decimals = -exponent + (lead < 2.95 ? 1 : 0);
    return decimals < 0 ? 0 : decimals > 9 ? 9 : (int)decimals;
}
