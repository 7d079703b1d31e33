/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * May people be in the hall? Monitors by place, what they stand against, the fan, people; in
 * plain short sentences when it matters. A lost monitor is never counted as well.
 */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "panel.h"

static const double bar_full = 0.23;  /* oxygen fraction at the end of a bar */
static const double enriched = 0.235; /* 29 CFR 1910.146 (b): enriched above 23.5 % */
enum { VALUE = 28, BAR = 41, ENTRY = 26 };

/* Index of the lowest action level that oxygen is below, or -1. */
static int level_passed(const struct hall *hall, double oxygen)
{
    int passed = -1;
    for (int i = 0; i < hall->action_count; i++)
        if (oxygen < hall->action_level[i] &&
            (passed < 0 || hall->action_level[i] < hall->action_level[passed]))
            passed = i;
    return passed;
}

static enum style state_word(const struct hall *hall, struct quantity q, char *word,
                             size_t size)
{
    if (!quantity_usable(q)) {
        text_copy(word, size, "UNKNOWN");
        return STYLE_DANGER;
    }
    int passed = level_passed(hall, q.value);
    if (passed >= 0) {
        text_format(word, size, "BELOW %.4g %%", hall->action_level[passed] * 100);
        return STYLE_DANGER;
    }
    text_copy(word, size, q.value > enriched ? "ENRICHED" : "well");
    return q.value > enriched ? STYLE_CAUTION : STYLE_NORMAL;
}

/* Percent with the digits that u allows, but never one that rounds up to a level it is below.
 */
static void oxygen_text(char *dst, size_t size, const struct hall *hall, struct quantity q)
{
    format_value(dst, size, q, &format_percent);
    int passed = quantity_usable(q) ? level_passed(hall, q.value) : -1;
    for (int decimals = 1; passed >= 0 && decimals <= 6; decimals++) {
        double shown = 0;
        if (text_to_double(dst, &shown) == 0 && shown < hall->action_level[passed] * 100)
            break;
        text_format(dst, size, "%.*f", decimals, q.value * 100);
    }
}

/* ---- monitors
 * ----------------------------------------------------------------------------------- */

static int bar_columns(const struct pen *pen)
{
    return pen->area.columns >= 100 ? 40 : 24;
}

static void draw_bar(struct canvas *canvas, int row, int width, struct quantity q,
                     enum style style)
{
    canvas_text(canvas, row, BAR, STYLE_FAINT, "▕");
    canvas_text(canvas, row, BAR + width + 1, STYLE_FAINT, "▏");
    if (!quantity_usable(q)) {
        canvas_text(canvas, row, BAR + 2, STYLE_BAD, "no reading to believe");
        return;
    }
    int full = (int)lround(fmax(0, fmin(1, q.value / bar_full)) * width);
    /* Danger is a ground colour: a bar of it is drawn by its runes alone. */
    for (int i = 0; i < full; i++)
        canvas_text(canvas, row, BAR + 1 + i, style == STYLE_DANGER ? STYLE_STRONG : style,
                    "█");
}

static void draw_monitor(const struct view *view, const struct hall *hall, int index,
                         struct pen *pen)
{
    const struct ref *ref = &hall->oxygen.at[index];
    const char *reason = "";
    struct quantity q =
        ref->kind == REF_TAG ? view_tag(view, ref->tag, &reason) : view_ref(view, ref);
    char value[48], word[32], name[200], mark[4] = "";
    enum style style = state_word(hall, q, word, sizeof(word));
    int row = pen_line(pen), width = bar_columns(pen);
    text_format(name, sizeof(name), "%s %s", ref_name(view, ref),
                ref->kind == REF_TAG ? plant_tag_says(view->plant, ref->tag) : "");
    oxygen_text(value, sizeof(value), hall, q);
    if (q.quality == QUALITY_STALE || q.quality == QUALITY_UNCERTAIN)
        text_format(mark, sizeof(mark), " %c", quality_mark(q.quality));
    canvas_fit(pen->canvas, row, 3, VALUE - 4, STYLE_NORMAL, name);
    canvas_format(pen->canvas, row, VALUE, quality_style(q.quality), "%9s %%%s", value, mark);
    draw_bar(pen->canvas, row, width, q, style);
    canvas_text(pen->canvas, row, BAR + width + 3, style, word);
    if (quantity_usable(q))
        return;
    char text[200];
    text_copy(text, sizeof(text), reason);
    char span[32];
    if (ref->kind == REF_TAG && view_age(view, ref->tag, span, sizeof(span))) {
        text_format(text + strlen(text), sizeof(text) - strlen(text), "%slast read %s ago",
                    *reason != '\0' ? "; " : "", span);
    }
    pen_wrap(pen, 10, STYLE_BAD, text);
}

/* The levels under the bars, each with its place. */
static void draw_levels(const struct hall *hall, struct pen *pen)
{
    char text[240] = "";
    int row = pen_line(pen), width = bar_columns(pen);
    for (int i = 0; i < hall->action_count; i++) {
        text_format(text + strlen(text), sizeof(text) - strlen(text), "%s%.4g %%",
                    i > 0 ? ", " : "", hall->action_level[i] * 100);
        if (hall->action_level[i] < bar_full)
            canvas_text(pen->canvas, row,
                        BAR + 1 + (int)lround(hall->action_level[i] / bar_full * width),
                        STYLE_NORMAL, "▴");
    }
    int at = canvas_text(pen->canvas, row, 3, STYLE_FAINT, "action levels ");
    if (at + canvas_width(pen->canvas, text) < BAR) {
        canvas_text(pen->canvas, row, at, STYLE_NORMAL, text);
        return;
    }
    pen_wrap(pen, 5, STYLE_NORMAL, text);
}

/* ---- what else is known
 * ------------------------------------------------------------------------ */

static void draw_derived(const struct view *view, enum derived_id id, int thing,
                         const char *label, struct pen *pen)
{
    int tag = plant_derived_tag(view->plant, id, thing);
    char value[120], text[300];
    const char *reason;
    if (tag < 0)
        return;
    struct quantity q = view_tag(view, tag, &reason);
    if (q.quality == QUALITY_MISSING && reason[0] == '\0')
        return;
    format_tag(value, sizeof(value), view, tag, true);
    bool told = q.quality != QUALITY_GOOD && reason[0] != '\0';
    text_format(text, sizeof(text), "%s%s%s%s", value, told ? "   (" : "", told ? reason : "",
                told ? ")" : "");
    pen_entry(pen, ENTRY, label, quality_style(q.quality), text);
}

static void draw_fan(const struct view *view, const struct hall *hall, struct pen *pen)
{
    struct quantity fan = view_ref(view, &hall->fan_running);
    struct quantity air = view_ref(view, &hall->ventilation);
    char flow[80] = "", text[160];
    if (hall->ventilation.kind != REF_NONE)
        format_reading(flow, sizeof(flow), air, &hall->ventilation.unit);
    bool told = hall->fan_running.kind != REF_NONE;
    bool on = quantity_usable(fan) && fan.value != 0;
    text_format(text, sizeof(text), "%s%s%s%s",
                !told                   ? ""
                : !quantity_usable(fan) ? "unknown"
                : on                    ? "on"
                                        : "OFF",
                told && *flow != '\0' ? ", " : "", flow,
                *flow == '\0'                ? ""
                : hall->mode == HALL_EXHAUST ? " drawn out"
                                             : " blown in");
    if (*text != '\0')
        pen_entry(pen, ENTRY, "fan", on || !told ? quality_style(air.quality) : STYLE_CAUTION,
                  text);
}

static void draw_headline(const struct view *view, const struct hall *hall,
                          struct quantity lowest, struct pen *pen)
{
    struct quantity people = view_ref(view, &hall->occupied);
    char value[48], word[32], text[200];
    enum style style = state_word(hall, lowest, word, sizeof(word));
    int row = pen_line(pen);
    if (style == STYLE_NORMAL)
        style = STYLE_STRONG;
    oxygen_text(value, sizeof(value), hall, lowest);
    const char *inside = hall->occupied.kind == REF_NONE ? ""
                         : !quantity_usable(people)      ? "people inside: unknown"
                         : people.value != 0             ? "people inside: YES"
                                                         : "people inside: no";
    if (quantity_usable(lowest))
        text_format(text, sizeof(text), "lowest %s %% O2   %s", value, word);
    else if (lowest.quality == QUALITY_STALE)
        text_format(text, sizeof(text), "O2 UNKNOWN (was %s %%)", value);
    else
        text_copy(text, sizeof(text), "O2 UNKNOWN");
    canvas_fill(pen->canvas, row, 0, style == STYLE_STRONG ? STYLE_NORMAL : style);
    int room = pen->area.columns - canvas_width(pen->canvas, text) -
               canvas_width(pen->canvas, inside) - 9;
    int at = canvas_fit_name(pen->canvas, row, 1, room, style, hall->name);
    at = canvas_text(pen->canvas, row, at, style, "   ");
    at = canvas_text(pen->canvas, row, at, style, text);
    at = canvas_text(pen->canvas, row, at, style, "   ");
    canvas_text(pen->canvas, row, at, style, inside);
}

static void draw_caution(enum style style, struct pen *pen)
{
    pen_wrap(pen, 3, style,
             "Monitors tell only where they stand. Cold gas lies low: pits, trenches and lifts "
             "can be worse than any reading. There is no warning to the senses.");
}

static void draw_hall(const struct view *view, int index, struct pen *pen)
{
    const struct hall *hall = &view->plant->hall[index];
    struct quantity lowest = view_quantity(view, DERIVED_HALL_OXYGEN_LOWEST, index);
    draw_headline(view, hall, lowest, pen);
    pen_line(pen);
    for (int i = 0; i < hall->oxygen.count; i++)
        draw_monitor(view, hall, i, pen);
    if (hall->oxygen.count == 0)
        pen_wrap(pen, 3, STYLE_CAUTION, "No monitor is described: this air is not watched.");
    if (hall->action_count > 0)
        draw_levels(hall, pen);
    bool well = quantity_usable(lowest) && level_passed(hall, lowest.value) < 0;
    pen_line(pen);
    if (!well)
        draw_caution(STYLE_STRONG, pen);
    draw_derived(view, DERIVED_HALL_RELEASE, index, "release", pen);
    draw_derived(view, DERIVED_HALL_RELEASE_TOTAL, index, "released so far", pen);
    draw_fan(view, hall, pen);
    draw_derived(view, DERIVED_HALL_TIME_TO_ACTION, index, "to the next level", pen);
    draw_derived(view, DERIVED_HALL_OXYGEN_PRESSURE, index, "oxygen pressure", pen);
    draw_derived(view, DERIVED_HALL_FATALITY_FACTOR, index, "fatality factor", pen);
    draw_derived(view, DERIVED_HALL_SPREAD, index, "spread of monitors", pen);
    if (well) {
        pen_line(pen);
        draw_caution(STYLE_FAINT, pen);
    }
}

static void draw(const struct view *view, const struct panel_state *state, struct pen *pen)
{
    (void)state;
    for (int i = 0; i < view->plant->hall_count; i++) {
        if (i > 0)
            pen_line(pen);
        draw_hall(view, i, pen);
    }
    if (view->plant->hall_count == 0)
        canvas_text(pen->canvas, pen_line(pen), 1, STYLE_NORMAL,
                    "No hall is described: nothing here watches whether people can breathe.");
}

const struct panel panel_hall = {
    .name = "hall",
    .key = '4',
    .asks = "may people be in the hall?",
    .draw = draw,
};
