/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Where does this number come from? Value, quality, the readings behind it with device and age,
 * and how much each contributes to the uncertainty.
 */
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "panel.h"

static void draw_point(const struct view *view, int tag, struct pen *pen)
{
    const struct point *point = &view->plant->point[tag];
    const struct link *link = &view->plant->link[point->link];
    char where[48], text[240], low[40], high[40];
    register_format(where, sizeof(where), &point->read);
    canvas_format(pen->canvas, pen_line(pen), 3, STYLE_NORMAL,
                  "read: %s over link %s (%s:%d unit %d)", where, link->name, link->host,
                  link->port, link->unit_id);
    if (view->frame->sample[tag].read_utc_ns != 0) {
        format_clock(text, sizeof(text), view->frame->sample[tag].read_utc_ns);
        canvas_format(pen->canvas, pen_line(pen), 3, STYLE_NORMAL, "read at %s", text);
    }
    if (point->has_valid) {
        text_format(low, sizeof(low), "%g", unit_from_si(&point->unit, point->valid_low));
        text_format(high, sizeof(high), "%g", unit_from_si(&point->unit, point->valid_high));
        canvas_format(pen->canvas, pen_line(pen), 3, STYLE_NORMAL, "valid from %s to %s %s",
                      low, high, point->unit.symbol);
    }
    canvas_format(pen->canvas, pen_line(pen), 3, STYLE_NORMAL, "described in %s, line %d",
                  point->place.file, point->place.line);
}

static void draw_budget_row(const struct view *view, const struct budget_row *entry,
                            double total, const struct unit *unit, struct pen *pen)
{
    double share = total > 0 ? entry->u * entry->u / total : 0;
    char u[60], input[80] = "";
    const char *name = entry->tag >= 0 ? plant_tag_name(view->plant, entry->tag) : entry->says;
    format_plain(u, sizeof(u), quantity_good(entry->u, 0.05 * entry->u), unit);
    if (entry->tag >= 0)
        format_reading(input, sizeof(input), view_tag(view, entry->tag, NULL),
                       plant_tag_shown(view->plant, entry->tag));
    int row = pen_line(pen);
    canvas_format(pen->canvas, row, 3, STYLE_NORMAL, "%-24s", name);
    canvas_format(pen->canvas, row, 28, STYLE_NORMAL, "%-12s %3.0f %%", u, share * 100);
    for (int i = 0; i < (int)lround(share * 12); i++)
        canvas_text(pen->canvas, row, 47 + i, STYLE_FAINT, "█");
    canvas_text(pen->canvas, row, 60, STYLE_FAINT, input);
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
        canvas_text(pen->canvas, pen_line(pen), 3, STYLE_FAINT,
                    "no uncertainty budget: it is not computed now");
        return;
    }
    canvas_format(pen->canvas, pen_line(pen), 3, STYLE_FAINT, "%-24s %-12s %s",
                  "what it rests on", "u from it", "share of u squared");
    for (int i = 0; i < budget.count; i++)
        draw_budget_row(view, &budget.row[i], total, plant_tag_shown(view->plant, tag), pen);
}

static void draw(const struct view *view, const struct panel_state *state, struct pen *pen)
{
    int tag = state->selected;
    const char *reason;
    if (tag < 0 || tag >= plant_tag_count(view->plant)) {
        canvas_text(pen->canvas, pen_line(pen), 1, STYLE_NORMAL, "no number is chosen");
        return;
    }
    struct quantity q = view_tag(view, tag, &reason);
    char value[80];
    format_quantity(value, sizeof(value), q, plant_tag_shown(view->plant, tag));
    canvas_format(pen->canvas, pen_line(pen), 1, STYLE_STRONG, "%s = %s",
                  plant_tag_name(view->plant, tag), value);
    canvas_format(pen->canvas, pen_line(pen), 3, STYLE_NORMAL, "%s",
                  plant_tag_says(view->plant, tag));
    canvas_format(pen->canvas, pen_line(pen), 3, quality_style(q.quality), "quality: %s%s%s",
                  quality_word(q.quality), *reason != '\0' ? ", " : "", reason);
    pen_line(pen);
    if (plant_tag_is_point(view->plant, tag))
        draw_point(view, tag, pen);
    else
        draw_budget(view, tag, pen);
    pen_line(pen);
    pen_wrap(pen, 3, STYLE_FAINT,
             "Method, formula and sources: docs/methods.md. Uncertainties are standard "
             "uncertainties "
             "(JCGM 100:2008).");
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
