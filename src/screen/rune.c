/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Runes: how wide they are, and what stands for them in ASCII. The widths are those of Unicode
 * Standard Annex 11 (East Asian wide and full width) by blocks, and of the common blocks of
 * combining marks; a terminal that knows more agrees on these.
 */
#include "canvas.h"

struct range {
    uint32_t first, last;
};

static bool within(const struct range *ranges, size_t count, uint32_t rune)
{
    for (size_t i = 0; i < count; i++)
        if (rune >= ranges[i].first && rune <= ranges[i].last)
            return true;
    return false;
}

int rune_width(uint32_t rune)
{
    static const struct range marks[] = {
        {0x0300,  0x036F },
        {0x0483,  0x0489 },
        {0x0591,  0x05BD },
        {0x0610,  0x061A },
        {0x064B,  0x065F },
        {0x1AB0,  0x1AFF },
        {0x1DC0,  0x1DFF },
        {0x20D0,  0x20FF },
        {0xFE00,  0xFE0F },
        {0xFE20,  0xFE2F },
        {0xE0100, 0xE01EF},
    };
    static const struct range wide[] = {
        {0x1100,  0x115F },
        {0x231A,  0x231B },
        {0x23E9,  0x23EC },
        {0x2E80,  0x303E },
        {0x3041,  0x33FF },
        {0x3400,  0x4DBF },
        {0x4E00,  0xA4CF },
        {0xA960,  0xA97F },
        {0xAC00,  0xD7A3 },
        {0xF900,  0xFAFF },
        {0xFE30,  0xFE6F },
        {0xFF01,  0xFF60 },
        {0xFFE0,  0xFFE6 },
        {0x1F300, 0x1F64F},
        {0x1F680, 0x1F6FF},
        {0x1F900, 0x1F9FF},
        {0x20000, 0x3FFFD},
    };
    if (rune < 0x300)
        return 1;
    if (within(marks, ARRAY_LENGTH(marks), rune))
        return 0;
    return within(wide, ARRAY_LENGTH(wide), rune) ? 2 : 1;
}

const char *rune_ascii(uint32_t rune)
{
    static const struct {
        uint32_t rune;
        const char *ascii;
    } table[] = {
        {0x00B1, "+-"},
        {0x00B7, "." },
        {0x00B0, "d" },
        {0x00B2, "2" },
        {0x00B3, "3" },
        {0x00B5, "u" },
        {0x00D7, "x" },
        {0x03BC, "u" },
        {0x2013, "-" },
        {0x2014, "-" },
        {0x2018, "'" },
        {0x2019, "'" },
        {0x201C, "\""},
        {0x201D, "\""},
        {0x2026, ">" },
        {0x2192, ">" },
        {0x2212, "-" },
        {0x2500, "-" },
        {0x2502, "|" },
        {0x2581, "_" },
        {0x2582, "." },
        {0x2583, "-" },
        {0x2584, "=" },
        {0x2585, "+" },
        {0x2586, "*" },
        {0x2587, "%" },
        {0x2588, "#" },
        {0x258F, "|" },
        {0x2595, "|" },
        {0x25B4, "^" },
        {0x25B8, ">" },
        {0x25C6, "o" },
    };
    for (size_t i = 0; i < ARRAY_LENGTH(table); i++)
        if (table[i].rune == rune)
            return table[i].ascii;
    return "?";
}

size_t rune_write(uint32_t rune, char text[5])
{
    size_t length = rune < 0x80 ? 1 : rune < 0x800 ? 2 : rune < 0x10000 ? 3 : 4;
    static const unsigned lead[] = {0, 0, 0xC0, 0xE0, 0xF0};
    for (size_t i = length; i > 1; i--) {
        text[i - 1] = (char)(0x80 | (rune & 0x3F));
        rune >>= 6;
    }
    text[0] = (char)(length == 1 ? rune : (lead[length] | rune));
    text[length] = '\0';
    return length;
}
