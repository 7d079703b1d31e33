/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Private to the room: a panel is a const table entry over a shared state. It answers one
 * question.
 */
#ifndef ULLAGE_SCREEN_PANEL_H
#define ULLAGE_SCREEN_PANEL_H

#include "canvas.h"
#include "format.h"

/* What is kept of a panel between pictures. */
struct panel_state {
    int selected; /* row of a list, in panels that have one */
    int id;       /* what that row stood for when it was last drawn (id_of), or -1 */
    bool held;    /* the operator chose it: it keeps what it stands for when rows move */
    int scroll, lines, height; /* of the last drawing */
};

struct panel {
    const char *name;
    char key;
    const char *asks; /* the question it answers, for help */
    /* Rows that can be chosen; NULL: none, arrows scroll. */
    int (*count)(const struct view *view);
    /* Draws with the pen, which is told where the chosen row is: state->selected. */
    void (*draw)(const struct view *view, const struct panel_state *state, struct pen *pen);
    /* What a row stands for, in lists whose rows change places; NULL: row n is n. */
    int (*id_of)(const struct view *view, int row);
    /* Tag whose origin the why panel shows for a row, or -1; NULL: none. */
    int (*why)(const struct view *view, int row);
    /* Keys of its own; NULL: none. */
    enum screen_request (*key_pressed)(const struct view *view, struct panel_state *state,
                                       uint32_t key, struct command *command, char *message,
                                       size_t message_size);
};

extern const struct panel panel_ledgers, panel_hall, panel_alarms, panel_links, panel_points,
    panel_banners, panel_help, panel_why;
extern const struct panel *const panels[];
int panel_count(void);

/* Keys that mean the same everywhere; the help panel and the foot are made from this table. */
struct key_help {
    const char *keys, *does;
    const char *foot; /* short form for the foot, or NULL */
};
extern const struct key_help key_helps[];
int key_help_count(void);

/* ---- layout: what stands around a panel
 * -------------------------------------------------------- */

void layout_title(const struct view *view, struct canvas *canvas);
/* The banners and the advisory line from a row on; returns the first free row. */
int layout_banners(const struct view *view, struct canvas *canvas, int row);
void layout_foot(const struct panel *chosen, struct canvas *canvas);
/* The whole picture where there is no room for a panel. */
void layout_small(const struct view *view, struct canvas *canvas);

/* ---- needle and trend
 * -------------------------------------------------------------------------- */

enum { NEEDLE_COLUMNS = 25 };
/* A needle and the ledger's word behind it. live: what it stands for is known now. */
void needle_draw(const struct ledger *ledger, bool live, struct canvas *canvas, int row,
                 int column);
/* A curve of one row; columns without a value stay blank. False if there is none at all. */
bool trend_draw(const struct trend_column *column, int count, struct canvas *canvas, int row,
                int at, double *low, double *high);

/* ---- method: how a derived quantity is found, in one sentence
 * ------------------------------------ */

const char *method_says(enum derived_id id);

#endif
