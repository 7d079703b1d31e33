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

enum { NEEDLE = 15, NEEDLE_COLUMN = 54, LINES = 4, WIDE = 160, TREND_SPAN_S = 4 * 3600 };

static int ledger_count(const struct view *view)
{
    return view->results->ledger_count;
}

static int line_of(const struct view *view, int row)
{
    (void)view;
    return row * LINES;
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
    case LEDGER_PURITY: {
        for (int i = 0; i < view->plant->drift_count; i++)
            if (view->plant->drift[i].vessel == ledger->thing)
                return plant_derived_tag(view->plant, DERIVED_DRIFT_LIFETIME, i);
        return plant_derived_tag(view->plant, DERIVED_VESSEL_OXYGEN_INGRESS, ledger->thing);
    }
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
    return step * round(value / step);
}

/* Rounded terms must still add up for the reader: the residue of rounding goes to the largest
 * of in and out, where it is least. */
static void draw_sum(const struct view *view, const struct ledger *ledger,
                     struct canvas *canvas, int row, int column)
{
    const struct unit own =
        unit_si(ledger->kind == LEDGER_HEAT ? DIMENSION_POWER : DIMENSION_MASS_FLOW);
    double largest = fmax(fmax(fabs(ledger->in.value), fabs(ledger->out.value)),
                          fmax(fabs(ledger->unexplained.value), ledger->unexplained.u));
    struct unit unit = shown_unit(&own, largest);
    double u = unit_span_from_si(&unit, ledger->unexplained.u);
    int decimals = quantity_decimals(u, 2);
    double step = pow(10, -decimals);
    double in = rounded(unit_from_si(&unit, ledger->in.value), step);
    double out = rounded(unit_from_si(&unit, ledger->out.value), step);
    double stored = rounded(unit_from_si(&unit, ledger->stored.value), step);
    double rest = rounded(unit_from_si(&unit, ledger->unexplained.value), step);
    double residue = in - out - stored - rest;
    if (fabs(in) >= fabs(out))
        in -= residue;
    else
        out += residue;
    (void)view;
    canvas_format(canvas, row, column, STYLE_NORMAL,
                  "in %.*f  -  out %.*f  -  stored %.*f  =  %+.*f ± %.*f %s", decimals,
                  in + 0.0, decimals, out + 0.0, decimals, stored + 0.0, decimals, rest + 0.0,
                  decimals, u, unit.symbol);
}

static enum style word_style(enum ledger_word word)
{
    switch (word) {
    case LEDGER_FINDING:
    case LEDGER_BLIND:
        return STYLE_CAUTION;
    case LEDGER_WATCH:
        return STYLE_STRONG;
    case LEDGER_FILLING:
    case LEDGER_ABSENT:
        return STYLE_FAINT;
    case LEDGER_QUIET:
        break;
    }
    return STYLE_NORMAL;
}

static void draw_needle(const struct ledger *ledger, struct canvas *canvas, int row, int column)
{
    char marks[NEEDLE + 1];
    bool usable = quantity_usable(ledger->unexplained) && ledger->unexplained.u > 0 &&
                  ledger->word != LEDGER_ABSENT;
    memset(marks, ' ', NEEDLE);
    marks[NEEDLE] = '\0';
    marks[NEEDLE / 2] = '|';
    marks[NEEDLE / 2 - 3] = marks[NEEDLE / 2 + 3] = ':';
    canvas_format(canvas, row, column, STYLE_FAINT, "[%s]", marks);
    if (usable) {
        double z = ledger->unexplained.value / ledger->unexplained.u;
        double at = z * (NEEDLE / 2) / 5;
        double most = NEEDLE / 2;
        at = at > most ? most : at < -most ? -most : at;
        canvas_text(canvas, row, column + 1 + NEEDLE / 2 + (int)lround(at),
                    ledger->word == LEDGER_FINDING ? STYLE_CAUTION : STYLE_STRONG, "◆");
    }
    canvas_text(canvas, row, column + NEEDLE + 3, word_style(ledger->word),
                ledger_word_text(ledger->word));
}

/* ---- the lines under it
 * -------------------------------------------------------------------------- */

static void part(char *dst, size_t size, const struct view *view, enum derived_id id, int thing,
                 const char *label, bool with_u)
{
    int tag = plant_derived_tag(view->plant, id, thing);
    char value[80];
    if (tag < 0) {
        *dst = '\0';
        return;
    }
    const struct unit *unit = plant_tag_shown(view->plant, tag);
    struct quantity q = view_quantity(view, id, thing);
    if (with_u)
        format_quantity(value, sizeof(value), q, unit);
    else
        format_plain(value, sizeof(value), q, unit);
    text_format(dst, size, "%s%s", label, value);
}

static void heat_lines(const struct view *view, const struct ledger *ledger, char *one,
                       char *two, size_t size)
{
    const struct plant *plant = view->plant;
    const struct vessel *vessel = &plant->vessel[ledger->thing];
    const struct unit watt = unit_si(DIMENSION_POWER);
    part(one, size, view, DERIVED_VESSEL_HEAT_LOAD, ledger->thing, "heat load ", true);
    *two = '\0';
    if (vessel->has_heat_budget) {
        char budget[40];
        format_plain(budget, sizeof(budget), quantity_good(vessel->heat_budget_w, 0), &watt);
        text_format(two, size, "budget %s, ", budget);
    }
    if (vessel->condenser >= 0) {
        char rated[40] = "";
        part(two + strlen(two), size - strlen(two), view, DERIVED_CONDENSER_DUTY,
             vessel->condenser, "cooling ", false);
        format_plain(rated, sizeof(rated),
                     quantity_good(plant->condenser[vessel->condenser].rated_duty_w, 0), &watt);
        if (plant->condenser[vessel->condenser].rated_duty_w > 0)
            text_format(two + strlen(two), size - strlen(two), " of %s", rated);
    }
    struct quantity hold = view_quantity(view, DERIVED_VESSEL_HOLD_TIME, ledger->thing);
    if (quantity_usable(hold)) {
        char span[40];
        time_format_span(span, sizeof(span), hold.value);
        text_format(two + strlen(two), size - strlen(two), "%srelief in < %s",
                    *two != '\0' ? ", else " : "", span);
    }
}

static void mass_lines(const struct view *view, const struct ledger *ledger, char *one,
                       char *two, size_t size)
{
    char fill[60], daily[60];
    part(one, size, view, DERIVED_VESSEL_LIQUID_MASS, ledger->thing, "liquid ", true);
    part(fill, sizeof(fill), view, DERIVED_VESSEL_FILL, ledger->thing, "", false);
    text_format(two, size, "%s full, ", fill);
    part(two + strlen(two), size - strlen(two), view, DERIVED_VESSEL_BOIL_OFF, ledger->thing,
         "boil-off ", true);
    part(daily, sizeof(daily), view, DERIVED_VESSEL_BOIL_OFF_DAILY, ledger->thing, "", false);
    text_format(two + strlen(two), size - strlen(two), ", %s", daily);
}

static void purity_lines(const struct view *view, const struct ledger *ledger, char *one,
                         char *two, size_t size)
{
    const struct plant *plant = view->plant;
    *one = *two = '\0';
    for (int i = 0; i < plant->drift_count && *one == '\0'; i++) {
        if (plant->drift[i].vessel != ledger->thing)
            continue;
        char oxygen[60];
        format_plain(oxygen, sizeof(oxygen), view_ref(view, &plant->drift[i].oxygen),
                     &plant->drift[i].oxygen.unit);
        text_format(one, size, "%s O2, ", oxygen);
        part(one + strlen(one), size - strlen(one), view, DERIVED_DRIFT_LIFETIME, i,
             "lifetime ", true);
    }
    int purifier = plant->vessel[ledger->thing].purifier;
    if (purifier < 0) {
        text_copy(two, size, "no purifier is described");
        return;
    }
    part(two, size, view, DERIVED_PURIFIER_EFFICIENCY, purifier, "purifier takes ", true);
    char used[60];
    part(used, sizeof(used), view, DERIVED_PURIFIER_LOADING, purifier, ", used ", false);
    struct quantity loading = view_quantity(view, DERIVED_PURIFIER_LOADING, purifier);
    if (quantity_usable(loading))
        text_format(two + strlen(two), size - strlen(two), "%s", used);
}

static void air_lines(const struct view *view, const struct ledger *ledger, char *one,
                      char *two, size_t size)
{
    const struct hall *hall = &view->plant->hall[ledger->thing];
    char lowest[60], spread[60], flow[60];
    part(lowest, sizeof(lowest), view, DERIVED_HALL_OXYGEN_LOWEST, ledger->thing, "", false);
    part(spread, sizeof(spread), view, DERIVED_HALL_SPREAD, ledger->thing, "", false);
    text_format(one, size, "%s O2 lowest of %d, spread %s", lowest, hall->oxygen.count, spread);
    *two = '\0';
    if (hall->fan_running.kind == REF_TAG) {
        struct quantity fan = view_ref(view, &hall->fan_running);
        text_format(two, size, "fan %s",
                    !quantity_usable(fan) ? "unknown"
                    : fan.value != 0      ? "on"
                                          : "OFF");
    }
    if (hall->ventilation.kind != REF_NONE) {
        format_plain(flow, sizeof(flow), view_ref(view, &hall->ventilation),
                     &hall->ventilation.unit);
        text_format(two + strlen(two), size - strlen(two), "%s%s", *two != '\0' ? " " : "air ",
                    flow);
    }
    if (hall->occupied.kind == REF_TAG) {
        struct quantity people = view_ref(view, &hall->occupied);
        text_format(two + strlen(two), size - strlen(two), ", %s",
                    !quantity_usable(people) ? "people inside: unknown"
                    : people.value != 0      ? "people inside"
                                             : "nobody inside");
    }
}

/* ---- trend
 * -------------------------------------------------------------------------------------- */

static void draw_trend(const struct view *view, int tag, struct pen *pen, int row, int column,
                       int width)
{
    static const char *const bars[] = {"▁", "▂", "▃", "▄", "▅", "▆", "▇", "█"};
    struct trend_column columns[SCREEN_COLUMNS_MAX];
    double low = HUGE_VAL, high = -HUGE_VAL;
    if (view->engine == NULL || tag < 0 || width < 16 || row < 0)
        return;
    if (width > 60)
        width = 60;
    engine_trend(view->engine, tag, TREND_SPAN_S, columns, width);
    for (int i = 0; i < width; i++) {
        if (!columns[i].set)
            continue;
        low = fmin(low, columns[i].low);
        high = fmax(high, columns[i].high);
    }
    if (!(low <= high))
        return;
    for (int i = 0; i < width; i++) {
        double middle = 0.5 * (columns[i].low + columns[i].high);
        int step = high > low ? (int)((middle - low) / (high - low) * 7.999) : 3;
        canvas_text(pen->canvas, row, column + i, STYLE_FAINT,
                    columns[i].set ? bars[step < 0   ? 0
                                          : step > 7 ? 7
                                                     : step]
                                   : " ");
    }
    const struct unit *own = plant_tag_shown(view->plant, tag);
    char from[60], to[60];
    format_plain(from, sizeof(from), quantity_good(low, 0.01 * (high - low)), own);
    format_plain(to, sizeof(to), quantity_good(high, 0.01 * (high - low)), own);
    canvas_format(pen->canvas, row + 1, column, STYLE_FAINT, "%s, last 4 h: %s to %s",
                  plant_tag_name(view->plant, tag), from, to);
}

/* ---- a ledger
 * ------------------------------------------------------------------------------------ */

static void draw_ledger(const struct view *view, const struct ledger *ledger, bool chosen,
                        int left, struct pen *pen)
{
    char one[200] = "", two[200] = "";
    struct canvas *canvas = pen->canvas;
    int first = pen_line(pen), second = pen_line(pen), third = pen_line(pen);
    canvas_text(canvas, first, 0, chosen ? STYLE_STRONG : STYLE_FAINT, chosen ? "▸" : " ");
    canvas_format(canvas, first, 1, STYLE_STRONG, "%s", ledger_kind_word(ledger->kind));
    canvas_text(canvas, first, 8, STYLE_NORMAL, thing_name(view, ledger));
    bool summed = quantity_usable(ledger->unexplained) && ledger->word != LEDGER_ABSENT;
    if (summed && ledger->kind != LEDGER_AIR) {
        draw_sum(view, ledger, canvas, first, left);
    } else if (summed) {
        char release[80];
        const struct unit flow = unit_si(DIMENSION_MASS_FLOW);
        format_quantity(release, sizeof(release), ledger->unexplained, &flow);
        canvas_format(canvas, first, left, STYLE_NORMAL, "release %s", release);
    } else {
        canvas_text(canvas, first, left,
                    ledger->word == LEDGER_BLIND ? STYLE_CAUTION : STYLE_FAINT, ledger->reason);
    }
    switch (ledger->kind) {
    case LEDGER_HEAT:
        heat_lines(view, ledger, one, two, sizeof(one));
        break;
    case LEDGER_MASS:
        mass_lines(view, ledger, one, two, sizeof(one));
        break;
    case LEDGER_PURITY:
        purity_lines(view, ledger, one, two, sizeof(one));
        break;
    case LEDGER_AIR:
        air_lines(view, ledger, one, two, sizeof(one));
        break;
    }
    canvas_text(canvas, second, left, STYLE_NORMAL, one);
    draw_needle(ledger, canvas, second, NEEDLE_COLUMN);
    canvas_text(canvas, third, left, STYLE_NORMAL, two);
    if (pen->area.columns >= WIDE)
        draw_trend(view, trend_tag(view, ledger), pen, first, 88, pen->area.columns - 90);
    pen_line(pen);
}

static void draw(const struct view *view, const struct panel_state *state, struct pen *pen)
{
    const struct results *results = view->results;
    size_t longest = 9;
    for (int i = 0; i < results->ledger_count; i++) {
        size_t length = strlen(thing_name(view, &results->ledger[i]));
        longest = length > longest ? length : longest;
    }
    int left = 8 + (int)(longest > 14 ? 14 : longest) + 1;
    for (int i = 0; i < results->ledger_count; i++)
        draw_ledger(view, &results->ledger[i], i == state->selected, left, pen);
    if (results->ledger_count == 0)
        canvas_text(pen->canvas, pen_line(pen), 1, STYLE_NORMAL,
                    "No vessel and no hall is described, so there is no ledger to keep.");
}

const struct panel panel_ledgers = {
    .name = "ledgers",
    .key = '1',
    .asks = "does it add up?",
    .count = ledger_count,
    .line_of = line_of,
    .why = why,
    .draw = draw,
};
