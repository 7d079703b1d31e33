/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * What does each instrument say? Every point, then every derived quantity, with uncertainty,
 * quality and age.
 */
#include <stdio.h>

#include "panel.h"

enum { VALUE = 26 };

static int count(const struct view *view)
{
    return plant_tag_count(view->plant);
}

static int why(const struct view *view, int row)
{
    return row < count(view) ? row : -1;
}

/* Columns by the longest name of a part, so that no value begins in a name. */
static int longest_name(const struct view *view, const struct canvas *canvas, int from, int to)
{
    int longest = 8;
    for (int tag = from; tag < to; tag++) {
        int width = canvas_width(canvas, plant_tag_name(view->plant, tag));
        longest = width > longest ? width : longest;
    }
    return longest > 36 ? 36 : longest;
}

static void draw_row(const struct view *view, int tag, int name_columns, bool chosen,
                     struct pen *pen)
{
    const char *reason;
    char value[120], text[300], age[40] = "";
    bool point = plant_tag_is_point(view->plant, tag);
    int row = pen_line(pen);
    if (row < 0)
        return;
    struct quantity q = view_tag(view, tag, &reason);
    format_tag(value, sizeof(value), view, tag, true);
    if (canvas_width(pen->canvas, value) >= VALUE)
        format_tag(value, sizeof(value), view, tag, false);
    view_age(view, tag, age, sizeof(age));
    canvas_text(pen->canvas, row, 0, STYLE_STRONG, chosen ? "▸" : " ");
    canvas_fit_name(pen->canvas, row, 1, name_columns, STYLE_NORMAL,
                    plant_tag_name(view->plant, tag));
    int at = name_columns + 3;
    canvas_text(pen->canvas, row, at, quality_style(q.quality), value);
    at += VALUE;
    canvas_format(pen->canvas, row, at, quality_style(q.quality), "%-9s",
                  quality_word(q.quality));
    at += 10;
    if (point) {
        canvas_format(pen->canvas, row, at, STYLE_NORMAL, "%9s", age);
        at += 11;
    }
    text_format(text, sizeof(text), "%s%s%s", reason, *reason != '\0' ? "; " : "",
                plant_tag_says(view->plant, tag));
    canvas_fit(pen->canvas, row, at, pen->area.columns - at, STYLE_FAINT, text);
}

static void draw_head(struct pen *pen, int name_columns, const char *what, bool age)
{
    int row = pen_line(pen), at = name_columns + 3;
    canvas_text(pen->canvas, row, 1, STYLE_FAINT, what);
    canvas_text(pen->canvas, row, at, STYLE_FAINT, "value");
    canvas_text(pen->canvas, row, at + VALUE, STYLE_FAINT, "quality");
    if (age)
        canvas_format(pen->canvas, row, at + VALUE + 10, STYLE_FAINT, "%9s", "age");
}

static void draw(const struct view *view, const struct panel_state *state, struct pen *pen)
{
    int points = view->plant->point_count;
    int columns = longest_name(view, pen->canvas, 0, points);
    draw_head(pen, columns, "point", true);
    for (int tag = 0; tag < count(view); tag++) {
        if (tag == points) {
            columns = longest_name(view, pen->canvas, points, count(view));
            pen_line(pen);
            draw_head(pen, columns, "derived", false);
        }
        if (tag == state->selected)
            pen_chosen_begin(pen);
        draw_row(view, tag, columns, tag == state->selected, pen);
    }
}

const struct panel panel_points = {
    .name = "points",
    .key = '8',
    .asks = "what does each instrument say?",
    .count = count,
    .why = why,
    .draw = draw,
};
