/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The two small pictures of a ledger: the needle, whose scale is the ledger's own uncertainty
 * (bar zero, colons 2 u, brackets 5 u), and the trend.
 */
#include <math.h>
#include <string.h>

#include "panel.h"

enum { HALF = 7, MARKS = 2 * HALF + 1 };

static enum style word_style(enum ledger_word word)
{
    switch (word) {
    case LEDGER_FINDING:
    case LEDGER_BLIND:
        return STYLE_CAUTION;
    case LEDGER_WATCH:
        return STYLE_STRONG;
    case LEDGER_FILLING:
    case LEDGER_ABSENT:
        return STYLE_FAINT;
    case LEDGER_QUIET:
        break;
    }
    return STYLE_NORMAL;
}

void needle_draw(const struct ledger *ledger, bool live, struct canvas *canvas, int row,
                 int column)
{
    char marks[MARKS + 1];
    memset(marks, ' ', MARKS);
    marks[MARKS] = '\0';
    marks[HALF] = '|';
    marks[HALF - 3] = marks[HALF + 3] = ':';
    canvas_format(canvas, row, column, STYLE_FAINT, "[%s]", marks);
    double u = ledger->unexplained.u;
    if (live && u > 0) {
        double at = fmax(-HALF, fmin(HALF, ledger->unexplained.value / u * HALF / 5));
        canvas_text(canvas, row, column + 1 + HALF + (int)lround(at),
                    ledger->word == LEDGER_FINDING ? STYLE_CAUTION : STYLE_STRONG, "◆");
    }
    bool old = !live && quantity_usable(ledger->unexplained) && ledger->word != LEDGER_ABSENT;
    canvas_text(canvas, row, column + MARKS + 3, old ? STYLE_STALE : word_style(ledger->word),
                old ? "old" : ledger_word_text(ledger->word));
}

bool trend_draw(const struct trend_column *column, int count, struct canvas *canvas, int row,
                int at, double *low, double *high)
{
    static const char *const bars[] = {"▁", "▂", "▃", "▄", "▅", "▆", "▇", "█"};
    *low = HUGE_VAL;
    *high = -HUGE_VAL;
    for (int i = 0; i < count; i++)
        if (column[i].set) {
            *low = fmin(*low, column[i].low);
            *high = fmax(*high, column[i].high);
        }
    if (!(*low <= *high))
        return false;
    for (int i = 0; i < count; i++) {
        double middle = 0.5 * (column[i].low + column[i].high);
        int step = *high > *low ? (int)((middle - *low) / (*high - *low) * 7.999) : 3;
        if (column[i].set)
            canvas_text(canvas, row, at + i, STYLE_FAINT,
                        bars[step < 0   ? 0
                             : step > 7 ? 7
                                        : step]);
    }
    return true;
}
