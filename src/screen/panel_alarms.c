/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * What wants an answer? Alarms in the order of their need: unacknowledged first, then priority.
 * The chosen one shows its consequence and response.
 */
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "panel.h"

enum { ORDER_MAX = 20000 };

static int count(const struct view *view)
{
    return view->alarms != NULL ? view->plant->alarm_count : 0;
}

/* Index of the alarm in a row of the list, or -1. */
static int alarm_at(const struct view *view, int row)
{
    static _Thread_local int order[ORDER_MAX];
    if (row < 0 || row >= count(view) || view->plant->alarm_count > ORDER_MAX)
        return -1;
    alarm_order(view->alarms, order);
    return order[row];
}

static const char *phase_word(const struct alarm_state *state)
{
    if (state->phase == ALARM_NORMAL && state->unknown)
        return "UNKNOWN";
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
    return "normal";
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

static void describe(const struct view *view, const struct alarm *alarm, char *dst, size_t size)
{
    static const char *const words[] = {
        [ALARM_ABOVE] = "above",
        [ALARM_BELOW] = "below",
        [ALARM_OUTSIDE] = "outside",
        [ALARM_IS_BAD] = "is bad",
        [ALARM_IS_ON] = "is on",
        [ALARM_IS_OFF] = "is off",
        [ALARM_RISING_FASTER] = "rises fast",
        [ALARM_FALLING_FASTER] = "falls fast",
    };
    const char *name = plant_tag_name(view->plant, alarm->watch);
    bool limit = alarm->condition == ALARM_ABOVE || alarm->condition == ALARM_BELOW;
    struct unit unit = *plant_tag_shown(view->plant, alarm->watch);
    double value = alarm->condition == ALARM_ABOVE ? alarm->high : alarm->low;
    if (unit.gauge != alarm->limit_gauge)
        text_copy(unit.symbol, sizeof(unit.symbol), "Pa");
    else if (!unit.gauge)
        unit = shown_unit(&unit, value);
    if (limit)
        text_format(dst, size, "%s %s %g %s", name, words[alarm->condition],
                    unit_from_si(&unit, value), unit.symbol);
    else
        text_format(dst, size, "%s %s", name, words[alarm->condition]);
}

static void draw_row(const struct view *view, int index, bool chosen, struct pen *pen)
{
    const struct alarm *alarm = &view->plant->alarm[index];
    const struct alarm_state *state = alarm_state(view->alarms, index);
    char what[120], clock[40] = "", user[48] = "";
    describe(view, alarm, what, sizeof(what));
    if (state->active_utc_ns != 0 && state->phase != ALARM_NORMAL)
        format_clock(clock, sizeof(clock), state->active_utc_ns);
    if (state->user[0] != '\0' && state->phase == ALARM_ACKNOWLEDGED)
        text_format(user, sizeof(user), " by %s", state->user);
    int row = pen_line(pen);
    canvas_text(pen->canvas, row, 0, STYLE_STRONG, chosen ? "▸" : " ");
    canvas_format(pen->canvas, row, 1, phase_style(alarm, state), "%d %-12s", alarm->priority,
                  phase_word(state));
    canvas_format(pen->canvas, row, 17, STYLE_NORMAL, "%-24s %s", alarm->name, what);
    if (chosen && clock[0] != '\0')
        canvas_format(pen->canvas, pen_line(pen), 17, STYLE_NORMAL, "since %s%s%s", clock, user,
                      state->unknown ? "; its source is not good now" : "");
    if (!chosen)
        return;
    char text[600];
    text_format(text, sizeof(text), "consequence: %s",
                alarm->consequence != NULL ? alarm->consequence
                                           : "not given in the plant file");
    pen_wrap(pen, 17, STYLE_NORMAL, text);
    text_format(text, sizeof(text), "response: %s",
                alarm->response != NULL ? alarm->response : "by site procedure");
    pen_wrap(pen, 17, STYLE_NORMAL, text);
}

static void draw(const struct view *view, const struct panel_state *state, struct pen *pen)
{
    canvas_format(pen->canvas, pen_line(pen), 1, STYLE_FAINT, "%-15s %-24s %s", "P state",
                  "alarm", "what it watches");
    for (int i = 0; i < count(view); i++) {
        int index = alarm_at(view, i);
        if (index >= 0)
            draw_row(view, index, i == state->selected, pen);
    }
    if (count(view) == 0)
        canvas_text(pen->canvas, pen_line(pen), 1, STYLE_NORMAL, "No alarm is described.");
}

static int line_of(const struct view *view, int row)
{
    (void)view;
    return row + 1;
}

static int why(const struct view *view, int row)
{
    int index = alarm_at(view, row);
    return index >= 0 ? view->plant->alarm[index].watch : -1;
}

static enum screen_request key_pressed(const struct view *view, struct panel_state *state,
                                       uint32_t key, struct command *command, char *message,
                                       size_t message_size)
{
    if (key == 'A') {
        *command = (struct command){.kind = COMMAND_ACKNOWLEDGE_ALL, .alarm = 1};
        text_copy(message, message_size,
                  "all below priority 1 acknowledged; those of priority 1 one by one with a");
        return SCREEN_COMMAND;
    }
    if (key != 'a')
        return SCREEN_NONE;
    int index = alarm_at(view, state->selected);
    if (index < 0)
        return SCREEN_REDRAW;
    const struct alarm_state *alarm = alarm_state(view->alarms, index);
    if (alarm->phase != ALARM_ACTIVE && alarm->phase != ALARM_RETURNED) {
        text_format(message, message_size, "%s: nothing to acknowledge",
                    view->plant->alarm[index].name);
        return SCREEN_REDRAW;
    }
    *command = (struct command){.kind = COMMAND_ACKNOWLEDGE, .alarm = index};
    text_format(message, message_size, "%s acknowledged", view->plant->alarm[index].name);
    return SCREEN_COMMAND;
}

const struct panel panel_alarms = {
    .name = "alarms",
    .key = '5',
    .asks = "what wants an answer?",
    .count = count,
    .line_of = line_of,
    .why = why,
    .draw = draw,
    .key_pressed = key_pressed,
};
