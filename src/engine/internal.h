/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Private to the room: the engine's memory, and what its files hand each other in a step. All
 * of it is taken at creation; a step only fills it.
 */
#ifndef ULLAGE_ENGINE_INTERNAL_H
#define ULLAGE_ENGINE_INTERNAL_H

#include "ullage/balance.h"
#include "ullage/engine.h"

/* ---- verdict.c: why a number is not good
 * ------------------------------------------------------ */

/* Quality with the reason of the worst found so far. */
struct verdict {
    enum quality quality;
    char reason[120];
};
/* Worsens a verdict; the first reason of the worst quality stays. */
void verdict_doubt(struct verdict *verdict, enum quality quality, const char *fmt, ...)
    PRINTF_LIKE(3, 4);
void verdict_join(struct verdict *verdict, const struct verdict *other);
bool verdict_usable(const struct verdict *verdict);
/* False, and bad, where readings are so far from sense that the result is no number. */
bool verdict_finite(const struct estimate *estimate, struct verdict *verdict);

/* ---- inputs.c: references to readings
 * --------------------------------------------------------- */

enum { INPUT_PARTS = 2 };
/* A reference at this frame. A gauge pressure that was made absolute has two parts. u is of one
 * reading, systematic what of it does not average out. */
struct input {
    bool described; /* false: the plant file gives no such reference */
    double value;
    enum quality quality;
    int culprit; /* tag at fault, or -1 */
    int parts;
    struct input_part {
        int tag;
        double u, systematic;
    } part[INPUT_PARTS];
};
struct input input_of(const struct engine *engine, const struct ref *ref);
/* A pressure, absolute: the frame's barometer is added where the reference is gauge. */
struct input input_pressure(const struct engine *engine, const struct ref *ref);
bool input_usable(const struct input *input);
/* Doubts a verdict if the input is not good; what says what is missing when not described. */
void input_judge(const struct engine *engine, const struct input *input, const char *what,
                 struct verdict *verdict);
/* Adds factor times the input's uncertainty (not its value): of one reading, or systematic. */
void input_add_u(struct estimate *estimate, double factor, const struct input *input);
void input_add_systematic(struct estimate *estimate, double factor, const struct input *input);
void input_estimate(struct estimate *out, const struct input *input);
/* Systematic part of a point's standard uncertainty u: what is left when the scatter seen is
 * taken out, at least u/sqrt 2. */
double input_systematic(const struct engine *engine, int tag, double u);
/* Scatter of a point's readings, standard deviation of one; 0 while not known. */
double input_scatter(const struct engine *engine, int tag);
/* Drift that an instrument may show within a window, of its u, per second. */
extern const double input_drift_per_s;

/* Scatter of a point, from successive differences. */
struct scatter {
    int64_t read_utc_ns;
    double last, variance, count;
};
void scatter_step(struct engine *engine, const struct frame *frame);

/* ---- vessels
 * ---------------------------------------------------------------------------------- */

enum { WINDOW_BLOCKS = 720 };

/* A metered flow over the border of a vessel (with its pumps and purifiers). */
struct vessel_stream {
    int stream;
    int sign;  /* +1 leaves, -1 enters */
    bool loop; /* condenser's other side is not metered: comes back (or went) as such */
    /* of this frame */
    double flow_kg_s, per_reading; /* kg/s; kg/s for one SI unit of the meter */
    double enthalpy_j_kg, u_model_j_kg;
    double by_temperature, by_pressure;
    struct input flow, temperature, pressure;
    struct verdict flow_verdict, heat_verdict;
};

/* What a vessel's window keeps of each frame. "Base" is the enthalpy that all is counted from.
 */
enum series {
    SERIES_ENERGY, /* internal energy less base times mass */
    SERIES_MASS,
    SERIES_VAPOUR,
    SERIES_PRESSURE,
    SERIES_NET_MASS,   /* out less in */
    SERIES_NET_HEAT,   /* out less in, less pump work, plus cooling that no stream carries */
    SERIES_NET_VAPOUR, /* out less in, plus condensed inside */
    SERIES_PUMP,
    SERIES_COOLING,
    SERIES_LOST,      /* seconds before a frame in which nothing could be used */
    SERIES_ENERGY_BY, /* derivatives: CONTENTS_VARIABLES of them */
    SERIES_MASS_BY = SERIES_ENERGY_BY + CONTENTS_VARIABLES,
    SERIES_STREAMS =
        SERIES_MASS_BY + CONTENTS_VARIABLES /* two a stream: flow, flow * enthalpy */
};

enum track { TRACK_HEAT, TRACK_MASS, TRACK_VAPOUR, TRACK_COUNT };

/* What an evaluation of a window found; kept until the next. */
struct balance_result {
    struct verdict verdict;
    bool filling; /* the window is not long enough yet */
    double span_s;
    struct estimate in, out, stored, unexplained;
};

struct vessel_state {
    const struct vessel *vessel;
    int index;
    /* of this frame */
    struct input pressure, level, vapour_temperature;
    struct input thermometer[PLANT_LIST_MAX];
    unsigned thermometers_used; /* bit mask: in the mean since the window began */
    double offset_k[PLANT_LIST_MAX], offset_weight; /* of each thermometer from the mean */
    double u_liquid_mean_k;
    struct contents_input contents_input;
    struct contents contents;
    struct verdict contents_verdict, flows_verdict, heat_verdict;
    struct estimate liquid_mass;
    int stream_count;
    struct vessel_stream *stream;
    int pump_count;
    int pump[PLANT_LIST_MAX];
    struct input pump_power[PLANT_LIST_MAX]; /* after the running bit */
    double pump_w;
    int cooling_count; /* condensers that no stream joins to the vessel: known by their duty */
    int cooling[PLANT_LIST_MAX];
    bool vapour_leaves;
    /* window */
    struct window window;
    double *values; /* one per series, of this frame */
    double base_j_kg;
    double start_s[TRACK_COUNT]; /* of the present regime, in the window's time */
    int64_t pushed_utc_ns;       /* last frame in the window; 0: none */
    int64_t heat_utc_ns;         /* last frame at which every enthalpy was known */
    bool heat_rejected;          /* and whether one has been missing since */
    double interval_s;           /* usual time between frames */
    bool rejected;               /* a frame stayed outside since the last that did not */
    struct verdict lost;         /* why */
    struct balance_result balance[TRACK_COUNT];
    struct estimate heat_load, pressure_rate, hold_time;
    struct verdict pressure_rate_verdict, hold_time_verdict;
};

int vessel_create(struct engine *engine, int index);
void vessel_step(struct engine *engine, struct vessel_state *state);
/* streams.c */
int streams_create(struct engine *engine, struct vessel_state *state);
void streams_read(struct engine *engine, struct vessel_state *state);
/* Shortest span worth a balance: window_minimum, and four blocks. */
double vessel_least_s(const struct vessel_state *state);
/* window.c: this frame into the window; true when the window is worth a new evaluation. */
bool vessel_window_push(struct engine *engine, struct vessel_state *state);
/* evaluate.c: the window's balances. */
void vessel_evaluate(struct engine *engine, struct vessel_state *state);
/* ledgers.c: ledgers and derived quantities from the last evaluation and this frame. */
void vessel_publish(struct engine *engine, struct vessel_state *state);
/* Quiet, watch or finding by the unexplained part against its uncertainty, or why not. */
enum ledger_word ledger_word_of(const struct verdict *verdict, bool filling,
                                const struct estimate *unexplained);
/* "filling: 7 min to go" */
void verdict_filling(struct verdict *verdict, double to_go_s);

/* ---- purity.c
 * --------------------------------------------------------------------------------- */

/* Oxygen in the liquid of a vessel with a purifier. */
struct purity_state {
    struct window window;    /* mole fraction, and what the purifier takes */
    struct estimate ingress; /* of the last evaluation */
    struct verdict verdict;
    int64_t pushed_utc_ns;
};
int purity_create(struct engine *engine, int vessel);
void purity_step(struct engine *engine, int vessel);

/* ---- halls
 * ------------------------------------------------------------------------------------ */

enum { HALL_BLOCKS = 60 };
enum hall_series {
    HALL_SERIES_MEAN,
    HALL_SERIES_LOWEST,
    HALL_SERIES_FAN,
    HALL_SERIES_VARIANCE, /* between the monitors */
    HALL_SERIES_COUNT
};

struct hall_state {
    struct window window;
    int64_t pushed_utc_ns;
    int64_t significant_utc_ns; /* last time at which the release stood out; 0: no episode */
    struct estimate total;
    double total_u; /* grows with the time integral of u: errors do not average out */
};
int hall_create(struct engine *engine, int index);
void hall_step(struct engine *engine, int index, double elapsed_s);

/* ---- findings.c
 * ------------------------------------------------------------------------------- */

/* A ledger that stays beyond its uncertainty becomes a finding, told in the journal with every
 * explanation that fits. */
struct finding {
    bool open;
    int64_t since_utc_ns; /* of the present leaning to open or close; 0: none */
};
void findings_step(struct engine *engine);

/* ---- condenser.c, things.c
 * --------------------------------------------------------------------------------- */

void condenser_step(struct engine *engine, int index);
void things_step(struct engine *engine);

/* ---- trend.c
 * ---------------------------------------------------------------------------------- */

enum { TREND_MINUTES = 256, TREND_SECONDS = 320 };
struct trend_range {
    double low, high; /* low > high: none */
};
/* Ranges of every tag over equal spans of time; a span's place is its number modulo slots. */
struct trend_ring {
    int slots;
    int64_t slot_ns;
    int64_t *stamp;            /* number of the span that a slot holds, -1 none */
    struct trend_range *range; /* slots rows of one per tag */
};
int trend_create(struct engine *engine);
void trend_step(struct engine *engine);

/* ---- the engine
 * ------------------------------------------------------------------------------- */

struct engine {
    const struct plant *plant;
    struct arena *arena;
    bool stepped;
    int64_t utc_ns;
    uint64_t clock_steps;
    struct frame frame; /* a copy of the last one */
    struct scatter *scatter;
    struct results results;
    struct estimate *estimate;            /* one per derived quantity */
    int *derived_index[DERIVED_ID_COUNT]; /* per thing; -1: has none */
    struct vessel_state *vessel;
    struct purity_state *purity; /* per vessel */
    struct estimate *duty;       /* per condenser */
    struct verdict *duty_verdict;
    struct fluid_saturation *coolant_line; /* two per condenser: in, out; near the pressure */
    struct hall_state *hall;
    struct hall_safety *hall_safety;
    struct finding *finding; /* per ledger */
    struct alarm_set *alarms;
    struct alarm_input *alarm_input;
    struct window_weights weights;
    double *balance; /* scratch, one per block */
    struct trend_ring minutes, seconds;
};

/* Sets a derived quantity; estimate may be NULL when the verdict is not usable. */
void engine_derive(struct engine *engine, enum derived_id id, int thing,
                   const struct estimate *estimate, const struct verdict *verdict);
struct ledger *engine_ledger(struct engine *engine, enum ledger_kind kind, int thing);

#endif
