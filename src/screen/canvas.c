/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * A grid of cells. Clipping, wide characters, the ASCII fallback and making text printable live
 * here, so that no panel has to think of them.
 */
#include "canvas.h"

#include <stdlib.h>
#include <string.h>
#include <wchar.h>

struct canvas {
    int columns, rows;
    bool ascii;
    struct area clip;
    struct cell *cells;
};

int canvas_create(int columns, int rows, bool ascii, struct canvas **out, struct error *err)
{
    if (columns < 1 || rows < 1 || columns > SCREEN_COLUMNS_MAX || rows > SCREEN_ROWS_MAX)
        return error_set(err, ERR_ARGUMENT, "a canvas is from 1x1 to %dx%d", SCREEN_COLUMNS_MAX,
                         SCREEN_ROWS_MAX);
    struct canvas *canvas = calloc(1, sizeof(*canvas));
    struct cell *cells = calloc((size_t)columns * (size_t)rows, sizeof(*cells));
    if (canvas == NULL || cells == NULL) {
        free(canvas);
        free(cells);
        return error_set(err, ERR_MEMORY, "no memory for a canvas of %dx%d", columns, rows);
    }
    *canvas = (struct canvas){.columns = columns, .rows = rows, .ascii = ascii, .cells = cells};
    canvas_clear(canvas);
    *out = canvas;
    return 0;
}

void canvas_free(struct canvas *canvas)
{
    if (canvas == NULL)
        return;
    free(canvas->cells);
    free(canvas);
}

int canvas_columns(const struct canvas *canvas)
{
    return canvas->columns;
}

int canvas_rows(const struct canvas *canvas)
{
    return canvas->rows;
}

void canvas_clip(struct canvas *canvas, const struct area *area)
{
    const struct area whole = {.rows = canvas->rows, .columns = canvas->columns};
    canvas->clip = area != NULL ? *area : whole;
}

void canvas_clear(struct canvas *canvas)
{
    size_t count = (size_t)canvas->columns * (size_t)canvas->rows;
    for (size_t i = 0; i < count; i++)
        canvas->cells[i] = (struct cell){.rune = ' ', .style = STYLE_NORMAL};
    canvas_clip(canvas, NULL);
}

const struct cell *canvas_cell(const struct canvas *canvas, int row, int column)
{
    if (row < 0 || column < 0 || row >= canvas->rows || column >= canvas->columns)
        return NULL;
    return &canvas->cells[row * canvas->columns + column];
}

/* What stands for a rune where only ASCII can be shown. */
static uint32_t ascii_rune(uint32_t rune)
{
    static const struct {
        uint32_t rune;
        char ascii;
    } table[] = {
        {0x00B1, '~'},
        {0x00B7, '.'},
        {0x00B0, 'd'},
        {0x25C6, 'o'},
        {0x2026, '~'},
        {0x2013, '-'},
        {0x2014, '-'},
        {0x2212, '-'},
        {0x2500, '-'},
        {0x2502, '|'},
        {0x2588, '#'},
        {0x2581, '_'},
        {0x2582, '.'},
        {0x2583, '-'},
        {0x2584, '='},
        {0x2585, '+'},
        {0x2586, '*'},
        {0x2587, '%'},
        {0x258F, '|'},
        {0x2595, '|'},
        {0x25B8, '>'},
        {0x00D7, 'x'},
        {0x2192, '>'},
        {0x03BC, 'u'},
        {0x00B5, 'u'},
    };
    if (rune < 0x7F)
        return rune;
    for (size_t i = 0; i < ARRAY_LENGTH(table); i++)
        if (table[i].rune == rune)
            return (uint32_t)table[i].ascii;
    return '?';
}

static bool inside(const struct canvas *canvas, int row, int column)
{
    const struct area *clip = &canvas->clip;
    return canvas_cell(canvas, row, column) != NULL && row >= clip->row &&
           row < clip->row + clip->rows && column >= clip->column &&
           column < clip->column + clip->columns;
}

static void put(struct canvas *canvas, int row, int column, uint32_t rune, enum style style)
{
    struct cell *cell = &canvas->cells[row * canvas->columns + column];
    /* A half of a wide character that loses the other half becomes a blank. */
    if (cell->rune == 0 && column > 0)
        cell[-1].rune = ' ';
    if (column + 1 < canvas->columns && cell[1].rune == 0 && rune != 0)
        cell[1].rune = ' ';
    *cell = (struct cell){.rune = rune, .style = style};
}

int canvas_text(struct canvas *canvas, int row, int column, enum style style, const char *text)
{
    char clean[SCREEN_COLUMNS_MAX * 4 + 1];
    text_printable(clean, sizeof(clean), text);
    const char *at = clean;
    while (*at != '\0') {
        uint32_t rune = '?';
        size_t bytes = text_rune(at, &rune);
        at += bytes > 0 ? bytes : 1;
        if (canvas->ascii)
            rune = ascii_rune(rune);
        int width = rune < 0x300 ? 1 : wcwidth((wchar_t)rune);
        if (width == 0)
            continue; /* a mark on the character before: the cell holds one rune */
        if (width < 0) {
            width = 1;
            /* In a locale that does not know it; our own drawing characters are one wide. */
            if (!(rune >= 0x2010 && rune <= 0x28FF))
                rune = '?';
        }
        bool fits =
            inside(canvas, row, column) && (width == 1 || inside(canvas, row, column + 1));
        if (fits) {
            put(canvas, row, column, rune, style);
            if (width == 2)
                put(canvas, row, column + 1, 0, style);
        }
        column += width;
    }
    return column;
}

int canvas_format(struct canvas *canvas, int row, int column, enum style style, const char *fmt,
                  ...)
{
    char text[SCREEN_COLUMNS_MAX * 4 + 1];
    va_list args;
    va_start(args, fmt);
    vsnprintf(text, sizeof(text), fmt, args);
    va_end(args);
    return canvas_text(canvas, row, column, style, text);
}

void canvas_restyle(struct canvas *canvas, int row, enum style style)
{
    for (int column = 0; column < canvas->columns; column++)
        if (inside(canvas, row, column))
            canvas->cells[row * canvas->columns + column].style = style;
}

static void write_rune(uint32_t rune, FILE *out)
{
    if (rune < 0x80) {
        fputc((int)rune, out);
    } else if (rune < 0x800) {
        fputc((int)(0xC0 | rune >> 6), out);
        fputc((int)(0x80 | (rune & 0x3F)), out);
    } else if (rune < 0x10000) {
        fputc((int)(0xE0 | rune >> 12), out);
        fputc((int)(0x80 | (rune >> 6 & 0x3F)), out);
        fputc((int)(0x80 | (rune & 0x3F)), out);
    } else {
        fputc((int)(0xF0 | rune >> 18), out);
        fputc((int)(0x80 | (rune >> 12 & 0x3F)), out);
        fputc((int)(0x80 | (rune >> 6 & 0x3F)), out);
        fputc((int)(0x80 | (rune & 0x3F)), out);
    }
}

void canvas_write(const struct canvas *canvas, FILE *out)
{
    for (int row = 0; row < canvas->rows; row++) {
        const struct cell *cells = &canvas->cells[row * canvas->columns];
        int end = canvas->columns;
        while (end > 0 && cells[end - 1].rune == ' ')
            end--;
        for (int column = 0; column < end; column++)
            if (cells[column].rune != 0)
                write_rune(cells[column].rune, out);
        fputc('\n', out);
    }
}

void canvas_write_styles(const struct canvas *canvas, FILE *out)
{
#define X(id, mark) [STYLE_##id] = mark,
    static const char marks[] = {STYLE_LIST(X)};
#undef X
    for (int row = 0; row < canvas->rows; row++) {
        for (int column = 0; column < canvas->columns; column++)
            fputc(marks[canvas->cells[row * canvas->columns + column].style], out);
        fputc('\n', out);
    }
}

/* ---- pen -----------------------------------------------------------------------------------
 */

int pen_line(struct pen *pen)
{
    int row = pen->line++ - pen->scroll;
    return row >= 0 && row < pen->area.rows ? pen->area.row + row : -1;
}

int pen_wrap(struct pen *pen, int indent, enum style style, const char *text)
{
    int width = pen->area.columns - indent, lines = 0;
    const char *at = text;
    while (*at != '\0' && width > 8) {
        size_t length = wrap_length(at, width);
        char line[SCREEN_COLUMNS_MAX * 4 + 1];
        text_format(line, sizeof(line), "%.*s", (int)length, at);
        canvas_text(pen->canvas, pen_line(pen), pen->area.column + indent, style, line);
        at += length;
        while (*at == ' ')
            at++;
        lines++;
    }
    return lines;
}

size_t wrap_length(const char *text, int width)
{
    size_t at = 0, last = 0;
    int column = 0;
    while (text[at] != '\0') {
        uint32_t rune = '?';
        size_t bytes = text_rune(text + at, &rune);
        if (text[at] == ' ')
            last = at;
        if (column == width)
            return last > 0 ? last : at;
        at += bytes > 0 ? bytes : 1;
        column++;
    }
    return at;
}
