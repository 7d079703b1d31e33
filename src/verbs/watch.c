/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * ullage watch: the dashboard on a plant.
 */
#include "picture.h"
#include "verbs.h"

#include <stdio.h>
#include <unistd.h>

static void print_help(void)
{
    printf("usage: ullage watch -c FILE --direct [options]\n\n"
           "The dashboard on the plant that FILE describes.\n\n"
           "  -c, --config FILE    the plant file\n"
           "  --direct             poll the devices in this process\n"
           "%s\n"
           "Keys are at the foot of the screen; '?' lists them all, 'q' quits.\n"
           "Without a terminal one picture is printed.\n"
           "Advisory only: site rules, local codes and fixed alarms prevail.\n",
           picture_help);
}

static int run(const char *config, struct picture *picture)
{
    struct error err = {0};
    struct plant *plant = NULL;
    struct collector *collector = NULL;
    const struct collector_options options = {.mode = VIEW_LIVE};
    if (verb_read_plant(config, &plant) != 0)
        return EXIT_FAILED;
    int status = EXIT_FAILED;
    int signals_fd = signals_open(&err);
    if (signals_fd < 0 || collector_open(plant, &options, &collector, &err) != 0 ||
        collector_start(collector, &err) != 0)
        verb_failed("watch", &err);
    else
        status = picture_show(picture, "watch", collector, signals_fd);
    collector_close(collector);
    if (signals_fd >= 0)
        close(signals_fd);
    plant_free(plant);
    return status;
}

int verb_watch(int argc, char **argv)
{
    enum { WATCH_HELP = 1, WATCH_DIRECT };
    static const struct option table[] = {
        {"config", required_argument, NULL, 'c'         },
        {"direct", no_argument,       NULL, WATCH_DIRECT},
        {"help",   no_argument,       NULL, WATCH_HELP  },
        PICTURE_OPTIONS,
        {NULL,     0,                 NULL, 0           },
    };
    struct picture picture = {0};
    const char *config = NULL;
    bool direct = false;
    int option;
    opterr = 0;
    while ((option = getopt_long(argc, argv, "c:h", table, NULL)) != -1) {
        int code = picture_option(&picture, "watch", option, optarg);
        if (code == EXIT_USAGE)
            return EXIT_USAGE;
        if (code == 0)
            continue;
        switch (option) {
        case 'c':
            config = optarg;
            break;
        case WATCH_DIRECT:
            direct = true;
            break;
        case 'h':
        case WATCH_HELP:
            print_help();
            return verb_end("watch", EXIT_DONE);
        default:
            return verb_usage("watch", "'%s' is not an option or lacks its value",
                              argv[optind - 1]);
        }
    }
    if (optind < argc)
        return verb_usage("watch", "'%s' is one word too many", argv[optind]);
    if (config == NULL)
        return verb_usage("watch", "name the plant file with -c FILE");
    if (!direct)
        return verb_usage("watch", "add --direct: this version has no collector to attach to");
    picture_settle(&picture);
    return run(config, &picture);
}
