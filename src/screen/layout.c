/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * What stands around every panel: the title, the banners with the advisory line, the foot. The
 * advisory line and what is most serious never give way.
 */
#include <string.h>

#include "panel.h"

/* ---- title
 * -------------------------------------------------------------------------------------- */

static int unacknowledged(const struct view *view)
{
    if (view->alarms != NULL)
        return alarm_unacknowledged(view->alarms);
    return view->results != NULL ? view->results->unacknowledged : 0;
}

/* Where the numbers come from; a stopped source is told before all else. */
static void mode_text(char *dst, size_t size, const struct view *view)
{
    char age[32];
    time_format_span(age, sizeof(age), view->stale_s);
    if (!view->ready)
        text_copy(dst, size, "WAITING");
    else if (view->stale && view->stale_s > 0)
        text_format(dst, size, "STALE %s", age);
    else if (view->stale)
        text_copy(dst, size, "STALE, nothing read");
    else
        text_copy(dst, size, view_mode_word(view->mode));
}

enum { TITLE_STEPS = 4 };

/* The right part of the title, shorter with each step. */
static void title_text(char *dst, size_t size, const struct view *view, int step)
{
    static const char *const gaps[] = {"   ", "  ", " ", " "};
    char mode[48], clock[40] = "no frame yet";
    const char *gap = gaps[step];
    if (view->utc_ns != 0)
        format_clock(clock, sizeof(clock), view->utc_ns);
    mode_text(mode, sizeof(mode), view);
    const char *time = step == TITLE_STEPS - 1 && strlen(clock) > 11 ? clock + 11 : clock;
    text_format(dst, size, "%s%s%s%slinks %d/%d%salarms %d", mode, gap, time, gap,
                view->links_up, view->plant->link_count, gap, unacknowledged(view));
}

void layout_title(const struct view *view, struct canvas *canvas)
{
    char right[200] = "";
    int columns = canvas_columns(canvas), room = 0;
    const char *site = view->plant->site.name != NULL ? view->plant->site.name : "";
    enum style style = view->stale && view->ready ? STYLE_DANGER : STYLE_TITLE;
    for (int step = 0; step < TITLE_STEPS; step++) {
        title_text(right, sizeof(right), view, step);
        room = columns - canvas_width(canvas, right) - 2;
        if (room >= canvas_width(canvas, site))
            break;
    }
    canvas_fill(canvas, 0, 0, style);
    canvas_fit(canvas, 0, 0, room, style, site);
    canvas_text(canvas, 0, room + 2 > 0 ? room + 2 : 0, style, right);
}

/* ---- banners
 * ------------------------------------------------------------------------------------ */

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
        bool last = used + 1 == most;
        size_t length = wrap_length(canvas, at, columns - indent - (last ? 2 : 0));
        if (last && wrap_length(canvas, at, columns - indent) == strlen(at))
            length = strlen(at);
        char line[SCREEN_COLUMNS_MAX * 4 + 1];
        text_format(line, sizeof(line), "%s%.*s", prefix, (int)length, at);
        int end = canvas_text(canvas, row + used, 0, style, line);
        at += length;
        while (*at == ' ')
            at++;
        if (last && *at != '\0')
            end = canvas_text(canvas, row + used, end, style, " …");
        if (style == STYLE_DANGER)
            canvas_fill(canvas, row + used, end, style);
        used++;
    }
    return used;
}

static int draw_stale(const struct view *view, struct canvas *canvas, int row)
{
    if (!view->stale || !view->ready)
        return 0;
    return draw_wrapped(
        canvas, row, 2, "!! ", STYLE_DANGER,
        "NOTHING HERE IS LIVE: no reading arrives. Old values are shown dim. Act "
        "on site rules and local instruments.");
}

int layout_banners(const struct view *view, struct canvas *canvas, int row)
{
    int rows = canvas_rows(canvas), room = rows >= 40 ? 8 : rows >= 30 ? 6 : 4, shown = 0;
    const struct banner_list *banners = view->results != NULL ? &view->results->banners : NULL;
    row += draw_stale(view, canvas, row);
    for (int i = 0; banners != NULL && i < banners->count && room > 0; i++) {
        const struct banner *banner = &banners->at[i];
        int most = shown > 0 ? 2 : rows >= 40 ? 6 : 3;
        if (shown > 0 && most > room)
            break;
        int used =
            draw_wrapped(canvas, row, most, banner->level == BANNER_DANGER ? "!! " : "!  ",
                         banner_style(banner->level), banner->text);
        row += used;
        room -= used;
        shown++;
    }
    int more = banners != NULL ? banners->count + banners->more - shown : 0;
    if (more > 0)
        canvas_format(canvas, row++, 0, STYLE_CAUTION, "!  and %d more; key b lists them all",
                      more);
    char advisory[320];
    banner_advisory(advisory, sizeof(advisory), view->plant);
    return row + draw_wrapped(canvas, row, 3, "", STYLE_ADVISORY, advisory);
}

/* ---- foot
 * ---------------------------------------------------------------------------------------- */

void layout_foot(const struct panel *chosen, struct canvas *canvas)
{
    int row = canvas_rows(canvas) - 1, column = 0;
    for (int i = 0; i < panel_count(); i++) {
        if (panels[i] == &panel_why)
            continue;
        const char *name = panels[i] == &panel_help ? "keys" : panels[i]->name;
        column = canvas_format(canvas, row, column,
                               panels[i] == chosen ? STYLE_SELECTED : STYLE_FAINT, "%c %s",
                               panels[i]->key, name) +
                 2;
    }
    for (int i = 0; i < key_help_count(); i++)
        if (key_helps[i].foot != NULL)
            column = canvas_text(canvas, row, column, STYLE_FAINT, key_helps[i].foot) + 2;
}

void layout_small(const struct view *view, struct canvas *canvas)
{
    char text[160];
    int rows = canvas_rows(canvas);
    text_format(text, sizeof(text), "ADVISORY ONLY. %dx%d is too small; %dx%d is needed.",
                canvas_columns(canvas), rows, SCREEN_COLUMNS_MIN, SCREEN_ROWS_MIN);
    int row = draw_wrapped(canvas, 0, rows, "", STYLE_STRONG, text);
    row += draw_stale(view, canvas, row);
    const struct banner_list *banners = view->results != NULL ? &view->results->banners : NULL;
    for (int i = 0; banners != NULL && i < banners->count && row < rows; i++)
        row += draw_wrapped(canvas, row, rows - row, "", banner_style(banners->at[i].level),
                            banners->at[i].text);
}
