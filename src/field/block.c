/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Which requests serve the points of a link. A value that spans registers must arrive in one
 * answer: the device may change it between two. Taking items in order of address, each request
 * as far as it reaches, gives the fewest: a request must start at the first item not yet
 * served, and what it cannot take fits the next.
 */
#include "internal.h"

#include <stdlib.h>

static bool is_bits(enum register_table table)
{
    return table == TABLE_COIL || table == TABLE_DISCRETE;
}

static int most(const struct link *link, enum register_table table)
{
    int registers = link->block < DEVICE_REGISTER_MAX ? link->block : DEVICE_REGISTER_MAX;
    if (!is_bits(table))
        return registers;
    return link->block < DEVICE_READ_MAX / 16 ? link->block * 16 : DEVICE_READ_MAX;
}

static int item_compare(const void *a, const void *b)
{
    const struct item *x = a, *y = b;
    if (x->table != y->table)
        return x->table < y->table ? -1 : 1;
    if (x->address != y->address)
        return x->address < y->address ? -1 : 1;
    return x->words - y->words;
}

static struct item item_of(const struct register_ref *ref)
{
    return (struct item){
        .table = ref->table, .address = ref->address, .words = register_words(ref)};
}

int items_collect(const struct plant *plant, int link, struct item *items)
{
    int count = 0;
    for (int i = 0; i < plant->point_count; i++) {
        const struct point *point = &plant->point[i];
        if (point->link != link)
            continue;
        items[count++] = item_of(&point->read);
        if (point->has_fault)
            items[count++] = item_of(&point->fault);
    }
    if (count == 0)
        return 0;
    qsort(items, (size_t)count, sizeof(*items), item_compare);
    int kept = 1;
    for (int i = 1; i < count; i++)
        if (item_compare(&items[i], &items[kept - 1]) != 0)
            items[kept++] = items[i];
    return kept;
}

int items_find(const struct item *items, int count, const struct register_ref *ref)
{
    struct item wanted = item_of(ref);
    const struct item *found =
        bsearch(&wanted, items, (size_t)count, sizeof(*items), item_compare);
    return found != NULL ? (int)(found - items) : -1;
}

struct block items_cover(const struct item *items, int count)
{
    int end = 0;
    for (int i = 0; i < count; i++)
        if (items[i].address + items[i].words > end)
            end = items[i].address + items[i].words;
    return (struct block){
        .table = items[0].table, .address = items[0].address, .count = end - items[0].address};
}

int items_reach(const struct link *link, const struct item *items, int count,
                struct block *block)
{
    int start = items[0].address, end = start + items[0].words;
    int reached = 1;
    for (; reached < count; reached++) {
        const struct item *next = &items[reached];
        int next_end = next->address + next->words > end ? next->address + next->words : end;
        if (next->table != items[0].table || next->address - end > link->gap ||
            next_end - start > most(link, next->table))
            break;
        end = next_end;
    }
    *block = (struct block){.table = items[0].table, .address = start, .count = end - start};
    return reached;
}

int block_plan(const struct plant *plant, int link, struct block *blocks, int max)
{
    struct item *items = calloc((size_t)plant->point_count * 2 + 1, sizeof(*items));
    if (items == NULL)
        return ERR_MEMORY;
    int item_count = items_collect(plant, link, items);
    int count = 0;
    for (int i = 0; i < item_count;) {
        if (count == max) {
            count = ERR_RANGE;
            break;
        }
        i += items_reach(&plant->link[link], items + i, item_count - i, &blocks[count++]);
    }
    free(items);
    return count;
}
