/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Memory taken once at start-up and given back as a whole: a chain of blocks, each filled from
 * its start. A request larger than a block gets a block of its own.
 */
#include "ullage/base.h"

#include <stdalign.h>
#include <stdlib.h>
#include <string.h>

enum { ARENA_BLOCK = 64 * 1024 };

struct arena_block {
    struct arena_block *next;
    size_t used, size;
    alignas(max_align_t) unsigned char bytes[];
};

struct arena {
    struct arena_block *first;
};

struct arena *arena_create(void)
{
    return calloc(1, sizeof(struct arena));
}

void *arena_take(struct arena *arena, size_t count, size_t size)
{
    const size_t step = alignof(max_align_t);
    if (size != 0 && count > (SIZE_MAX / 2) / size)
        return NULL;
    size_t wanted = (count * size + step - 1) / step * step;
    if (wanted == 0)
        wanted = step;
    struct arena_block *block = arena->first;
    if (block == NULL || block->size - block->used < wanted) {
        size_t room = wanted > ARENA_BLOCK ? wanted : ARENA_BLOCK;
        block = calloc(1, sizeof(*block) + room);
        if (block == NULL)
            return NULL;
        block->size = room;
        block->next = arena->first;
        arena->first = block;
    }
    void *memory = block->bytes + block->used;
    block->used += wanted;
    return memory;
}

char *arena_text(struct arena *arena, const char *text)
{
    size_t length = strlen(text) + 1;
    char *copy = arena_take(arena, length, 1);
    if (copy != NULL)
        memcpy(copy, text, length);
    return copy;
}

void arena_free(struct arena *arena)
{
    if (arena == NULL)
        return;
    for (struct arena_block *block = arena->first; block != NULL;) {
        struct arena_block *next = block->next;
        free(block);
        block = next;
    }
    free(arena);
}
