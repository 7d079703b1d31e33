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
    bool ascii;
    int panel, before;
    struct panel_state state[PANEL_MAX];
    char message[160];
};

int screen_create(bool ascii, struct screen **out, struct error *err)
{
    struct screen *screen = calloc(1, sizeof(*screen));
    if (screen == NULL)
        return error_set(err, ERR_MEMORY, "no memory for the screen");
    screen->ascii = ascii;
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

static void draw_title(const struct view *view, struct canvas *canvas)
{
    char right[160], clock[40] = "no frame yet", mode[48];
    int columns = canvas_columns(canvas);
    if (view->utc_ns != 0)
        format_clock(clock, sizeof(clock), view->utc_ns);
    text_copy(mode, sizeof(mode), view_mode_word(view->mode));
    if (!view->ready) {
        text_copy(mode, sizeof(mode), "WAITING");
    } else if (view->stale) {
        char age[32];
        time_format_span(age, sizeof(age), view->stale_s);
        if (view->stale_s > 0)
            text_format(mode, sizeof(mode), "STALE %s", age);
        else
            text_copy(mode, sizeof(mode), "STALE, nothing read");
    }
    int alarms = view->alarms != NULL    ? alarm_unacknowledged(view->alarms)
                 : view->results != NULL ? view->results->unacknowledged
                                         : 0;
    text_format(right, sizeof(right), "  %s  %s   links %d/%d   alarms %d", mode, clock,
                view->links_up, view->plant->link_count, alarms);
    enum style style = view->stale && view->ready ? STYLE_DANGER : STYLE_TITLE;
    for (int column = 0; column < columns; column++)
        canvas_text(canvas, 0, column, style, " ");
    canvas_text(canvas, 0, 0, style,
                view->plant->site.name != NULL ? view->plant->site.name : "");
    int start = columns - (int)strlen(right);
    canvas_text(canvas, 0, start > 0 ? start : 0, style, right);
}

static enum style banner_style(enum banner_level level)
{
    switch (level) {
    case BANNER_DANGER:
        return STYLE_DANGER;
    case BANNER_CAUTION:
        return STYLE_CAUTION;
    case BANNER_NOTE:
        break;
    }
    return STYLE_NORMAL;
}

/* Writes text from a row on, each line behind prefix, at most most lines; the cut is shown. */
static int draw_wrapped(struct canvas *canvas, int row, int most, const char *prefix,
                        enum style style, const char *text)
{
    int columns = canvas_columns(canvas), indent = (int)strlen(prefix), used = 0;
    const char *at = text;
    while (*at != '\0' && used < most) {
        size_t length = wrap_length(at, columns - indent - 1);
        char line[SCREEN_COLUMNS_MAX * 4 + 1];
        text_format(line, sizeof(line), "%s%.*s", prefix, (int)length, at);
        int end = canvas_text(canvas, row + used, 0, style, line);
        for (; style == STYLE_DANGER && end < columns; end++)
            canvas_text(canvas, row + used, end, style, " ");
        at += length;
        while (*at == ' ')
            at++;
        used++;
    }
    if (*at != '\0' && used > 0)
        canvas_text(canvas, row + used - 1, columns - 1, style, "…");
    return used;
}

/* The banners and the advisory line; returns the first free row. */
static int draw_banners(const struct view *view, struct canvas *canvas)
{
    int row = 1, rows = canvas_rows(canvas);
    const struct banner_list *banners = view->results != NULL ? &view->results->banners : NULL;
    int room = rows >= 40 ? 8 : rows >= 30 ? 6 : 4;
    if (view->stale && view->ready)
        row +=
            draw_wrapped(canvas, row, 2, "!! ", STYLE_DANGER,
                         "NOTHING HERE IS LIVE: no reading arrives. Old values are shown dim. "
                         "Act on site rules and local instruments.");
    int shown = 0;
    for (int i = 0; banners != NULL && i < banners->count; i++) {
        const struct banner *banner = &banners->at[i];
        int most = shown == 0 ? (rows >= 40 ? 6 : 3) : 2;
        if (most > room)
            break;
        const char *prefix = banner->level == BANNER_DANGER ? "!! " : "!  ";
        int used =
            draw_wrapped(canvas, row, most, prefix, banner_style(banner->level), banner->text);
        row += used;
        room -= used;
        shown++;
    }
    if (banners != NULL && banners->count + banners->more > shown)
        canvas_format(canvas, row++, 0, STYLE_CAUTION, "!  and %d more; key b lists them all",
                      banners->count + banners->more - shown);
    char advisory[320];
    banner_advisory(advisory, sizeof(advisory), view->plant);
    return row + draw_wrapped(canvas, row, 3, "", STYLE_ADVISORY, advisory);
}

static void draw_foot(const struct screen *screen, struct canvas *canvas)
{
    int row = canvas_rows(canvas) - 1, column = 0;
    int gap = canvas_columns(canvas) >= 100 ? 3 : 1;
    for (int i = 0; i < panel_count(); i++) {
        if (panels[i] == &panel_why)
            continue;
        enum style style = i == screen->panel ? STYLE_STRONG : STYLE_FAINT;
        const char *name = panels[i] == &panel_help ? "keys" : panels[i]->name;
        column = canvas_format(canvas, row, column, style, "%c %s", panels[i]->key, name);
        column += gap;
    }
    for (int i = 0; i < key_help_count(); i++)
        if (key_helps[i].foot != NULL)
            column = canvas_text(canvas, row, column, STYLE_FAINT, key_helps[i].foot) + gap;
}

/* Keeps the scroll within the last drawing's lines. */
static void hold_scroll(struct panel_state *state)
{
    int most = state->lines - state->height;
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
    if (panel->count != NULL) {
        int count = panel->count(view);
        if (state->selected >= count)
            state->selected = count > 0 ? count - 1 : 0;
    }
    state->height = area->rows;
    /* Drawn twice when its lines are fewer than the scroll believed: the second is the picture.
     */
    for (int pass = 0; pass < 2; pass++) {
        struct pen pen = {.canvas = canvas, .area = *area, .scroll = state->scroll};
        canvas_clip(canvas, area);
        for (int row = 0; row < area->rows; row++)
            for (int column = 0; column < area->columns; column++)
                canvas_text(canvas, area->row + row, area->column + column, STYLE_NORMAL, " ");
        panel->draw(view, state, &pen);
        canvas_clip(canvas, NULL);
        state->lines = pen.line;
        int before = state->scroll;
        hold_scroll(state);
        if (before == state->scroll)
            break;
    }
}

void screen_draw(struct screen *screen, const struct view *view, struct canvas *canvas)
{
    int columns = canvas_columns(canvas), rows = canvas_rows(canvas);
    canvas_clear(canvas);
    if (columns < SCREEN_COLUMNS_MIN || rows < SCREEN_ROWS_MIN) {
        canvas_format(canvas, 0, 0, STYLE_STRONG, "%dx%d is too small;", columns, rows);
        canvas_format(canvas, 1, 0, STYLE_STRONG, "%dx%d is needed.", SCREEN_COLUMNS_MIN,
                      SCREEN_ROWS_MIN);
        canvas_text(canvas, 2, 0, STYLE_ADVISORY, "ADVISORY ONLY.");
        return;
    }
    draw_title(view, canvas);
    int top = draw_banners(view, canvas) + 1;
    struct area area = {.row = top, .rows = rows - 1 - top, .columns = columns};
    if (screen->message[0] != '\0') {
        area.rows--;
        canvas_text(canvas, rows - 2, 0, STYLE_STRONG, screen->message);
    }
    if (!view->ready)
        canvas_text(canvas, top, 1, STYLE_NORMAL, "Waiting for the first whole frame.");
    else
        draw_panel(screen, view, canvas, &area);
    const struct panel_state *state = &screen->state[screen->panel];
    if (view->ready && state->lines > state->scroll + area.rows)
        canvas_text(canvas, top + area.rows - 1, columns - 6, STYLE_STRONG, " more ");
    draw_foot(screen, canvas);
}

/* ---- keys
 * ------------------------------------------------------------------------------------ */

static void move(const struct panel *panel, const struct view *view, struct panel_state *state,
                 int by)
{
    int count = panel->count != NULL ? panel->count(view) : 0;
    if (panel->count == NULL || panel == &panel_why) {
        state->scroll += by;
        hold_scroll(state);
        return;
    }
    long wanted = (long)state->selected + by;
    state->selected = wanted < 0        ? 0
                      : wanted >= count ? (count > 0 ? count - 1 : 0)
                                        : (int)wanted;
    int line = panel->line_of != NULL ? panel->line_of(view, state->selected) : state->selected;
    if (line < state->scroll + 1)
        state->scroll = line > 0 ? line - 1 : 0;
    if (line + 4 > state->scroll + state->height)
        state->scroll = line + 4 - state->height;
    hold_scroll(state);
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
    case SCREEN_KEY_TAB:
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
