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

enum { SHARE = 13, SHARE_BAR = 20, BAR = 24 }; /* from the column of u on */
static const double least_share = 0.005;

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

/* Contributions in one unit, so that they can be compared at a glance. */
static void draw_share(const char *name, double u, double total, const struct unit *unit,
                       int u_column, struct pen *pen)
{
    double share = total > 0 ? u * u / total : 0;
    int row = pen_line(pen), bar = u_column + SHARE_BAR;
    int room = pen->area.columns - bar - 1;
    canvas_fit_name(pen->canvas, row, 3, u_column - 4, STYLE_NORMAL, name);
    canvas_format(pen->canvas, row, u_column, STYLE_NORMAL, "%.2g %s",
                  unit_span_from_si(unit, u),
                  strcmp(unit->symbol, "1") != 0 ? unit->symbol : "");
    canvas_format(pen->canvas, row, u_column + SHARE, STYLE_NORMAL, "%3.0f %%", share * 100);
    for (int i = 0; i < (int)lround(share * (room < BAR ? room : BAR)); i++)
        canvas_text(pen->canvas, row, bar + i, STYLE_FAINT, "█");
}

static const char *row_name(const struct view *view, const struct budget_row *row)
{
    return row->tag >= 0 ? plant_tag_name(view->plant, row->tag) : row->says;
}

/* Column of u, behind the longest name where there is room for it. */
static int u_column(const struct view *view, const struct budget *budget, struct pen *pen)
{
    int longest = 20, most = pen->area.columns >= 100 ? 46 : 36;
    for (int i = 0; i < budget->count; i++) {
        int width = canvas_width(pen->canvas, row_name(view, &budget->row[i]));
        longest = width > longest ? width : longest;
    }
    return 4 + (longest < most ? longest : most);
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
        char where[48], age[40];
        bool read = view_age(view, tag, age, sizeof(age));
        register_format(where, sizeof(where), &point->read);
        text_format(text + strlen(text), sizeof(text) - strlen(text), ", %s%s; %s %s",
                    read ? age : "never read", read ? " old" : "",
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
    int row = pen_line(pen), column = u_column(view, &budget, pen), others = 0;
    struct unit unit = shown_unit(plant_tag_shown(view->plant, tag), 10 * sqrt(total));
    double rest = 0;
    canvas_text(pen->canvas, row, 3, STYLE_FAINT, "uncertainty from");
    canvas_text(pen->canvas, row, column, STYLE_FAINT, "u");
    canvas_text(pen->canvas, row, column + SHARE, STYLE_FAINT, "share of u squared");
    for (int i = 0; i < budget.count; i++) {
        double u = budget.row[i].u;
        if (u * u >= least_share * total) {
            draw_share(row_name(view, &budget.row[i]), u, total, &unit, column, pen);
            continue;
        }
        rest += u * u;
        others++;
    }
    char text[48];
    text_format(text, sizeof(text), "%d smaller together", others);
    if (others > 0)
        draw_share(text, sqrt(rest), total, &unit, column, pen);
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
