/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * What stands against safety now? All banners in full, with the time since when.
 */
#include <stdio.h>

#include "panel.h"

static void draw(const struct view *view, const struct panel_state *state, struct pen *pen)
{
    const struct banner_list *banners = &view->results->banners;
    (void)state;
    for (int i = 0; i < banners->count; i++) {
        const struct banner *banner = &banners->at[i];
        char clock[40];
        format_clock(clock, sizeof(clock), banner->since_utc_ns);
        enum style style = banner->level == BANNER_DANGER    ? STYLE_DANGER
                           : banner->level == BANNER_CAUTION ? STYLE_CAUTION
                                                             : STYLE_NORMAL;
        canvas_format(pen->canvas, pen_line(pen), 1, style, "%s, %s, since %s",
                      banner_level_word(banner->level), banner->subject, clock);
        pen_wrap(pen, 3, STYLE_NORMAL, banner->text);
        pen_line(pen);
    }
    if (banners->more > 0)
        canvas_format(pen->canvas, pen_line(pen), 1, STYLE_CAUTION,
                      "and %d less serious ones beyond this list", banners->more);
    if (banners->count == 0)
        pen_wrap(pen, 1, STYLE_NORMAL, "No safety statement stands now.");
    if (banners->count == 0)
        pen_line(pen);
    pen_wrap(
        pen, 1, STYLE_ADVISORY,
        "ADVISORY ONLY. This display reads instruments and computes; it controls nothing and "
        "is no safety system. That no statement stands does not make a hall safe: site rules, "
        "local codes, fixed alarms and licensed practice decide.");
}

const struct panel panel_banners = {
    .name = "banners",
    .key = 'b',
    .asks = "what stands against safety now?",
    .draw = draw,
};
