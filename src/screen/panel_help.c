/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Which keys are there? Made from the tables that the keys themselves are read from.
 */
#include <stdio.h>

#include "panel.h"

static void draw(const struct view *view, const struct panel_state *state, struct pen *pen)
{
    (void)view;
    (void)state;
    canvas_text(pen->canvas, pen_line(pen), 1, STYLE_STRONG, "keys: panels, each a question");
    for (int i = 0; i < panel_count(); i++)
        if (panels[i] != &panel_why)
            canvas_format(pen->canvas, pen_line(pen), 3, STYLE_NORMAL, "%c  %-9s %s",
                          panels[i]->key, panels[i]->name, panels[i]->asks);
    pen_line(pen);
    canvas_text(pen->canvas, pen_line(pen), 1, STYLE_STRONG,
                "keys that mean the same everywhere");
    for (int i = 0; i < key_help_count(); i++)
        canvas_format(pen->canvas, pen_line(pen), 3, STYLE_NORMAL, "%-19s %s",
                      key_helps[i].keys, key_helps[i].does);
    pen_line(pen);
    canvas_text(pen->canvas, pen_line(pen), 1, STYLE_STRONG, "how to read a ledger");
    pen_wrap(
        pen, 3, STYLE_NORMAL,
        "in - out - stored = unexplained ± its standard uncertainty. The needle's bar is zero, "
        "the colons are 2 u, the brackets 5 u. quiet: within 2 u; watch: beyond 2 u; finding: "
        "beyond 5 u; filling: the window is not long enough; blind: an input is lost; absent: "
        "not described, or not computed by this version.");
    pen_wrap(
        pen, 3, STYLE_NORMAL,
        "Behind a value: ? uncertain, ~ stale (dim, an old value), ! bad, - missing; a value "
        "that cannot be believed is shown as --.");
}

const struct panel panel_help = {
    .name = "help",
    .key = '?',
    .asks = "which keys are there?",
    .draw = draw,
};
