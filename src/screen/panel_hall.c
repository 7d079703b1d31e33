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

static const double BAR_FULL = 0.23; /* oxygen fraction at the end of a bar */

static const char *state_word(const struct hall *hall, struct quantity q, enum style *style,
                              char *word, size_t size)
{
    *style = STYLE_NORMAL;
    if (!quantity_usable(q)) {
        *style = STYLE_DANGER;
        return "UNKNOWN";
    }
    for (int i = hall->action_count - 1; i >= 0; i--)
        if (q.value < hall->action_level[i]) {
            *style = STYLE_DANGER;
            text_format(word, size, "BELOW %g", hall->action_level[i] * 100);
            return word;
        }
    if (q.value > 0.235) { /* 29 CFR 1910.146: enriched above 23.5 % */
        *style = STYLE_CAUTION;
        return "ENRICHED";
    }
    return "well";
}

static void draw_bar(struct canvas *canvas, int row, int column, int width, struct quantity q,
                     enum style style)
{
    canvas_text(canvas, row, column, STYLE_FAINT, "▕");
    canvas_text(canvas, row, column + width + 1, STYLE_FAINT, "▏");
    if (!quantity_usable(q)) {
        canvas_text(canvas, row, column + 1, STYLE_BAD, "no reading to believe");
        return;
    }
    int full = (int)lround(q.value / BAR_FULL * width);
    for (int i = 0; i < full && i < width; i++)
        canvas_text(canvas, row, column + 1 + i, style, "█");
}

static void draw_monitor(const struct view *view, const struct hall *hall, int index,
                         struct pen *pen)
{
    const struct ref *ref = &hall->oxygen.at[index];
    struct quantity q = view_ref(view, ref);
    const struct unit percent = {.symbol = "%", .dimension = DIMENSION_NUMBER, .scale = 0.01};
    char value[48], word[24], age[48] = "";
    enum style style;
    const char *state = state_word(hall, q, &style, word, sizeof(word));
    int row = pen_line(pen), width = pen->area.columns >= 100 ? 40 : 24;
    const char *says = ref->kind == REF_TAG ? plant_tag_says(view->plant, ref->tag) : "";
    format_value(value, sizeof(value), q, &percent);
    canvas_format(pen->canvas, row, 3, STYLE_NORMAL, "%s %s", ref_name(view, ref), says);
    /* The value keeps its place whatever the text before it. */
    canvas_format(pen->canvas, row, 31, quality_style(q.quality), " %6s %%", value);
    draw_bar(pen->canvas, row, 41, width, q, style == STYLE_NORMAL ? STYLE_NORMAL : style);
    if (q.quality == QUALITY_STALE && ref->kind == REF_TAG &&
        plant_tag_is_point(view->plant, ref->tag)) {
        char span[32];
        time_format_span(span, sizeof(span), frame_age_s(view->frame, ref->tag));
        text_format(age, sizeof(age), ", %s old", span);
    }
    canvas_format(pen->canvas, row, 41 + width + 3, style, "%s%s", state, age);
}

static void draw_levels(const struct hall *hall, struct pen *pen)
{
    char text[160] = "";
    for (int i = 0; i < hall->action_count; i++)
        text_format(text + strlen(text), sizeof(text) - strlen(text), "%s%g %%",
                    i > 0 ? ", " : "", hall->action_level[i] * 100);
    canvas_format(pen->canvas, pen_line(pen), 3, STYLE_FAINT, "action levels %s oxygen", text);
}

static void draw_reason(const struct view *view, enum derived_id id, int thing,
                        const char *label, struct pen *pen)
{
    const struct derived_value *derived = view_derived(view, id, thing);
    int tag = plant_derived_tag(view->plant, id, thing);
    char value[80];
    if (tag < 0)
        return;
    format_quantity(value, sizeof(value), derived->quantity, plant_tag_shown(view->plant, tag));
    bool reason = derived->quantity.quality != QUALITY_GOOD && derived->reason[0] != '\0';
    canvas_format(pen->canvas, pen_line(pen), 3, STYLE_NORMAL, "%-22s %s%s%s%s", label, value,
                  reason ? "   (" : "", reason ? derived->reason : "", reason ? ")" : "");
}

static void draw_fan(const struct view *view, const struct hall *hall, struct pen *pen)
{
    struct quantity fan = view_ref(view, &hall->fan_running);
    char flow[60];
    format_quantity(flow, sizeof(flow), view_ref(view, &hall->ventilation),
                    &hall->ventilation.unit);
    int row = pen_line(pen);
    int column = canvas_format(pen->canvas, row, 3, STYLE_NORMAL, "%-22s ", "fan");
    if (hall->fan_running.kind != REF_NONE)
        column =
            canvas_text(pen->canvas, row, column,
                        quantity_usable(fan) && fan.value != 0 ? STYLE_NORMAL : STYLE_CAUTION,
                        !quantity_usable(fan) ? "unknown"
                        : fan.value != 0      ? "on"
                                              : "OFF");
    canvas_format(pen->canvas, row, column, STYLE_NORMAL, "  %s %s", flow,
                  hall->mode == HALL_EXHAUST ? "drawn out" : "blown in");
}

static void draw_hall(const struct view *view, int index, struct pen *pen)
{
    const struct hall *hall = &view->plant->hall[index];
    struct quantity lowest = view_quantity(view, DERIVED_HALL_OXYGEN_LOWEST, index);
    struct quantity people = view_ref(view, &hall->occupied);
    char word[24];
    enum style style;
    const struct unit percent = {.symbol = "%", .dimension = DIMENSION_NUMBER, .scale = 0.01};
    char value[48];
    const char *state = state_word(hall, lowest, &style, word, sizeof(word));
    format_value(value, sizeof(value), lowest, &percent);
    int row = pen_line(pen);
    int column = canvas_format(pen->canvas, row, 1, STYLE_STRONG, "%s", hall->name);
    column = canvas_format(pen->canvas, row, column + 3,
                           style == STYLE_NORMAL ? STYLE_STRONG : style, "lowest %s %% O2: %s",
                           value, state);
    if (hall->occupied.kind != REF_NONE)
        canvas_format(pen->canvas, row, column + 3,
                      quantity_usable(people) && people.value == 0 ? STYLE_NORMAL
                                                                   : STYLE_STRONG,
                      "people inside: %s",
                      !quantity_usable(people) ? "unknown"
                      : people.value != 0      ? "YES"
                                               : "no");
    pen_line(pen);
    for (int i = 0; i < hall->oxygen.count; i++)
        draw_monitor(view, hall, i, pen);
    draw_levels(hall, pen);
    pen_line(pen);
    draw_fan(view, hall, pen);
    draw_reason(view, DERIVED_HALL_SPREAD, index, "spread of monitors", pen);
    draw_reason(view, DERIVED_HALL_OXYGEN_PRESSURE, index, "oxygen pressure", pen);
    draw_reason(view, DERIVED_HALL_FATALITY_FACTOR, index, "fatality factor", pen);
    draw_reason(view, DERIVED_HALL_RELEASE, index, "release", pen);
    draw_reason(view, DERIVED_HALL_TIME_TO_ACTION, index, "to the next level", pen);
    pen_line(pen);
    pen_wrap(pen, 3, style == STYLE_NORMAL ? STYLE_FAINT : STYLE_STRONG,
             "Monitors tell only where they stand. Cold gas lies low: pits, trenches and lifts "
             "can be "
             "worse than any reading. There is no warning to the senses.");
    pen_line(pen);
}

static void draw(const struct view *view, const struct panel_state *state, struct pen *pen)
{
    (void)state;
    for (int i = 0; i < view->plant->hall_count; i++)
        draw_hall(view, i, pen);
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
