/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * What several verbs say in the same way: failures, bad usage, the problems of a plant file.
 */
#include "verbs.h"

#include <errno.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

int verb_failed(const char *verb, const struct error *err)
{
    fprintf(stderr, "ullage %s: %s\n", verb, err->text);
    return EXIT_FAILED;
}

int verb_usage(const char *verb, const char *fmt, ...)
{
    va_list args;
    va_start(args, fmt);
    char raw[400], text[400];
    vsnprintf(raw, sizeof(raw), fmt, args);
    va_end(args);
    text_printable(text, sizeof(text), raw);
    fprintf(stderr, "ullage %s: %s (see 'ullage %s --help')\n", verb, text, verb);
    return EXIT_USAGE;
}

void verb_print_problems(const struct problems *problems)
{
    for (int i = 0; i < problems->count; i++) {
        const struct problem *problem = &problems->at[i];
        fprintf(stderr, "%s:%d: %s: %s\n", problem->file, problem->line,
                problem->level == PROBLEM_ERROR ? "error" : "warning", problem->text);
    }
    if (problems->dropped > 0)
        fprintf(stderr, "and %d more\n", problems->dropped);
}

int verb_read_plant(const char *path, struct plant **out)
{
    struct problems *problems = calloc(1, sizeof(*problems));
    if (problems == NULL) {
        fprintf(stderr, "ullage: no memory to read %s\n", path);
        return ERR_MEMORY;
    }
    int code = plant_read(path, out, problems);
    verb_print_problems(problems);
    free(problems);
    return code;
}

int verb_end(const char *verb, int status)
{
    if (fflush(stdout) != 0 || ferror(stdout)) {
        fprintf(stderr, "ullage %s: standard output could not be written: %s\n", verb,
                strerror(errno));
        return EXIT_FAILED;
    }
    return status;
}
