/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/* Private to the room: clipping, and a pen that writes line by line in a scrolled area. */
#ifndef ULLAGE_SCREEN_CANVAS_H
#define ULLAGE_SCREEN_CANVAS_H

#include "ullage/screen.h"

struct area {
    int row, column, rows, columns;
};

/* Text outside the area is not drawn; NULL: the whole canvas. canvas_clear lifts it. */
void canvas_clip(struct canvas *canvas, const struct area *area);
/* The whole row within the clip takes a style. */
void canvas_restyle(struct canvas *canvas, int row, enum style style);

/* Writes lines from the top; the first scroll lines are passed over, those below are only
 * counted. */
struct pen {
    struct canvas *canvas;
    struct area area;
    int scroll, line;
};
/* Row of the next line on the canvas, or -1 (where nothing is drawn). */
int pen_line(struct pen *pen);
/* Text over as many lines as it needs; returns their number. */
int pen_wrap(struct pen *pen, int indent, enum style style, const char *text);
/* Bytes of text that fit into width columns, broken at a space where there is one. */
size_t wrap_length(const char *text, int width);

#endif
