/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * screen: what an operator sees. Panels draw into a canvas (a grid of cells) from a const view;
 * a layout frames them with title, banner lines and foot; a back end puts the canvas on a
 * terminal (ncurses) or writes it as text. No panel reads a clock or computes a plant quantity.
 */
#ifndef ULLAGE_SCREEN_H
#define ULLAGE_SCREEN_H

#include <stdbool.h>
#include <stdint.h>
#include <stdio.h>

#include "ullage/base.h"
#include "ullage/service.h"

enum {
    SCREEN_COLUMNS_MIN = 80,
    SCREEN_ROWS_MIN = 24,
    SCREEN_COLUMNS_MAX = 500,
    SCREEN_ROWS_MAX = 200
};

/* ---- canvas --------------------------------------------------------------------------------
 */

/* Styles by meaning; a back end decides what each looks like. */
#define STYLE_LIST(X)                                                                          \
    X(NORMAL, '.')   /* text */                                                                \
    X(STRONG, '*')   /* the number that matters */                                             \
    X(FAINT, ',')    /* labels, units, decoration */                                           \
    X(TITLE, 'T')    /* the top line */                                                        \
    X(ADVISORY, 'a') /* the advisory line */                                                   \
    X(STALE, '~')    /* an old value */                                                        \
    X(BAD, '!')      /* a bad or missing value */                                              \
    X(CAUTION, 'c')  /* caution, priority 3 and 4 */                                           \
    X(ALARM, 'A')    /* alarm, priority 2 */                                                   \
    X(DANGER, 'D')   /* danger, priority 1, danger banners */                                  \
    X(SELECTED, 's') /* the chosen row */

#define X(id, mark) STYLE_##id,
enum style { STYLE_LIST(X) STYLE_COUNT };
#undef X

struct cell {
    uint32_t rune; /* Unicode code point; 0: right half of a wide character */
    enum style style;
};
struct canvas;
/* ascii: every rune outside ASCII is replaced by a sensible one when set. */
int canvas_create(int columns, int rows, bool ascii, struct canvas **out,
                  struct error *err) MUST_CHECK;
void canvas_free(struct canvas *canvas);
int canvas_columns(const struct canvas *canvas);
int canvas_rows(const struct canvas *canvas);
void canvas_clear(struct canvas *canvas);
const struct cell *canvas_cell(const struct canvas *canvas, int row, int column);
/* Text at row, column, clipped at the canvas; UTF-8, made printable. Returns the column after.
 */
int canvas_text(struct canvas *canvas, int row, int column, enum style style, const char *text);
int canvas_format(struct canvas *canvas, int row, int column, enum style style, const char *fmt,
                  ...) PRINTF_LIKE(5, 6);
/* Writes the canvas as UTF-8 (or ASCII) lines without trailing blanks. */
void canvas_write(const struct canvas *canvas, FILE *out);
/* The style plane: one mark per cell, for tests. */
void canvas_write_styles(const struct canvas *canvas, FILE *out);

/* ---- screen ---------------------------------------------------------------------------------
 */

/* What is on screen besides the view: chosen panel, selection, scroll, help. */
struct screen;
int screen_create(struct screen **out, struct error *err) MUST_CHECK;
void screen_free(struct screen *screen);
/* Chooses a panel by name. 0 or ERR_ARGUMENT with the nearest name. */
int screen_panel(struct screen *screen, const char *name, struct error *err) MUST_CHECK;
/* Names of the panels, for --help and completion. */
const char *screen_panel_name(int index); /* NULL after the last */
/* Draws the whole picture: title, banners, panel, foot. */
void screen_draw(struct screen *screen, const struct view *view, struct canvas *canvas);

/* What a key asks of the program outside the screen. */
enum screen_request {
    SCREEN_NONE,
    SCREEN_REDRAW,
    SCREEN_QUIT,
    SCREEN_COMMAND /* *command holds what the operator wants (user is the caller's to set) */
};
/* One key: a Unicode code point, or one of the SCREEN_KEY_ values. */
enum screen_key {
    SCREEN_KEY_UP = 0x110000,
    SCREEN_KEY_DOWN,
    SCREEN_KEY_PAGE_UP,
    SCREEN_KEY_PAGE_DOWN,
    SCREEN_KEY_HOME,
    SCREEN_KEY_END,
    SCREEN_KEY_LEFT,
    SCREEN_KEY_RIGHT,
    SCREEN_KEY_ENTER,
    SCREEN_KEY_ESCAPE,
    SCREEN_KEY_TAB,
    SCREEN_KEY_RESIZE
};
enum screen_request screen_key(struct screen *screen, const struct view *view, uint32_t key,
                               struct command *command);
/* A short message at the foot ("acknowledged", "nothing to acknowledge"), until the next key.
 */
void screen_message(struct screen *screen, const char *text);

/* ---- terminal: the ncurses back end
 * ----------------------------------------------------------- */

struct terminal;
struct terminal_options {
    bool ascii, mono;
};
/* Takes the terminal (stdin, stdout). ERR_IO when there is none or TERM is unknown. */
int terminal_open(const struct terminal_options *options, struct terminal **out,
                  struct error *err) MUST_CHECK;
/* Gives the terminal back as it was. NULL is allowed. */
void terminal_close(struct terminal *terminal);
void terminal_size(const struct terminal *terminal, int *columns, int *rows);
bool terminal_ascii(
    const struct terminal *terminal); /* asked for, or the locale is not UTF-8 */
/* The next key waiting, or -1. Resizes arrive as SCREEN_KEY_RESIZE. */
int64_t terminal_key(struct terminal *terminal);
/* Shows the canvas; writes only what changed. */
void terminal_show(struct terminal *terminal, const struct canvas *canvas);

/* ---- dashboard: a collector on a terminal, or as one picture
 * ---------------------------------- */

struct dashboard_options {
    bool ascii, mono;
    const char *panel; /* NULL: the first */
    int columns, rows; /* of a printed picture; 0: the terminal's, or 80 x 24 */
    const char *user;  /* whose acknowledgements these are */
};
/* Shows a started collector until the operator quits or SIGINT, SIGTERM or SIGHUP arrives on
 * signals_fd. 0 or a negative code; the terminal is given back either way. */
int dashboard_run(struct collector *collector, const struct dashboard_options *options,
                  int signals_fd, struct error *err) MUST_CHECK;
/* Waits for the first whole frame, at most patience_s, and writes one picture to out. *well is
 * false while a safety banner (danger or caution) stands or the source is stale. */
int dashboard_print(struct collector *collector, const struct dashboard_options *options,
                    int signals_fd, double patience_s, FILE *out, bool *well,
                    struct error *err) MUST_CHECK;

#endif
