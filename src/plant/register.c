/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Where a value stands in a device: "input 0 f32 CDAB", "holding 0x10 u16.3", "discrete 12".
 */
#include "ullage/plant.h"

#include <string.h>

static const char *const table_words[] = {
    [TABLE_COIL] = "coil",
    [TABLE_DISCRETE] = "discrete",
    [TABLE_INPUT] = "input",
    [TABLE_HOLDING] = "holding",
};
static const char *const type_words[] = {
    [REGISTER_BIT] = "bit", [REGISTER_U16] = "u16", [REGISTER_I16] = "i16",
    [REGISTER_U32] = "u32", [REGISTER_I32] = "i32", [REGISTER_U64] = "u64",
    [REGISTER_I64] = "i64", [REGISTER_F32] = "f32", [REGISTER_F64] = "f64",
};
static const char *const order_words[] = {
    [ORDER_ABCD] = "ABCD",
    [ORDER_CDAB] = "CDAB",
    [ORDER_BADC] = "BADC",
    [ORDER_DCBA] = "DCBA",
};
_Static_assert(ARRAY_LENGTH(table_words) == TABLE_COUNT, "each table has its word");
_Static_assert(ARRAY_LENGTH(type_words) == REGISTER_TYPE_COUNT, "each type has its word");
_Static_assert(ARRAY_LENGTH(order_words) == ORDER_COUNT, "each order has its word");

const char *register_table_word(enum register_table table)
{
    return table_words[table];
}

const char *register_type_word(enum register_type type)
{
    return type_words[type];
}

const char *byte_order_word(enum byte_order order)
{
    return order_words[order];
}

int register_words(const struct register_ref *ref)
{
    switch (ref->type) {
    case REGISTER_U32:
    case REGISTER_I32:
    case REGISTER_F32:
        return 2;
    case REGISTER_U64:
    case REGISTER_I64:
    case REGISTER_F64:
        return 4;
    case REGISTER_BIT:
    case REGISTER_U16:
    case REGISTER_I16:
    case REGISTER_TYPE_COUNT:
        break;
    }
    return 1;
}

static int find_word(const char *const *words, int count, const char *word)
{
    for (int i = 0; i < count; i++)
        if (strcmp(words[i], word) == 0)
            return i;
    return -1;
}

static int bad_word(const char *what, const char *word, const char *const *words, int count,
                    struct error *err)
{
    const char *near = text_nearest(word, words, (size_t)count);
    if (near != NULL)
        return error_set(err, ERR_FORMAT, "'%s' is no %s; did you mean '%s'?", word, what,
                         near);
    char all[80] = "";
    for (int i = 0; i < count; i++)
        text_format(all + strlen(all), sizeof(all) - strlen(all), "%s%s", i > 0 ? " " : "",
                    words[i]);
    return error_set(err, ERR_FORMAT, "'%s' is no %s; one of: %s", word, what, all);
}

static int parse_type(const char *word, struct register_ref *ref, struct error *err)
{
    bool wide = ref->table == TABLE_INPUT || ref->table == TABLE_HOLDING;
    if (strncmp(word, "u16.", 4) == 0) {
        long bit;
        if (!wide || text_to_long(word + 4, 0, 15, &bit) != 0)
            return error_set(
                err, ERR_FORMAT,
                "'%s': a bit of a register is u16.0 to u16.15, of input or holding", word);
        ref->type = REGISTER_BIT;
        ref->bit = (int)bit;
        return 0;
    }
    int type = find_word(type_words, REGISTER_TYPE_COUNT, word);
    if (type < 0)
        return bad_word("register type", word, type_words, REGISTER_TYPE_COUNT, err);
    if (wide && type == REGISTER_BIT)
        return error_set(err, ERR_FORMAT,
                         "a bit of a register names its place: u16.0 to u16.15, not 'bit'");
    if (!wide && type != REGISTER_BIT)
        return error_set(err, ERR_FORMAT, "a %s holds a bit, not %s", table_words[ref->table],
                         word);
    ref->type = (enum register_type)type;
    return 0;
}

int register_parse(const char *text, struct register_ref *out, struct error *err)
{
    char copy[80];
    if (!text_copy(copy, sizeof(copy), text))
        return error_set(err, ERR_FORMAT, "'%.40s...' is too long for a register", text);
    char *word[4] = {NULL}, *rest = NULL;
    int count = 0;
    for (char *w = strtok_r(copy, " \t", &rest); w != NULL; w = strtok_r(NULL, " \t", &rest)) {
        if (count == 4)
            return error_set(err, ERR_FORMAT,
                             "'%s' has a word too many; TABLE ADDRESS TYPE ORDER", text);
        word[count++] = w;
    }
    if (count < 2)
        return error_set(err, ERR_FORMAT,
                         "'%s' is no register; write TABLE ADDRESS TYPE, such as input 0 f32",
                         text);
    struct register_ref ref = {.bit = -1, .order = ORDER_ABCD};
    int table = find_word(table_words, TABLE_COUNT, word[0]);
    if (table < 0)
        return bad_word("register table", word[0], table_words, TABLE_COUNT, err);
    ref.table = (enum register_table)table;
    long address;
    if (text_to_long(word[1], 0, 65535, &address) != 0)
        return error_set(err, ERR_FORMAT,
                         "'%s' is no address; the protocol's own, 0 to 65535 or 0x0 to 0xffff",
                         word[1]);
    ref.address = (int)address;
    bool bits = ref.table == TABLE_COIL || ref.table == TABLE_DISCRETE;
    if (count < 3 && !bits)
        return error_set(err, ERR_FORMAT, "'%s' lacks its type (u16 i16 u32 ... f64)", text);
    int code = parse_type(count < 3 ? "bit" : word[2], &ref, err);
    if (code != 0)
        return code;
    if (count == 4) {
        int order = find_word(order_words, ORDER_COUNT, word[3]);
        if (order < 0)
            return bad_word("byte order", word[3], order_words, ORDER_COUNT, err);
        ref.order = (enum byte_order)order;
        if (ref.type == REGISTER_BIT)
            return error_set(err, ERR_FORMAT, "a bit has no byte order");
    }
    if (ref.address + register_words(&ref) > 65536)
        return error_set(err, ERR_FORMAT, "'%s' reaches beyond register 65535", text);
    *out = ref;
    return 0;
}

void register_format(char *dst, size_t size, const struct register_ref *ref)
{
    char type[12];
    if (ref->type == REGISTER_BIT && ref->bit >= 0)
        text_format(type, sizeof(type), "u16.%d", ref->bit);
    else
        text_copy(type, sizeof(type), type_words[ref->type]);
    text_format(dst, size, "%s %d %s%s%s", table_words[ref->table], ref->address, type,
                ref->order != ORDER_ABCD ? " " : "",
                ref->order != ORDER_ABCD ? order_words[ref->order] : "");
}
