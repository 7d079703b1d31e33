/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Time and memory of an engine step on a plant of 2,000 points and 20 vessels, each with three
 * thermometers, boil-off and condensate metered, a condenser, a pump; five halls; 40 alarms.
 * Reach: 1 ms a step, 64 MiB.
 */
#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/resource.h>
#include <time.h>
#include <unistd.h>

#include "ullage/engine.h"

enum { VESSELS = 20, HALLS = 5, POINTS = 2000, FRAMES = 9000, WARM = 8000 };

static int points;

static void point(FILE *out, const char *name, const char *unit, const char *u)
{
    fprintf(out, "[point %s]\nlink=l\nread=input %d f64\nunit=%s\nu=%s\n", name, 4 * points++,
            unit, u);
}

static void numbered(FILE *out, const char *name, int v, const char *unit, const char *u)
{
    char text[40];
    snprintf(text, sizeof(text), "%s-%d", name, v);
    point(out, text, unit, u);
}

static void write_vessel(FILE *out, int v)
{
    static const struct {
        const char *name, *unit, *u;
    } of[] = {
        {"PT", "kPa(g)", "0.05 kPa"},
        {"LT", "m",      "1 mm"    },
        {"TA", "K",      "0.02 K"  },
        {"TB", "K",      "0.02 K"  },
        {"TC", "K",      "0.02 K"  },
        {"TV", "K",      "1 K"     },
        {"FB", "g/s",    "0.5 %"   },
        {"FC", "g/s",    "0.5 %"   },
        {"TX", "K",      "0.1 K"   },
        {"JP", "W",      "1 %"     },
        {"FN", "g/s",    "0.5 %"   },
        {"PI", "kPa",    "1 kPa"   },
        {"TI", "K",      "0.1 K"   },
        {"PO", "kPa",    "1 kPa"   },
        {"TO", "K",      "0.1 K"   }
    };
    for (size_t i = 0; i < ARRAY_LENGTH(of); i++)
        numbered(out, of[i].name, v, of[i].unit, of[i].u);
    fprintf(out,
            "[vessel v%d]\nfluid=argon\nshape=box 9 m x 6.5 m x 6 m\npressure=PT-%d\n"
            "level=LT-%d\nliquid_temperature=TA-%d, TB-%d, TC-%d\nvapour_temperature=TV-%d\n"
            "heat_budget=5 kW\nrelief=25 kPa(g)\n"
            "[condenser c%d]\nvessel=v%d\ncoolant=nitrogen\ncoolant_flow=FN-%d\n"
            "coolant_in_pressure=PI-%d\ncoolant_in_temperature=TI-%d\n"
            "coolant_out_pressure=PO-%d\ncoolant_out_temperature=TO-%d\nrated_duty=9 kW\n"
            "[stream boil%d]\nfrom=v%d\nto=c%d\nphase=vapour\nflow=FB-%d\ntemperature=TX-%d\n"
            "[stream back%d]\nfrom=c%d\nto=v%d\nphase=liquid\nflow=FC-%d\n"
            "[pump p%d]\nvessel=v%d\npower=JP-%d\nnpsh_required=1 m\n"
            "[alarm high%d]\nwatch=PT-%d\nabove=14 kPa(g)\npriority=2\n"
            "[alarm heat%d]\nwatch=v%d.heat_load\nabove=7 kW\npriority=3\n",
            v, v, v, v, v, v, v, v, v, v, v, v, v, v, v, v, v, v, v, v, v, v, v, v, v, v, v, v,
            v, v);
}

static void write_plant(const char *path)
{
    FILE *out = fopen(path, "w");
    if (out == NULL)
        exit(1);
    fputs("[site]\nname=Tarn Hollow bench\nframe=1 s\nbarometer=PB\n"
          "[link l]\nhost=127.0.0.1\nport=15097\n",
          out);
    point(out, "PB", "kPa", "0.02 kPa");
    for (int v = 0; v < VESSELS; v++)
        write_vessel(out, v);
    for (int h = 0; h < HALLS; h++) {
        numbered(out, "AA", h, "%", "0.1 %");
        numbered(out, "AB", h, "%", "0.1 %");
        numbered(out, "AC", h, "%", "0.1 %");
        fprintf(out,
                "[hall h%d]\nvolume=3200 m3\nventilation=2.4 m3/s\nmode=exhaust\n"
                "oxygen=AA-%d, AB-%d, AC-%d\ngas=argon\naction_levels=19.5 %%, 18 %%\n",
                h, h, h, h);
    }
    for (int i = 0; points < POINTS; i++)
        numbered(out, "X", i, "K", "0.1 K");
    fclose(out);
}

static double noise(uint64_t *seed)
{
    *seed = *seed * UINT64_C(6364136223846793005) + UINT64_C(1442695040888963407);
    return (double)(*seed >> 11) / 4503599627370496.0 - 1;
}

/* A quiet reading by the first letters of its name. */
static double quiet(const char *name)
{
    static const struct {
        const char *starts;
        double value;
    } values[] = {
        {"PB", 98200 },
        {"PT", 12400 },
        {"LT", 4.7   },
        {"TA", 88.2  },
        {"TB", 88.2  },
        {"TC", 88.2  },
        {"TV", 92    },
        {"FB", 0.033 },
        {"FC", 0.033 },
        {"TX", 95    },
        {"JP", 800   },
        {"FN", 0.03  },
        {"PI", 300000},
        {"TI", 84    },
        {"PO", 250000},
        {"TO", 95    },
        {"AA", 0.2095},
        {"AB", 0.2095},
        {"AC", 0.2095}
    };
    for (size_t i = 0; i < ARRAY_LENGTH(values); i++)
        if (strncmp(name, values[i].starts, strlen(values[i].starts)) == 0)
            return values[i].value;
    return 90;
}

static double now_s(void)
{
    struct timespec t;
    clock_gettime(CLOCK_MONOTONIC, &t);
    return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

static int by_size(const void *a, const void *b)
{
    double x = *(const double *)a, y = *(const double *)b;
    return (x > y) - (x < y);
}

int main(void)
{
    static struct problems problems;
    static double took[FRAMES];
    char path[] = "/tmp/ullage-bench-XXXXXX";
    struct plant *plant;
    struct engine *engine;
    struct frame frame;
    struct error err = {0};
    struct rusage before, after;
    int fd = mkstemp(path);
    if (fd < 0)
        return 1;
    close(fd);
    write_plant(path);
    int code = plant_read(path, &plant, &problems);
    unlink(path);
    getrusage(RUSAGE_SELF, &before);
    if (code != 0 || engine_create(plant, &engine, &err) != 0) {
        fprintf(stderr, "%s\n", code != 0 ? problems.at[0].text : err.text);
        return 1;
    }
    struct arena *arena = arena_create();
    if (frame_init(&frame, plant, arena) != 0)
        return 1;
    uint64_t seed = 1;
    int usable = 0;
    for (int i = 0; i < FRAMES; i++) {
        frame.utc_ns = INT64_C(1796083200) * NS_PER_S + i * NS_PER_S;
        for (int p = 0; p < plant->point_count; p++) {
            double value = quiet(plant->point[p].name);
            double u = point_uncertainty(&plant->point[p], value);
            frame.sample[p] = (struct sample){.value = value + u * noise(&seed),
                                              .u = u,
                                              .quality = QUALITY_GOOD,
                                              .read_utc_ns = frame.utc_ns};
        }
        double start = now_s();
        const struct results *results = engine_step(engine, &frame, NULL, 0);
        took[i] = now_s() - start;
        usable = 0;
        for (int d = 0; d < results->derived_count; d++)
            usable += quantity_usable(results->derived[d].quantity);
    }
    getrusage(RUSAGE_SELF, &after);
    qsort(took + WARM, FRAMES - WARM, sizeof(*took), by_size);
    printf("engine step, %d points, %d vessels, windows full: median %.3f ms, 99th percentile "
           "%.3f ms (reach 1 ms)\n",
           plant->point_count, plant->vessel_count, 1e3 * took[WARM + (FRAMES - WARM) / 2],
           1e3 * took[WARM + (FRAMES - WARM) * 99 / 100]);
    printf("engine memory: %.1f MiB (reach 64 MiB); %d of %d derived quantities usable\n",
           (double)(after.ru_maxrss - before.ru_maxrss) / 1024, usable, plant->derived_count);
    engine_free(engine);
    arena_free(arena);
    plant_free(plant);
    return 0;
}
