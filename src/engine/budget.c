/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The uncertainty budget of a derived quantity: the terms of its estimate, largest first.
 */
#include "internal.h"

#include <math.h>

static const char *thing_of_source(const struct plant *plant, enum source_kind kind, int index)
{
    switch ((int)kind) {
    case SOURCE_DRIFT:
        return index < plant_tag_count(plant) ? plant_tag_name(plant, index) : "";
    case SOURCE_FLOW_NOISE:
    case SOURCE_STREAM_STATE:
    case SOURCE_CONDENSATE:
        return index < plant->stream_count ? plant->stream[index].name : "";
    case SOURCE_COOLANT_STATE:
        return index < plant->condenser_count ? plant->condenser[index].name : "";
    default:
        return "";
    }
}

static void set_row(const struct plant *plant, const struct estimate_term *term,
                    struct budget_row *row)
{
    enum source_kind kind = source_kind_of(term->source);
    int index = source_index_of(term->source);
    *row = (struct budget_row){.tag = -1, .u = fabs(term->u)};
    if (kind == SOURCE_POINT) {
        row->tag = index;
        return;
    }
    const char *thing = thing_of_source(plant, kind, index);
    text_format(row->says, sizeof(row->says), "%s%s%s", source_kind_says(kind),
                thing[0] != '\0' ? ", " : "", thing);
}

void engine_budget(const struct engine *engine, int tag, struct budget *out)
{
    const struct plant *plant = engine->plant;
    out->count = 0;
    int derived = tag - plant->point_count;
    if (derived < 0 || derived >= plant->derived_count ||
        !quantity_usable(engine->results.derived[derived].quantity))
        return;
    const struct estimate *estimate = &engine->estimate[derived];
    bool taken[ESTIMATE_TERMS] = {false};
    double rest = 0;
    for (int n = 0; n < estimate->count; n++) {
        int best = -1;
        for (int i = 0; i < estimate->count; i++)
            if (!taken[i] &&
                (best < 0 || fabs(estimate->term[i].u) > fabs(estimate->term[best].u)))
                best = i;
        taken[best] = true;
        if (n < BUDGET_MAX - 1 || estimate->count <= BUDGET_MAX)
            set_row(plant, &estimate->term[best], &out->row[out->count++]);
        else
            rest = hypot(rest, estimate->term[best].u);
    }
    if (rest > 0) {
        struct budget_row *last = &out->row[out->count++];
        *last = (struct budget_row){.tag = -1, .u = rest};
        text_copy(last->says, sizeof(last->says), source_kind_says(SOURCE_REST));
    }
}
