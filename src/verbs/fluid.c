/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * ullage fluid: properties of a fluid, at one state, on the saturation line, or row by row for
 * a table. What must stay true: what cannot be computed is an empty field with its reason on
 * stderr, never a plausible number.
 */
#include "fluid_input.h"
#include "fluid_units.h"
#include "verbs.h"

#include <errno.h>
#include <getopt.h>
#include <stdio.h>
#include <string.h>

#include "ullage/fluid.h"

enum { FIELD_SIZE = 32 };

/* What was asked of the command line. */
struct request {
    const struct fluid *fluid;
    const char *at, *points;
    bool saturation;
    const char *saturation_at; /* NULL: row by row */
    bool csv;
    const char *units_text; /* NULL: SI */
    struct fluid_units units;
};

enum state_field {
    STATE_TEMPERATURE,
    STATE_PRESSURE,
    STATE_DENSITY,
    STATE_ENTHALPY,
    STATE_ENTROPY,
    STATE_ENERGY,
    STATE_CP,
    STATE_CV,
    STATE_SOUND,
    STATE_VISCOSITY,
    STATE_CONDUCTIVITY,
    STATE_PHASE,
    STATE_FIELDS
};
enum saturation_field {
    SATURATION_TEMPERATURE,
    SATURATION_PRESSURE,
    SATURATION_DENSITY_LIQUID,
    SATURATION_DENSITY_VAPOUR,
    SATURATION_ENTHALPY_LIQUID,
    SATURATION_ENTHALPY_VAPOUR,
    SATURATION_ENTROPY_LIQUID,
    SATURATION_ENTROPY_VAPOUR,
    SATURATION_TENSION,
    SATURATION_FIELDS
};

/* A row of results as text, in the order of the columns; an empty field is not known. */
struct answer {
    char field[STATE_FIELDS][FIELD_SIZE];
};

struct column {
    const char *name; /* in CSV */
    const char *says, *unit;
};
static const struct column state_columns[] = {
    [STATE_TEMPERATURE] = {"temperature_k",        "temperature",     "K"       },
    [STATE_PRESSURE] = {"pressure_pa",          "pressure",        "Pa"      },
    [STATE_DENSITY] = {"density_kg_m3",        "density",         "kg/m3"   },
    [STATE_ENTHALPY] = {"enthalpy_j_kg",        "enthalpy",        "J/kg"    },
    [STATE_ENTROPY] = {"entropy_j_kg_k",       "entropy",         "J/(kg K)"},
    [STATE_ENERGY] = {"internal_energy_j_kg", "internal energy", "J/kg"    },
    [STATE_CP] = {"cp_j_kg_k",            "cp",              "J/(kg K)"},
    [STATE_CV] = {"cv_j_kg_k",            "cv",              "J/(kg K)"},
    [STATE_SOUND] = {"sound_speed_m_s",      "speed of sound",  "m/s"     },
    [STATE_VISCOSITY] = {"viscosity_pa_s",       "viscosity",       "Pa s"    },
    [STATE_CONDUCTIVITY] = {"conductivity_w_m_k",   "conductivity",    "W/(m K)" },
    [STATE_PHASE] = {"phase",                "phase",           ""        },
};
static const struct column saturation_columns[] = {
    [SATURATION_TEMPERATURE] = {"temperature_k",         "temperature",      "K"       },
    [SATURATION_PRESSURE] = {"pressure_pa",           "pressure",         "Pa"      },
    [SATURATION_DENSITY_LIQUID] = {"density_liquid_kg_m3",  "density, liquid",  "kg/m3"   },
    [SATURATION_DENSITY_VAPOUR] = {"density_vapour_kg_m3",  "density, vapour",  "kg/m3"   },
    [SATURATION_ENTHALPY_LIQUID] = {"enthalpy_liquid_j_kg",  "enthalpy, liquid", "J/kg"    },
    [SATURATION_ENTHALPY_VAPOUR] = {"enthalpy_vapour_j_kg",  "enthalpy, vapour", "J/kg"    },
    [SATURATION_ENTROPY_LIQUID] = {"entropy_liquid_j_kg_k", "entropy, liquid",  "J/(kg K)"},
    [SATURATION_ENTROPY_VAPOUR] = {"entropy_vapour_j_kg_k", "entropy, vapour",  "J/(kg K)"},
    [SATURATION_TENSION] = {"surface_tension_n_m",   "surface tension",  "N/m"     },
};
_Static_assert((int)SATURATION_FIELDS <= (int)STATE_FIELDS, "an answer holds either row");
_Static_assert(ARRAY_LENGTH(state_columns) == STATE_FIELDS &&
                   ARRAY_LENGTH(saturation_columns) == SATURATION_FIELDS,
               "each field has its column");

_Static_assert(STATE_TEMPERATURE == 0 && STATE_PRESSURE == 1 && SATURATION_TEMPERATURE == 0 &&
                   SATURATION_PRESSURE == 1,
               "inputs come first in either answer");

static void print_help(void)
{
    puts("usage: ullage fluid NAME [--at PAIR | --saturation [ONE]] [--points CSV] [--csv | "
         "--units LIST]\n"
         "       ullage fluid --list\n\n"
         "Properties of a pure fluid from its published equation of state; without an option\n"
         "what the equation is and where it is valid. Pressures are absolute.\n\n"
         "  --at PAIR           one state: T=87.3K,p=1.2bar, or p,h  p,s  rho,T  T,x  p,x\n"
         "                      (h in kJ/kg, s in kJ/(kg K), rho in kg/m3, x the vapour's\n"
         "                      part by mass)\n"
         "  --saturation ONE    both phases in equilibrium at p=1bar or T=90K\n"
         "  --points CSV        row by row for a file ('-': standard input) with columns\n"
         "                      temperature_k,pressure_pa; with --saturation one of them.\n"
         "                      Answers in CSV; a row that cannot be computed keeps its\n"
         "                      inputs, its reason goes to stderr, the status is 1\n"
         "  --units LIST        units of the table for people: kPa,degC,kJ/kg\n"
         "  --csv               the answer in CSV, SI units always\n"
         "  --list              the fluids, their limits, stated uncertainty and source");
}

/* ---- one answer
 * ------------------------------------------------------------------------------ */

static void put(struct answer *answer, int field, double value)
{
    csv_number(answer->field[field], sizeof(answer->field[field]), value);
}

static void answer_state(struct answer *answer, const struct fluid *fluid,
                         const struct fluid_state *state)
{
    *answer = (struct answer){0};
    put(answer, STATE_TEMPERATURE, state->temperature_k);
    put(answer, STATE_PRESSURE, state->pressure_pa);
    put(answer, STATE_DENSITY, state->density_kg_m3);
    put(answer, STATE_ENTHALPY, state->enthalpy_j_kg);
    put(answer, STATE_ENTROPY, state->entropy_j_kg_k);
    put(answer, STATE_ENERGY, state->internal_energy_j_kg);
    text_copy(answer->field[STATE_PHASE], FIELD_SIZE, fluid_phase_word(state->phase));
    if (state->phase == FLUID_PHASE_TWO_PHASE)
        return; /* the rest does not exist there */
    put(answer, STATE_CP, state->cp_j_kg_k);
    put(answer, STATE_CV, state->cv_j_kg_k);
    put(answer, STATE_SOUND, state->sound_speed_m_s);
    double value;
    if (fluid_viscosity(fluid, state, &value, NULL) == 0)
        put(answer, STATE_VISCOSITY, value);
    if (fluid_conductivity(fluid, state, &value, NULL) == 0)
        put(answer, STATE_CONDUCTIVITY, value);
}

/* What was asked stands in the answer as asked, not as computed back. */
static void answer_as_asked(struct answer *answer, const struct fluid_inputs *inputs)
{
    if ((inputs->given >> INPUT_T & 1u) != 0)
        put(answer, STATE_TEMPERATURE, inputs->value[INPUT_T]);
    if ((inputs->given >> INPUT_P & 1u) != 0)
        put(answer, STATE_PRESSURE, inputs->value[INPUT_P]);
}

static void answer_saturation(struct answer *answer, const struct fluid *fluid,
                              const struct fluid_saturation *saturation)
{
    *answer = (struct answer){0};
    put(answer, SATURATION_TEMPERATURE, saturation->temperature_k);
    put(answer, SATURATION_PRESSURE, saturation->pressure_pa);
    put(answer, SATURATION_DENSITY_LIQUID, saturation->liquid.density_kg_m3);
    put(answer, SATURATION_DENSITY_VAPOUR, saturation->vapour.density_kg_m3);
    put(answer, SATURATION_ENTHALPY_LIQUID, saturation->liquid.enthalpy_j_kg);
    put(answer, SATURATION_ENTHALPY_VAPOUR, saturation->vapour.enthalpy_j_kg);
    put(answer, SATURATION_ENTROPY_LIQUID, saturation->liquid.entropy_j_kg_k);
    put(answer, SATURATION_ENTROPY_VAPOUR, saturation->vapour.entropy_j_kg_k);
    double tension;
    if (fluid_surface_tension(fluid, saturation->temperature_k, &tension, NULL) == 0)
        put(answer, SATURATION_TENSION, tension);
}

static void print_header(const struct column *column, int count)
{
    for (int i = 0; i < count; i++)
        printf("%s%s", i > 0 ? "," : "", column[i].name);
    putchar('\n');
}

static void print_row(const struct answer *answer, int count)
{
    for (int i = 0; i < count; i++) {
        if (i > 0)
            putchar(',');
        csv_write(stdout, answer->field[i]);
    }
    putchar('\n');
}

/* For people: seven digits are more than any equation of state is good for. */
static void print_table(const struct request *request, const struct column *column,
                        const struct answer *answer, int count)
{
    printf("%s\n", fluid_name(request->fluid));
    for (int i = 0; i < count; i++) {
        double value;
        const char *text = answer->field[i];
        struct fluid_unit unit = fluid_units_shown(&request->units, column[i].unit);
        if (text[0] == '\0')
            printf("  %-17s %14s\n", column[i].says, "-");
        else if (text_to_double(text, &value) == 0)
            printf("  %-17s %14.7g %s\n", column[i].says, (value - unit.offset) / unit.scale,
                   unit.symbol);
        else
            printf("  %-17s %14s\n", column[i].says, text);
    }
    const struct fluid_limits *limits = fluid_limits(request->fluid);
    printf("\npressure is absolute; '-': no value there, or no published model here\n"
           "source: %s\n",
           limits->source);
}

static void print_answer(const struct request *request, const struct column *column,
                         const struct answer *answer, int count)
{
    if (request->csv) {
        print_header(column, count);
        print_row(answer, count);
    } else {
        print_table(request, column, answer, count);
    }
}

/* One state or one point of the saturation line, from the command line. */
static int run_one(const struct request *request)
{
    const char *option = request->saturation ? "--saturation" : "--at";
    struct fluid_inputs inputs;
    struct error err = {0};
    struct answer answer;
    if (fluid_inputs_parse(request->saturation ? request->saturation_at : request->at, &inputs,
                           &err) != 0)
        return verb_usage("fluid", "%s: %s", option, err.text);
    if (request->saturation) {
        struct fluid_saturation saturation;
        if (fluid_inputs_saturation(request->fluid, &inputs, &saturation, &err) == 0) {
            answer_saturation(&answer, request->fluid, &saturation);
            answer_as_asked(&answer, &inputs);
            print_answer(request, saturation_columns, &answer, SATURATION_FIELDS);
            return EXIT_DONE;
        }
    } else {
        struct fluid_state state;
        if (fluid_inputs_state(request->fluid, &inputs, &state, &err) == 0) {
            answer_state(&answer, request->fluid, &state);
            answer_as_asked(&answer, &inputs);
            print_answer(request, state_columns, &answer, STATE_FIELDS);
            if (!request->csv && state.phase == FLUID_PHASE_TWO_PHASE)
                printf("vapour: %.7g of the mass\n", state.vapour_fraction);
            return EXIT_DONE;
        }
    }
    if (err.code == ERR_ARGUMENT)
        return verb_usage("fluid", "%s: %s", option, err.text);
    return verb_failed("fluid", &err);
}

/* ---- row by row
 * ------------------------------------------------------------------------------ */

/* Which columns of the file hold what; -1: none. */
struct points {
    struct csv *csv;
    const char *name;
    int temperature, pressure;
};

/* A misspelt column is told with what it may have meant. */
static int missing_column(const struct points *points, const char *wanted, struct error *err)
{
    const char *near = NULL;
    for (int i = 0; i < csv_count(points->csv); i++) {
        const char *pair[] = {csv_field(points->csv, i), near};
        near = text_nearest(wanted, pair, ARRAY_LENGTH(pair));
    }
    return error_set(err, ERR_FORMAT, "%s:%ld: there is no column %s%s%s%s", points->name,
                     csv_line(points->csv), wanted, near != NULL ? "; is '" : "",
                     near != NULL ? near : "", near != NULL ? "' meant to be it?" : "");
}

static int find_columns(const struct request *request, struct points *points, struct error *err)
{
    int code = csv_read(points->csv, err);
    if (code < 0)
        return error_context(err, "%s", points->name);
    if (code == 0)
        return error_set(
            err, ERR_FORMAT,
            "%s is empty; its first line names the columns temperature_k,pressure_pa",
            points->name);
    points->temperature = csv_find(points->csv, state_columns[STATE_TEMPERATURE].name);
    points->pressure = csv_find(points->csv, state_columns[STATE_PRESSURE].name);
    bool has_t = points->temperature >= 0, has_p = points->pressure >= 0;
    if (request->saturation) {
        if (has_t && has_p)
            return error_set(
                err, ERR_FORMAT,
                "%s:%ld: with --saturation one of temperature_k and pressure_pa is "
                "given, not both; leave one out",
                points->name, csv_line(points->csv));
        if (has_t || has_p)
            return 0;
        missing_column(points, "pressure_pa", err);
        return error_context(err, "one of pressure_pa and temperature_k is needed");
    }
    if (!has_p)
        return missing_column(points, "pressure_pa", err);
    return has_t ? 0 : missing_column(points, "temperature_k", err);
}

/* An input of the row: into the answer as it stands there, and as a number. */
static int take_input(const struct points *points, int column, const char *name, char *field,
                      double *value, struct error *err)
{
    const char *text = csv_field(points->csv, column);
    text_printable(field, FIELD_SIZE, text);
    if (text[0] == '\0')
        return error_set(err, ERR_FORMAT, "%s is empty", name);
    if (text_to_double(text, value) != 0)
        return error_set(err, ERR_FORMAT, "%s: '%.60s' is no number", name, text);
    return 0;
}

static int point_inputs(const struct points *points, struct fluid_inputs *inputs,
                        struct answer *answer, struct error *err)
{
    *inputs = (struct fluid_inputs){0};
    *answer = (struct answer){0};
    int code_t = 0, code_p = 0;
    if (points->temperature >= 0) {
        inputs->given |= 1u << INPUT_T;
        code_t = take_input(points, points->temperature, "temperature_k", answer->field[0],
                            &inputs->value[INPUT_T], err);
    }
    if (points->pressure >= 0) {
        inputs->given |= 1u << INPUT_P;
        code_p = take_input(points, points->pressure, "pressure_pa", answer->field[1],
                            &inputs->value[INPUT_P], code_t == 0 ? err : NULL);
    }
    return code_t != 0 ? code_t : code_p;
}

/* The row that stands in points; false with the reason told if it cannot be computed. */
static bool run_row(const struct request *request, const struct points *points)
{
    struct fluid_inputs inputs;
    struct answer answer;
    struct error err = {0};
    int code = point_inputs(points, &inputs, &answer, &err);
    if (code == 0 && request->saturation) {
        struct fluid_saturation saturation;
        code = fluid_inputs_saturation(request->fluid, &inputs, &saturation, &err);
        if (code == 0)
            answer_saturation(&answer, request->fluid, &saturation);
    } else if (code == 0) {
        struct fluid_state state;
        code = fluid_inputs_state(request->fluid, &inputs, &state, &err);
        if (code == 0)
            answer_state(&answer, request->fluid, &state);
    }
    if (code == 0) {
        answer_as_asked(&answer, &inputs);
    } else {
        char reason[sizeof(err.text)];
        text_printable(reason, sizeof(reason), err.text);
        fprintf(stderr, "ullage fluid: %s:%ld: %s\n", points->name, csv_line(points->csv),
                reason);
    }
    print_row(&answer, request->saturation ? SATURATION_FIELDS : STATE_FIELDS);
    return code == 0;
}

static int run_rows(const struct request *request, struct points *points)
{
    struct error err = {0};
    int status = EXIT_DONE;
    if (find_columns(request, points, &err) != 0)
        return verb_failed("fluid", &err);
    if (request->saturation)
        print_header(saturation_columns, SATURATION_FIELDS);
    else
        print_header(state_columns, STATE_FIELDS);
    while (!ferror(stdout)) {
        int code = csv_read(points->csv, &err);
        if (code == 0)
            break;
        if (code < 0) {
            error_context(&err, "%s", points->name);
            status = verb_failed("fluid", &err);
            if (code != ERR_FORMAT)
                break;
            print_row(&(const struct answer){0},
                      request->saturation ? SATURATION_FIELDS : STATE_FIELDS);
        } else if (!run_row(request, points)) {
            status = EXIT_FAILED;
        }
    }
    return status;
}

static int run_points(const struct request *request)
{
    bool standard = strcmp(request->points, "-") == 0;
    char name[200];
    text_printable(name, sizeof(name), standard ? "standard input" : request->points);
    struct error err = {0};
    FILE *file = standard ? stdin : fopen(request->points, "r");
    if (file == NULL) {
        error_set(&err, ERR_IO, "%s cannot be opened: %s", name, strerror(errno));
        return verb_failed("fluid", &err);
    }
    struct points points = {.csv = csv_create(file), .name = name};
    int status;
    if (points.csv != NULL) {
        status = run_rows(request, &points);
    } else {
        error_set(&err, ERR_MEMORY, "no memory to read %s", name);
        status = verb_failed("fluid", &err);
    }
    csv_free(points.csv);
    if (!standard)
        fclose(file);
    return status;
}

/* ---- what there is
 * --------------------------------------------------------------------------- */

static void run_list(void)
{
    for (size_t i = 0; i < fluid_count(); i++) {
        const struct fluid *fluid = fluid_at(i);
        const struct fluid_limits *limits = fluid_limits(fluid);
        printf("%-13s %.6g to %.6g K, up to %.6g MPa; %s\n%-13s %s\n", fluid_name(fluid),
               limits->triple_temperature_k, limits->max_temperature_k,
               limits->max_pressure_pa / 1e6, limits->uncertainty, "", limits->source);
    }
}

static void run_facts(const struct fluid *fluid)
{
    const struct fluid_limits *limits = fluid_limits(fluid);
    printf("%s\n"
           "  molar mass        %14.7g kg/mol\n"
           "  gas constant      %14.9g J/(mol K), of the equation\n"
           "  triple point      %14.7g K, %.7g Pa\n"
           "  critical point    %14.7g K, %.7g Pa, %.7g kg/m3\n"
           "  valid up to       %14.7g K, %.7g Pa\n"
           "  uncertainty       %s\n"
           "  source            %s\n",
           fluid_name(fluid), limits->molar_mass_kg_mol, limits->gas_constant_j_mol_k,
           limits->triple_temperature_k, limits->triple_pressure_pa,
           limits->critical_temperature_k, limits->critical_pressure_pa,
           limits->critical_density_kg_m3, limits->max_temperature_k, limits->max_pressure_pa,
           limits->uncertainty, limits->source);
}

static int unknown_fluid(const char *name)
{
    const char *names[32];
    size_t count = fluid_count() < ARRAY_LENGTH(names) ? fluid_count() : ARRAY_LENGTH(names);
    for (size_t i = 0; i < count; i++)
        names[i] = fluid_name(fluid_at(i));
    const char *near = text_nearest(name, names, count);
    if (near != NULL)
        return verb_usage("fluid", "there is no fluid '%.60s'; did you mean %s?", name, near);
    return verb_usage("fluid", "there is no fluid '%.60s'; 'ullage fluid --list' names them",
                      name);
}

static int run(struct request *request)
{
    struct error err = {0};
    if (request->units_text != NULL && (request->csv || request->points != NULL))
        return verb_usage("fluid", "--units is for the table; CSV is in SI units always");
    if (request->units_text != NULL && request->at == NULL && !request->saturation)
        return verb_usage("fluid", "--units needs --at or --saturation");
    if (request->units_text != NULL &&
        fluid_units_parse(request->units_text, &request->units, &err) != 0)
        return verb_usage("fluid", "--units: %s", err.text);
    if (request->at != NULL && (request->saturation || request->points != NULL))
        return verb_usage("fluid", "--at stands alone, without --saturation and --points");
    if (request->saturation_at != NULL && request->points != NULL)
        return verb_usage("fluid", "--saturation takes no value when --points gives them");
    if (request->points != NULL)
        return run_points(request);
    if (request->saturation && request->saturation_at == NULL)
        return verb_usage("fluid", "--saturation needs p=1bar or T=90K, or --points");
    if (request->at != NULL || request->saturation)
        return run_one(request);
    if (request->csv)
        return verb_usage("fluid", "--csv needs --at, --saturation or --points");
    run_facts(request->fluid);
    return EXIT_DONE;
}

int verb_fluid(int argc, char **argv)
{
    enum {
        FLUID_AT = 1,
        FLUID_SATURATION,
        FLUID_POINTS,
        FLUID_CSV,
        FLUID_UNITS,
        FLUID_LIST,
        FLUID_HELP
    };
    static const struct option table[] = {
        {"at",         required_argument, NULL, FLUID_AT        },
        {"saturation", optional_argument, NULL, FLUID_SATURATION},
        {"points",     required_argument, NULL, FLUID_POINTS    },
        {"csv",        no_argument,       NULL, FLUID_CSV       },
        {"units",      required_argument, NULL, FLUID_UNITS     },
        {"list",       no_argument,       NULL, FLUID_LIST      },
        {"help",       no_argument,       NULL, FLUID_HELP      },
        {NULL,         0,                 NULL, 0               },
    };
    struct request request = {0};
    opterr = 0;
    for (int option; (option = getopt_long(argc, argv, ":", table, NULL)) != -1;) {
        switch (option) {
        case FLUID_AT:
            request.at = optarg;
            break;
        case FLUID_SATURATION:
            request.saturation = true;
            request.saturation_at = optarg;
            /* Its value may also be the next word; no fluid's name has a '='. */
            if (optarg == NULL && optind < argc && argv[optind][0] != '-' &&
                strchr(argv[optind], '=') != NULL)
                request.saturation_at = argv[optind++];
            break;
        case FLUID_POINTS:
            request.points = optarg;
            break;
        case FLUID_CSV:
            request.csv = true;
            break;
        case FLUID_UNITS:
            request.units_text = optarg;
            break;
        case FLUID_LIST:
            run_list();
            return verb_end("fluid", EXIT_DONE);
        case FLUID_HELP:
            print_help();
            return verb_end("fluid", EXIT_DONE);
        case ':':
            return verb_usage("fluid", "%s needs a value", argv[optind - 1]);
        default:
            return verb_usage("fluid", "there is no option '%s'", argv[optind - 1]);
        }
    }
    if (argc - optind != 1)
        return verb_usage("fluid", argc == optind ? "which fluid?" : "one fluid at a time");
    request.fluid = fluid_find(argv[optind]);
    if (request.fluid == NULL)
        return unknown_fluid(argv[optind]);
    return verb_end("fluid", run(&request));
}
