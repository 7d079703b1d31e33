/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The layout of a record's file. Times are nanoseconds UTC; values SI in the tag's basis;
 * quality is the number in the table quality. The view reading shows samples with names and
 * words.
 */
#include "schema.h"

#include <string.h>

static const char layout[] =
    "CREATE TABLE program(utc_ns INTEGER, version TEXT, plant_path TEXT, plant_text BLOB);"
    "CREATE TABLE quality(id INTEGER PRIMARY KEY, word TEXT);"
    "CREATE TABLE tag(id INTEGER PRIMARY KEY, name TEXT UNIQUE, unit TEXT, is_point INTEGER,"
    " resolution REAL, place INTEGER);"
    "CREATE TABLE sample(utc_ns INTEGER, tag INTEGER, value REAL, u REAL, quality INTEGER,"
    " read_utc_ns INTEGER, PRIMARY KEY(utc_ns, tag)) WITHOUT ROWID;"
    "CREATE TABLE journal(id INTEGER PRIMARY KEY, utc_ns INTEGER, kind INTEGER, kind_word TEXT,"
    " subject TEXT, priority INTEGER, state TEXT, user TEXT, text TEXT);"
    "CREATE INDEX journal_time ON journal(utc_ns);"
    "CREATE VIEW reading AS SELECT strftime('%Y-%m-%dT%H:%M:%S', sample.utc_ns / 1000000000,"
    " 'unixepoch') || printf('.%03dZ', sample.utc_ns / 1000000 % 1000) AS time,"
    " tag.name AS tag, sample.value AS value_si, sample.u AS u_si, quality.word AS quality,"
    " tag.unit AS unit FROM sample JOIN tag ON tag.id = sample.tag"
    " JOIN quality ON quality.id = sample.quality;";

int schema_failed(sqlite3 *db, const char *path, const char *doing, struct error *err)
{
    return error_set(err, ERR_IO, "record '%s': %s: %s", path, doing, sqlite3_errmsg(db));
}

int schema_run(sqlite3 *db, const char *path, const char *sql, struct error *err)
{
    if (sqlite3_exec(db, sql, NULL, NULL, NULL) != SQLITE_OK)
        return schema_failed(db, path, "cannot be written", err);
    return 0;
}

int schema_integer(sqlite3 *db, const char *path, const char *sql, int64_t *out,
                   struct error *err)
{
    sqlite3_stmt *statement = NULL;
    int code = 0;
    if (sqlite3_prepare_v2(db, sql, -1, &statement, NULL) != SQLITE_OK ||
        sqlite3_step(statement) != SQLITE_ROW)
        code = schema_failed(db, path, "cannot be read", err);
    else
        *out = sqlite3_column_int64(statement, 0);
    sqlite3_finalize(statement);
    return code;
}

int schema_check(sqlite3 *db, const char *path, bool *fresh, struct error *err)
{
    int64_t tables, id, version;
    int code = schema_integer(db, path, "SELECT count(*) FROM sqlite_master", &tables, err);
    if (code == 0)
        code = schema_integer(db, path, "PRAGMA application_id", &id, err);
    if (code == 0)
        code = schema_integer(db, path, "PRAGMA user_version", &version, err);
    if (code != 0)
        return code;
    *fresh = tables == 0 && id == 0 && version == 0;
    if (*fresh)
        return 0;
    if (id != SCHEMA_APPLICATION_ID)
        return error_set(err, ERR_FORMAT,
                         "'%s' is a SQLite file, but no record; it is left as it is", path);
    if (version > SCHEMA_VERSION)
        return error_set(
            err, ERR_UNSUPPORTED,
            "record '%s' is of version %lld, this program knows %d; use a newer one", path,
            (long long)version, SCHEMA_VERSION);
    return 0;
}

int schema_make(sqlite3 *db, const char *path, struct error *err)
{
    char pragmas[120];
    int code = schema_run(db, path, layout, err);
    for (int i = 0; i < QUALITY_COUNT && code == 0; i++) {
        char row[80];
        text_format(row, sizeof(row), "INSERT INTO quality VALUES(%d, '%s')", i,
                    quality_word((enum quality)i));
        code = schema_run(db, path, row, err);
    }
    text_format(pragmas, sizeof(pragmas),
                "PRAGMA application_id = %d; PRAGMA user_version = %d", SCHEMA_APPLICATION_ID,
                SCHEMA_VERSION);
    return code == 0 ? schema_run(db, path, pragmas, err) : code;
}
