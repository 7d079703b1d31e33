/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * ullage check: validates a plant file; --map shows how it will be read and what will be
 * computed.
 */
#include <getopt.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "ullage/field.h"
#include "verbs.h"

static void print_help(void)
{
    puts("usage: ullage check FILE [--strict] [--map] [--keys]\n\n"
         "Validates a plant file: everything that is wrong in one run, as FILE:LINE: error: "
         "what\n"
         "and the mend. Silent when all is well.\n\n"
         "  --strict  status 3 when there are warnings\n"
         "  --map     points by link and read block, derived quantities\n"
         "  --keys    every section and key that a plant file may have (no FILE needed)");
}

enum { BLOCKS_MAX = 4096 };

static bool in_block(const struct point *point, const struct block *block)
{
    return point->read.table == block->table && point->read.address >= block->address &&
           point->read.address < block->address + block->count;
}

static void print_point(const struct point *point)
{
    char where[48];
    register_format(where, sizeof(where), &point->read);
    printf("    %-20s %-24s %-8s %s\n", point->name, where,
           point->unit.dimension == DIMENSION_BIT ? "bit" : point->unit.symbol,
           point->says != NULL ? point->says : "");
}

static void print_link(const struct plant *plant, int index, struct block *blocks)
{
    const struct link *link = &plant->link[index];
    int count = block_plan(plant, index, blocks, BLOCKS_MAX);
    printf("link %s  %s port %d unit %d, every %g s, timeout %g s: %d request%s a poll\n",
           link->name, link->host, link->port, link->unit_id, link->period_s, link->timeout_s,
           count < 0 ? BLOCKS_MAX : count, count == 1 ? "" : "s");
    for (int b = 0; b < count; b++) {
        printf("  %s %d to %d (%d %s)\n", register_table_word(blocks[b].table),
               blocks[b].address, blocks[b].address + blocks[b].count - 1, blocks[b].count,
               blocks[b].table == TABLE_COIL || blocks[b].table == TABLE_DISCRETE
                   ? "bits"
                   : "registers");
        for (int i = 0; i < plant->point_count; i++)
            if (plant->point[i].link == index && in_block(&plant->point[i], &blocks[b]))
                print_point(&plant->point[i]);
    }
}

static void print_ref(const struct plant *plant, const char *key, const struct ref *ref)
{
    if (ref->kind == REF_TAG)
        printf(" %s=%s", key, plant_tag_name(plant, ref->tag));
    else if (ref->kind == REF_CONSTANT)
        printf(" %s=%g %s", key, unit_from_si(&ref->unit, ref->value), ref->unit.symbol);
    else
        printf(" %s=(none)", key);
}

static void print_list(const struct plant *plant, const char *key, const struct ref_list *list)
{
    if (list->count == 0)
        printf(" %s=(none)", key);
    for (int i = 0; i < list->count; i++)
        print_ref(plant, key, &list->at[i]);
}

static bool joins(const struct stream *stream, enum thing_kind kind, int index)
{
    return (stream->from.kind == kind && stream->from.index == index) ||
           (stream->to.kind == kind && stream->to.index == index);
}

/* What the quantities of one thing are computed from; '(none)' is what the file does not give.
 */
static void print_inputs(const struct plant *plant, enum thing_kind kind, int index)
{
    fputs("    from", stdout);
    switch (kind) {
    case THING_VESSEL: {
        const struct vessel *vessel = &plant->vessel[index];
        print_ref(plant, "barometer", &plant->site.barometer);
        print_ref(plant, "pressure", &vessel->pressure);
        print_ref(plant, "level", &vessel->level);
        print_list(plant, "liquid_temperature", &vessel->liquid_temperature);
        print_ref(plant, "vapour_temperature", &vessel->vapour_temperature);
        for (int i = 0; i < plant->stream_count; i++)
            if (joins(&plant->stream[i], THING_VESSEL, index))
                print_ref(plant, plant->stream[i].name, &plant->stream[i].flow);
        for (int i = 0; i < plant->pump_count; i++)
            if (plant->pump[i].vessel == index)
                print_ref(plant, plant->pump[i].name, &plant->pump[i].power);
        printf(" heat_budget=%s relief=%s", vessel->has_heat_budget ? "given" : "(none)",
               vessel->relief.set ? "given" : "(none)");
        break;
    }
    case THING_CONDENSER: {
        const struct condenser *condenser = &plant->condenser[index];
        print_ref(plant, "coolant_flow", &condenser->coolant_flow);
        print_ref(plant, "coolant_in_pressure", &condenser->coolant_in_pressure);
        print_ref(plant, "coolant_in_temperature", &condenser->coolant_in_temperature);
        print_ref(plant, "coolant_out_pressure", &condenser->coolant_out_pressure);
        print_ref(plant, "coolant_out_temperature", &condenser->coolant_out_temperature);
        break;
    }
    case THING_PUMP:
        print_ref(plant, "flow", &plant->pump[index].flow);
        print_ref(plant, "running", &plant->pump[index].running);
        print_ref(plant, "suction_temperature", &plant->pump[index].suction_temperature);
        break;
    case THING_PURIFIER:
        print_ref(plant, "flow", &plant->purifier[index].flow);
        print_ref(plant, "oxygen_in", &plant->purifier[index].oxygen_in);
        print_ref(plant, "oxygen_out", &plant->purifier[index].oxygen_out);
        break;
    case THING_DRIFT:
        print_ref(plant, "oxygen", &plant->drift[index].oxygen);
        print_ref(plant, "nitrogen", &plant->drift[index].nitrogen);
        print_ref(plant, "water", &plant->drift[index].water);
        break;
    case THING_HALL:
        print_list(plant, "oxygen", &plant->hall[index].oxygen);
        print_ref(plant, "barometer", &plant->site.barometer);
        print_ref(plant, "ventilation", &plant->hall[index].ventilation);
        print_ref(plant, "fan_running", &plant->hall[index].fan_running);
        print_ref(plant, "occupied", &plant->hall[index].occupied);
        break;
    case THING_SHAFT:
        print_ref(plant, "flow", &plant->shaft[index].flow);
        print_ref(plant, "top_pressure", &plant->shaft[index].top_pressure);
        print_ref(plant, "bottom_pressure", &plant->shaft[index].bottom_pressure);
        print_ref(plant, "temperature", &plant->shaft[index].temperature);
        break;
    case THING_DELIVERY:
        print_ref(plant, "oxygen", &plant->delivery[index].oxygen);
        print_ref(plant, "nitrogen", &plant->delivery[index].nitrogen);
        print_ref(plant, "water", &plant->delivery[index].water);
        break;
    case THING_OUTSIDE:
    case THING_STREAM:
    case THING_KIND_COUNT:
        break;
    }
    putchar('\n');
}

static int print_map(const struct plant *plant)
{
    struct block *blocks = calloc(BLOCKS_MAX, sizeof(*blocks));
    if (blocks == NULL)
        return ERR_MEMORY;
    for (int i = 0; i < plant->link_count; i++)
        print_link(plant, i, blocks);
    free(blocks);
    fputs("\nderived quantities\n", stdout);
    for (int i = 0; i < plant->derived_count; i++) {
        const struct derived *derived = &plant->derived[i];
        bool first = i == 0 || plant->derived[i - 1].kind != derived->kind ||
                     plant->derived[i - 1].thing != derived->thing;
        if (first) {
            printf("  %s %.*s\n", thing_kind_word(derived->kind),
                   (int)strcspn(derived->name, "."), derived->name);
            print_inputs(plant, derived->kind, derived->thing);
        }
        printf("    %-32s %-6s %s\n", derived->name, derived->unit.symbol, derived->says);
    }
    return 0;
}

int verb_check(int argc, char **argv)
{
    enum { CHECK_STRICT = 1, CHECK_MAP, CHECK_KEYS };
    static const struct option table[] = {
        {"strict", no_argument, NULL, CHECK_STRICT},
        {"map",    no_argument, NULL, CHECK_MAP   },
        {"keys",   no_argument, NULL, CHECK_KEYS  },
        {"help",   no_argument, NULL, 'h'         },
        {NULL,     0,           NULL, 0           },
    };
    bool strict = false, map = false;
    int option;
    opterr = 0;
    while ((option = getopt_long(argc, argv, "h", table, NULL)) != -1) {
        switch (option) {
        case CHECK_STRICT:
            strict = true;
            break;
        case CHECK_MAP:
            map = true;
            break;
        case CHECK_KEYS:
            plant_print_keys(stdout);
            return verb_end("check", EXIT_DONE);
        case 'h':
            print_help();
            return verb_end("check", EXIT_DONE);
        default:
            return verb_usage("check", "'%s' is not an option", argv[optind - 1]);
        }
    }
    if (argc - optind != 1)
        return verb_usage("check",
                          argc == optind ? "name the plant file" : "one plant file at a time");
    struct problems *problems = calloc(1, sizeof(*problems));
    struct plant *plant = NULL;
    if (problems == NULL)
        return verb_failed("check", &(struct error){.text = "no memory"});
    int code = plant_read(argv[optind], &plant, problems);
    int status = code != 0                       ? EXIT_FAILED
                 : strict && problems->count > 0 ? EXIT_UNWELL
                                                 : EXIT_DONE;
    verb_print_problems(problems);
    free(problems);
    if (code == 0 && map && print_map(plant) != 0)
        status = verb_failed("check", &(struct error){.text = "no memory for the map"});
    plant_free(plant);
    return verb_end("check", status);
}
