/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Verdicts: the quality of a derived number with the reason that an operator reads.
 */
#include "internal.h"

#include <math.h>
#include <stdio.h>

void verdict_doubt(struct verdict *verdict, enum quality quality, const char *fmt, ...)
{
    if (quality <= verdict->quality)
        return;
    verdict->quality = quality;
    va_list args;
    va_start(args, fmt);
    if (vsnprintf(verdict->reason, sizeof(verdict->reason), fmt, args) < 0)
        verdict->reason[0] = '\0';
    va_end(args);
}

void verdict_join(struct verdict *verdict, const struct verdict *other)
{
    if (other->quality > verdict->quality)
        *verdict = *other;
}

bool verdict_usable(const struct verdict *verdict)
{
    return verdict->quality == QUALITY_GOOD || verdict->quality == QUALITY_UNCERTAIN;
}

void verdict_filling(struct verdict *verdict, double to_go_s)
{
    char span[40];
    time_format_span(span, sizeof(span), to_go_s > 1 ? to_go_s : 1);
    verdict_doubt(verdict, QUALITY_MISSING, "filling: %s to go", span);
}

bool verdict_finite(const struct estimate *estimate, struct verdict *verdict)
{
    double u = estimate_u(estimate);
    if (isfinite(estimate->value) && isfinite(u) && fabs(estimate->value) < 1e100 && u < 1e100)
        return true;
    verdict_doubt(verdict, QUALITY_BAD,
                  "a reading is out of all reason; give the point a valid "
                  "range");
    return false;
}
