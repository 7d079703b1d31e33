/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Where does this number come from? Value, quality, method, how much each input contributes to
 * the uncertainty, and the readings behind it with device and age.
 */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "panel.h"

enum { INPUT_U = 30, SHARE = 44, SHARE_BAR = 52, BAR = 24 };

static void draw_point(const struct view *view, int tag, struct pen *pen)
{
    const struct point *point = &view->plant->point[tag];
    const struct link *link = &view->plant->link[point->link];
    char where[48], text[400], clock[40];
    register_format(where, sizeof(where), &point->read);
    text_format(text, sizeof(text), "%s over link %s (%s:%d unit %d)", where, link->name,
                link->host, link->port, link->unit_id);
    pen_entry(pen, 18, "read", STYLE_NORMAL, text);
    if (view->frame->sample[tag].read_utc_ns != 0) {
        format_clock(clock, sizeof(clock), view->frame->sample[tag].read_utc_ns);
        pen_entry(pen, 18, "read at", STYLE_NORMAL, clock);
    }
    if (point->has_valid) {
        text_format(text, sizeof(text), "from %.6g to %.6g %s",
                    unit_from_si(&point->unit, point->valid_low),
                    unit_from_si(&point->unit, point->valid_high), point->unit.symbol);
        pen_entry(pen, 18, "valid", STYLE_NORMAL, text);
    }
    text_format(text, sizeof(text), "%s, line %d", point->place.file, point->place.line);
    pen_entry(pen, 18, "described in", STYLE_NORMAL, text);
}

static void draw_share(const struct view *view, const struct budget_row *entry, double total,
                       const struct unit *unit, struct pen *pen)
{
    double share = total > 0 ? entry->u * entry->u / total : 0;
    char u[60];
    const char *name = entry->tag >= 0 ? plant_tag_name(view->plant, entry->tag) : entry->says;
    format_plain(u, sizeof(u), quantity_good(entry->u, 0.05 * entry->u), unit);
    int row = pen_line(pen);
    canvas_fit_name(pen->canvas, row, 3, INPUT_U - 4, STYLE_NORMAL, name);
    canvas_text(pen->canvas, row, INPUT_U, STYLE_NORMAL, u);
    canvas_format(pen->canvas, row, SHARE, STYLE_NORMAL, "%3.0f %%", share * 100);
    for (int i = 0; i < (int)lround(share * BAR); i++)
        canvas_text(pen->canvas, row, SHARE_BAR + i, STYLE_FAINT, "█");
}

/* Value, quality, age and register of an input. */
static void draw_input(const struct view *view, int tag, struct pen *pen)
{
    char value[120], text[400];
    const char *reason;
    struct quantity q = view_tag(view, tag, &reason);
    format_tag(value, sizeof(value), view, tag, true);
    text_format(text, sizeof(text), "%s, %s%s%s", value, quality_word(q.quality),
                *reason != '\0' ? ": " : "", reason);
    if (plant_tag_is_point(view->plant, tag)) {
        const struct point *point = &view->plant->point[tag];
        char where[48], age[40] = "never read";
        register_format(where, sizeof(where), &point->read);
        double age_s;
        if (view_age(view, tag, &age_s)) {
            time_format_span(age, sizeof(age), age_s);
            text_format(age + strlen(age), sizeof(age) - strlen(age), " old");
        }
        text_format(text + strlen(text), sizeof(text) - strlen(text), ", %s; %s %s", age,
                    view->plant->link[point->link].name, where);
    }
    pen_entry(pen, 18, plant_tag_name(view->plant, tag), quality_style(q.quality), text);
}

static void draw_budget(const struct view *view, int tag, struct pen *pen)
{
    struct budget budget = {.count = 0};
    double total = 0;
    if (view->engine != NULL)
        engine_budget(view->engine, tag, &budget);
    for (int i = 0; i < budget.count; i++)
        total += budget.row[i].u * budget.row[i].u;
    if (budget.count == 0) {
        pen_wrap(pen, 3, STYLE_FAINT, "No uncertainty budget: it is not computed now.");
        return;
    }
    int row = pen_line(pen);
    canvas_text(pen->canvas, row, 3, STYLE_FAINT, "uncertainty from");
    canvas_text(pen->canvas, row, INPUT_U, STYLE_FAINT, "u");
    canvas_text(pen->canvas, row, SHARE, STYLE_FAINT, "share of u squared");
    for (int i = 0; i < budget.count; i++)
        draw_share(view, &budget.row[i], total, plant_tag_shown(view->plant, tag), pen);
    pen_line(pen);
    canvas_text(pen->canvas, pen_line(pen), 3, STYLE_FAINT, "inputs now");
    for (int i = 0; i < budget.count; i++)
        if (budget.row[i].tag >= 0)
            draw_input(view, budget.row[i].tag, pen);
}

static void draw(const struct view *view, const struct panel_state *state, struct pen *pen)
{
    int tag = state->selected;
    const char *reason;
    char value[120], text[400];
    if (tag < 0 || tag >= plant_tag_count(view->plant)) {
        canvas_text(pen->canvas, pen_line(pen), 1, STYLE_NORMAL, "No number is chosen.");
        return;
    }
    struct quantity q = view_tag(view, tag, &reason);
    bool point = plant_tag_is_point(view->plant, tag);
    format_tag(value, sizeof(value), view, tag, true);
    text_format(text, sizeof(text), "%s = %s", plant_tag_name(view->plant, tag), value);
    pen_wrap(pen, 1, STYLE_STRONG, text);
    pen_entry(pen, 18, "what it is", STYLE_NORMAL, plant_tag_says(view->plant, tag));
    text_format(text, sizeof(text), "%s%s%s", quality_word(q.quality),
                *reason != '\0' ? ": " : "", reason);
    pen_entry(pen, 18, "quality", quality_style(q.quality), text);
    if (point) {
        draw_point(view, tag, pen);
        return;
    }
    pen_entry(pen, 18, "how", STYLE_NORMAL,
              method_says(view->plant->derived[tag - view->plant->point_count].id));
    pen_line(pen);
    draw_budget(view, tag, pen);
    pen_line(pen);
    pen_wrap(pen, 3, STYLE_FAINT,
             "Formulas and their sources: docs/methods.md. Uncertainties are standard "
             "uncertainties (JCGM 100:2008).");
}

static int count(const struct view *view)
{
    return plant_tag_count(view->plant);
}

const struct panel panel_why = {
    .name = "why",
    .key = 'w',
    .asks = "where does this number come from?",
    .count = count,
    .draw = draw,
};
