/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/* Private to the room: runes, clipping, and a pen that writes line by line in a scrolled area.
 */
#ifndef ULLAGE_SCREEN_CANVAS_H
#define ULLAGE_SCREEN_CANVAS_H

#include "ullage/screen.h"

/* ---- runes ---------------------------------------------------------------------------------
 */

/* Columns that a rune takes: 0 (a mark on the one before), 1 or 2. Of a table of our own, so
 * that a picture is the same in every locale. */
int rune_width(uint32_t rune);
/* What stands for a rune where only ASCII can be shown: one or two characters. */
const char *rune_ascii(uint32_t rune);
/* The rune as UTF-8; returns its length. */
size_t rune_write(uint32_t rune, char text[5]);

/* ---- clipping ------------------------------------------------------------------------------
 */

struct area {
    int row, column, rows, columns;
};

/* Text outside the area is not drawn; NULL: the whole canvas. canvas_clear lifts it. */
void canvas_clip(struct canvas *canvas, const struct area *area);
/* Runes that were lost at the right edge of the canvas or clip since canvas_clear. A layout
 * that loses any has cut something an operator wants to read. */
int canvas_lost(const struct canvas *canvas);
/* Columns that a text takes on this canvas. */
int canvas_width(const struct canvas *canvas, const char *text);
/* Text in at most width columns; what does not fit gives way to an ellipsis. */
int canvas_fit(struct canvas *canvas, int row, int column, int width, enum style style,
               const char *text);
/* The same for names, which often differ at their end: the middle gives way. */
int canvas_fit_name(struct canvas *canvas, int row, int column, int width, enum style style,
                    const char *name);
/* Every cell of a style within the clip takes another. */
void canvas_restyle(struct canvas *canvas, enum style from, enum style to);
/* Blank cells from column on take a style, to the end of the row or clip. */
void canvas_fill(struct canvas *canvas, int row, int column, enum style style);

/* ---- pen -----------------------------------------------------------------------------------
 */

/* Writes lines from the top; the first scroll lines are passed over, those below are only
 * counted. chosen_from..chosen_to are the lines of the chosen row, which stays in sight. */
struct pen {
    struct canvas *canvas;
    struct area area;
    int scroll, line;
    int chosen_from, chosen_to;
};
/* Row of the next line on the canvas, or -1 (where nothing is drawn). */
int pen_line(struct pen *pen);
/* Lines of the chosen row begin, and have ended. */
void pen_chosen_begin(struct pen *pen);
void pen_chosen_end(struct pen *pen);
/* Text over as many lines as it needs; returns their number. */
int pen_wrap(struct pen *pen, int indent, enum style style, const char *text);
/* A label at column 3, then text from indent on, over as many lines as it needs. */
void pen_entry(struct pen *pen, int indent, const char *label, enum style style,
               const char *text);
/* Bytes of text that fit into width columns, broken at a space where there is one. */
size_t wrap_length(const struct canvas *canvas, const char *text, int width);

/* Parts that stay whole, one after the other, over as many lines as they need. */
struct flow {
    struct pen *pen;
    int indent, limit, column, row;
    bool begun, wanted; /* a part stands in the line; the next one goes into a new line */
};
/* Starts on a new line of the pen; limit is the column at which that first line ends. */
struct flow flow_begin(struct pen *pen, int indent, int limit);
void flow_part(struct flow *flow, const char *label, enum style style, const char *value);
/* The next part, if there is one, goes into a new line. */
void flow_line(struct flow *flow);

#endif
