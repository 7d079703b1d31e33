/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The screen: which panel, which row, and the frame around it: title, banners, advisory line,
 * panel, message, foot. A picture is a function of this state and the view.
 */
#include <stdlib.h>
#include <string.h>

#include "panel.h"

enum { PANEL_MAX = 16 };

struct screen {
    int panel, before;
    struct panel_state state[PANEL_MAX];
    char message[160];
};

int screen_create(struct screen **out, struct error *err)
{
    struct screen *screen = calloc(1, sizeof(*screen));
    if (screen == NULL)
        return error_set(err, ERR_MEMORY, "no memory for the screen");
    *out = screen;
    return 0;
}

void screen_free(struct screen *screen)
{
    free(screen);
}

const char *screen_panel_name(int index)
{
    return index >= 0 && index < panel_count() ? panels[index]->name : NULL;
}

static void open_panel(struct screen *screen, int index)
{
    if (panels[screen->panel] != &panel_why && panels[screen->panel] != &panel_help)
        screen->before = screen->panel;
    screen->panel = index;
    screen->state[index] = (struct panel_state){.id = -1};
}

static int index_of(const struct panel *panel)
{
    for (int i = 0; i < panel_count(); i++)
        if (panels[i] == panel)
            return i;
    return 0;
}

int screen_panel(struct screen *screen, const char *name, struct error *err)
{
    const char *names[PANEL_MAX];
    for (int i = 0; i < panel_count(); i++) {
        names[i] = panels[i]->name;
        if (strcmp(panels[i]->name, name) == 0) {
            open_panel(screen, i);
            return 0;
        }
    }
    const char *near = text_nearest(name, names, (size_t)panel_count());
    char all[160] = "";
    for (int i = 0; i < panel_count(); i++)
        text_format(all + strlen(all), sizeof(all) - strlen(all), "%s%s", i > 0 ? " " : "",
                    names[i]);
    if (near != NULL)
        return error_set(err, ERR_ARGUMENT, "there is no panel '%s'; did you mean '%s'?", name,
                         near);
    return error_set(err, ERR_ARGUMENT, "there is no panel '%s'; one of: %s", name, all);
}

void screen_message(struct screen *screen, const char *text)
{
    text_printable(screen->message, sizeof(screen->message), text);
}

/* ---- drawing
 * --------------------------------------------------------------------------------- */

/* The chosen row keeps what it stands for where rows change places; until the operator has
 * chosen, it is the first. */
static void hold_choice(const struct panel *panel, const struct view *view,
                        struct panel_state *state)
{
    int count = panel->count != NULL ? panel->count(view) : 0;
    if (panel->count == NULL || panel == &panel_why)
        return;
    if (panel->id_of != NULL) {
        int wanted = state->selected;
        state->selected = 0;
        for (int row = 0; state->held && row < count; row++)
            if (panel->id_of(view, row) == state->id) {
                wanted = row;
                break;
            }
        if (state->held)
            state->selected = wanted;
    }
    state->selected = state->selected < count ? state->selected : count > 0 ? count - 1 : 0;
    state->id = panel->id_of == NULL ? state->selected
                : count > 0          ? panel->id_of(view, state->selected)
                                     : -1;
}

/* Scrolls no further than the lines go, and so that the chosen row is in sight. */
static void hold_scroll(struct panel_state *state, const struct pen *pen, bool first, bool last)
{
    int most = state->lines - state->height;
    if (pen != NULL && pen->chosen_to > pen->chosen_from) {
        int from = first ? 0 : pen->chosen_from, to = last ? state->lines : pen->chosen_to;
        if (to > state->scroll + state->height)
            state->scroll = to - state->height;
        if (from < state->scroll)
            state->scroll = from;
        if (pen->chosen_from < state->scroll)
            state->scroll = pen->chosen_from;
    }
    if (state->scroll > most)
        state->scroll = most;
    if (state->scroll < 0)
        state->scroll = 0;
}

static void draw_panel(struct screen *screen, const struct view *view, struct canvas *canvas,
                       const struct area *area)
{
    const struct panel *panel = panels[screen->panel];
    struct panel_state *state = &screen->state[screen->panel];
    hold_choice(panel, view, state);
    state->height = area->rows;
    canvas_clip(canvas, area);
    /* Drawn once more when it turns out that another part of it has to be in sight. */
    for (int pass = 0; pass < 2; pass++) {
        struct pen pen = {.canvas = canvas, .area = *area, .scroll = state->scroll};
        for (int row = 0; row < area->rows; row++)
            canvas_fill(canvas, area->row + row, area->column, STYLE_NORMAL);
        panel->draw(view, state, &pen);
        state->lines = pen.line;
        int before = state->scroll;
        bool last = panel->count != NULL && state->selected == panel->count(view) - 1;
        hold_scroll(state, &pen, state->selected == 0, last);
        if (before == state->scroll)
            break;
    }
    if (view->stale) {
        canvas_restyle(canvas, STYLE_NORMAL, STYLE_STALE);
        canvas_restyle(canvas, STYLE_STRONG, STYLE_STALE);
    }
    canvas_clip(canvas, NULL);
}

/* The line above the foot: a message, and whether the panel goes on. */
static void draw_message(const struct screen *screen, struct canvas *canvas, int row)
{
    const struct panel_state *state = &screen->state[screen->panel];
    int below = state->lines - state->scroll - state->height;
    char more[80] = "";
    if (state->scroll > 0 && below > 0)
        text_format(more, sizeof(more), "%d lines above, %d below", state->scroll, below);
    else if (below > 0)
        text_format(more, sizeof(more), "%d more line%s below", below, below == 1 ? "" : "s");
    else if (state->scroll > 0)
        text_format(more, sizeof(more), "%d line%s above", state->scroll,
                    state->scroll == 1 ? "" : "s");
    int start = canvas_columns(canvas) - (int)strlen(more) - 1;
    canvas_fit(canvas, row, 0, start - 2, STYLE_STRONG, screen->message);
    canvas_text(canvas, row, start, STYLE_FAINT, more);
}

void screen_draw(struct screen *screen, const struct view *view, struct canvas *canvas)
{
    int columns = canvas_columns(canvas), rows = canvas_rows(canvas);
    canvas_clear(canvas);
    if (columns < SCREEN_COLUMNS_MIN || rows < SCREEN_ROWS_MIN) {
        layout_small(view, canvas);
        return;
    }
    layout_title(view, canvas);
    int top = layout_banners(view, canvas, 1) + 1;
    struct area area = {.row = top, .rows = rows - 2 - top, .columns = columns};
    if (view->ready) {
        draw_panel(screen, view, canvas, &area);
        draw_message(screen, canvas, rows - 2);
    } else {
        canvas_text(canvas, top, 1, STYLE_NORMAL, "Waiting for the first whole frame.");
    }
    layout_foot(panels[screen->panel], canvas);
}

/* ---- keys
 * ------------------------------------------------------------------------------------ */

static void move(const struct panel *panel, const struct view *view, struct panel_state *state,
                 int by)
{
    if (panel->count == NULL || panel == &panel_why) {
        state->scroll += by;
        hold_scroll(state, NULL, false, false);
        return;
    }
    hold_choice(panel, view, state);
    int count = panel->count(view);
    long wanted = (long)state->selected + by;
    state->selected = wanted < 0        ? 0
                      : wanted >= count ? (count > 0 ? count - 1 : 0)
                                        : (int)wanted;
    state->held = state->selected > 0;
    if (panel->id_of != NULL && count > 0)
        state->id = panel->id_of(view, state->selected);
}

static void open_why(struct screen *screen, const struct view *view)
{
    const struct panel *panel = panels[screen->panel];
    if (panel == &panel_why) {
        screen->panel = screen->before;
        return;
    }
    int tag = panel->why != NULL ? panel->why(view, screen->state[screen->panel].selected) : -1;
    if (tag < 0) {
        screen_message(screen,
                       "no number is chosen here; choose a row in ledgers or points, then w");
        return;
    }
    int why = index_of(&panel_why);
    open_panel(screen, why);
    screen->state[why] = (struct panel_state){.selected = tag};
}

static enum screen_request common_key(struct screen *screen, const struct view *view,
                                      uint32_t key)
{
    const struct panel *panel = panels[screen->panel];
    struct panel_state *state = &screen->state[screen->panel];
    int page = state->height > 2 ? state->height - 2 : 1;
    switch (key) {
    case 'q':
        return SCREEN_QUIT;
    case 'w':
        open_why(screen, view);
        return SCREEN_REDRAW;
    case SCREEN_KEY_ESCAPE:
        if (panel == &panel_why || panel == &panel_help)
            screen->panel = screen->before;
        return SCREEN_REDRAW;
    case SCREEN_KEY_TAB: /* why, the last of the table, is no panel of its own */
        if (panel == &panel_why)
            screen->panel = screen->before;
        open_panel(screen, (screen->panel + 1) % (panel_count() - 1));
        return SCREEN_REDRAW;
    case SCREEN_KEY_UP:
        move(panel, view, state, -1);
        return SCREEN_REDRAW;
    case SCREEN_KEY_DOWN:
        move(panel, view, state, 1);
        return SCREEN_REDRAW;
    case SCREEN_KEY_PAGE_UP:
        move(panel, view, state, -page);
        return SCREEN_REDRAW;
    case SCREEN_KEY_PAGE_DOWN:
        move(panel, view, state, page);
        return SCREEN_REDRAW;
    case SCREEN_KEY_HOME:
        move(panel, view, state, -1000000);
        return SCREEN_REDRAW;
    case SCREEN_KEY_END:
        move(panel, view, state, 1000000);
        return SCREEN_REDRAW;
    case 0x0C: /* Ctrl-L */
    case SCREEN_KEY_RESIZE:
        return SCREEN_REDRAW;
    default:
        break;
    }
    for (int i = 0; i < panel_count(); i++)
        if (panels[i] != &panel_why && key == (uint32_t)panels[i]->key) {
            open_panel(screen, i);
            return SCREEN_REDRAW;
        }
    return SCREEN_NONE;
}

enum screen_request screen_key(struct screen *screen, const struct view *view, uint32_t key,
                               struct command *command)
{
    const struct panel *panel = panels[screen->panel];
    screen->message[0] = '\0';
    if (!view->ready)
        return key == 'q' ? SCREEN_QUIT : SCREEN_NONE;
    enum screen_request request = SCREEN_NONE;
    if (panel->key_pressed != NULL)
        request = panel->key_pressed(view, &screen->state[screen->panel], key, command,
                                     screen->message, sizeof(screen->message));
    return request != SCREEN_NONE ? request : common_key(screen, view, key);
}
