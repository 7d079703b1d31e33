/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Estimates: a value that remembers which independent source moves it how far, so that a sensor
 * used twice counts once and may cancel. Propagation to first order, JCGM 100:2008, 5.1.2 and
 * 5.2.2; correlation is carried by the shared sources, not by a matrix.
 */
#include "ullage/balance.h"

#include <assert.h>
#include <math.h>

#define X(id, says) [SOURCE_##id] = says,
static const char *const source_words[] = {SOURCE_LIST(X)};
#undef X

enum { SOURCE_SHIFT = 24 };
_Static_assert(SOURCE_KIND_COUNT < 127, "kind and index share an int");

const char *source_kind_says(enum source_kind kind)
{
    return source_words[kind];
}

int source_of(enum source_kind kind, int index)
{
    return ((int)kind << SOURCE_SHIFT) | index;
}

enum source_kind source_kind_of(int source)
{
    return (enum source_kind)(source >> SOURCE_SHIFT);
}

int source_index_of(int source)
{
    return source & ((1 << SOURCE_SHIFT) - 1);
}

void estimate_exact(struct estimate *out, double value)
{
    out->value = value;
    out->count = 0;
}

/* The rest's number is above all others, so it stands last. Its own sign means nothing. */
static void add_rest(struct estimate *estimate, double u)
{
    struct estimate_term *last = &estimate->term[ESTIMATE_TERMS - 1];
    int rest = source_of(SOURCE_REST, 0);
    if (last->source != rest) {
        u = hypot(u, last->u);
        *last = (struct estimate_term){.source = rest};
    }
    last->u = hypot(last->u, u);
}

void estimate_add_term(struct estimate *estimate, int source, double u)
{
    if (u == 0)
        return;
    int at = estimate->count;
    while (at > 0 && estimate->term[at - 1].source >= source)
        at--;
    if (at < estimate->count && estimate->term[at].source == source) {
        if (source_kind_of(source) == SOURCE_REST)
            estimate->term[at].u = hypot(estimate->term[at].u, u);
        else
            estimate->term[at].u += u;
        return;
    }
    if (estimate->count == ESTIMATE_TERMS) {
        add_rest(estimate, u);
        return;
    }
    for (int i = estimate->count; i > at; i--)
        estimate->term[i] = estimate->term[i - 1];
    estimate->term[at] = (struct estimate_term){.source = source, .u = u};
    estimate->count++;
}

void estimate_add(struct estimate *sum, double factor, const struct estimate *x)
{
    assert(sum != x);
    sum->value += factor * x->value;
    for (int i = 0; i < x->count; i++)
        estimate_add_term(sum, x->term[i].source, factor * x->term[i].u);
}

void estimate_scale(struct estimate *estimate, double factor)
{
    estimate->value *= factor;
    for (int i = 0; i < estimate->count; i++)
        estimate->term[i].u *= factor;
}

double estimate_u(const struct estimate *estimate)
{
    double squares = 0;
    for (int i = 0; i < estimate->count; i++)
        squares += estimate->term[i].u * estimate->term[i].u;
    return sqrt(squares);
}

double estimate_covariance(const struct estimate *a, const struct estimate *b)
{
    double sum = 0;
    for (int i = 0, j = 0; i < a->count && j < b->count;) {
        if (a->term[i].source < b->term[j].source)
            i++;
        else if (a->term[i].source > b->term[j].source)
            j++;
        else
            sum += a->term[i++].u * b->term[j++].u;
    }
    return sum;
}

void estimate_combine(struct estimate *out, double value, int n,
                      const struct estimate *const *x, const double *derivative)
{
    estimate_exact(out, 0);
    for (int i = 0; i < n; i++)
        estimate_add(out, derivative[i], x[i]);
    out->value = value;
}

int estimate_apply(struct estimate *out, estimate_function *f, const void *context, int n,
                   const struct estimate *const *x)
{
    enum { INPUTS_MAX = 8 };
    assert(n <= INPUTS_MAX);
    double at[INPUTS_MAX] = {0}, derivative[INPUTS_MAX] = {0}, value = 0, low = 0, high = 0;
    for (int i = 0; i < n; i++)
        at[i] = x[i]->value;
    int code = f(context, at, &value);
    for (int i = 0; code == 0 && i < n; i++) {
        double u = estimate_u(x[i]);
        derivative[i] = 0;
        if (!(u > 0))
            continue;
        at[i] = x[i]->value + u;
        code = f(context, at, &high);
        at[i] = x[i]->value - u;
        if (code == 0)
            code = f(context, at, &low);
        at[i] = x[i]->value;
        if (code == 0)
            derivative[i] = (high - low) / (2 * u);
    }
    if (code == 0)
        estimate_combine(out, value, n, x, derivative);
    return code;
}
