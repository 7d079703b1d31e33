/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * ullage demo: the fictional Tarn Hollow cold store, simulated behind a Modbus/TCP server on a
 * free loopback port, and the dashboard on it. So that windows and trends are not empty at the
 * first picture, the simulated plant's last hours are computed first and handed to the engine
 * as frames, through the same registers and decoding as on the wire; from then on every reading
 * is polled.
 */
#include "picture.h"
#include "verbs.h"

#include <stdio.h>
#include <string.h>
#include <unistd.h>

#include "ullage/simulator.h"

/* The past that is computed before the first picture: long enough for the trends, frame by
 * frame for the windows (2 h), coarser before. */
static const double PAST_S = 4 * 3600, FINE_S = 7300, COARSE_FRAME_S = 5;
/* An upset begins this long after the first live picture; on a printed one, this long before.
 */
static const double UPSET_DELAY_S = 20, UPSET_LEAD_S = 600;

static void print_help(void)
{
    size_t count;
    const struct upset *upsets = upset_list(&count);
    printf(
        "usage: ullage demo [options]\n\n"
        "Starts a simulated plant (the fictional Tarn Hollow cold store) on a free loopback\n"
        "port and the dashboard on it.\n\n"
        "  -c, --config FILE    another plant file to simulate\n"
        "  --seed N             seed of the simulated noise (1 if left out)\n"
        "%s"
        "  --upset NAME         something goes wrong %.0f s after the start (on a printed\n"
        "                       picture: %.0f min before it):\n",
        picture_help, UPSET_DELAY_S, UPSET_LEAD_S / 60);
    for (size_t i = 0; i < count; i++)
        printf("                         %-15s %s\n", upsets[i].name, upsets[i].says);
    puts("\nAll data of the demo are invented.");
}

/* The plant file: beside us in the source tree, or where it was installed. */
static const char *find_config(void)
{
    static const char *const places[] = {"config/tarn-hollow.ini",
                                         ULLAGE_DATADIR "/tarn-hollow.ini"};
    for (size_t i = 0; i < ARRAY_LENGTH(places); i++)
        if (access(places[i], R_OK) == 0)
            return places[i];
    return NULL;
}

static int feed_past(struct simulator *simulator, const struct plant *plant,
                     struct collector *collector, struct error *err)
{
    struct arena *arena = arena_create();
    struct frame frame;
    int code = arena == NULL ? ERR_MEMORY : frame_init(&frame, plant, arena);
    if (code != 0)
        error_set(err, code, "no memory for the simulated past");
    int64_t now_ns = time_utc_ns();
    now_ns -= now_ns % NS_PER_S;
    double fine_s = plant->site.frame_s;
    for (double ago_s = PAST_S, step_s; code == 0 && ago_s > 0; ago_s -= step_s) {
        step_s = ago_s > FINE_S && fine_s < COARSE_FRAME_S ? COARSE_FRAME_S : fine_s;
        code = simulator_step(simulator, step_s, err);
        if (code == 0) {
            simulator_frame(simulator, now_ns - time_s_to_ns(ago_s), &frame);
            collector_feed(collector, &frame);
        }
    }
    arena_free(arena);
    return code;
}

static int run(const char *config, uint64_t seed, const struct upset *upset,
               const struct picture *picture)
{
    struct error err = {0};
    struct plant *plant = NULL;
    struct simulator *simulator = NULL;
    struct simulator_server *server = NULL;
    struct collector *collector = NULL;
    const struct collector_options options = {.mode = VIEW_DEMO};
    const struct simulator_options model = {
        .seed = seed,
        .upset = upset,
        .upset_start_s = PAST_S + (picture->print ? -UPSET_LEAD_S : UPSET_DELAY_S),
    };
    if (verb_read_plant(config, &plant) != 0)
        return EXIT_FAILED;
    int status = EXIT_FAILED;
    int signals_fd = signals_open(&err);
    int code = signals_fd < 0 ? signals_fd : simulator_create(plant, &model, &simulator, &err);
    if (code == 0)
        code = collector_open(plant, &options, &collector, &err);
    if (code == 0)
        code = feed_past(simulator, plant, collector, &err);
    if (code == 0)
        code = simulator_serve(simulator, "127.0.0.1", 0, 1, NULL, &server, &err);
    if (code == 0) {
        code = plant_redirect(plant, "127.0.0.1", simulator_server_port(server));
        if (code != 0)
            error_set(&err, code, "the links cannot be turned to the simulated plant");
    }
    if (code == 0)
        code = collector_start(collector, &err);
    if (code != 0)
        verb_failed("demo", &err);
    else
        status = picture_show(picture, "demo", collector, signals_fd);
    collector_close(collector);
    simulator_server_stop(server);
    simulator_free(simulator);
    if (signals_fd >= 0)
        close(signals_fd);
    plant_free(plant);
    return status;
}

static int usage_upset(const char *name)
{
    size_t count;
    const struct upset *upsets = upset_list(&count);
    const char *names[64];
    for (size_t i = 0; i < count && i < ARRAY_LENGTH(names); i++)
        names[i] = upsets[i].name;
    const char *near = text_nearest(name, names, count);
    return near != NULL ? verb_usage("demo", "no upset '%s'; did you mean '%s'?", name, near)
                        : verb_usage("demo", "no upset '%s'", name);
}

int verb_demo(int argc, char **argv)
{
    enum { DEMO_HELP = 1, DEMO_UPSET, DEMO_SEED };
    static const struct option table[] = {
        {"config", required_argument, NULL, 'c'       },
        {"upset",  required_argument, NULL, DEMO_UPSET},
        {"seed",   required_argument, NULL, DEMO_SEED },
        {"help",   no_argument,       NULL, DEMO_HELP },
        PICTURE_OPTIONS,
        {NULL,     0,                 NULL, 0         },
    };
    struct picture picture = {0};
    const char *config = NULL;
    const struct upset *upset = NULL;
    long seed = 1;
    int option;
    opterr = 0;
    while ((option = getopt_long(argc, argv, "c:h", table, NULL)) != -1) {
        int code = picture_option(&picture, "demo", option, optarg);
        if (code == EXIT_USAGE)
            return EXIT_USAGE;
        if (code == 0)
            continue;
        switch (option) {
        case 'c':
            config = optarg;
            break;
        case DEMO_UPSET:
            upset = upset_find(optarg);
            if (upset == NULL)
                return usage_upset(optarg);
            break;
        case DEMO_SEED:
            if (text_to_long(optarg, 0, INT32_MAX, &seed) != 0)
                return verb_usage("demo", "--seed '%s' is not a whole number from 0", optarg);
            break;
        case 'h':
        case DEMO_HELP:
            print_help();
            return verb_end("demo", EXIT_DONE);
        default:
            return verb_usage("demo", "'%s' is not an option or lacks its value",
                              argv[optind - 1]);
        }
    }
    if (optind < argc)
        return verb_usage("demo", "'%s' is one word too many", argv[optind]);
    if (config == NULL)
        config = find_config();
    if (config == NULL)
        return verb_usage("demo", "config/tarn-hollow.ini is not here; name it with -c FILE");
    picture_settle(&picture);
    return run(config, (uint64_t)seed, upset, &picture);
}
