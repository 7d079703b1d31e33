/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * What watch and demo have in common: the options of a picture, and showing a started
 * collector.
 */
#ifndef ULLAGE_VERBS_PICTURE_H
#define ULLAGE_VERBS_PICTURE_H

#include <getopt.h>
#include <stdbool.h>

#include "ullage/screen.h"

struct picture {
    struct dashboard_options dashboard;
    bool print;
    char user[32];
};

/* Long options --panel --print --size --ascii --mono, to be put into a verb's table. */
enum { PICTURE_PANEL = 1000, PICTURE_PRINT, PICTURE_SIZE, PICTURE_ASCII, PICTURE_MONO };
#define PICTURE_OPTIONS                                                                        \
    {"panel", required_argument, NULL, PICTURE_PANEL},                                         \
        {"print", no_argument, NULL, PICTURE_PRINT},                                           \
        {"size", required_argument, NULL, PICTURE_SIZE},                                       \
        {"ascii", no_argument, NULL, PICTURE_ASCII},                                           \
    {                                                                                          \
        "mono", no_argument, NULL, PICTURE_MONO                                                \
    }
extern const char picture_help[];

/* 0 taken, 1 not one of these options, EXIT_USAGE (already told) when its value is wrong. */
int picture_option(struct picture *picture, const char *verb, int option, const char *value);
/* After the options: user's name; without a terminal on both ends a picture is printed. From
 * here on the log keeps off the terminal. */
void picture_settle(struct picture *picture);
/* Shows the collector. Returns an enum exit_status; failures are told. */
int picture_show(const struct picture *picture, const char *verb, struct collector *collector,
                 int signals_fd);

#endif
