/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * A record as CSV: frames row by row, the journal row by row. A point's value is written with
 * the decimals of its resolution, so that it reads back as the very number that entered the
 * frame.
 */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "ullage/history.h"

static bool is_bit(const struct record_tag *tag)
{
    return tag->unit.dimension == DIMENSION_BIT;
}

static void write_head(const struct record_reader *reader, const struct export_options *options,
                       FILE *out)
{
    char text[160];
    fputs("time", out);
    for (int i = 0; i < record_reader_tag_count(reader); i++) {
        const struct record_tag *tag = record_reader_tag(reader, i);
        if (!options->tag[i])
            continue;
        fputc(',', out);
        text_format(text, sizeof(text), is_bit(tag) ? "%s" : "%s [%s]", tag->name,
                    tag->unit.symbol);
        csv_write(out, text);
        if (options->quality) {
            text_format(text, sizeof(text), "%s quality", tag->name);
            fputc(',', out);
            csv_write(out, text);
        }
        if (options->uncertainty) {
            text_format(text, sizeof(text), "%s u", tag->name);
            fputc(',', out);
            csv_write(out, text);
        }
    }
    fputs("\r\n", out);
}

static void write_value(const struct record_tag *tag, struct quantity q, FILE *out)
{
    char text[40];
    /* A stale value is the last one, told by its quality; a bad or missing one is nothing. */
    if (q.quality == QUALITY_BAD || q.quality == QUALITY_MISSING)
        return;
    if (is_bit(tag)) {
        fputs(q.value != 0 ? "1" : "0", out);
        return;
    }
    double own = unit_from_si(&tag->unit, q.value);
    if (tag->resolution > 0) {
        double decimals = ceil(-log10(tag->resolution) - 1e-6);
        text_format(text, sizeof(text), "%.*f",
                    decimals < 0    ? 0
                    : decimals > 15 ? 15
                                    : (int)decimals,
                    own);
    } else {
        csv_number(text, sizeof(text), own);
    }
    fputs(text, out);
}

static void write_row(const struct record_reader *reader, const struct export_options *options,
                      int64_t utc_ns, const struct quantity *value, FILE *out)
{
    char text[40];
    time_format(text, sizeof(text), utc_ns, utc_ns % 1000000 == 0 ? 3 : 9);
    fputs(text, out);
    for (int i = 0; i < record_reader_tag_count(reader); i++) {
        const struct record_tag *tag = record_reader_tag(reader, i);
        if (!options->tag[i])
            continue;
        fputc(',', out);
        write_value(tag, value[i], out);
        if (options->quality)
            fprintf(out, ",%s", quality_word(value[i].quality));
        if (options->uncertainty) {
            bool has = !is_bit(tag) && value[i].quality != QUALITY_BAD &&
                       value[i].quality != QUALITY_MISSING;
            csv_number(text, sizeof(text), unit_span_from_si(&tag->unit, value[i].u));
            fprintf(out, ",%s", has ? text : "");
        }
    }
    fputs("\r\n", out);
}

/* Frames between two steps: the last one before each step stands for it. */
struct stepping {
    int64_t every_ns, next_ns;
    int64_t held_ns; /* of the frame that is held; INT64_MIN: none */
    struct quantity *held;
};

static void take_step(struct stepping *stepping, const struct record_reader *reader,
                      const struct export_options *options, int64_t utc_ns, FILE *out)
{
    if (stepping->held_ns == INT64_MIN) {
        stepping->next_ns = utc_ns;
        return;
    }
    if (utc_ns <= stepping->next_ns)
        return;
    write_row(reader, options, stepping->held_ns, stepping->held, out);
    int64_t steps = (utc_ns - stepping->next_ns + stepping->every_ns - 1) / stepping->every_ns;
    stepping->next_ns += steps * stepping->every_ns;
}

int export_frames(struct record_reader *reader, const struct export_options *options, FILE *out,
                  struct error *err)
{
    size_t count = (size_t)record_reader_tag_count(reader) + 1;
    struct quantity *value = calloc(count, sizeof(*value));
    struct stepping stepping = {.every_ns = time_s_to_ns(options->every_s),
                                .held_ns = INT64_MIN};
    stepping.held = calloc(count, sizeof(*value));
    int code = value == NULL || stepping.held == NULL
                   ? error_set(err, ERR_MEMORY, "no memory to export")
                   : record_reader_seek(reader, options->from_utc_ns, options->to_utc_ns, err);
    if (code == 0)
        write_head(reader, options, out);
    int64_t utc_ns;
    while (code == 0 && (code = record_reader_next(reader, &utc_ns, value, err)) == 1) {
        code = 0;
        if (stepping.every_ns > 0) {
            take_step(&stepping, reader, options, utc_ns, out);
            memcpy(stepping.held, value, count * sizeof(*value));
            stepping.held_ns = utc_ns;
        } else {
            write_row(reader, options, utc_ns, value, out);
        }
        if (ferror(out))
            code = error_set(err, ERR_IO, "the output cannot be written");
    }
    if (code == 0 && stepping.held_ns != INT64_MIN)
        write_row(reader, options, stepping.held_ns, stepping.held, out);
    free(value);
    free(stepping.held);
    return code;
}

static int write_entry(const struct journal_entry *entry, void *context)
{
    FILE *out = context;
    char text[40];
    time_format(text, sizeof(text), entry->utc_ns, 3);
    fprintf(out, "%s,%s,", text, journal_kind_word(entry->kind));
    csv_write(out, entry->subject);
    if (entry->priority > 0)
        fprintf(out, ",%d,", entry->priority);
    else
        fputs(",,", out);
    csv_write(out, entry->state);
    fputc(',', out);
    csv_write(out, entry->user);
    fputc(',', out);
    csv_write(out, entry->text);
    fputs("\r\n", out);
    return 0;
}

int export_journal(struct record_reader *reader, int64_t from_utc_ns, int64_t to_utc_ns,
                   FILE *out, struct error *err)
{
    fputs("time,kind,subject,priority,state,user,text\r\n", out);
    return record_reader_journal(reader, from_utc_ns, to_utc_ns, write_entry, out, err);
}
