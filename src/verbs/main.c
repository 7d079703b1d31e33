/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The program: a table of verbs. Only LC_CTYPE is taken from the locale, so that a decimal
 * comma never enters parsing, CSV or reports.
 */
#include "verbs.h"

#include <locale.h>
#include <signal.h>
#include <stdio.h>
#include <string.h>

static const struct verb verbs[] = {
    {.name = "demo",
     .run = verb_demo,
     .usage = "[--upset NAME] [--print]",
     .says = "simulated plant and the dashboard on it; nothing else needed"},
    {.name = "watch",
     .run = verb_watch,
     .usage = "-c FILE --direct [--panel NAME] [--print]",
     .says = "the dashboard on a plant"                                    },
    {.name = "collect",
     .run = verb_collect,
     .usage = "-c FILE [--history PATH] [--for SPAN]",
     .says = "polls, computes and records, without a screen"               },
    {.name = "export",
     .run = verb_export,
     .usage = "--history PATH [--from T] [--to T] [--tags A,B] [--journal]",
     .says = "a record as CSV"                                             },
    {.name = "check",
     .run = verb_check,
     .usage = "FILE [--strict] [--map]",
     .says = "validates a plant file, all errors at once"                  },
    {.name = "fluid",
     .run = verb_fluid,
     .usage = "NAME [--at T=87.3K,p=1.2bar] [--csv]",
     .says = "properties of a fluid"                                       },
    {.name = "simulate",
     .run = verb_simulate,
     .usage = "-c FILE [--listen ADDR:PORT] [--upset NAME]",
     .says = "the simulated plant as Modbus/TCP devices"                   },
    {.name = "inspect",
     .run = verb_inspect,
     .usage = "HOST:PORT --read \"input 0 f32\"",
     .says = "reads registers of a device once"                            },
};

static void print_help(FILE *out)
{
    fputs("usage: ullage VERB [options]\n\n"
          "Keeps the heat, mass, purity and air ledgers of a liquid-argon or nitrogen plant "
          "from\n"
          "its instruments' readings over Modbus/TCP, and shows what does not add up.\n\n",
          out);
    for (size_t i = 0; i < ARRAY_LENGTH(verbs); i++)
        fprintf(out, "  %-9s %s\n            ullage %s %s\n", verbs[i].name, verbs[i].says,
                verbs[i].name, verbs[i].usage);
    fputs("\n'ullage VERB --help' tells more; 'ullage --version' the version.\n"
          "Exit status: 0 done, 1 it could not be done, 2 bad usage, 3 done and not well.\n\n"
          "Advisory only: it reads, never controls. Site rules, local codes, fixed alarms and\n"
          "licensed practice prevail over anything shown here.\n",
          out);
}

int main(int argc, char **argv)
{
    setlocale(LC_CTYPE, "");
    /* A closed pipe is an error of the write, told by verb_end, not a silent death. */
    signal(SIGPIPE, SIG_IGN);
    if (argc < 2) {
        print_help(stderr);
        return EXIT_USAGE;
    }
    if (strcmp(argv[1], "--help") == 0 || strcmp(argv[1], "-h") == 0) {
        print_help(stdout);
        return verb_end("--help", EXIT_DONE);
    }
    if (strcmp(argv[1], "--version") == 0) {
        puts("ullage " ULLAGE_VERSION);
        return verb_end("--version", EXIT_DONE);
    }
    const char *names[ARRAY_LENGTH(verbs)];
    for (size_t i = 0; i < ARRAY_LENGTH(verbs); i++) {
        names[i] = verbs[i].name;
        if (strcmp(argv[1], verbs[i].name) == 0)
            return verbs[i].run(argc - 1, argv + 1);
    }
    char shown[80];
    text_printable(shown, sizeof(shown), argv[1]);
    const char *near = text_nearest(argv[1], names, ARRAY_LENGTH(names));
    if (near != NULL)
        fprintf(stderr, "ullage: no verb '%s'; did you mean '%s'?\n", shown, near);
    else
        fprintf(stderr, "ullage: no verb '%s'; 'ullage --help' lists them\n", shown);
    return EXIT_USAGE;
}
