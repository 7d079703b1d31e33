/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The list of what is wrong with a plant file: bounded, in the order of file and line.
 */
#include "reader.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

void problem_add(struct problems *problems, enum problem_level level, struct place place,
                 const char *fmt, ...)
{
    if (level == PROBLEM_ERROR)
        problems->error_count++;
    if (problems->count == (int)ARRAY_LENGTH(problems->at)) {
        problems->dropped++;
        return;
    }
    struct problem *problem = &problems->at[problems->count++];
    char text[sizeof(problem->text)];
    va_list args;
    va_start(args, fmt);
    vsnprintf(text, sizeof(text), fmt, args);
    va_end(args);
    problem->level = level;
    text_printable(problem->file, sizeof(problem->file), place.file);
    problem->line = place.line;
    text_printable(problem->text, sizeof(problem->text), text);
}

static int by_place(const void *a, const void *b)
{
    const struct problem *x = a, *y = b;
    int files = strcmp(x->file, y->file);
    return files != 0 ? files : x->line - y->line;
}

void problems_sort(struct problems *problems)
{
    qsort(problems->at, (size_t)problems->count, sizeof(problems->at[0]), by_place);
}
