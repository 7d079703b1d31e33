/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Looks a terminal type up. In a file of its own: term.h defines macros named columns, lines
 * and the like, which no other header survives.
 */
#include "terminal_type.h"

#include <curses.h>
#include <stdlib.h>
#include <term.h>
#include <unistd.h>

enum terminal_type terminal_type_check(void)
{
    int found = 0;
    if (getenv("TERM") == NULL || setupterm(NULL, STDOUT_FILENO, &found) != OK)
        return TERMINAL_TYPE_UNKNOWN;
    enum terminal_type type = cursor_address != NULL ? TERMINAL_TYPE_GOOD : TERMINAL_TYPE_DUMB;
    del_curterm(cur_term);
    return type;
}
