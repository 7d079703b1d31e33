/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * CSV row by row. What must stay true: memory is bounded whatever the file holds; a row that
 * cannot be read costs that row only; no byte is taken as text that is none.
 */
#include "ullage/base.h"

#include <stdlib.h>
#include <string.h>
#include <strings.h>

struct csv {
    FILE *file;
    char *text; /* the row's fields, each with a terminating zero */
    size_t used, text_room;
    size_t *start; /* of each field in text */
    size_t start_room;
    int count;
    long line; /* of the next byte */
    long row_line;
    bool begun;
};

struct csv *csv_create(FILE *file)
{
    struct csv *csv = calloc(1, sizeof(*csv));
    if (csv == NULL)
        return NULL;
    csv->file = file;
    csv->line = 1;
    csv->text_room = 1024;
    csv->start_room = 64;
    csv->text = malloc(csv->text_room);
    csv->start = calloc(csv->start_room, sizeof(*csv->start));
    if (csv->text == NULL || csv->start == NULL) {
        csv_free(csv);
        return NULL;
    }
    return csv;
}

void csv_free(struct csv *csv)
{
    if (csv == NULL)
        return;
    free(csv->text);
    free(csv->start);
    free(csv);
}

int csv_count(const struct csv *csv)
{
    return csv->count;
}

const char *csv_field(const struct csv *csv, int index)
{
    return index >= 0 && index < csv->count ? csv->text + csv->start[index] : "";
}

long csv_line(const struct csv *csv)
{
    return csv->row_line;
}

int csv_find(const struct csv *csv, const char *name)
{
    for (int i = 0; i < csv->count; i++)
        if (strcasecmp(csv_field(csv, i), name) == 0)
            return i;
    return -1;
}

/* A byte, with every line ending as one '\n'. */
static int next_byte(struct csv *csv)
{
    int c = getc(csv->file);
    if (c == '\r') {
        c = getc(csv->file);
        if (c != '\n') {
            if (c != EOF)
                ungetc(c, csv->file);
            c = '\n';
        }
    }
    if (c == '\n')
        csv->line++;
    return c;
}

static void skip_line(struct csv *csv, int c)
{
    while (c != '\n' && c != EOF)
        c = next_byte(csv);
}

static void skip_mark(struct csv *csv)
{
    static const int mark[] = {0xef, 0xbb, 0xbf};
    int c = getc(csv->file);
    if (c != mark[0]) {
        if (c != EOF)
            ungetc(c, csv->file);
        return;
    }
    /* No text begins with that byte alone: a broken mark is skipped as well. */
    for (int i = 1; i < 3; i++) {
        c = getc(csv->file);
        if (c == mark[i])
            continue;
        if (c != EOF)
            ungetc(c, csv->file);
        return;
    }
}

static int put_byte(struct csv *csv, char c, struct error *err)
{
    if (csv->used >= CSV_ROW_MAX)
        return error_set(err, ERR_FORMAT, "line %ld: the row is longer than %d bytes",
                         csv->row_line, CSV_ROW_MAX);
    if (csv->used == csv->text_room) {
        char *more = realloc(csv->text, 2 * csv->text_room);
        if (more == NULL)
            return error_set(err, ERR_MEMORY, "line %ld: no memory for the row", csv->row_line);
        csv->text = more;
        csv->text_room *= 2;
    }
    csv->text[csv->used++] = c;
    return 0;
}

static int begin_field(struct csv *csv, struct error *err)
{
    if (csv->count >= CSV_FIELDS_MAX)
        return error_set(err, ERR_FORMAT, "line %ld: the row has more than %d fields",
                         csv->row_line, CSV_FIELDS_MAX);
    if ((size_t)csv->count == csv->start_room) {
        size_t *more = realloc(csv->start, 2 * csv->start_room * sizeof(*more));
        if (more == NULL)
            return error_set(err, ERR_MEMORY, "line %ld: no memory for the row", csv->row_line);
        csv->start = more;
        csv->start_room *= 2;
    }
    csv->start[csv->count++] = csv->used;
    return 0;
}

static bool blank(int c)
{
    return c == ' ' || c == '\t';
}

static int zero_byte(const struct csv *csv, struct error *err)
{
    return error_set(err, ERR_FORMAT, "line %ld: a zero byte: this is no text", csv->line);
}

/* The rest of a field after its opening quote; *c is then the byte that ended it. */
static int read_quoted(struct csv *csv, int *c, struct error *err)
{
    long opened = csv->line;
    int code = 0;
    for (;;) {
        *c = next_byte(csv);
        if (*c == '"') {
            *c = next_byte(csv);
            if (*c != '"')
                break;
        }
        if (*c == EOF)
            return error_set(
                err, ERR_FORMAT,
                "line %ld: a quote is opened and never closed; add the closing '\"'", opened);
        if (*c == '\0')
            return zero_byte(csv, err);
        code = put_byte(csv, (char)*c, err);
        if (code != 0)
            return code;
    }
    while (blank(*c))
        *c = next_byte(csv);
    if (*c != ',' && *c != '\n' && *c != EOF)
        return error_set(
            err, ERR_FORMAT,
            "line %ld: text after a closing quote; a quote within a quoted field is "
            "written twice",
            csv->line);
    return put_byte(csv, '\0', err);
}

static int read_plain(struct csv *csv, int *c, struct error *err)
{
    size_t begin = csv->used;
    for (; *c != ',' && *c != '\n' && *c != EOF; *c = next_byte(csv)) {
        if (*c == '\0')
            return zero_byte(csv, err);
        int code = put_byte(csv, (char)*c, err);
        if (code != 0)
            return code;
    }
    while (csv->used > begin && blank(csv->text[csv->used - 1]))
        csv->used--;
    return put_byte(csv, '\0', err);
}

/* The row whose first byte is *c; *c is then its last. */
static int read_row(struct csv *csv, int *c, struct error *err)
{
    for (;;) {
        while (blank(*c))
            *c = next_byte(csv);
        int code = begin_field(csv, err);
        if (code == 0)
            code = *c == '"' ? read_quoted(csv, c, err) : read_plain(csv, c, err);
        if (code != 0 || *c != ',')
            return code;
        *c = next_byte(csv);
    }
}

int csv_read(struct csv *csv, struct error *err)
{
    if (!csv->begun)
        skip_mark(csv);
    csv->begun = true;
    for (;;) {
        csv->used = 0;
        csv->count = 0;
        csv->row_line = csv->line;
        int c = next_byte(csv);
        if (c == '#') {
            skip_line(csv, c);
            continue;
        }
        while (blank(c))
            c = next_byte(csv);
        if (c == '\n')
            continue;
        int code = 0;
        if (c != EOF) {
            code = read_row(csv, &c, err);
            if (code != 0)
                skip_line(csv, c);
        }
        if (ferror(csv->file))
            code = error_set(err, ERR_IO, "line %ld: the file cannot be read on", csv->line);
        if (code != 0)
            csv->count = 0;
        return code != 0 ? code : csv->count > 0;
    }
}

void csv_write(FILE *file, const char *text)
{
    size_t length = strlen(text);
    bool edges = length > 0 && (blank(text[0]) || blank(text[length - 1]) || text[0] == '#');
    if (!edges && strpbrk(text, ",\"\r\n") == NULL) {
        fputs(text, file);
        return;
    }
    putc('"', file);
    for (; *text != '\0'; text++) {
        if (*text == '"')
            putc('"', file);
        putc(*text, file);
    }
    putc('"', file);
}

void csv_number(char *dst, size_t size, double value)
{
    for (int digits = 15; digits <= 17; digits++) {
        text_format(dst, size, "%.*g", digits, value);
        double read_back;
        if (text_to_double(dst, &read_back) == 0 && read_back == value)
            return;
    }
}
