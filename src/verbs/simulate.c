/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * ullage simulate: the simulated plant as Modbus/TCP devices.
 */
#include <errno.h>
#include <getopt.h>
#include <poll.h>
#include <stdio.h>
#include <string.h>
#include <unistd.h>

#include "ullage/service.h"
#include "ullage/simulator.h"
#include "verbs.h"

struct simulate {
    const char *config, *truth;
    char host[64];
    long port;
    bool listen;
    double pace, for_s;
    struct simulator_options model;
};

static void print_help(void)
{
    size_t count;
    const struct upset *upsets = upset_list(&count);
    puts("usage: ullage simulate -c FILE [options]\n\n"
         "Serves a simulated plant as the Modbus/TCP devices that FILE describes; the unit id\n"
         "chooses the device. Writes nothing it is asked to: it refuses every write.\n\n"
         "  -c, --config FILE   the plant file\n"
         "  --listen ADDR:PORT  where (the first link's host and port if left out; port 0: a "
         "free\n"
         "                      one, told on stderr)\n"
         "  --pace N            N times as fast as the clock (1)\n"
         "  --seed N            seed of the noise (1)\n"
         "  --heat-leak POWER   heat into each vessel, such as 60W or 5.2kW (its budget)\n"
         "  --truth FILE        writes the model's true values as CSV, a line a frame\n"
         "  --for SPAN          end after this time\n"
         "  --upset-at SPAN     when the upset begins, in simulated time (at once)\n"
         "  --upset NAME        one of:");
    for (size_t i = 0; i < count; i++)
        printf("                        %-15s %s\n", upsets[i].name, upsets[i].says);
}

static int take_listen(struct simulate *simulate, const char *text)
{
    const char *colon = strrchr(text, ':');
    size_t length = colon != NULL ? (size_t)(colon - text) : 0;
    if (colon == NULL || length == 0 || length >= sizeof(simulate->host) ||
        text_to_long(colon + 1, 0, 65535, &simulate->port) != 0)
        return verb_usage("simulate", "--listen '%s' is not ADDR:PORT, such as 127.0.0.1:0",
                          text);
    memcpy(simulate->host, text, length);
    simulate->host[length] = '\0';
    simulate->listen = true;
    return 0;
}

static int take_upset(struct simulate *simulate, const char *name)
{
    size_t count;
    const struct upset *upsets = upset_list(&count);
    const char *names[64];
    simulate->model.upset = upset_find(name);
    if (simulate->model.upset != NULL)
        return 0;
    for (size_t i = 0; i < count && i < ARRAY_LENGTH(names); i++)
        names[i] = upsets[i].name;
    const char *near = text_nearest(name, names, count);
    return near != NULL
               ? verb_usage("simulate", "no upset '%s'; did you mean '%s'?", name, near)
               : verb_usage("simulate", "no upset '%s'", name);
}

static int take_span(const char *option, const char *text, double *out)
{
    struct error err = {0};
    if (time_parse_span(text, out, &err) == 0)
        return 0;
    return verb_usage("simulate", "%s: %s", option, err.text);
}

static int take_leak(struct simulate *simulate, const char *text)
{
    struct unit unit;
    double value;
    if (unit_parse_value(text, &unit, &value, NULL) != 0 || unit.dimension != DIMENSION_POWER ||
        !(value > 0) || value > 1e9)
        return verb_usage("simulate", "--heat-leak '%s' is no power above 0, such as 60W",
                          text);
    simulate->model.heat_leak_w = value;
    return 0;
}

enum {
    OPTION_LISTEN = 1,
    OPTION_PACE,
    OPTION_SEED,
    OPTION_LEAK,
    OPTION_TRUTH,
    OPTION_FOR,
    OPTION_UPSET,
    OPTION_UPSET_AT
};

static int take_option(struct simulate *simulate, int option, const char *value)
{
    long seed;
    switch (option) {
    case 'c':
        simulate->config = value;
        return 0;
    case OPTION_LISTEN:
        return take_listen(simulate, value);
    case OPTION_PACE:
        if (text_to_double(value, &simulate->pace) != 0 || !(simulate->pace > 0) ||
            simulate->pace > 3600)
            return verb_usage("simulate", "--pace '%s' is no number above 0, at most 3600",
                              value);
        return 0;
    case OPTION_SEED:
        if (text_to_long(value, 0, INT32_MAX, &seed) != 0)
            return verb_usage("simulate", "--seed '%s' is not a whole number from 0", value);
        simulate->model.seed = (uint64_t)seed;
        return 0;
    case OPTION_LEAK:
        return take_leak(simulate, value);
    case OPTION_TRUTH:
        simulate->truth = value;
        return 0;
    case OPTION_FOR:
        return take_span("--for", value, &simulate->for_s);
    case OPTION_UPSET:
        return take_upset(simulate, value);
    case OPTION_UPSET_AT:
        return take_span("--upset-at", value, &simulate->model.upset_start_s);
    default:
        return EXIT_USAGE;
    }
}

/* Waits for a signal or the end of the time asked for. */
static void wait_end(int signals_fd, double for_s)
{
    struct pollfd fd = {.fd = signals_fd, .events = POLLIN};
    int64_t end_ns = time_mono_ns() + time_s_to_ns(for_s);
    for (;;) {
        int wait_ms = -1;
        if (for_s > 0) {
            int64_t left_ns = end_ns - time_mono_ns();
            if (left_ns <= 0)
                return;
            wait_ms = left_ns > NS_PER_S * 1000 ? 1000000 : (int)(left_ns / 1000000) + 1;
        }
        if (poll(&fd, 1, wait_ms) > 0 && signals_take(signals_fd) != 0)
            return;
    }
}

static int run(struct simulate *simulate)
{
    struct error err = {0};
    struct plant *plant = NULL;
    struct simulator *simulator = NULL;
    struct simulator_server *server = NULL;
    FILE *truth = NULL;
    if (verb_read_plant(simulate->config, &plant) != 0)
        return EXIT_FAILED;
    int signals_fd = signals_open(&err), code = signals_fd < 0 ? signals_fd : 0;
    if (code == 0 && plant->link_count == 0)
        code = error_set(&err, ERR_CONFIG, "%s describes no link to serve", simulate->config);
    if (code == 0 && !simulate->listen) {
        text_copy(simulate->host, sizeof(simulate->host), plant->link[0].host);
        simulate->port = plant->link[0].port;
    }
    if (code == 0 && simulate->truth != NULL) {
        truth = fopen(simulate->truth, "we");
        if (truth == NULL)
            code = error_set(&err, ERR_IO, "'%s' cannot be written: %s", simulate->truth,
                             strerror(errno));
    }
    if (code == 0)
        code = simulator_create(plant, &simulate->model, &simulator, &err);
    if (code == 0)
        code = simulator_serve(simulator, simulate->host, (int)simulate->port, simulate->pace,
                               truth, &server, &err);
    if (code == 0) {
        fprintf(stderr, "simulate: listening on %s:%d\n", simulate->host,
                simulator_server_port(server));
        wait_end(signals_fd, simulate->for_s);
    } else {
        verb_failed("simulate", &err);
    }
    simulator_server_stop(server);
    simulator_free(simulator);
    if (truth != NULL && fclose(truth) != 0 && code == 0)
        code =
            verb_failed("simulate", &(struct error){.text = "the truth was not written whole"});
    if (signals_fd >= 0)
        close(signals_fd);
    plant_free(plant);
    return code == 0 ? EXIT_DONE : EXIT_FAILED;
}

int verb_simulate(int argc, char **argv)
{
    static const struct option table[] = {
        {"config",    required_argument, NULL, 'c'            },
        {"listen",    required_argument, NULL, OPTION_LISTEN  },
        {"pace",      required_argument, NULL, OPTION_PACE    },
        {"seed",      required_argument, NULL, OPTION_SEED    },
        {"heat-leak", required_argument, NULL, OPTION_LEAK    },
        {"truth",     required_argument, NULL, OPTION_TRUTH   },
        {"for",       required_argument, NULL, OPTION_FOR     },
        {"upset",     required_argument, NULL, OPTION_UPSET   },
        {"upset-at",  required_argument, NULL, OPTION_UPSET_AT},
        {"help",      no_argument,       NULL, 'h'            },
        {NULL,        0,                 NULL, 0              },
    };
    struct simulate simulate = {.pace = 1, .model = {.seed = 1}};
    int option;
    opterr = 0;
    while ((option = getopt_long(argc, argv, "c:h", table, NULL)) != -1) {
        if (option == 'h') {
            print_help();
            return verb_end("simulate", EXIT_DONE);
        }
        if (option == '?')
            return verb_usage("simulate", "'%s' is not an option or lacks its value",
                              argv[optind - 1]);
        int code = take_option(&simulate, option, optarg);
        if (code != 0)
            return code;
    }
    if (optind < argc)
        return verb_usage("simulate", "'%s' is one word too many", argv[optind]);
    if (simulate.config == NULL)
        return verb_usage("simulate", "name the plant file with -c FILE");
    return run(&simulate);
}
