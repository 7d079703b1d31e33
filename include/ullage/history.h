/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * history: the record of a plant: frames with what was computed from them, and the journal. One
 * SQLite file (WAL), readable by any SQLite tool; what has been committed survives kill -9 and
 * a power cut. Values are SI in each tag's own basis, as in a frame; unit and resolution stand
 * beside each tag.
 */
#ifndef ULLAGE_HISTORY_H
#define ULLAGE_HISTORY_H

#include <stdbool.h>
#include <stdint.h>
#include <stdio.h>

#include "ullage/alarm.h"
#include "ullage/base.h"
#include "ullage/engine.h"
#include "ullage/field.h"
#include "ullage/plant.h"

/* ---- writing
 * --------------------------------------------------------------------------------- */

struct record_writer;
/* Opens or makes a record for a plant and notes the program's version and the plant file in
 * force. A file that is no record, or of a newer version, is refused and left as it is. One
 * writer at a time: a second is refused. */
int record_writer_open(const char *path, const struct plant *plant, const char *plant_path,
                       struct record_writer **out, struct error *err) MUST_CHECK;
/* One frame with its results and the journal entries since the last, in one transaction. A
 * frame of a time that is there already replaces it. On an error nothing of it is kept, and the
 * next may be tried. */
int record_writer_append(struct record_writer *writer, const struct frame *frame,
                         const struct results *results, const struct journal_entry *journal,
                         int journal_count, struct error *err) MUST_CHECK;
/* Goes on with another plant: its tags and its file are noted. On an error the writer goes on
 * with the plant it had. */
int record_writer_plant(struct record_writer *writer, const struct plant *plant,
                        const char *plant_path, struct error *err) MUST_CHECK;
void record_writer_close(struct record_writer *writer);

/* ---- reading
 * ---------------------------------------------------------------------------------- */

/* A tag as the record knows it. */
struct record_tag {
    char name[96];
    struct unit unit;
    bool is_point;
    double resolution; /* in its own unit; 0: none */
};

struct record_reader;
int record_reader_open(const char *path, struct record_reader **out,
                       struct error *err) MUST_CHECK;
void record_reader_close(struct record_reader *reader);
/* Tags in the plant file's order: points, then derived quantities by name. */
int record_reader_tag_count(const struct record_reader *reader);
const struct record_tag *record_reader_tag(const struct record_reader *reader, int index);
/* First and last frame; ERR_RANGE when there is none. */
int record_reader_span(struct record_reader *reader, int64_t *first_utc_ns,
                       int64_t *last_utc_ns, struct error *err) MUST_CHECK;

/* Sets out to read frames with from <= time < to, in order of time. */
int record_reader_seek(struct record_reader *reader, int64_t from_utc_ns, int64_t to_utc_ns,
                       struct error *err) MUST_CHECK;
/* The next frame: value has one quantity a tag. 1, 0 at the end, or a negative code. */
int record_reader_next(struct record_reader *reader, int64_t *utc_ns, struct quantity *value,
                       struct error *err) MUST_CHECK;

/* Calls back for each journal entry with from <= time < to, in the order they were written. */
typedef int record_journal_take(const struct journal_entry *entry, void *context);
int record_reader_journal(struct record_reader *reader, int64_t from_utc_ns, int64_t to_utc_ns,
                          record_journal_take *take, void *context,
                          struct error *err) MUST_CHECK;

/* ---- CSV
 * -------------------------------------------------------------------------------------- */

struct export_options {
    int64_t from_utc_ns, to_utc_ns;
    double every_s; /* 0: every frame; else the last frame at or before each step */
    bool quality, uncertainty;
    const bool *tag; /* one a tag of the reader: which to write */
};
/* Writes RFC 4180 CSV: time, then "TAG [UNIT]" for each tag, and by option "TAG quality", "TAG
 * u". A value that is missing or bad is an empty field. */
int export_frames(struct record_reader *reader, const struct export_options *options, FILE *out,
                  struct error *err) MUST_CHECK;
/* time,kind,subject,priority,state,user,text */
int export_journal(struct record_reader *reader, int64_t from_utc_ns, int64_t to_utc_ns,
                   FILE *out, struct error *err) MUST_CHECK;

#endif
