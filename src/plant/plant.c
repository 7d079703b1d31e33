/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Reading a plant file: sections, drafts, resolved plant, cross-checks. All problems come out
 * of one run.
 */
#include "reader.h"

#include <stdlib.h>

int plant_read(const char *path, struct plant **out, struct problems *problems)
{
    struct arena *arena = arena_create();
    struct source source = {0};
    struct assembly assembly = {.arena = arena, .problems = problems};
    struct place place = {.file = "plant", .line = 0};
    *problems = (struct problems){0};
    int code = arena == NULL ? ERR_MEMORY : 0;
    if (code == 0) {
        assembly.plant = arena_take(arena, 1, sizeof(*assembly.plant));
        const char *file = arena_text(arena, path);
        if (assembly.plant == NULL || file == NULL)
            code = ERR_MEMORY;
        else
            place.file = file;
    }
    if (code == 0)
        code = source_read(path, arena, &source, problems);
    if (code == 0)
        code = assemble(&assembly, &source);
    if (code == 0)
        code = resolve(&assembly);
    if (code == 0)
        crosscheck(&assembly);
    free(assembly.pending);
    source_done(&source);
    if (code == ERR_MEMORY)
        problem_add(problems, PROBLEM_ERROR, place, "no memory to read it");
    problems_sort(problems);
    if (code == 0 && problems->error_count > 0)
        code = ERR_CONFIG;
    if (code != 0) {
        arena_free(arena);
        return code;
    }
    assembly.plant->arena = arena;
    *out = assembly.plant;
    return 0;
}

void plant_free(struct plant *plant)
{
    if (plant != NULL)
        arena_free(plant->arena);
}

int plant_redirect(struct plant *plant, const char *host, int port)
{
    struct link *links =
        arena_take(plant->arena, (size_t)plant->link_count + 1, sizeof(struct link));
    char *copy = arena_text(plant->arena, host);
    if (links == NULL || copy == NULL)
        return ERR_MEMORY;
    for (int i = 0; i < plant->link_count; i++) {
        links[i] = plant->link[i];
        links[i].host = copy;
        links[i].port = port;
    }
    plant->link = links;
    return 0;
}
