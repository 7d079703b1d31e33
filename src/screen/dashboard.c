/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The main loop of a program with a collector and a terminal: one wait on frames, keys and
 * signals. A picture is drawn when a frame or a key asks for one, never on a timer of its own.
 */
#include "ullage/screen.h"

#include <errno.h>
#include <poll.h>
#include <signal.h>
#include <string.h>
#include <unistd.h>

struct dashboard {
    struct collector *collector;
    const struct dashboard_options *options;
    struct screen *screen;
    struct terminal *terminal;
    struct canvas *canvas;
};

/* A canvas of the terminal's present size; the old one is kept if there is no memory. */
static int fit_canvas(struct dashboard *dashboard, struct error *err)
{
    int columns, rows;
    terminal_size(dashboard->terminal, &columns, &rows);
    columns = columns < 1 ? 1 : columns > SCREEN_COLUMNS_MAX ? SCREEN_COLUMNS_MAX : columns;
    rows = rows < 1 ? 1 : rows > SCREEN_ROWS_MAX ? SCREEN_ROWS_MAX : rows;
    if (dashboard->canvas != NULL && canvas_columns(dashboard->canvas) == columns &&
        canvas_rows(dashboard->canvas) == rows)
        return 0;
    struct canvas *canvas = NULL;
    int code = canvas_create(columns, rows, terminal_ascii(dashboard->terminal), &canvas, err);
    if (code != 0)
        return dashboard->canvas != NULL ? 0 : code;
    canvas_free(dashboard->canvas);
    dashboard->canvas = canvas;
    return 0;
}

static void show(struct dashboard *dashboard)
{
    screen_draw(dashboard->screen, collector_view(dashboard->collector), dashboard->canvas);
    terminal_show(dashboard->terminal, dashboard->canvas);
}

static void send_command(struct dashboard *dashboard, struct command *command)
{
    struct error err = {0};
    text_copy(command->user, sizeof(command->user),
              dashboard->options->user != NULL ? dashboard->options->user : "unknown");
    if (collector_command(dashboard->collector, command, &err) != 0)
        screen_message(dashboard->screen, err.text);
}

/* All keys that wait. 1 to go on, 0 when the operator quits, negative when memory fails. */
static int take_keys(struct dashboard *dashboard, struct error *err)
{
    bool any = false;
    int64_t key;
    while ((key = terminal_key(dashboard->terminal)) >= 0) {
        struct command command = {0};
        any = true;
        switch (screen_key(dashboard->screen, collector_view(dashboard->collector),
                           (uint32_t)key, &command)) {
        case SCREEN_QUIT:
            return 0;
        case SCREEN_COMMAND:
            send_command(dashboard, &command);
            break;
        case SCREEN_NONE:
        case SCREEN_REDRAW:
            break;
        }
    }
    if (any) {
        int code = fit_canvas(dashboard, err);
        if (code != 0)
            return code;
        show(dashboard);
    }
    return 1;
}

static int loop(struct dashboard *dashboard, int signals_fd, struct error *err)
{
    struct pollfd fds[] = {
        {.fd = collector_fd(dashboard->collector), .events = POLLIN},
        {.fd = STDIN_FILENO,                       .events = POLLIN},
        {.fd = signals_fd,                         .events = POLLIN},
    };
    for (;;) {
        int code = take_keys(dashboard, err);
        if (code <= 0)
            return code;
        if (poll(fds, ARRAY_LENGTH(fds), -1) < 0 && errno != EINTR)
            return error_set(err, ERR_IO, "the dashboard cannot wait: %s", strerror(errno));
        if (signals_take(signals_fd) != 0)
            return 0;
        /* A terminal that has gone away gives no key ever again. */
        if ((fds[1].revents & (POLLHUP | POLLERR | POLLNVAL)) != 0)
            return error_set(err, ERR_IO, "the terminal has gone away");
        if (collector_tick(dashboard->collector))
            show(dashboard);
    }
}

int dashboard_run(struct collector *collector, const struct dashboard_options *options,
                  int signals_fd, struct error *err)
{
    struct dashboard dashboard = {.collector = collector, .options = options};
    struct terminal_options look = {.ascii = options->ascii, .mono = options->mono};
    int code = terminal_open(&look, &dashboard.terminal, err);
    if (code != 0)
        return code;
    code = screen_create(&dashboard.screen, err);
    if (code == 0 && options->panel != NULL)
        code = screen_panel(dashboard.screen, options->panel, err);
    if (code == 0)
        code = fit_canvas(&dashboard, err);
    if (code == 0) {
        show(&dashboard);
        code = loop(&dashboard, signals_fd, err);
    }
    terminal_close(dashboard.terminal);
    canvas_free(dashboard.canvas);
    screen_free(dashboard.screen);
    return code;
}

static int wait_ready(struct collector *collector, int signals_fd, double patience_s,
                      struct error *err)
{
    struct pollfd fds[] = {
        {.fd = collector_fd(collector), .events = POLLIN},
        {.fd = signals_fd,              .events = POLLIN},
    };
    int64_t deadline_ns = time_mono_ns() + time_s_to_ns(patience_s);
    while (!collector_view(collector)->ready) {
        int64_t left_ns = deadline_ns - time_mono_ns();
        if (left_ns <= 0)
            return error_set(
                err, ERR_NETWORK,
                "no whole frame within %.0f s; check the links with 'ullage inspect'",
                patience_s);
        if (poll(fds, ARRAY_LENGTH(fds), (int)(left_ns / 1000000) + 1) < 0 && errno != EINTR)
            return error_set(err, ERR_IO, "cannot wait for a frame: %s", strerror(errno));
        if (signals_take(signals_fd) != 0)
            return error_set(err, ERR_IO, "ended by a signal before the first frame");
        collector_tick(collector);
    }
    return 0;
}

static bool view_well(const struct view *view)
{
    for (int i = 0; i < view->results->banners.count; i++)
        if (view->results->banners.at[i].level != BANNER_NOTE)
            return false;
    return !view->stale;
}

int dashboard_print(struct collector *collector, const struct dashboard_options *options,
                    int signals_fd, double patience_s, FILE *out, bool *well, struct error *err)
{
    struct screen *screen = NULL;
    struct canvas *canvas = NULL;
    int columns = options->columns > 0 ? options->columns : SCREEN_COLUMNS_MIN;
    int rows = options->rows > 0 ? options->rows : SCREEN_ROWS_MIN;
    int code = screen_create(&screen, err);
    if (code == 0 && options->panel != NULL)
        code = screen_panel(screen, options->panel, err);
    if (code == 0)
        code = canvas_create(columns, rows, options->ascii, &canvas, err);
    if (code == 0)
        code = wait_ready(collector, signals_fd, patience_s, err);
    if (code == 0) {
        screen_draw(screen, collector_view(collector), canvas);
        canvas_write(canvas, out);
        *well = view_well(collector_view(collector));
    }
    canvas_free(canvas);
    screen_free(screen);
    return code;
}
