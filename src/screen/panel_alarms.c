/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * What wants an answer? Alarms in the order of their need: unacknowledged first, then priority.
 * The chosen one shows its consequence and response. An acknowledgement is for the alarm that
 * was shown as chosen, never for one that has taken its place since.
 */
#include <stdio.h>
#include <string.h>

#include "panel.h"

enum { ORDER_MAX = 4096, NAME = 17, WHAT = 42, TEXT = 17 };

static int count(const struct view *view)
{
    int alarms = view->alarms != NULL ? view->plant->alarm_count : 0;
    return alarms < ORDER_MAX ? alarms : 0;
}

/* Index of the alarm in a row of the list, or -1. */
static int alarm_at(const struct view *view, int row)
{
    int order[ORDER_MAX];
    if (row < 0 || row >= count(view))
        return -1;
    alarm_order(view->alarms, order);
    return order[row];
}

static const char *phase_word(const struct alarm_state *state)
{
    switch (state->phase) {
    case ALARM_ACTIVE:
        return "ACTIVE";
    case ALARM_ACKNOWLEDGED:
        return "acknowledged";
    case ALARM_RETURNED:
        return "returned";
    case ALARM_NORMAL:
        break;
    }
    return state->unknown ? "UNKNOWN" : "normal";
}

static enum style phase_style(const struct alarm *alarm, const struct alarm_state *state)
{
    if (state->phase == ALARM_NORMAL)
        return state->unknown ? STYLE_CAUTION : STYLE_FAINT;
    if (state->phase == ALARM_RETURNED)
        return STYLE_STRONG;
    return alarm->priority == 1   ? STYLE_DANGER
           : alarm->priority == 2 ? STYLE_ALARM
                                  : STYLE_CAUTION;
}

/* Since when, by whom, what is behind it: for the chosen alarm. */
static void draw_detail(const struct view *view, const struct alarm *alarm,
                        const struct alarm_state *state, struct pen *pen)
{
    char clock[40], text[800];
    const char *doubt = state->unknown ? "; its source is not good now" : "";
    if (state->active_utc_ns != 0 && state->phase != ALARM_NORMAL) {
        format_clock(clock, sizeof(clock), state->active_utc_ns);
        text_format(text, sizeof(text), "since %s%s%s%s", clock,
                    state->user[0] != '\0' ? ", acknowledged by " : "", state->user, doubt);
        pen_wrap(pen, TEXT, STYLE_NORMAL, text);
    } else if (state->unknown) {
        pen_wrap(pen, TEXT, STYLE_CAUTION,
                 "its source is not good: whether all is well cannot be "
                 "told");
    }
    format_tag(text, sizeof(text), view, alarm->watch, true);
    char now[900];
    text_format(now, sizeof(now), "%s now: %s", plant_tag_name(view->plant, alarm->watch),
                text);
    pen_wrap(pen, TEXT, STYLE_NORMAL, now);
    text_format(text, sizeof(text), "consequence: %s",
                alarm->consequence != NULL ? alarm->consequence
                                           : "not given in the plant file");
    pen_wrap(pen, TEXT, STYLE_NORMAL, text);
    text_format(text, sizeof(text), "response: %s",
                alarm->response != NULL ? alarm->response : "by site procedure");
    pen_wrap(pen, TEXT, STYLE_NORMAL, text);
}

static void draw_row(const struct view *view, int index, bool chosen, struct pen *pen)
{
    const struct alarm *alarm = &view->plant->alarm[index];
    const struct alarm_state *state = alarm_state(view->alarms, index);
    char limit[120], what[200];
    alarm_limit_text(limit, sizeof(limit), view->plant, alarm);
    text_format(what, sizeof(what), "%s %s", plant_tag_name(view->plant, alarm->watch), limit);
    int row = pen_line(pen);
    canvas_text(pen->canvas, row, 0, STYLE_STRONG, chosen ? "▸" : " ");
    canvas_format(pen->canvas, row, 1, phase_style(alarm, state), "%d %-12s", alarm->priority,
                  phase_word(state));
    canvas_fit_name(pen->canvas, row, NAME, WHAT - NAME - 1, STYLE_NORMAL, alarm->name);
    /* What does not fit beside the name has a line of its own. */
    int room = pen->area.columns - WHAT - 1;
    if (canvas_width(pen->canvas, what) <= room)
        canvas_text(pen->canvas, row, WHAT, STYLE_NORMAL, what);
    else if (chosen)
        pen_wrap(pen, TEXT, STYLE_NORMAL, what);
    else
        canvas_fit(pen->canvas, row, WHAT, room, STYLE_NORMAL,
                   plant_tag_name(view->plant, alarm->watch));
    if (chosen)
        draw_detail(view, alarm, state, pen);
}

static void draw(const struct view *view, const struct panel_state *state, struct pen *pen)
{
    int order[ORDER_MAX], rows = count(view);
    if (rows == 0) {
        pen_wrap(pen, 1, STYLE_NORMAL,
                 view->plant->alarm_count == 0 ? "No alarm is described."
                                               : "The alarms cannot be shown here.");
        return;
    }
    alarm_order(view->alarms, order);
    int head = pen_line(pen);
    canvas_text(pen->canvas, head, 1, STYLE_FAINT, "P state");
    canvas_text(pen->canvas, head, NAME, STYLE_FAINT, "alarm");
    canvas_text(pen->canvas, head, WHAT, STYLE_FAINT, "what it waits for");
    for (int i = 0; i < rows; i++) {
        if (i == state->selected)
            pen_chosen_begin(pen);
        draw_row(view, order[i], i == state->selected, pen);
        if (i == state->selected)
            pen_chosen_end(pen);
    }
}

static int why(const struct view *view, int row)
{
    int index = alarm_at(view, row);
    return index >= 0 ? view->plant->alarm[index].watch : -1;
}

static bool waits(const struct view *view, int index)
{
    enum alarm_phase phase = alarm_state(view->alarms, index)->phase;
    return phase == ALARM_ACTIVE || phase == ALARM_RETURNED;
}

static enum screen_request acknowledge_all(const struct view *view, struct command *command,
                                           char *message, size_t message_size)
{
    int found = 0, highest = 0;
    for (int i = 0; i < count(view); i++)
        if (waits(view, i))
            *(view->plant->alarm[i].priority > 1 ? &found : &highest) += 1;
    text_format(message, message_size, "%d acknowledged%s", found,
                highest > 0 ? "; priority 1 only one by one, with a" : "");
    if (found == 0) {
        text_copy(message, message_size,
                  highest > 0 ? "priority 1 is acknowledged one by one, with a"
                              : "nothing to acknowledge");
        return SCREEN_REDRAW;
    }
    *command = (struct command){.kind = COMMAND_ACKNOWLEDGE_ALL, .alarm = 1};
    return SCREEN_COMMAND;
}

static enum screen_request key_pressed(const struct view *view, struct panel_state *state,
                                       uint32_t key, struct command *command, char *message,
                                       size_t message_size)
{
    if (key != 'a' && key != 'A')
        return SCREEN_NONE;
    if (view->mode == VIEW_REPLAY) {
        text_copy(message, message_size, "this is a record: nothing can be acknowledged in it");
        return SCREEN_REDRAW;
    }
    if (key == 'A')
        return acknowledge_all(view, command, message, message_size);
    if (state->id < 0 || state->id >= count(view)) {
        text_copy(message, message_size,
                  "no alarm was shown as chosen yet; look, then press a");
        return SCREEN_REDRAW;
    }
    const char *name = view->plant->alarm[state->id].name;
    if (!waits(view, state->id)) {
        text_format(message, message_size, "%s: nothing to acknowledge", name);
        return SCREEN_REDRAW;
    }
    *command = (struct command){.kind = COMMAND_ACKNOWLEDGE, .alarm = state->id};
    text_format(message, message_size, "%s acknowledged", name);
    return SCREEN_COMMAND;
}

const struct panel panel_alarms = {
    .name = "alarms",
    .key = '5',
    .asks = "what wants an answer?",
    .count = count,
    .id_of = alarm_at,
    .why = why,
    .draw = draw,
    .key_pressed = key_pressed,
};
