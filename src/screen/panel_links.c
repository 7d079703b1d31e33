/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Are the instruments heard? Each link with its traffic, its times and its last trouble; below
 * it the newest ups and downs of the journal.
 */
#include <stdio.h>

#include "panel.h"

static void draw_link(const struct view *view, int index, struct pen *pen)
{
    const struct link *link = &view->plant->link[index];
    const struct link_state *state = &view->link[index];
    char since[40] = "", retry[40] = "";
    int row = pen_line(pen);
    enum style style = state->phase == LINK_UP ? STYLE_NORMAL : STYLE_CAUTION;
    if (state->since_utc_ns != 0)
        format_clock(since, sizeof(since), state->since_utc_ns);
    canvas_format(pen->canvas, row, 1, STYLE_STRONG, "%s", link->name);
    canvas_format(pen->canvas, row, 17, style, "%s since %s", link_phase_word(state->phase),
                  since);
    canvas_format(pen->canvas, row, 52, STYLE_FAINT, "%s:%d unit %d", link->host, link->port,
                  link->unit_id);
    canvas_format(
        pen->canvas, pen_line(pen), 3, STYLE_NORMAL,
        "requests %llu  answers %llu  exceptions %llu  timeouts %llu  reconnects %llu",
        (unsigned long long)state->requests, (unsigned long long)state->answers,
        (unsigned long long)state->exceptions, (unsigned long long)state->timeouts,
        (unsigned long long)state->reconnects);
    canvas_format(
        pen->canvas, pen_line(pen), 3, STYLE_NORMAL,
        "answer in %.1f ms, worst %.1f  late by %.1f ms  sent %llu B, received %llu B",
        state->latency_s * 1e3, state->latency_worst_s * 1e3, state->jitter_s * 1e3,
        (unsigned long long)state->bytes_sent, (unsigned long long)state->bytes_received);
    if (state->phase != LINK_UP && state->retry_s > 0) {
        char span[32];
        time_format_span(span, sizeof(span), state->retry_s);
        text_format(retry, sizeof(retry), "; next try in %s", span);
    }
    if (state->trouble[0] != '\0')
        canvas_format(pen->canvas, pen_line(pen), 3, style, "last trouble: %s%s",
                      state->trouble, retry);
    pen_line(pen);
}

static void draw(const struct view *view, const struct panel_state *state, struct pen *pen)
{
    (void)state;
    for (int i = 0; i < view->plant->link_count; i++)
        draw_link(view, i, pen);
    canvas_text(pen->canvas, pen_line(pen), 1, STYLE_FAINT, "newest entries of the journal");
    for (int i = view->journal_count - 1, shown = 0; i >= 0 && shown < 50; i--, shown++) {
        const struct journal_entry *entry = &view->journal[i];
        char clock[40];
        format_clock(clock, sizeof(clock), entry->utc_ns);
        canvas_format(pen->canvas, pen_line(pen), 1, STYLE_NORMAL, "%s %s %s %s %s %s", clock,
                      journal_kind_word(entry->kind), entry->subject, entry->state, entry->user,
                      entry->text);
    }
}

const struct panel panel_links = {
    .name = "links",
    .key = '7',
    .asks = "are the instruments heard?",
    .draw = draw,
};
