/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * What does each instrument say? Every point, then every derived quantity, with uncertainty,
 * quality and age.
 */
#include <stdio.h>

#include "panel.h"

static int count(const struct view *view)
{
    return plant_tag_count(view->plant);
}

static int line_of(const struct view *view, int row)
{
    return row + 1 + (plant_tag_is_point(view->plant, row) ? 0 : 2);
}

static int why(const struct view *view, int row)
{
    return row < count(view) ? row : -1;
}

static void draw_row(const struct view *view, int tag, bool chosen, struct pen *pen)
{
    const char *reason;
    struct quantity q = view_tag(view, tag, &reason);
    const struct unit *unit = plant_tag_shown(view->plant, tag);
    char value[80], age[40] = "";
    int row = pen_line(pen);
    if (row < 0)
        return;
    if (plant_tag_is_point(view->plant, tag))
        format_reading(value, sizeof(value), q, unit);
    else
        format_quantity(value, sizeof(value), q, unit);
    if (plant_tag_is_point(view->plant, tag) && view->frame->sample[tag].read_utc_ns != 0)
        time_format_span(age, sizeof(age), frame_age_s(view->frame, tag));
    canvas_text(pen->canvas, row, 0, STYLE_STRONG, chosen ? "▸" : " ");
    canvas_text(pen->canvas, row, 1, STYLE_NORMAL, plant_tag_name(view->plant, tag));
    int column = plant_tag_is_point(view->plant, tag) ? 14 : 34;
    canvas_text(pen->canvas, row, column, quality_style(q.quality), value);
    if (plant_tag_is_point(view->plant, tag)) {
        canvas_format(pen->canvas, row, 38, quality_style(q.quality), "%-9s %6s",
                      quality_word(q.quality), age);
        canvas_format(pen->canvas, row, 55, STYLE_FAINT, "%s%s%s", reason,
                      *reason != '\0' ? ": " : "", plant_tag_says(view->plant, tag));
    } else {
        canvas_format(pen->canvas, row, 55, STYLE_FAINT, "%s",
                      q.quality == QUALITY_GOOD ? plant_tag_says(view->plant, tag) : reason);
    }
}

static void draw(const struct view *view, const struct panel_state *state, struct pen *pen)
{
    canvas_format(pen->canvas, pen_line(pen), 1, STYLE_FAINT, "%-12s %-23s %-9s %6s  %s",
                  "point", "reads", "quality", "age", "what it is");
    for (int tag = 0; tag < count(view); tag++) {
        if (tag == view->plant->point_count) {
            pen_line(pen);
            canvas_text(pen->canvas, pen_line(pen), 1, STYLE_FAINT, "derived quantities");
        }
        draw_row(view, tag, tag == state->selected, pen);
    }
}

const struct panel panel_points = {
    .name = "points",
    .key = '8',
    .asks = "what does each instrument say?",
    .count = count,
    .line_of = line_of,
    .why = why,
    .draw = draw,
};
