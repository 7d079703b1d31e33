/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Reading a record, also while it is being written: frames in the order of time with a place
 * for each tag, and the journal. Memory does not grow with the record.
 */
#include <stdlib.h>
#include <string.h>

#include "schema.h"

struct record_reader {
    char path[512];
    sqlite3 *db;
    int tag_count, id_room;
    struct record_tag *tag;
    int *index_of_id; /* place of a tag by its id in the file, or -1 */
    sqlite3_stmt *samples;
    bool row_waits; /* the statement stands on the first row of the next frame */
};

static int read_tag(struct record_reader *reader, sqlite3_stmt *statement, int index,
                    struct error *err)
{
    struct record_tag *tag = &reader->tag[index];
    int id = sqlite3_column_int(statement, 0);
    const char *name = (const char *)sqlite3_column_text(statement, 1);
    const char *unit = (const char *)sqlite3_column_text(statement, 2);
    if (name == NULL || unit == NULL || id < 0 || id >= reader->id_room ||
        !text_copy(tag->name, sizeof(tag->name), name))
        return error_set(err, ERR_FORMAT, "record '%s': its list of tags is damaged",
                         reader->path);
    tag->is_point = sqlite3_column_int(statement, 3) != 0;
    tag->resolution = sqlite3_column_double(statement, 4);
    tag->unit = unit_si(DIMENSION_BIT);
    reader->index_of_id[id] = index;
    return *unit == '\0' ? 0 : unit_parse(unit, &tag->unit, err);
}

static int read_tags(struct record_reader *reader, struct error *err)
{
    int64_t count, last;
    int code =
        schema_integer(reader->db, reader->path, "SELECT count(*) FROM tag", &count, err);
    if (code == 0)
        code = schema_integer(reader->db, reader->path, "SELECT coalesce(max(id), 0) FROM tag",
                              &last, err);
    if (code != 0)
        return code;
    if (count > 1000000 || last > 2000000)
        return error_set(err, ERR_FORMAT, "record '%s': its list of tags is damaged",
                         reader->path);
    reader->id_room = (int)last + 1;
    reader->tag = calloc((size_t)count + 1, sizeof(*reader->tag));
    reader->index_of_id = malloc((size_t)reader->id_room * sizeof(*reader->index_of_id));
    if (reader->tag == NULL || reader->index_of_id == NULL)
        return error_set(err, ERR_MEMORY, "no memory for the record's tags");
    for (int i = 0; i < reader->id_room; i++)
        reader->index_of_id[i] = -1;
    sqlite3_stmt *statement = NULL;
    /* Points in the plant file's order, then derived quantities by name. */
    if (sqlite3_prepare_v2(
            reader->db,
            "SELECT id, name, unit, is_point, resolution FROM tag ORDER BY is_point"
            " DESC, CASE WHEN is_point THEN place END, name",
            -1, &statement, NULL) != SQLITE_OK)
        return schema_failed(reader->db, reader->path, "cannot be read", err);
    while (code == 0 && sqlite3_step(statement) == SQLITE_ROW && reader->tag_count < count)
        code = read_tag(reader, statement, reader->tag_count++, err);
    sqlite3_finalize(statement);
    return code;
}

int record_reader_open(const char *path, struct record_reader **out, struct error *err)
{
    struct record_reader *reader = calloc(1, sizeof(*reader));
    bool fresh = false;
    if (reader == NULL)
        return error_set(err, ERR_MEMORY, "no memory for the record");
    text_copy(reader->path, sizeof(reader->path), path);
    int code = 0;
    if (sqlite3_open_v2(path, &reader->db, SQLITE_OPEN_READONLY, NULL) != SQLITE_OK)
        code = schema_failed(reader->db, path, "cannot be opened", err);
    if (code == 0) {
        sqlite3_busy_timeout(reader->db, 2000);
        code = schema_check(reader->db, path, &fresh, err);
    }
    if (code == 0 && fresh)
        code = error_set(err, ERR_FORMAT, "'%s' is empty, no record", path);
    if (code == 0)
        code = read_tags(reader, err);
    if (code != 0) {
        record_reader_close(reader);
        return code;
    }
    *out = reader;
    return 0;
}

void record_reader_close(struct record_reader *reader)
{
    if (reader == NULL)
        return;
    sqlite3_finalize(reader->samples);
    sqlite3_close(reader->db);
    free(reader->tag);
    free(reader->index_of_id);
    free(reader);
}

int record_reader_tag_count(const struct record_reader *reader)
{
    return reader->tag_count;
}

const struct record_tag *record_reader_tag(const struct record_reader *reader, int index)
{
    return &reader->tag[index];
}

int record_reader_span(struct record_reader *reader, int64_t *first_utc_ns,
                       int64_t *last_utc_ns, struct error *err)
{
    int64_t any;
    int code = schema_integer(reader->db, reader->path, "SELECT EXISTS(SELECT 1 FROM sample)",
                              &any, err);
    if (code == 0 && any == 0)
        code = error_set(err, ERR_RANGE, "record '%s' holds no frame", reader->path);
    if (code == 0)
        code = schema_integer(reader->db, reader->path, "SELECT min(utc_ns) FROM sample",
                              first_utc_ns, err);
    if (code == 0)
        code = schema_integer(reader->db, reader->path, "SELECT max(utc_ns) FROM sample",
                              last_utc_ns, err);
    return code;
}

static int step(struct record_reader *reader, struct error *err)
{
    int code = sqlite3_step(reader->samples);
    reader->row_waits = code == SQLITE_ROW;
    if (code != SQLITE_ROW && code != SQLITE_DONE)
        return schema_failed(reader->db, reader->path, "cannot be read", err);
    return 0;
}

int record_reader_seek(struct record_reader *reader, int64_t from_utc_ns, int64_t to_utc_ns,
                       struct error *err)
{
    if (reader->samples == NULL &&
        sqlite3_prepare_v2(
            reader->db,
            "SELECT utc_ns, tag, value, u, quality FROM sample WHERE utc_ns >= ? AND"
            " utc_ns < ? ORDER BY utc_ns, tag",
            -1, &reader->samples, NULL) != SQLITE_OK)
        return schema_failed(reader->db, reader->path, "cannot be read", err);
    sqlite3_reset(reader->samples);
    sqlite3_bind_int64(reader->samples, 1, from_utc_ns);
    sqlite3_bind_int64(reader->samples, 2, to_utc_ns);
    return step(reader, err);
}

int record_reader_next(struct record_reader *reader, int64_t *utc_ns, struct quantity *value,
                       struct error *err)
{
    if (!reader->row_waits)
        return 0;
    for (int i = 0; i < reader->tag_count; i++)
        value[i] = quantity_none(QUALITY_MISSING);
    *utc_ns = sqlite3_column_int64(reader->samples, 0);
    while (reader->row_waits && sqlite3_column_int64(reader->samples, 0) == *utc_ns) {
        int id = sqlite3_column_int(reader->samples, 1);
        int quality = sqlite3_column_int(reader->samples, 4);
        int index = id >= 0 && id < reader->id_room ? reader->index_of_id[id] : -1;
        if (index < 0 || quality < 0 || quality >= QUALITY_COUNT)
            return error_set(err, ERR_FORMAT, "record '%s': a sample is damaged", reader->path);
        value[index] = (struct quantity){
            .value = sqlite3_column_double(reader->samples, 2),
            .u = sqlite3_column_double(reader->samples, 3),
            .quality = (enum quality)quality,
        };
        int code = step(reader, err);
        if (code != 0)
            return code;
    }
    return 1;
}

static void column(sqlite3_stmt *statement, int index, char *dst, size_t size)
{
    const char *text = (const char *)sqlite3_column_text(statement, index);
    text_copy(dst, size, text != NULL ? text : "");
}

int record_reader_journal(struct record_reader *reader, int64_t from_utc_ns, int64_t to_utc_ns,
                          record_journal_take *take, void *context, struct error *err)
{
    sqlite3_stmt *statement = NULL;
    int code = 0, row;
    if (sqlite3_prepare_v2(
            reader->db,
            "SELECT utc_ns, kind, subject, priority, state, user, text FROM journal"
            " WHERE utc_ns >= ? AND utc_ns < ? ORDER BY id",
            -1, &statement, NULL) != SQLITE_OK)
        return schema_failed(reader->db, reader->path, "cannot be read", err);
    sqlite3_bind_int64(statement, 1, from_utc_ns);
    sqlite3_bind_int64(statement, 2, to_utc_ns);
    while (code == 0 && (row = sqlite3_step(statement)) == SQLITE_ROW) {
        struct journal_entry entry = {
            .utc_ns = sqlite3_column_int64(statement, 0),
            .priority = sqlite3_column_int(statement, 3),
        };
        int kind = sqlite3_column_int(statement, 1);
        if (kind < JOURNAL_ALARM || kind > JOURNAL_CLOCK) {
            code = error_set(err, ERR_FORMAT, "record '%s': a journal entry is damaged",
                             reader->path);
            break;
        }
        entry.kind = (enum journal_kind)kind;
        column(statement, 2, entry.subject, sizeof(entry.subject));
        column(statement, 4, entry.state, sizeof(entry.state));
        column(statement, 5, entry.user, sizeof(entry.user));
        column(statement, 6, entry.text, sizeof(entry.text));
        code = take(&entry, context);
    }
    if (code == 0 && row != SQLITE_DONE)
        code = schema_failed(reader->db, reader->path, "cannot be read", err);
    sqlite3_finalize(statement);
    return code;
}
