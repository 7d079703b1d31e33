/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * ullage export: a record as CSV to stdout.
 */
#include <getopt.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "ullage/history.h"
#include "verbs.h"

struct export_request {
    const char *history, *tags;
    bool journal;
    struct export_options options;
};

static void print_help(void)
{
    puts("usage: ullage export --history PATH [options]\n\n"
         "A record as CSV (RFC 4180): time, then TAG [UNIT] for each tag. A bad or missing "
         "value is\n"
         "an empty field; --quality tells which values are old or doubtful.\n\n"
         "  --history PATH   the record\n"
         "  --from T --to T  from this time (ISO 8601) to before that\n"
         "  --tags A,B       only these points and derived quantities\n"
         "  --every SPAN     the last frame at or before each step\n"
         "  --quality        a column with each value's quality\n"
         "  --uncertainty    a column with each value's standard uncertainty, same unit\n"
         "  --journal        the journal instead: alarms, acknowledgements, banners, links");
}

static int find_tag(const struct record_reader *reader, const char *name)
{
    for (int i = 0; i < record_reader_tag_count(reader); i++)
        if (strcmp(record_reader_tag(reader, i)->name, name) == 0)
            return i;
    return -1;
}

static const char *near_tag(const struct record_reader *reader, const char *name)
{
    const char *best = NULL;
    for (int i = 0; i < record_reader_tag_count(reader); i++) {
        const char *pair[] = {record_reader_tag(reader, i)->name, best};
        best = text_nearest(name, pair, 2);
    }
    return best;
}

/* Which tags are asked for; all of them without a list. */
static int choose_tags(const struct record_reader *reader, const char *list, bool *chosen)
{
    char copy[4096], *rest = NULL;
    for (int i = 0; i < record_reader_tag_count(reader); i++)
        chosen[i] = list == NULL;
    if (list == NULL)
        return EXIT_DONE;
    if (!text_copy(copy, sizeof(copy), list))
        return verb_usage("export", "--tags is too long");
    for (char *name = strtok_r(copy, ",", &rest); name != NULL;
         name = strtok_r(NULL, ",", &rest)) {
        int index = find_tag(reader, text_trim(name));
        const char *near = index < 0 ? near_tag(reader, text_trim(name)) : NULL;
        if (index < 0 && near != NULL)
            return verb_usage("export", "the record has no '%s'; did you mean '%s'?",
                              text_trim(name), near);
        if (index < 0)
            return verb_usage("export", "the record has no '%s'", text_trim(name));
        chosen[index] = true;
    }
    return EXIT_DONE;
}

static int run(struct export_request *request)
{
    struct error err = {0};
    struct record_reader *reader = NULL;
    int code = record_reader_open(request->history, &reader, &err);
    if (code != 0)
        return verb_failed("export", &err);
    int status = EXIT_DONE;
    bool *chosen = calloc((size_t)record_reader_tag_count(reader) + 1, sizeof(*chosen));
    if (chosen == NULL) {
        status = verb_failed("export", &(struct error){.text = "no memory"});
    } else if (request->journal) {
        code = export_journal(reader, request->options.from_utc_ns, request->options.to_utc_ns,
                              stdout, &err);
    } else {
        status = choose_tags(reader, request->tags, chosen);
        request->options.tag = chosen;
        if (status == EXIT_DONE)
            code = export_frames(reader, &request->options, stdout, &err);
    }
    if (code != 0)
        status = verb_failed("export", &err);
    free(chosen);
    record_reader_close(reader);
    return verb_end("export", status);
}

enum {
    EXPORT_HISTORY = 1,
    EXPORT_FROM,
    EXPORT_TO,
    EXPORT_TAGS,
    EXPORT_EVERY,
    EXPORT_QUALITY,
    EXPORT_UNCERTAINTY,
    EXPORT_JOURNAL
};

static int take_option(struct export_request *request, int option, const char *value)
{
    struct error err = {0};
    switch (option) {
    case EXPORT_HISTORY:
        request->history = value;
        return 0;
    case EXPORT_FROM:
        if (time_parse(value, &request->options.from_utc_ns, &err) != 0)
            return verb_usage("export", "--from: %s", err.text);
        return 0;
    case EXPORT_TO:
        if (time_parse(value, &request->options.to_utc_ns, &err) != 0)
            return verb_usage("export", "--to: %s", err.text);
        return 0;
    case EXPORT_TAGS:
        request->tags = value;
        return 0;
    case EXPORT_EVERY:
        if (time_parse_span(value, &request->options.every_s, &err) != 0)
            return verb_usage("export", "--every: %s", err.text);
        return 0;
    case EXPORT_QUALITY:
        request->options.quality = true;
        return 0;
    case EXPORT_UNCERTAINTY:
        request->options.uncertainty = true;
        return 0;
    case EXPORT_JOURNAL:
        request->journal = true;
        return 0;
    default:
        return EXIT_USAGE;
    }
}

int verb_export(int argc, char **argv)
{
    static const struct option table[] = {
        {"history",     required_argument, NULL, EXPORT_HISTORY    },
        {"from",        required_argument, NULL, EXPORT_FROM       },
        {"to",          required_argument, NULL, EXPORT_TO         },
        {"tags",        required_argument, NULL, EXPORT_TAGS       },
        {"every",       required_argument, NULL, EXPORT_EVERY      },
        {"quality",     no_argument,       NULL, EXPORT_QUALITY    },
        {"uncertainty", no_argument,       NULL, EXPORT_UNCERTAINTY},
        {"journal",     no_argument,       NULL, EXPORT_JOURNAL    },
        {"help",        no_argument,       NULL, 'h'               },
        {NULL,          0,                 NULL, 0                 },
    };
    struct export_request request = {
        .options = {.from_utc_ns = INT64_MIN, .to_utc_ns = INT64_MAX}
    };
    int option;
    opterr = 0;
    while ((option = getopt_long(argc, argv, "h", table, NULL)) != -1) {
        if (option == 'h') {
            print_help();
            return verb_end("export", EXIT_DONE);
        }
        if (option == '?')
            return verb_usage("export", "'%s' is not an option or lacks its value",
                              argv[optind - 1]);
        int code = take_option(&request, option, optarg);
        if (code != 0)
            return code;
    }
    if (optind < argc)
        return verb_usage("export", "'%s' is one word too many", argv[optind]);
    if (request.history == NULL)
        return verb_usage("export", "name the record with --history PATH");
    return run(&request);
}
