/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The options of a picture, and showing a started collector; for watch and demo.
 */
#include "picture.h"

#include <langinfo.h>
#include <pwd.h>
#include <stdio.h>
#include <string.h>
#include <unistd.h>

#include "verbs.h"

/* Longest wait for the first whole frame of a printed picture. */
static const double PATIENCE_S = 30;

const char picture_help[] =
    "  --panel NAME         panel to begin with\n"
    "  --print              write one picture as text after the first whole frame, and end;\n"
    "                       status 3 while a safety banner stands or all readings are old\n"
    "  --size COLSxROWS     size of a printed picture (80x24 if left out)\n"
    "  --ascii              only ASCII characters\n"
    "  --mono               no colour\n";

static int option_size(struct picture *picture, const char *verb, const char *value)
{
    char copy[32];
    long columns, rows;
    char *cross = text_copy(copy, sizeof(copy), value) ? strchr(copy, 'x') : NULL;
    if (cross != NULL)
        *cross++ = '\0';
    if (cross == NULL ||
        text_to_long(copy, SCREEN_COLUMNS_MIN, SCREEN_COLUMNS_MAX, &columns) != 0 ||
        text_to_long(cross, SCREEN_ROWS_MIN, SCREEN_ROWS_MAX, &rows) != 0)
        return verb_usage(verb, "--size '%s' is not COLSxROWS from %dx%d to %dx%d", value,
                          SCREEN_COLUMNS_MIN, SCREEN_ROWS_MIN, SCREEN_COLUMNS_MAX,
                          SCREEN_ROWS_MAX);
    picture->dashboard.columns = (int)columns;
    picture->dashboard.rows = (int)rows;
    return 0;
}

static int option_panel(struct picture *picture, const char *verb, const char *value)
{
    struct screen *screen = NULL;
    struct error err = {0};
    int code = screen_create(&screen, &err);
    if (code == 0)
        code = screen_panel(screen, value, &err);
    screen_free(screen);
    picture->dashboard.panel = value;
    return code == 0 ? 0 : verb_usage(verb, "%s", err.text);
}

int picture_option(struct picture *picture, const char *verb, int option, const char *value)
{
    switch (option) {
    case PICTURE_PANEL:
        return option_panel(picture, verb, value);
    case PICTURE_PRINT:
        picture->print = true;
        return 0;
    case PICTURE_SIZE:
        return option_size(picture, verb, value);
    case PICTURE_ASCII:
        picture->dashboard.ascii = true;
        return 0;
    case PICTURE_MONO:
        picture->dashboard.mono = true;
        return 0;
    default:
        return 1;
    }
}

/* While curses owns the terminal no line may go there; links' ups and downs are in the journal.
 */
static void swallow(enum log_level level, const char *line, void *context)
{
    (void)level;
    (void)line;
    (void)context;
}

void picture_settle(struct picture *picture)
{
    const struct passwd *entry = getpwuid(getuid());
    if (entry != NULL)
        text_printable(picture->user, sizeof(picture->user), entry->pw_name);
    else
        text_format(picture->user, sizeof(picture->user), "uid %lu", (unsigned long)getuid());
    picture->dashboard.user = picture->user;
    if (!isatty(STDIN_FILENO) || !isatty(STDOUT_FILENO))
        picture->print = true;
    if (picture->print && strcmp(nl_langinfo(CODESET), "UTF-8") != 0)
        picture->dashboard.ascii = true;
    /* What goes well is no news on stderr; what does not still is. */
    if (picture->print)
        log_set_level(LOG_LEVEL_WARNING);
    else
        log_set_sink(swallow, NULL);
}

int picture_show(const struct picture *picture, const char *verb, struct collector *collector,
                 int signals_fd)
{
    struct error err = {0};
    bool well = true;
    int code;
    if (picture->print) {
        code = dashboard_print(collector, &picture->dashboard, signals_fd, PATIENCE_S, stdout,
                               &well, &err);
    } else {
        code = dashboard_run(collector, &picture->dashboard, signals_fd, &err);
        log_set_sink(NULL, NULL);
    }
    if (code != 0)
        return verb_failed(verb, &err);
    return verb_end(verb, well ? EXIT_DONE : EXIT_UNWELL);
}
