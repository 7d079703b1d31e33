/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Trends: for every tag the lowest and highest good value of each minute of the last four hours
 * and of each second of the last five minutes, in memory taken once. A span's place in its ring
 * is its number modulo the ring, with the number beside it, so a clock that steps leaves holes
 * and never false values.
 */
#include "internal.h"

static int ring_create(struct engine *engine, struct trend_ring *ring, int slots,
                       int64_t slot_ns)
{
    size_t tags = (size_t)plant_tag_count(engine->plant);
    *ring = (struct trend_ring){.slots = slots, .slot_ns = slot_ns};
    ring->stamp = arena_take(engine->arena, (size_t)slots, sizeof(*ring->stamp));
    ring->range = arena_take(engine->arena, (size_t)slots * (tags + 1), sizeof(*ring->range));
    if (ring->stamp == NULL || ring->range == NULL)
        return ERR_MEMORY;
    for (int i = 0; i < slots; i++)
        ring->stamp[i] = -1;
    return 0;
}

int trend_create(struct engine *engine)
{
    if (ring_create(engine, &engine->minutes, TREND_MINUTES, 60 * NS_PER_S) != 0)
        return ERR_MEMORY;
    return ring_create(engine, &engine->seconds, TREND_SECONDS, NS_PER_S);
}

static void ring_step(const struct engine *engine, struct trend_ring *ring)
{
    int tags = plant_tag_count(engine->plant);
    int64_t number = engine->utc_ns / ring->slot_ns;
    int slot = (int)(number % ring->slots);
    struct trend_range *row = ring->range + (size_t)slot * (size_t)tags;
    if (ring->stamp[slot] != number) {
        ring->stamp[slot] = number;
        for (int i = 0; i < tags; i++)
            row[i] = (struct trend_range){.low = 1, .high = 0};
    }
    for (int i = 0; i < tags; i++) {
        struct quantity q = engine_tag(engine, i, NULL);
        if (q.quality != QUALITY_GOOD)
            continue;
        if (row[i].low > row[i].high)
            row[i] = (struct trend_range){.low = q.value, .high = q.value};
        else if (q.value < row[i].low)
            row[i].low = q.value;
        else if (q.value > row[i].high)
            row[i].high = q.value;
    }
}

void trend_step(struct engine *engine)
{
    if (engine->utc_ns < 0)
        return;
    ring_step(engine, &engine->minutes);
    ring_step(engine, &engine->seconds);
}

/* Widens a column by what a tag did between two times. */
static void gather(const struct engine *engine, const struct trend_ring *ring, int tag,
                   int64_t from_ns, int64_t to_ns, struct trend_column *column)
{
    int tags = plant_tag_count(engine->plant);
    int64_t newest = engine->utc_ns / ring->slot_ns;
    int64_t first = from_ns / ring->slot_ns, last = (to_ns - 1) / ring->slot_ns;
    if (first < newest - ring->slots + 1)
        first = newest - ring->slots + 1;
    for (int64_t n = first < 0 ? 0 : first; n <= last && n <= newest; n++) {
        int slot = (int)(n % ring->slots);
        const struct trend_range *range =
            &ring->range[(size_t)slot * (size_t)tags + (size_t)tag];
        if (ring->stamp[slot] != n || range->low > range->high)
            continue;
        if (!column->set || range->low < column->low)
            column->low = range->low;
        if (!column->set || range->high > column->high)
            column->high = range->high;
        column->set = true;
    }
}

void engine_trend(const struct engine *engine, int tag, double span_s,
                  struct trend_column *column, int columns)
{
    const struct trend_ring *ring =
        span_s <= TREND_SECONDS - 10 ? &engine->seconds : &engine->minutes;
    bool known = engine->stepped && tag >= 0 && tag < plant_tag_count(engine->plant);
    /* The newest column ends with the span that is being filled, so columns move by whole spans
     * and a picture does not flicker. */
    int64_t end = (engine->utc_ns / ring->slot_ns + 1) * ring->slot_ns;
    double width_ns = span_s * 1e9 / (columns > 0 ? columns : 1);
    for (int i = 0; i < columns; i++) {
        column[i] = (struct trend_column){.set = false};
        int64_t from = end - (int64_t)(width_ns * (columns - i));
        int64_t to = end - (int64_t)(width_ns * (columns - i - 1));
        if (known && to > from)
            gather(engine, ring, tag, from, to, &column[i]);
    }
}
