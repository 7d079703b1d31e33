/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Text: checked copies, numbers, likely slips, and making foreign text safe to print. Numbers
 * are read by the C locale's rules; the program never sets LC_NUMERIC.
 */
#include "ullage/base.h"

#include <ctype.h>
#include <errno.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

bool text_copy(char *dst, size_t size, const char *src)
{
    size_t length = strnlen(src, size);
    bool whole = length < size;
    if (!whole)
        length = size - 1;
    memcpy(dst, src, length);
    dst[length] = '\0';
    return whole;
}

bool text_format(char *dst, size_t size, const char *fmt, ...)
{
    va_list args;
    va_start(args, fmt);
    int length = vsnprintf(dst, size, fmt, args);
    va_end(args);
    return length >= 0 && (size_t)length < size;
}

size_t text_rune(const char *text, uint32_t *rune)
{
    const unsigned char *s = (const unsigned char *)text;
    size_t length = s[0] < 0x80   ? 1
                    : s[0] < 0xC2 ? 0
                    : s[0] < 0xE0 ? 2
                    : s[0] < 0xF0 ? 3
                    : s[0] < 0xF5 ? 4
                                  : 0;
    if (length == 0)
        return 0;
    uint32_t value = length == 1 ? s[0] : s[0] & (0x7Fu >> length);
    for (size_t i = 1; i < length; i++) {
        if ((s[i] & 0xC0) != 0x80)
            return 0;
        value = value << 6 | (s[i] & 0x3Fu);
    }
    static const uint32_t least[] = {0, 0, 0x80, 0x800, 0x10000};
    if (value < least[length] || value > 0x10FFFF || (value >= 0xD800 && value <= 0xDFFF))
        return 0;
    *rune = value;
    return length;
}

/* Control characters, and what reorders or hides the text around it. */
static bool rune_hostile(uint32_t rune)
{
    return rune < 0x20 || (rune >= 0x7F && rune < 0xA0) || (rune >= 0x200B && rune <= 0x200F) ||
           (rune >= 0x2028 && rune <= 0x202E) || (rune >= 0x2060 && rune <= 0x206F) ||
           rune == 0x061C || rune == 0xFEFF || (rune >= 0xFFF9 && rune <= 0xFFFB) ||
           (rune >= 0xE0000 && rune <= 0xE007F);
}

void text_printable(char *dst, size_t size, const char *src)
{
    size_t used = 0;
    while (*src != '\0') {
        uint32_t rune = 0;
        size_t length = text_rune(src, &rune);
        bool keep = length > 0 && !rune_hostile(rune);
        size_t out = keep ? length : 1;
        if (used + out >= size)
            break;
        if (keep)
            memcpy(dst + used, src, length);
        else
            dst[used] = '?';
        used += out;
        src += length > 0 ? length : 1;
    }
    dst[used] = '\0';
}

char *text_trim(char *text)
{
    while (isspace((unsigned char)*text))
        text++;
    size_t length = strlen(text);
    while (length > 0 && isspace((unsigned char)text[length - 1]))
        text[--length] = '\0';
    return text;
}

int text_to_double(const char *text, double *out)
{
    /* strtod also takes hexadecimal, "inf" and "nan": none of them is a number in a plant file.
     */
    const char *s = text;
    if (*s == '+' || *s == '-')
        s++;
    if (!isdigit((unsigned char)*s) && !(*s == '.' && isdigit((unsigned char)s[1])))
        return ERR_FORMAT;
    if (s[strspn(s, "0123456789.eE+-")] != '\0')
        return ERR_FORMAT;
    char *end;
    double value = strtod(text, &end);
    if (end == text || *end != '\0')
        return ERR_FORMAT;
    if (!isfinite(value))
        return ERR_RANGE;
    *out = value;
    return 0;
}

int text_to_long(const char *text, long low, long high, long *out)
{
    const char *s = text;
    if (*s == '+' || *s == '-')
        s++;
    bool hex = s[0] == '0' && (s[1] == 'x' || s[1] == 'X');
    if (!(hex ? isxdigit((unsigned char)s[2]) : isdigit((unsigned char)*s)))
        return ERR_FORMAT;
    char *end;
    errno = 0;
    long value = strtol(text, &end, hex ? 16 : 10);
    if (*end != '\0')
        return ERR_FORMAT;
    if (errno == ERANGE || value < low || value > high)
        return ERR_RANGE;
    *out = value;
    return 0;
}

enum { DISTANCE_MAX = 64 };

static char lower(char c)
{
    return (char)tolower((unsigned char)c);
}

size_t text_distance(const char *a, const char *b)
{
    /* Optimal string alignment (Levenshtein 1966 with Damerau's swap). A common start costs
     * nothing. Names are short: after it, what lies beyond DISTANCE_MAX characters counts by
     * length alone. */
    while (*a != '\0' && lower(*a) == lower(*b)) {
        a++;
        b++;
    }
    size_t la = strnlen(a, DISTANCE_MAX), lb = strnlen(b, DISTANCE_MAX);
    size_t rows[3][DISTANCE_MAX + 1];
    size_t *before = rows[0], *above = rows[1], *now = rows[2];
    for (size_t j = 0; j <= lb; j++)
        above[j] = before[j] = j;
    for (size_t i = 1; i <= la; i++) {
        now[0] = i;
        for (size_t j = 1; j <= lb; j++) {
            bool same = lower(a[i - 1]) == lower(b[j - 1]);
            size_t best = above[j - 1] + (same ? 0 : 1);
            if (above[j] + 1 < best)
                best = above[j] + 1;
            if (now[j - 1] + 1 < best)
                best = now[j - 1] + 1;
            if (i > 1 && j > 1 && lower(a[i - 1]) == lower(b[j - 2]) &&
                lower(a[i - 2]) == lower(b[j - 1]) && before[j - 2] + 1 < best)
                best = before[j - 2] + 1;
            now[j] = best;
        }
        size_t *spare = before;
        before = above;
        above = now;
        now = spare;
    }
    size_t rest_a = strlen(a) - la, rest_b = strlen(b) - lb;
    return above[lb] + (rest_a > rest_b ? rest_a : rest_b);
}

const char *text_nearest(const char *text, const char *const *candidates, size_t count)
{
    const char *best = NULL;
    size_t length = strlen(text);
    /* A slip changes about a third of a word at most. */
    size_t limit = length < 3 ? 1 : length / 3 + 1;
    for (size_t i = 0; i < count; i++) {
        if (candidates[i] == NULL)
            continue;
        size_t distance = text_distance(text, candidates[i]);
        if (distance > limit)
            continue;
        best = candidates[i];
        if (distance == 0)
            break;
        limit = distance - 1; /* the first of equals stays */
    }
    return best;
}
