/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Writing a record: a frame with its results and journal entries is one transaction, synced to
 * the disk, so that what a commit returned for is there after a power cut.
 */
#include <errno.h>
#include <fcntl.h>
#include <stdlib.h>
#include <string.h>
#include <sys/file.h>
#include <unistd.h>

#include "schema.h"

struct record_writer {
    const struct plant *plant;
    char path[512];
    int lock_fd;
    sqlite3 *db;
    sqlite3_stmt *sample, *journal;
    int *tag_id; /* of each tag of the plant, in the record */
};

/* One writer: an advisory lock on a file beside the record, held as long as the writer lives.
 */
static int take_lock(struct record_writer *writer, struct error *err)
{
    char path[sizeof(writer->path) + 8];
    text_format(path, sizeof(path), "%s-lock", writer->path);
    writer->lock_fd = open(path, O_RDWR | O_CREAT | O_CLOEXEC, 0640);
    if (writer->lock_fd < 0)
        return error_set(err, ERR_IO, "record '%s' cannot be locked: %s", writer->path,
                         strerror(errno));
    if (flock(writer->lock_fd, LOCK_EX | LOCK_NB) != 0)
        return error_set(err, ERR_IO,
                         "record '%s' is being written by another process; end it, or choose "
                         "another file",
                         writer->path);
    return 0;
}

static int prepare(struct record_writer *writer, const char *sql, sqlite3_stmt **out,
                   struct error *err)
{
    if (sqlite3_prepare_v2(writer->db, sql, -1, out, NULL) != SQLITE_OK)
        return schema_failed(writer->db, writer->path, "cannot be written", err);
    return 0;
}

/* Every tag of the plant, new ones added; a tag whose unit has changed is another dimension of
 * the same name, which an old reader would take for the old one: refused. */
static int note_tags(struct record_writer *writer, struct error *err)
{
    const struct plant *plant = writer->plant;
    sqlite3_stmt *insert = NULL, *find = NULL;
    int code =
        prepare(writer,
                "INSERT INTO tag(name, unit, is_point, resolution, place) VALUES(?,?,?,?,?)"
                " ON CONFLICT(name) DO UPDATE SET resolution = excluded.resolution,"
                " place = excluded.place",
                &insert, err);
    if (code == 0)
        code = prepare(writer, "SELECT id, unit FROM tag WHERE name = ?", &find, err);
    for (int i = 0; code == 0 && i < plant_tag_count(plant); i++) {
        const char *name = plant_tag_name(plant, i);
        const struct unit *unit = plant_tag_unit(plant, i);
        bool is_point = plant_tag_is_point(plant, i);
        sqlite3_bind_text(insert, 1, name, -1, SQLITE_STATIC);
        sqlite3_bind_text(insert, 2, unit->symbol, -1, SQLITE_STATIC);
        sqlite3_bind_int(insert, 3, is_point);
        sqlite3_bind_double(insert, 4, is_point ? plant->point[i].resolution : 0);
        sqlite3_bind_int(insert, 5, i);
        if (sqlite3_step(insert) != SQLITE_DONE)
            code = schema_failed(writer->db, writer->path, "cannot be written", err);
        sqlite3_reset(insert);
        sqlite3_bind_text(find, 1, name, -1, SQLITE_STATIC);
        if (code == 0 && sqlite3_step(find) != SQLITE_ROW)
            code = schema_failed(writer->db, writer->path, "cannot be read", err);
        if (code == 0) {
            const char *before = (const char *)sqlite3_column_text(find, 1);
            writer->tag_id[i] = sqlite3_column_int(find, 0);
            if (before == NULL || strcmp(before, unit->symbol) != 0)
                code = error_set(
                    err, ERR_CONFIG,
                    "record '%s' has %s in %s, the plant file in %s; begin a new record",
                    writer->path, name, before != NULL ? before : "no unit", unit->symbol);
        }
        sqlite3_reset(find);
    }
    sqlite3_finalize(insert);
    sqlite3_finalize(find);
    return code;
}

/* The program and the plant file's text from now on. */
static int note_program(struct record_writer *writer, const char *plant_path, struct error *err)
{
    sqlite3_stmt *insert = NULL;
    char text[1 << 16];
    size_t length = 0;
    FILE *file = plant_path != NULL ? fopen(plant_path, "re") : NULL;
    if (file != NULL) {
        length = fread(text, 1, sizeof(text), file);
        fclose(file);
    }
    int code = prepare(writer, "INSERT INTO program VALUES(?, ?, ?, ?)", &insert, err);
    if (code == 0) {
        sqlite3_bind_int64(insert, 1, time_utc_ns());
        sqlite3_bind_text(insert, 2, ULLAGE_VERSION, -1, SQLITE_STATIC);
        sqlite3_bind_text(insert, 3, plant_path, -1, SQLITE_STATIC);
        sqlite3_bind_blob(insert, 4, text, (int)length, SQLITE_STATIC);
        if (sqlite3_step(insert) != SQLITE_DONE)
            code = schema_failed(writer->db, writer->path, "cannot be written", err);
    }
    sqlite3_finalize(insert);
    return code;
}

static int set_up(struct record_writer *writer, const char *plant_path, struct error *err)
{
    bool fresh = false;
    int code = schema_check(writer->db, writer->path, &fresh, err);
    /* Full sync: a commit is on the disk when it returns; at a frame a second it costs little.
     */
    if (code == 0)
        code = schema_run(writer->db, writer->path,
                          "PRAGMA journal_mode = WAL; PRAGMA synchronous = FULL;"
                          "PRAGMA cache_size = -4096",
                          err);
    if (code == 0)
        code = schema_run(writer->db, writer->path, "BEGIN IMMEDIATE", err);
    if (code != 0)
        return code;
    if (fresh)
        code = schema_make(writer->db, writer->path, err);
    if (code == 0)
        code = note_tags(writer, err);
    if (code == 0)
        code = note_program(writer, plant_path, err);
    if (code == 0)
        code = schema_run(writer->db, writer->path, "COMMIT", err);
    if (code == 0)
        code = prepare(writer, "INSERT OR REPLACE INTO sample VALUES(?, ?, ?, ?, ?, ?)",
                       &writer->sample, err);
    if (code == 0)
        code = prepare(
            writer,
            "INSERT INTO journal(utc_ns, kind, kind_word, subject, priority, state, user,"
            " text) VALUES(?, ?, ?, ?, ?, ?, ?, ?)",
            &writer->journal, err);
    return code;
}

int record_writer_open(const char *path, const struct plant *plant, const char *plant_path,
                       struct record_writer **out, struct error *err)
{
    struct record_writer *writer = calloc(1, sizeof(*writer));
    if (writer == NULL)
        return error_set(err, ERR_MEMORY, "no memory for the record");
    writer->plant = plant;
    writer->lock_fd = -1;
    writer->tag_id = calloc((size_t)plant_tag_count(plant) + 1, sizeof(*writer->tag_id));
    int code = 0;
    if (writer->tag_id == NULL)
        code = error_set(err, ERR_MEMORY, "no memory for the record");
    else if (!text_copy(writer->path, sizeof(writer->path), path))
        code = error_set(err, ERR_ARGUMENT, "the record's path is too long");
    if (code == 0)
        code = take_lock(writer, err);
    if (code == 0 &&
        sqlite3_open_v2(path, &writer->db, SQLITE_OPEN_READWRITE | SQLITE_OPEN_CREATE, NULL) !=
            SQLITE_OK)
        code = schema_failed(writer->db, path, "cannot be opened", err);
    if (code == 0) {
        sqlite3_busy_timeout(writer->db, 2000);
        code = set_up(writer, plant_path, err);
    }
    if (code != 0) {
        record_writer_close(writer);
        return code;
    }
    *out = writer;
    return 0;
}

int record_writer_plant(struct record_writer *writer, const struct plant *plant,
                        const char *plant_path, struct error *err)
{
    const struct plant *old_plant = writer->plant;
    int *old_ids = writer->tag_id;
    int *ids = calloc((size_t)plant_tag_count(plant) + 1, sizeof(*ids));
    if (ids == NULL)
        return error_set(err, ERR_MEMORY, "no memory for the record");
    int code = schema_run(writer->db, writer->path, "BEGIN IMMEDIATE", err);
    writer->plant = plant;
    writer->tag_id = ids;
    if (code == 0)
        code = note_tags(writer, err);
    if (code == 0)
        code = note_program(writer, plant_path, err);
    if (code == 0)
        code = schema_run(writer->db, writer->path, "COMMIT", err);
    if (code != 0) {
        sqlite3_exec(writer->db, "ROLLBACK", NULL, NULL, NULL);
        writer->plant = old_plant;
        writer->tag_id = old_ids;
        old_ids = ids;
    }
    free(old_ids);
    return code;
}

static int write_sample(struct record_writer *writer, int64_t utc_ns, int tag,
                        struct quantity q, int64_t read_utc_ns, struct error *err)
{
    sqlite3_stmt *statement = writer->sample;
    sqlite3_bind_int64(statement, 1, utc_ns);
    sqlite3_bind_int(statement, 2, writer->tag_id[tag]);
    sqlite3_bind_double(statement, 3, q.value);
    sqlite3_bind_double(statement, 4, q.u);
    sqlite3_bind_int(statement, 5, (int)q.quality);
    if (read_utc_ns != 0)
        sqlite3_bind_int64(statement, 6, read_utc_ns);
    else
        sqlite3_bind_null(statement, 6);
    int step = sqlite3_step(statement);
    sqlite3_reset(statement);
    return step == SQLITE_DONE
               ? 0
               : schema_failed(writer->db, writer->path, "a frame is lost", err);
}

static int write_journal(struct record_writer *writer, const struct journal_entry *entry,
                         struct error *err)
{
    sqlite3_stmt *statement = writer->journal;
    sqlite3_bind_int64(statement, 1, entry->utc_ns);
    sqlite3_bind_int(statement, 2, (int)entry->kind);
    sqlite3_bind_text(statement, 3, journal_kind_word(entry->kind), -1, SQLITE_STATIC);
    sqlite3_bind_text(statement, 4, entry->subject, -1, SQLITE_STATIC);
    sqlite3_bind_int(statement, 5, entry->priority);
    sqlite3_bind_text(statement, 6, entry->state, -1, SQLITE_STATIC);
    sqlite3_bind_text(statement, 7, entry->user, -1, SQLITE_STATIC);
    sqlite3_bind_text(statement, 8, entry->text, -1, SQLITE_STATIC);
    int step = sqlite3_step(statement);
    sqlite3_reset(statement);
    return step == SQLITE_DONE
               ? 0
               : schema_failed(writer->db, writer->path, "a journal entry is lost", err);
}

int record_writer_append(struct record_writer *writer, const struct frame *frame,
                         const struct results *results, const struct journal_entry *journal,
                         int journal_count, struct error *err)
{
    const struct plant *plant = writer->plant;
    int code = schema_run(writer->db, writer->path, "BEGIN IMMEDIATE", err);
    if (code != 0)
        return code;
    for (int i = 0; code == 0 && i < plant->point_count; i++) {
        const struct sample *sample = &frame->sample[i];
        const struct quantity q = {
            .value = sample->value, .u = sample->u, .quality = sample->quality};
        code = write_sample(writer, frame->utc_ns, i, q, sample->read_utc_ns, err);
    }
    for (int i = 0; code == 0 && i < plant->derived_count; i++)
        code = write_sample(writer, frame->utc_ns, plant->point_count + i,
                            results->derived[i].quantity, 0, err);
    for (int i = 0; code == 0 && i < journal_count; i++)
        code = write_journal(writer, &journal[i], err);
    if (code == 0)
        code = schema_run(writer->db, writer->path, "COMMIT", err);
    if (code != 0)
        sqlite3_exec(writer->db, "ROLLBACK", NULL, NULL, NULL);
    return code;
}

void record_writer_close(struct record_writer *writer)
{
    if (writer == NULL)
        return;
    sqlite3_finalize(writer->sample);
    sqlite3_finalize(writer->journal);
    sqlite3_close(writer->db);
    if (writer->lock_fd >= 0)
        close(writer->lock_fd);
    free(writer->tag_id);
    free(writer);
}
