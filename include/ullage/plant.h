/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * plant: the described plant, as the plant file says it. Everything here is const once read; no
 * live value ever enters. Lengths, pressures and so on are SI. A pressure that the file gives
 * as gauge stays a difference to the barometer and carries gauge = true; whoever needs it
 * absolute adds the barometer of that moment.
 */
#ifndef ULLAGE_PLANT_H
#define ULLAGE_PLANT_H

#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>

#include "ullage/base.h"
#include "ullage/fluid.h"

enum { PLANT_LIST_MAX = 16, PLANT_STRAPPING_MAX = 256 };

/* Where in the plant file a thing is described. */
struct place {
    const char *file;
    int line;
};

/* ---- links and points ----------------------------------------------------------------------
 */

/* One Modbus/TCP device (or a unit behind a gateway). */
struct link {
    const char *name, *says;
    struct place place;
    const char *host;
    int port;
    int unit_id;
    double period_s;
    double timeout_s;
    int gap;   /* registers (or bits) that may be read over to join two blocks */
    int block; /* largest block, registers; bits: 16 times as many, at most 2000 */
};

enum register_table { TABLE_COIL, TABLE_DISCRETE, TABLE_INPUT, TABLE_HOLDING, TABLE_COUNT };

enum register_type {
    REGISTER_BIT, /* a coil or discrete input, or one bit of a register (bit >= 0) */
    REGISTER_U16,
    REGISTER_I16,
    REGISTER_U32,
    REGISTER_I32,
    REGISTER_U64,
    REGISTER_I64,
    REGISTER_F32,
    REGISTER_F64,
    REGISTER_TYPE_COUNT
};

/* How the bytes of a value arrive: ABCD most significant first (the protocol's own). For 64
 * bit: CDAB reverses the order of the words, BADC swaps the bytes in each word, DCBA does both.
 */
enum byte_order { ORDER_ABCD, ORDER_CDAB, ORDER_BADC, ORDER_DCBA, ORDER_COUNT };

struct register_ref {
    enum register_table table;
    int address; /* the protocol's own, from 0 */
    enum register_type type;
    int bit; /* 0..15 with REGISTER_BIT in an input or holding register, else -1 */
    enum byte_order order;
};

/* Registers (bits for coil and discrete) that a value takes: 1, 2 or 4. */
int register_words(const struct register_ref *ref);
/* "input 0 f32 CDAB", "holding 0x10 u16.3", "discrete 12 bit". 0 or ERR_FORMAT. */
int register_parse(const char *text, struct register_ref *out, struct error *err) MUST_CHECK;
void register_format(char *dst, size_t size, const struct register_ref *ref);
const char *register_table_word(enum register_table table);
const char *register_type_word(enum register_type type);
const char *byte_order_word(enum byte_order order);

/* Standard uncertainty: the parts combine in quadrature. All in SI spans of the point's unit.
 */
struct uncertainty {
    double absolute;
    double of_reading; /* fraction of the magnitude of the reading in the point's own unit */
    double of_span;    /* already turned into SI: fraction times span */
};

/* One reading. valid, span, u are SI in the point's own basis (a gauge pressure stays gauge).
 */
struct point {
    const char *name, *says;
    struct place place;
    int link;
    struct register_ref read;
    struct unit unit;
    bool has_valid;
    double valid_low, valid_high;
    struct uncertainty u;
    double stale_s;
    bool scaled; /* raw numbers are mapped linearly: raw_low..raw_high onto span_low..span_high
                  */
    double raw_low, raw_high;
    double span_low, span_high;
    bool has_fault;
    struct register_ref fault; /* device's own fault bit: set means bad */
    double
        resolution; /* in the point's own unit; a reading is rounded to it once, where it enters
                       a frame; 0: kept as it is (bits, and integer registers' own counts) */
};

/* Standard uncertainty of a reading of this point, SI. */
double point_uncertainty(const struct point *point, double value_si);
/* Rounds a reading (SI) to the point's resolution. */
double point_round(const struct point *point, double value_si);

/* ---- tags: points, then derived quantities, in one row of numbers ---------------------------
 */

enum thing_kind {
    THING_OUTSIDE,
    THING_VESSEL,
    THING_CONDENSER,
    THING_PUMP,
    THING_PURIFIER,
    THING_DRIFT,
    THING_HALL,
    THING_SHAFT,
    THING_DELIVERY,
    THING_STREAM,
    THING_KIND_COUNT
};
const char *thing_kind_word(enum thing_kind kind);

/* Every derived quantity: kind of thing, identifier, name, unit, what it says. A quantity
 * marked PURIFIER exists only for a vessel with a purifier. The unit is the one in headers and
 * exports. */
#define DERIVED_LIST(X)                                                                        \
    X(VESSEL, LIQUID_MASS, "liquid_mass", "kg", "mass of the liquid")                          \
    X(VESSEL, VAPOUR_MASS, "vapour_mass", "kg", "mass of the vapour above it")                 \
    X(VESSEL, FILL, "fill", "1", "liquid volume as a part of the whole")                       \
    X(VESSEL, SATURATION_TEMPERATURE, "saturation_temperature", "K",                           \
      "saturation temperature at the vapour pressure")                                         \
    X(VESSEL, SUBCOOLING, "subcooling", "K", "saturation less mean liquid temperature")        \
    X(VESSEL, HEAT_LOAD, "heat_load", "W", "heat that reaches the contents")                   \
    X(VESSEL, HEAT_EXCESS, "heat_excess", "W", "heat load less its budget")                    \
    X(VESSEL, BOIL_OFF, "boil_off", "kg/s", "liquid that evaporates")                          \
    X(VESSEL, BOIL_OFF_DAILY, "boil_off_daily", "1/d", "boil-off against the liquid now")      \
    X(VESSEL, MASS_CHANGE, "mass_change", "kg/s", "change of the contents")                    \
    X(VESSEL, MASS_UNEXPLAINED, "mass_unexplained", "kg/s", "in less out less stored")         \
    X(VESSEL, HOLD_TIME, "hold_time", "s", "to relief if cooling stopped now, upper bound")    \
    X(VESSEL, PRESSURE_RATE, "pressure_rate", "Pa/s", "change of the absolute pressure")       \
    X(VESSEL, OXYGEN_INGRESS, "oxygen_ingress", "kg/s", "oxygen that enters the liquid")       \
    X(VESSEL, PURITY_TIME_CONSTANT, "purity_time_constant", "s", "time constant of cleaning")  \
    X(VESSEL, TIME_TO_PURITY, "time_to_purity", "s", "to the purity aimed at")                 \
    X(CONDENSER, DUTY, "duty", "W", "heat taken up by the coolant")                            \
    X(CONDENSER, MARGIN, "margin", "W", "rated duty less duty")                                \
    X(PUMP, NPSH, "npsh", "m", "net positive suction head available")                          \
    X(PUMP, NPSH_MARGIN, "npsh_margin", "m", "available less required")                        \
    X(PURIFIER, OXYGEN_CAPTURED, "oxygen_captured", "kg", "oxygen taken up since new")         \
    X(PURIFIER, LOADING, "loading", "1", "captured against capacity")                          \
    X(PURIFIER, EFFICIENCY, "efficiency", "1", "part of the oxygen removed in a pass")         \
    X(PURIFIER, TIME_TO_SPENT, "time_to_spent", "s", "to full load at the present rate")       \
    X(DRIFT, LIFETIME, "lifetime", "s", "lifetime of free electrons")                          \
    X(DRIFT, VELOCITY, "velocity", "m/s", "drift velocity of free electrons")                  \
    X(DRIFT, DRIFT_TIME, "drift_time", "s", "time to drift the whole length")                  \
    X(DRIFT, SURVIVING_CHARGE, "surviving_charge", "1", "charge left after the whole length")  \
    X(HALL, OXYGEN_LOWEST, "oxygen_lowest", "1", "lowest of the monitors")                     \
    X(HALL, OXYGEN_PRESSURE, "oxygen_pressure", "Pa",                                          \
      "partial pressure at the lowest monitor")                                                \
    X(HALL, FATALITY_FACTOR, "fatality_factor", "1", "fatality factor at that pressure")       \
    X(HALL, RELEASE, "release", "kg/s", "gas released into the hall")                          \
    X(HALL, RELEASE_TOTAL, "release_total", "kg", "released since the episode began")          \
    X(HALL, TIME_TO_ACTION, "time_to_action", "s", "to the next action level at this rate")    \
    X(HALL, SPREAD, "spread", "1", "highest less lowest of the monitors")                      \
    X(SHAFT, STATIC_GAIN, "static_gain", "Pa", "pressure gained by the standing column")       \
    X(SHAFT, FRICTION_LOSS, "friction_loss", "Pa", "pressure lost to friction")                \
    X(SHAFT, UNEXPLAINED, "unexplained", "Pa", "top to bottom, less gain, plus loss")          \
    X(SHAFT, RELIQUEFACTION_POWER_MINIMUM, "reliquefaction_power_minimum", "W",                \
      "least power to turn the flow into liquid again")                                        \
    X(DELIVERY, VERDICT, "verdict", "1", "accept 0, hold 1, reject 2")                         \
    X(DELIVERY, GUARDED_MARGIN, "guarded_margin", "1", "least margin to a guarded limit")

#define X(kind, id, word, unit, says) DERIVED_##kind##_##id,
enum derived_id { DERIVED_LIST(X) DERIVED_ID_COUNT };
#undef X

struct derived {
    const char *name; /* "store.heat_load" */
    const char *says;
    enum thing_kind kind;
    int thing; /* index among its kind */
    enum derived_id id;
    struct unit unit;  /* of headers and exports */
    struct unit shown; /* that people read: parts as %, rates as % a day; a unit with an empty
                          symbol is a plain number */
};

/* A reference in the plant file: a tag, a constant that stands in its place, or nothing. */
enum ref_kind { REF_NONE, REF_CONSTANT, REF_TAG };
struct ref {
    enum ref_kind kind;
    int tag;          /* REF_TAG */
    double value;     /* REF_CONSTANT, SI */
    struct unit unit; /* of the constant or of the tag */
};

struct ref_list {
    int count;
    struct ref at[PLANT_LIST_MAX];
};

/* A pressure limit: gauge or absolute as the file says. */
struct limit {
    bool set;
    double value;
    bool gauge;
};

/* ---- things --------------------------------------------------------------------------------
 */

struct site {
    const char *name;
    struct place place;
    double frame_s;
    struct ref barometer;
    double elevation_m;
    const char *history;
    const char *rules, *emergency; /* NULL when the file gives none */
};

enum shape_kind {
    SHAPE_BOX,              /* length x width x height */
    SHAPE_UPRIGHT_CYLINDER, /* diameter x height */
    SHAPE_LYING_CYLINDER,   /* diameter x length, flat ends */
    SHAPE_SPHERE,           /* diameter */
    SHAPE_TABLE             /* strapping table: height_m, volume_m3 */
};
struct shape {
    enum shape_kind kind;
    double length_m, width_m, height_m, diameter_m;
    int count; /* SHAPE_TABLE */
    const double *table_height_m, *table_volume_m3;
};
double shape_height_m(const struct shape *shape);
double shape_volume_m3(const struct shape *shape);
/* Volume below a level; level outside 0..height is held to it. Formulas: methods 11. */
double shape_volume_at_m3(const struct shape *shape, double level_m);
/* Free surface at a level, the derivative of that volume. */
double shape_surface_at_m2(const struct shape *shape, double level_m);
/* Level at which the volume below is volume_m3; held to 0..height. */
double shape_level_at_m(const struct shape *shape, double volume_m3);

struct vessel {
    const char *name, *says;
    struct place place;
    const struct fluid *fluid;
    struct shape shape;
    struct ref pressure;
    struct ref level; /* unit: a length, or a number (part of the height) */
    struct ref_list liquid_temperature;
    struct ref vapour_temperature;
    double heat_budget_w; /* with has_heat_budget */
    bool has_heat_budget;
    struct limit relief;
    double window_s;         /* longest averaging window of its balances; default 2 h */
    double window_minimum_s; /* a balance over less than this is "filling"; default 10 min */
    int condenser;           /* index of its condenser, or -1 */
    int purifier;            /* index of its first purifier, or -1 */
};

enum stream_phase { STREAM_LIQUID, STREAM_VAPOUR };
struct thing_ref {
    enum thing_kind kind;
    int index;
};
struct stream {
    const char *name, *says;
    struct place place;
    struct thing_ref from, to;
    enum stream_phase phase;
    const struct fluid *fluid; /* of the things it joins; never NULL */
    struct ref flow; /* mass flow, volume flow (at temperature, pressure) or normal flow */
    struct ref temperature, pressure;
};

struct condenser {
    const char *name, *says;
    struct place place;
    int vessel;
    const struct fluid *coolant;
    struct ref coolant_flow;
    struct ref coolant_in_pressure, coolant_in_temperature;
    struct ref coolant_out_pressure, coolant_out_temperature;
    double rated_duty_w; /* 0: not given */
};

struct pump {
    const char *name, *says;
    struct place place;
    int vessel;
    struct ref flow, power, running, suction_temperature;
    double npsh_required_m, suction_depth_m;
};

struct purifier {
    const char *name, *says;
    struct place place;
    int vessel;
    struct ref flow, oxygen_in, oxygen_out;
    double oxygen_capacity_kg;
    bool has_installed;
    int64_t installed_utc_ns;
    double target; /* mole fraction, 0: none */
};

struct drift {
    const char *name, *says;
    struct place place;
    int vessel;
    struct ref oxygen, nitrogen, water;
    double field_v_m, length_m;
};

enum hall_mode { HALL_EXHAUST, HALL_SUPPLY };
struct hall {
    const char *name, *says;
    struct place place;
    double volume_m3;
    struct ref ventilation, fan_running, occupied;
    enum hall_mode mode;
    struct ref_list oxygen;
    const struct fluid *gas;
    int action_count; /* levels from high to low */
    double action_level[PLANT_LIST_MAX];
    struct ref temperature;
    double fresh_air_oxygen;
};

struct shaft {
    const char *name, *says;
    struct place place;
    double depth_m, pipe_m, roughness_m;
    const struct fluid *gas;
    struct ref flow, top_pressure, bottom_pressure, temperature;
};

struct delivery {
    const char *name, *says;
    struct place place;
    const struct fluid *fluid;
    struct ref oxygen, nitrogen, water;
    double oxygen_limit, nitrogen_limit, water_limit; /* 0: none */
    double guard; /* probability of conformity asked for, 0.5..0.9999 */
};

enum alarm_condition {
    ALARM_ABOVE,
    ALARM_BELOW,
    ALARM_OUTSIDE,
    ALARM_IS_BAD,
    ALARM_IS_ON,
    ALARM_IS_OFF,
    ALARM_RISING_FASTER,
    ALARM_FALLING_FASTER
};
struct alarm {
    const char *name, *says;
    struct place place;
    int watch; /* tag */
    enum alarm_condition condition;
    double low,
        high; /* SI, in the basis of limit_gauge; ABOVE uses high, BELOW low, rates high */
    bool limit_gauge; /* with pressures; may differ from the watched tag's own basis */
    double deadband;  /* SI span */
    double on_delay_s, off_delay_s;
    int priority; /* 1 highest .. 4 */
    bool banner;
    const char *consequence, *response; /* NULL when the file gives none */
};

/* ---- the whole -----------------------------------------------------------------------------
 */

struct plant {
    struct site site;
    int link_count, point_count, derived_count;
    int vessel_count, stream_count, condenser_count, pump_count, purifier_count;
    int drift_count, hall_count, shaft_count, delivery_count, alarm_count;
    const struct link *link;
    const struct point *point;
    const struct derived *derived;
    const struct vessel *vessel;
    const struct stream *stream;
    const struct condenser *condenser;
    const struct pump *pump;
    const struct purifier *purifier;
    const struct drift *drift;
    const struct hall *hall;
    const struct shaft *shaft;
    const struct delivery *delivery;
    const struct alarm *alarm;
    const int *tag_by_name; /* all tags, by strcmp of their names */
    struct arena *arena;    /* owns all of the above */
};

/* Everything that is wrong with a plant file, in order of file and line. */
enum problem_level { PROBLEM_ERROR, PROBLEM_WARNING };
struct problem {
    enum problem_level level;
    char file[256]; /* printable */
    int line;
    char text[400]; /* what is wrong and the mend; printable */
};
struct problems {
    int count, error_count;
    int dropped; /* found beyond the room of the list */
    struct problem at[200];
};

/* Reads a plant file and all that it includes. 0 with *out to be freed, or a negative code with
 * at least one error among the problems. Warnings may stand in problems either way. */
int plant_read(const char *path, struct plant **out, struct problems *problems) MUST_CHECK;
void plant_free(struct plant *plant);
/* Sends every link to another host and port (the demo's simulator); before anything uses it. */
int plant_redirect(struct plant *plant, const char *host, int port) MUST_CHECK;

/* Tags 0..point_count-1 are points, the next derived_count derived quantities. */
int plant_tag_count(const struct plant *plant);
int plant_tag_find(const struct plant *plant, const char *name); /* or -1 */
const char *plant_tag_name(const struct plant *plant, int tag);
const char *plant_tag_says(const struct plant *plant, int tag);
const struct unit *plant_tag_unit(const struct plant *plant, int tag);
/* The unit that people read a tag in: a point's own, or a derived quantity's shown one. */
const struct unit *plant_tag_shown(const struct plant *plant, int tag);
bool plant_tag_is_point(const struct plant *plant, int tag);
/* The tag of a derived quantity of a thing, or -1 where that thing has none. */
int plant_derived_tag(const struct plant *plant, enum derived_id id, int thing);

/* Writes every section kind and its keys: kind of value, default, help. For --help and manual.
 */
void plant_print_keys(FILE *out);

#endif
