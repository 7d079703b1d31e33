/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * ullage collect: polls, computes and records, without a screen.
 */
#include <errno.h>
#include <getopt.h>
#include <poll.h>
#include <signal.h>
#include <stdio.h>
#include <string.h>
#include <unistd.h>

#include "ullage/history.h"
#include "ullage/service.h"
#include "verbs.h"

static void print_help(void)
{
    puts("usage: ullage collect -c FILE [--history PATH] [--for SPAN]\n\n"
         "Polls the devices that FILE describes, computes, and writes every frame, what was "
         "computed\n"
         "from it and the journal into a record. Without a screen, until SIGTERM or Ctrl-C.\n"
         "SIGHUP reads FILE again: only links that have changed connect anew; an invalid file\n"
         "changes nothing.\n\n"
         "  -c, --config FILE   the plant file\n"
         "  --history PATH      the record (history in [site] if left out)\n"
         "  --for SPAN          end after this time, such as 20s or 4h");
}

/* What the record has missed: written again is impossible, so it is counted and told. */
struct losses {
    uint64_t frames;
    int64_t told_mono_ns;
};

static void tell_loss(struct losses *losses, const struct error *err)
{
    int64_t now_ns = time_mono_ns();
    losses->frames++;
    /* The first at once, then one line a minute with the count. */
    if (losses->told_mono_ns != 0 && now_ns - losses->told_mono_ns < 60 * NS_PER_S)
        return;
    losses->told_mono_ns = now_ns;
    log_error("%s (%llu frame%s not recorded so far; polling goes on)", err->text,
              (unsigned long long)losses->frames, losses->frames == 1 ? "" : "s");
}

static void record(struct record_writer *writer, const struct view *view, uint64_t *written,
                   struct losses *losses)
{
    struct error err = {0};
    uint64_t fresh = view->journal_total - *written;
    if (fresh > (uint64_t)view->journal_count)
        fresh = (uint64_t)view->journal_count;
    const struct journal_entry *entries = view->journal + view->journal_count - fresh;
    if (record_writer_append(writer, view->frame, view->results, entries, (int)fresh, &err) !=
        0)
        tell_loss(losses, &err); /* the journal's entries wait for the next frame */
    else
        *written = view->journal_total;
}

/* What is being collected, so that SIGHUP can put another plant in its place. */
struct collecting {
    const char *config;
    struct plant *plant;
    struct collector *collector;
    struct record_writer *writer;
};

/* Reads the plant file again. An invalid one changes nothing and is told, here and in the
 * journal. */
static void reload(struct collecting *collecting)
{
    struct error err = {0};
    struct plant *plant = NULL;
    if (verb_read_plant(collecting->config, &plant) != 0) {
        log_error("%s is not valid; the plant described before goes on", collecting->config);
        collector_note(collecting->collector, JOURNAL_CONFIG, "plant file", "refused",
                       "it is not valid; the plant described before goes on");
        return;
    }
    int code = record_writer_plant(collecting->writer, plant, collecting->config, &err);
    if (code == 0) {
        code = collector_reload(collecting->collector, plant, &err);
        struct error back = {0};
        if (code != 0 && record_writer_plant(collecting->writer, collecting->plant,
                                             collecting->config, &back) != 0)
            log_error("%s", back.text);
    }
    if (code != 0) {
        log_error("%s; the plant described before goes on", err.text);
        collector_note(collecting->collector, JOURNAL_CONFIG, "plant file", "refused",
                       err.text);
        plant_free(plant);
        return;
    }
    plant_free(collecting->plant);
    collecting->plant = plant;
    log_notice("collect: %s read again", collecting->config);
    collector_note(collecting->collector, JOURNAL_CONFIG, "plant file", "read again",
                   collecting->config);
}

/* Frames until the end of the time asked for or a signal. */
static int loop(struct collecting *collecting, int signals_fd, double for_s, struct error *err)
{
    struct collector *collector = collecting->collector;
    struct pollfd fds[] = {
        {.fd = collector_fd(collector), .events = POLLIN},
        {.fd = signals_fd,              .events = POLLIN},
    };
    struct losses losses = {0};
    uint64_t written = 0;
    int64_t end_ns = time_mono_ns() + time_s_to_ns(for_s);
    for (;;) {
        int wait_ms = 1000;
        if (for_s > 0) {
            int64_t left_ns = end_ns - time_mono_ns();
            if (left_ns <= 0)
                break;
            if (left_ns < NS_PER_S)
                wait_ms = (int)(left_ns / 1000000) + 1;
        }
        if (poll(fds, ARRAY_LENGTH(fds), wait_ms) < 0 && errno != EINTR)
            return error_set(err, ERR_IO, "cannot wait for a frame: %s", strerror(errno));
        int signal = signals_take(signals_fd);
        if (signal == SIGINT || signal == SIGTERM)
            break;
        if (signal == SIGHUP)
            reload(collecting);
        if (collector_tick(collector))
            record(collecting->writer, collector_view(collector), &written, &losses);
    }
    if (losses.frames > 0)
        return error_set(err, ERR_IO, "%llu frames could not be recorded",
                         (unsigned long long)losses.frames);
    return 0;
}

static int run(const char *config, const char *history, double for_s)
{
    struct error err = {0};
    struct collecting collecting = {.config = config};
    const struct collector_options options = {.mode = VIEW_LIVE};
    if (verb_read_plant(config, &collecting.plant) != 0)
        return EXIT_FAILED;
    if (history == NULL)
        history = collecting.plant->site.history;
    int signals_fd = signals_open(&err);
    int code = signals_fd < 0 ? signals_fd
                              : record_writer_open(history, collecting.plant, config,
                                                   &collecting.writer, &err);
    if (code == 0)
        code = collector_open(collecting.plant, &options, &collecting.collector, &err);
    if (code == 0)
        code = collector_start(collecting.collector, &err);
    if (code == 0)
        code = loop(&collecting, signals_fd, for_s, &err);
    if (code != 0)
        verb_failed("collect", &err);
    collector_close(collecting.collector);
    record_writer_close(collecting.writer);
    if (signals_fd >= 0)
        close(signals_fd);
    plant_free(collecting.plant);
    return code == 0 ? EXIT_DONE : EXIT_FAILED;
}

int verb_collect(int argc, char **argv)
{
    enum { COLLECT_HISTORY = 1, COLLECT_FOR };
    static const struct option table[] = {
        {"config",  required_argument, NULL, 'c'            },
        {"history", required_argument, NULL, COLLECT_HISTORY},
        {"for",     required_argument, NULL, COLLECT_FOR    },
        {"help",    no_argument,       NULL, 'h'            },
        {NULL,      0,                 NULL, 0              },
    };
    const char *config = NULL, *history = NULL;
    double for_s = 0;
    struct error err = {0};
    int option;
    opterr = 0;
    while ((option = getopt_long(argc, argv, "c:h", table, NULL)) != -1) {
        switch (option) {
        case 'c':
            config = optarg;
            break;
        case COLLECT_HISTORY:
            history = optarg;
            break;
        case COLLECT_FOR:
            if (time_parse_span(optarg, &for_s, &err) != 0)
                return verb_usage("collect", "--for: %s", err.text);
            break;
        case 'h':
            print_help();
            return verb_end("collect", EXIT_DONE);
        default:
            return verb_usage("collect", "'%s' is not an option or lacks its value",
                              argv[optind - 1]);
        }
    }
    if (optind < argc)
        return verb_usage("collect", "'%s' is one word too many", argv[optind]);
    if (config == NULL)
        return verb_usage("collect", "name the plant file with -c FILE");
    return run(config, history, for_s);
}
