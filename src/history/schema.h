/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/* Private to the room: what a record's file is, shared by its writer and its reader. */
#ifndef ULLAGE_HISTORY_SCHEMA_H
#define ULLAGE_HISTORY_SCHEMA_H

#include <sqlite3.h>

#include "ullage/history.h"

/* Marks a SQLite file as a record ("ullr"), and its layout. */
enum { SCHEMA_APPLICATION_ID = 0x756c6c72, SCHEMA_VERSION = 1 };

/* ERR_IO with SQLite's own sentence. */
int schema_failed(sqlite3 *db, const char *path, const char *doing, struct error *err);
int schema_run(sqlite3 *db, const char *path, const char *sql, struct error *err) MUST_CHECK;
/* The value of a pragma or a query with one integer. */
int schema_integer(sqlite3 *db, const char *path, const char *sql, int64_t *out,
                   struct error *err) MUST_CHECK;
/* Is it a record of a version that is known here? fresh: an empty file is one to be made. */
int schema_check(sqlite3 *db, const char *path, bool *fresh, struct error *err) MUST_CHECK;
int schema_make(sqlite3 *db, const char *path, struct error *err) MUST_CHECK;

#endif
