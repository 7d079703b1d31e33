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

struct panel_state {
    int selected;              /* row of a list, in panels that have one */
    int scroll, lines, height; /* of the last drawing */
};

struct panel {
    const char *name;
    char key;
    const char *asks; /* the question it answers, for help */
    /* Rows that can be chosen; NULL: none, arrows scroll. */
    int (*count)(const struct view *view);
    /* Draws with the pen; the chosen row is state->selected. */
    void (*draw)(const struct view *view, const struct panel_state *state, struct pen *pen);
    /* Line on which a chosen row stands, to scroll to it; NULL: its own number. */
    int (*line_of)(const struct view *view, int row);
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

/* The tag whose origin panel_why shows; kept in its selected. */

#endif
