/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The verbs of the command line: one file each, one table in main.c. A verb reads its options,
 * calls the rooms below and turns what they return into text and an exit status; the rest of
 * the program never exits.
 */
#ifndef ULLAGE_VERBS_H
#define ULLAGE_VERBS_H

#include <stdbool.h>

#include "ullage/base.h"
#include "ullage/plant.h"

enum exit_status {
    EXIT_DONE = 0,
    EXIT_FAILED = 1, /* it could not be done; the sentence is on stderr */
    EXIT_USAGE = 2,  /* bad usage */
    EXIT_UNWELL = 3  /* done, and what was asked about is not well */
};

/* A verb: argv[0] is its own name. Returns an enum exit_status. */
typedef int verb_run(int argc, char **argv);
verb_run verb_check, verb_collect, verb_demo, verb_export, verb_fluid, verb_inspect,
    verb_simulate, verb_watch;

struct verb {
    const char *name;
    verb_run *run;
    const char *usage; /* options, after the name */
    const char *says;  /* one line for --help */
};

/* "ullage VERB: sentence" on stderr; returns EXIT_FAILED. */
int verb_failed(const char *verb, const struct error *err);
/* The same for a bad option, with a hint at --help; returns EXIT_USAGE. */
int verb_usage(const char *verb, const char *fmt, ...) PRINTF_LIKE(2, 3);
/* Reads a plant file; its problems go to stderr, one a line. 0 or a negative code (already
 * told). */
int verb_read_plant(const char *path, struct plant **out) MUST_CHECK;
/* Writes problems to stderr as FILE:LINE: error: text. */
void verb_print_problems(const struct problems *problems);
/* Flushes stdout; EXIT_FAILED with a sentence if that fails, else status. */
int verb_end(const char *verb, int status);

#endif
