/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Does it add up? Each ledger is one line of arithmetic, in - out - stored = unexplained, and a
 * needle that must stand in the middle: the bar is zero, the colons two, the brackets five of
 * its own standard uncertainties. The word behind it says the same again.
 */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "panel.h"

enum { NAME = 8, NAME_COLUMNS = 14, WIDE = 160, WIDE_NEEDLE = 86, TREND_SPAN_S = 4 * 3600 };

static int ledger_count(const struct view *view)
{
    return view->results->ledger_count;
}

static const char *thing_name(const struct view *view, const struct ledger *ledger)
{
    return ledger->thing_kind == THING_HALL ? view->plant->hall[ledger->thing].name
                                            : view->plant->vessel[ledger->thing].name;
}

/* The number that a ledger is about, for why and trend. */
static int why(const struct view *view, int row)
{
    if (row >= view->results->ledger_count)
        return -1;
    const struct ledger *ledger = &view->results->ledger[row];
    switch (ledger->kind) {
    case LEDGER_HEAT:
        return plant_derived_tag(view->plant, DERIVED_VESSEL_HEAT_LOAD, ledger->thing);
    case LEDGER_MASS:
        return plant_derived_tag(view->plant, DERIVED_VESSEL_MASS_UNEXPLAINED, ledger->thing);
    case LEDGER_PURITY:
        for (int i = 0; i < view->plant->drift_count; i++)
            if (view->plant->drift[i].vessel == ledger->thing)
                return plant_derived_tag(view->plant, DERIVED_DRIFT_LIFETIME, i);
        return plant_derived_tag(view->plant, DERIVED_VESSEL_OXYGEN_INGRESS, ledger->thing);
    case LEDGER_AIR:
        return plant_derived_tag(view->plant, DERIVED_HALL_OXYGEN_LOWEST, ledger->thing);
    }
    return -1;
}

static int trend_tag(const struct view *view, const struct ledger *ledger)
{
    if (ledger->kind == LEDGER_MASS)
        return plant_derived_tag(view->plant, DERIVED_VESSEL_LIQUID_MASS, ledger->thing);
    return why(view, (int)(ledger - view->results->ledger));
}

/* ---- the arithmetic
 * ---------------------------------------------------------------------------- */

static double rounded(double value, double step)
{
    return step * round(value / step) + 0.0; /* no negative zero */
}

/* BARE: numbers by magnitude, where the plain ones would not fit into the line. */
enum { BARE = -1 };

static void term(char *dst, size_t size, double value, int decimals, bool sign)
{
    if (decimals == BARE)
        text_format(dst, size, sign ? "%+.3g" : "%.3g", value);
    else
        text_format(dst, size, sign ? "%+.*f" : "%.*f", decimals, value);
}

/* The sum with some decimals: terms, then the unexplained part. Rounded terms must still add up
 * for the reader: the residue of rounding goes to the largest of in and out, where it is least.
 */
static void sum_text(const struct ledger *ledger, enum quality quality, const struct unit *unit,
                     int decimals, const char *gap, char *terms, char *rest, size_t size)
{
    double step = decimals == BARE ? 1 : pow(10, -decimals);
    double in = rounded(unit_from_si(unit, ledger->in.value), step);
    double out = rounded(unit_from_si(unit, ledger->out.value), step);
    double stored = rounded(unit_from_si(unit, ledger->stored.value), step);
    double left = rounded(unit_from_si(unit, ledger->unexplained.value), step);
    double u = unit_span_from_si(unit, ledger->unexplained.u);
    double residue = in - out - stored - left;
    if (fabs(in) >= fabs(out))
        in = rounded(in - residue, step);
    else
        out = rounded(out + residue, step);
    char text[5][64], mark[3] = "";
    bool hidden = u < 0.5 * step; /* an uncertainty is never shown as none */
    term(text[0], sizeof(text[0]), in, decimals, false);
    term(text[1], sizeof(text[1]), out, decimals, false);
    term(text[2], sizeof(text[2]), stored, decimals, false);
    term(text[3], sizeof(text[3]), left, decimals, true);
    term(text[4], sizeof(text[4]), hidden ? step : u, decimals, false);
    if (quality != QUALITY_GOOD)
        text_format(mark, sizeof(mark), " %c", quality_mark(quality));
    text_format(terms, size, "in %s%s-%sout %s%s-%sstored %s%s=%s", text[0], gap, gap, text[1],
                gap, gap, text[2], gap, gap);
    text_format(rest, size, "%s ± %s%s %s%s", text[3], hidden ? "<" : "", text[4], unit->symbol,
                mark);
}

/* Decimals as the uncertainty allows; fewer where the line is too short for them. */
static void draw_sum(const struct ledger *ledger, enum quality quality, struct canvas *canvas,
                     int row, int column, int end)
{
    const struct unit own =
        unit_si(ledger->kind == LEDGER_HEAT ? DIMENSION_POWER : DIMENSION_MASS_FLOW);
    double largest = fmax(fmax(fabs(ledger->in.value), fabs(ledger->out.value)),
                          fmax(fabs(ledger->unexplained.value), 10 * ledger->unexplained.u));
    struct unit unit = shown_unit(&own, largest);
    int decimals = quantity_decimals(unit_span_from_si(&unit, ledger->unexplained.u), 2);
    char terms[400], rest[400];
    const char *gap = "  ";
    for (;;) {
        sum_text(ledger, quality, &unit, decimals, gap, terms, rest, sizeof(rest));
        if (column + canvas_width(canvas, terms) + canvas_width(canvas, rest) <= end)
            break;
        if (gap[1] != '\0')
            gap++;
        else if (decimals-- == BARE) {
            text_copy(terms, sizeof(terms), "unexplained ");
            break;
        }
    }
    bool live = quality != QUALITY_STALE;
    column = canvas_text(canvas, row, column, live ? STYLE_NORMAL : STYLE_STALE, terms);
    canvas_text(canvas, row, column, live ? STYLE_STRONG : STYLE_STALE, rest);
}

/* ---- the lines under it
 * -------------------------------------------------------------------------- */

static void add(struct flow *flow, const char *label, const char *value)
{
    flow_part(flow, label, STYLE_NORMAL, value);
}

static void add_tag(struct flow *flow, const struct view *view, int tag, const char *before,
                    bool with_u, const char *behind)
{
    char value[120], age[60];
    if (tag < 0)
        return;
    enum quality quality = view_tag(view, tag, NULL).quality;
    format_tag(value, sizeof(value), view, tag, with_u);
    format_age(age, sizeof(age), view, tag);
    text_format(value + strlen(value), sizeof(value) - strlen(value), "%s%s", behind, age);
    flow_part(flow, before, quality_style(quality), value);
}

static void add_derived(struct flow *flow, const struct view *view, enum derived_id id,
                        int thing, const char *before, bool with_u, const char *behind)
{
    add_tag(flow, view, plant_derived_tag(view->plant, id, thing), before, with_u, behind);
}

/* The same, left out where there is nothing to say yet. */
static void add_known(struct flow *flow, const struct view *view, enum derived_id id, int thing,
                      const char *before, bool with_u, const char *behind)
{
    if (view_quantity(view, id, thing).quality != QUALITY_MISSING)
        add_derived(flow, view, id, thing, before, with_u, behind);
}

static void heat_lines(const struct view *view, int index, struct flow *flow)
{
    const struct vessel *vessel = &view->plant->vessel[index];
    const struct unit watt = unit_si(DIMENSION_POWER);
    char text[80];
    add_derived(flow, view, DERIVED_VESSEL_HEAT_LOAD, index, "heat load ", true, "");
    if (vessel->has_heat_budget) {
        format_plain(text, sizeof(text), quantity_good(vessel->heat_budget_w, 0), &watt);
        add(flow, "budget ", text);
    }
    flow_line(flow);
    if (vessel->condenser >= 0) {
        double rated_w = view->plant->condenser[vessel->condenser].rated_duty_w;
        char of[48] = "";
        format_plain(text, sizeof(text), quantity_good(rated_w, 0), &watt);
        if (rated_w > 0)
            text_format(of, sizeof(of), " of %s", text);
        add_derived(flow, view, DERIVED_CONDENSER_DUTY, vessel->condenser, "cooling ", false,
                    of);
    }
    struct quantity hold = view_quantity(view, DERIVED_VESSEL_HOLD_TIME, index);
    if (quantity_usable(hold)) {
        time_format_span(text, sizeof(text), hold.value);
        text_format(text + strlen(text), sizeof(text) - strlen(text), " to relief at most");
        add(flow, "if cooling stops: ", text);
    }
}

static void mass_lines(const struct view *view, int index, struct flow *flow)
{
    add_derived(flow, view, DERIVED_VESSEL_LIQUID_MASS, index, "liquid ", true, "");
    add_derived(flow, view, DERIVED_VESSEL_FILL, index, "", false, " full");
    flow_line(flow);
    add_derived(flow, view, DERIVED_VESSEL_BOIL_OFF, index, "boil-off ", true, "");
    add_derived(flow, view, DERIVED_VESSEL_BOIL_OFF_DAILY, index, "", false, "");
}

static void purity_lines(const struct view *view, int index, struct flow *flow)
{
    const struct plant *plant = view->plant;
    for (int i = 0; i < plant->drift_count; i++) {
        if (plant->drift[i].vessel != index)
            continue;
        if (plant->drift[i].oxygen.kind == REF_TAG)
            add_tag(flow, view, plant->drift[i].oxygen.tag, "oxygen ", true, "");
        add_derived(flow, view, DERIVED_DRIFT_LIFETIME, i, "lifetime ", true, "");
        break;
    }
    int purifier = plant->vessel[index].purifier;
    flow_line(flow);
    if (purifier < 0) {
        add(flow, "", "no purifier is described");
        return;
    }
    char name[80];
    text_format(name, sizeof(name), "purifier %s", plant->purifier[purifier].name);
    add(flow, "", name);
    add_known(flow, view, DERIVED_PURIFIER_EFFICIENCY, purifier, "takes ", false, "");
    add_known(flow, view, DERIVED_PURIFIER_LOADING, purifier, "", false, " used");
    add_known(flow, view, DERIVED_PURIFIER_TIME_TO_SPENT, purifier, "", false, " left");
}

/* "lowest 20.9 %" "of 3 (AT-402)" */
static void add_lowest(struct flow *flow, const struct view *view, int index)
{
    const struct hall *hall = &view->plant->hall[index];
    const char *name = NULL;
    double lowest = 0;
    for (int i = 0; i < hall->oxygen.count; i++) {
        struct quantity q = view_ref(view, &hall->oxygen.at[i]);
        if (quantity_usable(q) && (name == NULL || q.value < lowest)) {
            name = ref_name(view, &hall->oxygen.at[i]);
            lowest = q.value;
        }
    }
    char of[100];
    text_format(of, sizeof(of), " of %d%s%s%s", hall->oxygen.count, name != NULL ? " (" : "",
                name != NULL ? name : "", name != NULL ? ")" : "");
    add_derived(flow, view, DERIVED_HALL_OXYGEN_LOWEST, index, "oxygen lowest ", false, of);
}

static void add_bit(struct flow *flow, const struct view *view, const struct ref *ref,
                    const char *label, const char *on, const char *off, bool on_is_well)
{
    if (ref->kind != REF_TAG)
        return;
    struct quantity q = view_ref(view, ref);
    bool well = quantity_usable(q) && (q.value != 0) == on_is_well;
    flow_part(flow, label, well ? STYLE_NORMAL : STYLE_CAUTION,
              !quantity_usable(q) ? "unknown"
              : q.value != 0      ? on
                                  : off);
}

static void air_lines(const struct view *view, int index, struct flow *flow)
{
    const struct hall *hall = &view->plant->hall[index];
    add_lowest(flow, view, index);
    flow_line(flow);
    add_known(flow, view, DERIVED_HALL_SPREAD, index, "spread ", false, "");
    add_bit(flow, view, &hall->fan_running, "fan ", "on", "OFF", true);
    if (hall->ventilation.kind == REF_TAG)
        add_tag(flow, view, hall->ventilation.tag, "air ", false, "");
    if (hall->occupied.kind == REF_TAG) {
        struct quantity people = view_ref(view, &hall->occupied);
        add(flow, "people inside: ",
            !quantity_usable(people) ? "unknown"
            : people.value != 0      ? "yes"
                                     : "no");
    }
}

/* ---- a ledger
 * ------------------------------------------------------------------------------------ */

static void draw_trend(const struct view *view, int tag, struct pen *pen, int row, int column)
{
    struct trend_column columns[SCREEN_COLUMNS_MAX];
    int width = pen->area.columns - column - 2;
    if (view->engine == NULL || tag < 0 || width < 16 || row < 0)
        return;
    width = width > 80 ? 80 : width;
    double low, high;
    engine_trend(view->engine, tag, TREND_SPAN_S, columns, width);
    if (!trend_draw(columns, width, pen->canvas, row, column, &low, &high))
        return;
    const struct unit *own = plant_tag_shown(view->plant, tag);
    char from[60], to[60], text[240];
    format_plain(from, sizeof(from), quantity_good(low, 0.01 * (high - low)), own);
    format_plain(to, sizeof(to), quantity_good(high, 0.01 * (high - low)), own);
    text_format(text, sizeof(text), "%s to %s in 4 h: %s", from, to,
                plant_tag_name(view->plant, tag));
    canvas_fit(pen->canvas, row + 1, column, width, STYLE_FAINT, text);
}

/* The open finding of a ledger, if any: the newest entry about it that did not close it. */
static void draw_finding(const struct view *view, const struct ledger *ledger, struct pen *pen)
{
    char subject[128], clock[40], text[400];
    text_format(subject, sizeof(subject), "%s %s", ledger_kind_word(ledger->kind),
                thing_name(view, ledger));
    for (int i = view->journal_count - 1; i >= 0; i--) {
        const struct journal_entry *entry = &view->journal[i];
        if (entry->kind != JOURNAL_FINDING || strcmp(entry->subject, subject) != 0)
            continue;
        if (strcmp(entry->state, "closed") == 0)
            return;
        format_clock(clock, sizeof(clock), entry->utc_ns);
        text_format(text, sizeof(text), "since %s: %s", clock, entry->text);
        pen_wrap(pen, NAME, STYLE_CAUTION, text);
        return;
    }
}

/* The sum, or why there is none. */
static int draw_head(const struct view *view, const struct ledger *ledger, bool chosen,
                     int left, struct pen *pen)
{
    struct canvas *canvas = pen->canvas;
    struct pen first = *pen;
    int row = pen_line(&first), columns = pen->area.columns;
    struct quantity rest = view_as_of_now(view, ledger->unexplained);
    bool summed = ledger->word != LEDGER_ABSENT && quantity_usable(ledger->unexplained);
    canvas_text(canvas, row, 0, STYLE_STRONG, chosen ? "▸" : " ");
    canvas_text(canvas, row, 1, STYLE_STRONG, ledger_kind_word(ledger->kind));
    canvas_fit_name(canvas, row, NAME, left - NAME - 1, STYLE_NORMAL, thing_name(view, ledger));
    if (!summed) {
        enum style style = ledger->word == LEDGER_BLIND ? STYLE_CAUTION : STYLE_FAINT;
        if (pen_wrap(pen, left, style,
                     ledger->reason[0] != '\0' ? ledger->reason : "no reason is told") == 0)
            pen_line(pen);
        return row;
    }
    pen_line(pen);
    if (ledger->kind == LEDGER_AIR) {
        const struct unit flow = unit_si(DIMENSION_MASS_FLOW);
        char release[80];
        format_quantity(release, sizeof(release), rest, &flow);
        int column = canvas_text(canvas, row, left, STYLE_NORMAL, "release ");
        canvas_text(canvas, row, column,
                    rest.quality == QUALITY_STALE ? STYLE_STALE : STYLE_STRONG, release);
    } else {
        draw_sum(ledger, rest.quality, canvas, row, left,
                 columns >= WIDE ? WIDE_NEEDLE + NEEDLE_COLUMNS : columns);
    }
    return row;
}

static void draw_ledger(const struct view *view, const struct ledger *ledger, bool chosen,
                        int left, struct pen *pen)
{
    int columns = pen->area.columns;
    int needle = columns >= WIDE ? WIDE_NEEDLE : columns - NEEDLE_COLUMNS - 1;
    bool known = ledger->word != LEDGER_ABSENT && quantity_usable(ledger->unexplained);
    int row = draw_head(view, ledger, chosen, left, pen);
    struct flow flow = flow_begin(pen, NAME, needle - 1);
    needle_draw(ledger, known && !view->stale, pen->canvas, flow.row, needle);
    if (columns >= WIDE)
        draw_trend(view, trend_tag(view, ledger), pen, row, needle + NEEDLE_COLUMNS + 4);
    switch (ledger->kind) {
    case LEDGER_HEAT:
        heat_lines(view, ledger->thing, &flow);
        break;
    case LEDGER_MASS:
        mass_lines(view, ledger->thing, &flow);
        break;
    case LEDGER_PURITY:
        purity_lines(view, ledger->thing, &flow);
        break;
    case LEDGER_AIR:
        air_lines(view, ledger->thing, &flow);
        break;
    }
    if (known && ledger->unexplained.quality == QUALITY_UNCERTAIN && ledger->reason[0] != '\0')
        pen_wrap(pen, NAME, STYLE_CAUTION, ledger->reason);
    draw_finding(view, ledger, pen);
}

static void draw(const struct view *view, const struct panel_state *state, struct pen *pen)
{
    const struct results *results = view->results;
    int longest = 9;
    for (int i = 0; i < results->ledger_count; i++) {
        int width = canvas_width(pen->canvas, thing_name(view, &results->ledger[i]));
        longest = width > longest ? width : longest;
    }
    int left = NAME + (longest > NAME_COLUMNS ? NAME_COLUMNS : longest) + 1;
    for (int i = 0; i < results->ledger_count; i++) {
        if (i > 0)
            pen_line(pen);
        if (i == state->selected)
            pen_chosen_begin(pen);
        draw_ledger(view, &results->ledger[i], i == state->selected, left, pen);
        if (i == state->selected)
            pen_chosen_end(pen);
    }
    if (results->ledger_count == 0)
        canvas_text(pen->canvas, pen_line(pen), 1, STYLE_NORMAL,
                    "No vessel and no hall is described, so there is no ledger to keep.");
}

const struct panel panel_ledgers = {
    .name = "ledgers",
    .key = '1',
    .asks = "does it add up?",
    .count = ledger_count,
    .why = why,
    .draw = draw,
};
