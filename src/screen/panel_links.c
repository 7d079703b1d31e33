/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Are the instruments heard? Each link with its traffic, its times and its last trouble; below
 * them the newest entries of the journal.
 */
#include <stdio.h>

#include "panel.h"

enum { STATE = 17, JOURNAL_SHOWN = 50 };

static void add_count(struct flow *flow, const char *label, uint64_t count)
{
    char text[32];
    text_format(text, sizeof(text), "%llu", (unsigned long long)count);
    flow_part(flow, label, STYLE_NORMAL, text);
}

static void add_time(struct flow *flow, const char *label, double time_s)
{
    char text[40];
    text_format(text, sizeof(text), "%.1f ms", time_s * 1e3);
    flow_part(flow, label, STYLE_NORMAL, text);
}

static void draw_state(const struct link *link, const struct link_state *state, struct pen *pen)
{
    char since[40] = "", where[200];
    int row = pen_line(pen), columns = pen->area.columns;
    if (state->since_utc_ns != 0)
        format_clock(since, sizeof(since), state->since_utc_ns);
    canvas_fit_name(pen->canvas, row, 1, STATE - 2, STYLE_STRONG, link->name);
    int at = canvas_format(
        pen->canvas, row, STATE, state->phase == LINK_UP ? STYLE_NORMAL : STYLE_CAUTION,
        "%s%s%s", link_phase_word(state->phase), since[0] != '\0' ? " since " : "", since);
    text_format(where, sizeof(where), "%s:%d unit %d", link->host, link->port, link->unit_id);
    if (at + 3 + canvas_width(pen->canvas, where) < columns)
        canvas_text(pen->canvas, row, at + 3, STYLE_FAINT, where);
    else
        pen_wrap(pen, 3, STYLE_FAINT, where);
}

static void draw_link(const struct view *view, int index, struct pen *pen)
{
    const struct link_state *state = &view->link[index];
    draw_state(&view->plant->link[index], state, pen);
    struct flow flow = flow_begin(pen, 3, pen->area.columns);
    add_count(&flow, "requests ", state->requests);
    add_count(&flow, "answers ", state->answers);
    add_count(&flow, "exceptions ", state->exceptions);
    add_count(&flow, "timeouts ", state->timeouts);
    add_count(&flow, "reconnects ", state->reconnects);
    if (state->late > 0)
        add_count(&flow, "polls left out ", state->late);
    add_time(&flow, "answered in ", state->latency_s);
    add_time(&flow, "at worst ", state->latency_worst_s);
    add_time(&flow, "late by ", state->jitter_s);
    add_count(&flow, "bytes sent ", state->bytes_sent);
    add_count(&flow, "received ", state->bytes_received);
    if (state->trouble[0] == '\0')
        return;
    char text[300], span[32], retry[64] = "";
    time_format_span(span, sizeof(span), state->retry_s);
    if (state->phase != LINK_UP && state->retry_s > 0)
        text_format(retry, sizeof(retry), "; next try in %s", span);
    text_format(text, sizeof(text), "%s: %s%s",
                state->phase == LINK_UP ? "last trouble" : "trouble", state->trouble, retry);
    pen_wrap(pen, 3, state->phase == LINK_UP ? STYLE_NORMAL : STYLE_CAUTION, text);
}

static void draw_journal(const struct view *view, struct pen *pen)
{
    canvas_text(pen->canvas, pen_line(pen), 1, STYLE_FAINT, "newest entries of the journal");
    for (int i = view->journal_count - 1, shown = 0; i >= 0 && shown < JOURNAL_SHOWN;
         i--, shown++) {
        const struct journal_entry *entry = &view->journal[i];
        char clock[40], text[480];
        format_clock(clock, sizeof(clock), entry->utc_ns);
        text_format(text, sizeof(text), "%s %s %s%s%s%s%s", journal_kind_word(entry->kind),
                    entry->subject, entry->state, entry->user[0] != '\0' ? " by " : "",
                    entry->user, entry->text[0] != '\0' ? ": " : "", entry->text);
        struct pen first = *pen;
        canvas_text(pen->canvas, pen_line(&first), 1, STYLE_NORMAL, clock);
        if (pen_wrap(pen, 23, STYLE_NORMAL, text) == 0)
            pen_line(pen);
    }
    if (view->journal_count == 0)
        canvas_text(pen->canvas, pen_line(pen), 1, STYLE_NORMAL, "none yet");
}

static void draw(const struct view *view, const struct panel_state *state, struct pen *pen)
{
    (void)state;
    for (int i = 0; i < view->plant->link_count; i++) {
        draw_link(view, i, pen);
        pen_line(pen);
    }
    draw_journal(view, pen);
}

const struct panel panel_links = {
    .name = "links",
    .key = '7',
    .asks = "are the instruments heard?",
    .draw = draw,
};
