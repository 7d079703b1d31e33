/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Writing line by line in a scrolled area, so that a panel need not know how much of it is in
 * sight. A number is never broken across lines or cut: text breaks at spaces, a flow between
 * its parts.
 */
#include "canvas.h"

#include <string.h>

int pen_line(struct pen *pen)
{
    int row = pen->line++ - pen->scroll;
    return row >= 0 && row < pen->area.rows ? pen->area.row + row : -1;
}

void pen_chosen_begin(struct pen *pen)
{
    pen->chosen_from = pen->line;
    pen->chosen_to = pen->line + 1;
}

void pen_chosen_end(struct pen *pen)
{
    pen->chosen_to = pen->line;
}

size_t wrap_length(const struct canvas *canvas, const char *text, int width)
{
    size_t at = 0, last = 0;
    int column = 0;
    while (text[at] != '\0') {
        uint32_t rune;
        char one[5];
        size_t bytes = text_rune(text + at, &rune);
        bytes = bytes > 0 ? bytes : 1;
        memcpy(one, text + at, bytes);
        one[bytes] = '\0';
        if (text[at] == ' ')
            last = at;
        column += canvas_width(canvas, one);
        if (column > width)
            return last > 0 ? last : at > 0 ? at : bytes;
        at += bytes;
    }
    return at;
}

int pen_wrap(struct pen *pen, int indent, enum style style, const char *text)
{
    int width = pen->area.columns - indent - 1, lines = 0;
    for (const char *at = text; *at != '\0' && width > 8; lines++) {
        size_t length = wrap_length(pen->canvas, at, width);
        char line[SCREEN_COLUMNS_MAX * 4 + 1];
        text_format(line, sizeof(line), "%.*s", (int)length, at);
        canvas_text(pen->canvas, pen_line(pen), pen->area.column + indent, style, line);
        at += length;
        while (*at == ' ')
            at++;
    }
    return lines;
}

void pen_entry(struct pen *pen, int indent, const char *label, enum style style,
               const char *text)
{
    struct pen first = *pen;
    canvas_text(pen->canvas, pen_line(&first), pen->area.column + 3, STYLE_NORMAL, label);
    if (pen_wrap(pen, indent, style, text) == 0)
        pen_line(pen);
}

struct flow flow_begin(struct pen *pen, int indent, int limit)
{
    return (struct flow){
        .pen = pen, .indent = indent, .limit = limit, .column = indent, .row = pen_line(pen)};
}

void flow_line(struct flow *flow)
{
    flow->wanted = flow->begun;
}

static void next_line(struct flow *flow)
{
    flow->row = pen_line(flow->pen);
    flow->column = flow->indent;
    flow->limit = flow->pen->area.columns;
    flow->begun = flow->wanted = false;
}

void flow_part(struct flow *flow, const char *label, enum style style, const char *value)
{
    struct canvas *canvas = flow->pen->canvas;
    int width = canvas_width(canvas, label) + canvas_width(canvas, value);
    int gap = flow->begun ? 2 : 0;
    /* One column is kept for the comma behind it. */
    bool fits = flow->column + gap + width + 1 <= flow->limit;
    if (flow->begun && !flow->wanted)
        canvas_text(canvas, flow->row, flow->column, STYLE_NORMAL, ",");
    if (flow->wanted || !fits)
        next_line(flow);
    else
        flow->column += gap;
    flow->column = canvas_text(canvas, flow->row, flow->column, STYLE_NORMAL, label);
    flow->column = canvas_text(canvas, flow->row, flow->column, style, value);
    flow->begun = true;
}
