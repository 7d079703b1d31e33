/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/* Private to the room: what can be said of a terminal before it is taken. */
#ifndef ULLAGE_SCREEN_TERMINAL_TYPE_H
#define ULLAGE_SCREEN_TERMINAL_TYPE_H

enum terminal_type { TERMINAL_TYPE_GOOD, TERMINAL_TYPE_UNKNOWN, TERMINAL_TYPE_DUMB };
/* The type that TERM names: known here, and able to place text? */
enum terminal_type terminal_type_check(void);

#endif
