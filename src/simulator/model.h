/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Private to the room: the models of vessel, hall and the rest, and what holds them together.
 * Written from the physics, not from balance/.
 */
#ifndef ULLAGE_SIMULATOR_MODEL_H
#define ULLAGE_SIMULATOR_MODEL_H

#include <modbus.h>

#include "ullage/simulator.h"

/* ---- random.c: seeded, own, the same on every machine
 * ------------------------------------------ */

struct random {
    uint64_t state;
    bool spare_set;
    double spare;
};
void random_seed(struct random *random, uint64_t seed);
double random_uniform(struct random *random); /* in (0, 1) */
double random_normal(struct random *random);

/* ---- vessel.c: two phases in equilibrium in a rigid vessel
 * -------------------------------------- */

/* State is mass and internal energy; all else follows from them. */
struct vessel_model {
    const struct vessel *described;
    double volume_m3;
    double mass_kg, energy_j;
    struct fluid_saturation line;
    double vapour_fraction, liquid_kg, vapour_kg, level_m;
    bool one_phase; /* full or dry: line is then the state's own pressure only */
    /* what acts on it now */
    double leak_w, pump_w;
    double boil_off_kg_s, vent_kg_s, duty_w; /* to the condenser, to the stack */
    double released_kg_s;                    /* liquid lost into a hall */
    double evaporation_kg_s, mass_change_kg_s, pressure_rate_pa_s;
    /* pressure control */
    double set_pa, integral_w, cooling_limit_w;
    double energy_in_j, mass_in_kg; /* sums for the proof of conservation */
};
int vessel_model_init(struct vessel_model *vessel, const struct vessel *described,
                      double pressure_pa, double fill, struct error *err);
/* State from mass and energy. */
int vessel_model_settle(struct vessel_model *vessel, struct error *err);
/* One step of at most a second or so. gauge_zero_pa is the barometer. has_condenser: vapour
 * goes to it and returns as liquid; otherwise the vent holds the pressure. */
int vessel_model_step(struct vessel_model *vessel, double span_s, double gauge_zero_pa,
                      bool has_condenser, struct error *err);

/* ---- coolant.c: the coolant's side of a condenser
 * ----------------------------------------------- */

struct coolant_model {
    const struct condenser *described;
    double in_pressure_pa, in_temperature_k, out_pressure_pa, out_temperature_k;
    double flow_kg_s, rise_j_kg;
};
int coolant_model_init(struct coolant_model *coolant, const struct condenser *described,
                       double vessel_temperature_k, struct error *err);

/* ---- hall.c: air in two zones, a low one and the rest
 * --------------------------------------------- */

struct hall_model {
    const struct hall *described;
    double low_part, exchange_s; /* share of the volume; time in which it is exchanged */
    double low, main;            /* oxygen fractions */
    double ventilation_m3_s;
    bool fan, occupied;
    double release_m3_s, release_kg_s, released_kg;
    double monitor[PLANT_LIST_MAX]; /* what each reads, behind its lag */
    int low_monitor;
    double temperature_k, lag_s;
};
void hall_model_init(struct hall_model *hall, const struct hall *described);
/* Chooses the monitor that stands lowest, by the height in its description ("Pit, 0.2 m"). */
void hall_model_place(struct hall_model *hall, const struct plant *plant);
void hall_model_step(struct hall_model *hall, double span_s);

/* ---- trace.c: oxygen and nitrogen in the liquid, the purifier, the riser, the dock
 * ---------------- */

struct trace_model {
    double oxygen, nitrogen; /* mole fractions in the liquid of a vessel */
    double oxygen_in_mol_s, nitrogen_in_mol_s;
    double circulation_kg_s, removed; /* part of the oxygen removed in a pass */
    double captured_kg;
};
void trace_model_init(struct trace_model *trace, double circulation_kg_s, double liquid_kg,
                      const struct fluid *fluid);
void trace_model_step(struct trace_model *trace, double span_s, double liquid_kg,
                      const struct fluid *fluid);

struct riser_model {
    const struct shaft *described;
    double flow_kg_s, top_pa, bottom_pa, temperature_k;
};
void riser_model_init(struct riser_model *riser, const struct shaft *described);

/* Barometric pressure of the standard atmosphere (ISO 2533) at an elevation, with slow weather.
 */
double weather_pa(double elevation_m, double time_s);

/* ---- upset.c
 * --------------------------------------------------------------------------------- */

enum upset_id {
    UPSET_HALL_RELEASE,
    UPSET_COOLING_LOST,
    UPSET_HEAT_STEP,
    UPSET_FAN_FAILED,
    UPSET_SLOW_LEAK,
    UPSET_AIR_INGRESS,
    UPSET_PURIFIER_SPENT,
    UPSET_GAUGE_DRIFT,
    UPSET_MONITOR_STUCK,
    UPSET_LINK_LOST,
    UPSET_BAD_DELIVERY,
    UPSET_COUNT
};
enum upset_id upset_id(const struct upset *upset);

/* ---- the whole
 * --------------------------------------------------------------------------------- */

struct device_image {
    int unit_id;
    modbus_mapping_t *mapping;
};

struct simulator {
    const struct plant *plant;
    struct arena *arena;
    struct random random;
    double time_s;
    double barometer_pa;
    const struct upset *upset;
    double upset_start_s;
    struct vessel_model *vessel;
    struct coolant_model *coolant;
    struct hall_model *hall;
    struct trace_model *trace; /* one a vessel */
    struct riser_model *riser;
    double *leak_w; /* of each vessel, undisturbed */
    double *truth;  /* the value that each point would read if it were perfect, SI, own basis */
    double *bias;   /* of each point, in standard normal units of its share */
    double *stuck;  /* last reading of a stuck monitor */
    int image_count;
    struct device_image *image;
};
bool upset_active(const struct simulator *simulator, enum upset_id id);
/* Seconds since the active upset began; 0 if none. */
double upset_age_s(const struct simulator *simulator);

/* readings.c */
int readings_init(struct simulator *simulator, struct error *err);
void readings_done(struct simulator *simulator);
/* Takes new noisy readings of the present truth into the registers. */
void readings_take(struct simulator *simulator);
modbus_mapping_t *readings_image(const struct simulator *simulator, int unit_id);
/* Unit that does not answer now, or -1. */
int readings_lost_unit(const struct simulator *simulator);

#endif
