/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * A grid of cells. Clipping, wide characters, the ASCII fallback and making text printable live
 * here, so that no panel has to think of them.
 */
#include "canvas.h"

#include <stdlib.h>
#include <string.h>

enum { TEXT_MAX = SCREEN_COLUMNS_MAX * 4 + 1 };

struct canvas {
    int columns, rows;
    bool ascii;
    struct area clip;
    int lost;
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
    canvas->lost = 0;
    canvas_clip(canvas, NULL);
}

int canvas_lost(const struct canvas *canvas)
{
    return canvas->lost;
}

const struct cell *canvas_cell(const struct canvas *canvas, int row, int column)
{
    if (row < 0 || column < 0 || row >= canvas->rows || column >= canvas->columns)
        return NULL;
    return &canvas->cells[row * canvas->columns + column];
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
    if (cell->rune == 0 && column > 0 && rune != 0)
        cell[-1].rune = ' ';
    if (column + 1 < canvas->columns && cell[1].rune == 0)
        cell[1].rune = ' ';
    *cell = (struct cell){.rune = rune, .style = style};
}

/* One rune of a known width; returns the column after. */
static int put_rune(struct canvas *canvas, int row, int column, uint32_t rune, int width,
                    enum style style)
{
    if (inside(canvas, row, column) && (width == 1 || inside(canvas, row, column + 1))) {
        put(canvas, row, column, rune, style);
        if (width == 2)
            put(canvas, row, column + 1, 0, style);
    } else if (rune != ' ' && row >= canvas->clip.row &&
               row < canvas->clip.row + canvas->clip.rows && column > 0) {
        canvas->lost++;
    }
    return column + width;
}

/* The next rune of a text; what is not well-formed is '?'. */
static uint32_t next_rune(const char **at)
{
    uint32_t rune = '?';
    size_t bytes = text_rune(*at, &rune);
    *at += bytes > 0 ? bytes : 1;
    return rune;
}

static int width_of(const struct canvas *canvas, uint32_t rune)
{
    if (!canvas->ascii || rune < 0x80 || rune_width(rune) == 0)
        return rune_width(rune);
    return (int)strlen(rune_ascii(rune));
}

int canvas_text(struct canvas *canvas, int row, int column, enum style style, const char *text)
{
    char clean[TEXT_MAX];
    text_printable(clean, sizeof(clean), text);
    for (const char *at = clean; *at != '\0';) {
        uint32_t rune = next_rune(&at);
        int width = width_of(canvas, rune);
        if (width == 0)
            continue; /* a mark on the character before: the cell holds one rune */
        if (canvas->ascii && rune >= 0x80)
            for (const char *ascii = rune_ascii(rune); *ascii != '\0'; ascii++)
                column = put_rune(canvas, row, column, (uint32_t)*ascii, 1, style);
        else
            column = put_rune(canvas, row, column, rune, width, style);
    }
    return column;
}

int canvas_format(struct canvas *canvas, int row, int column, enum style style, const char *fmt,
                  ...)
{
    char text[TEXT_MAX];
    va_list args;
    va_start(args, fmt);
    vsnprintf(text, sizeof(text), fmt, args);
    va_end(args);
    return canvas_text(canvas, row, column, style, text);
}

int canvas_width(const struct canvas *canvas, const char *text)
{
    int width = 0;
    for (const char *at = text; *at != '\0';)
        width += width_of(canvas, next_rune(&at));
    return width;
}

/* Bytes of text that take at most width columns. */
static size_t bytes_within(const struct canvas *canvas, const char *text, int width)
{
    const char *at = text;
    while (*at != '\0' && at - text < TEXT_MAX - 5) {
        const char *next = at;
        width -= width_of(canvas, next_rune(&next));
        if (width < 0)
            break;
        at = next;
    }
    return (size_t)(at - text);
}

int canvas_fit(struct canvas *canvas, int row, int column, int width, enum style style,
               const char *text)
{
    if (width < 1)
        return column;
    if (canvas_width(canvas, text) <= width)
        return canvas_text(canvas, row, column, style, text);
    char part[TEXT_MAX];
    text_format(part, sizeof(part), "%.*s…", (int)bytes_within(canvas, text, width - 1), text);
    return canvas_text(canvas, row, column, style, part);
}

int canvas_fit_name(struct canvas *canvas, int row, int column, int width, enum style style,
                    const char *name)
{
    if (canvas_width(canvas, name) <= width)
        return canvas_text(canvas, row, column, style, name);
    const char *tail = name;
    while (canvas_width(canvas, tail) > (width - 1) / 2)
        next_rune(&tail);
    char part[TEXT_MAX];
    int head = width - 1 - canvas_width(canvas, tail);
    text_format(part, sizeof(part), "%.*s…%s", (int)bytes_within(canvas, name, head), name,
                tail);
    return canvas_text(canvas, row, column, style, part);
}

void canvas_restyle(struct canvas *canvas, enum style from, enum style to)
{
    const struct area *clip = &canvas->clip;
    for (int row = clip->row; row < clip->row + clip->rows; row++)
        for (int column = clip->column; column < clip->column + clip->columns; column++) {
            struct cell *cell = &canvas->cells[row * canvas->columns + column];
            if (cell->style == from && cell->rune != ' ')
                cell->style = to;
        }
}

void canvas_fill(struct canvas *canvas, int row, int column, enum style style)
{
    for (; inside(canvas, row, column); column++)
        canvas_text(canvas, row, column, style, " ");
}

void canvas_write(const struct canvas *canvas, FILE *out)
{
    for (int row = 0; row < canvas->rows; row++) {
        const struct cell *cells = &canvas->cells[row * canvas->columns];
        int end = canvas->columns;
        while (end > 0 && cells[end - 1].rune == ' ')
            end--;
        for (int column = 0; column < end; column++) {
            char text[5];
            if (cells[column].rune != 0)
                fwrite(text, 1, rune_write(cells[column].rune, text), out);
        }
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
