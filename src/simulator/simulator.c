/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The simulated plant as a whole: what stands in it, one step of time, and its truth.
 */
#include "model.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

static const double STEP_S = 1; /* longest step of the models */
static const double FILL = 0.782, RELEASE_KG_S = 0.150, LEAK_KG_S = 0.003, HEAT_STEP = 1.3;
/* Heat into a vessel that has no budget to go by, W per m2 of a wall. */
static const double LEAK_W_M2 = 10;

static double default_leak(const struct vessel *vessel)
{
    if (vessel->has_heat_budget)
        return vessel->heat_budget_w;
    return LEAK_W_M2 * 6 * pow(shape_volume_m3(&vessel->shape), 2.0 / 3);
}

static const struct pump *pump_of(const struct plant *plant, int vessel)
{
    for (int i = 0; i < plant->pump_count; i++)
        if (plant->pump[i].vessel == vessel)
            return &plant->pump[i];
    return NULL;
}

static int make_vessel(struct simulator *simulator, int index, double leak_w, struct error *err)
{
    const struct plant *plant = simulator->plant;
    const struct vessel *described = &plant->vessel[index];
    struct vessel_model *vessel = &simulator->vessel[index];
    double gauge_zero = simulator->barometer_pa, set = 12.4e3;
    if (described->relief.set)
        set = 0.5 * (described->relief.value - (described->relief.gauge ? 0 : gauge_zero));
    double start = gauge_zero + set,
           triple = fluid_limits(described->fluid)->triple_pressure_pa;
    if (start < 1.05 * triple)
        start = 1.05 * triple;
    int code = vessel_model_init(vessel, described, start, FILL, err);
    if (code != 0)
        return error_context(err, "vessel %s", described->name);
    const struct pump *pump = pump_of(plant, index);
    double circulation = 0;
    if (pump != NULL || described->purifier >= 0)
        circulation = vessel->liquid_kg / (3.6 * 86400); /* a turnover in some days */
    if (pump != NULL && pump->power.kind == REF_TAG)
        vessel->pump_w =
            650 * circulation; /* J/kg: about 90 kPa of head at a fifth of efficiency */
    simulator->leak_w[index] = vessel->leak_w = leak_w > 0 ? leak_w : default_leak(described);
    vessel->set_pa = start - gauge_zero;
    vessel->integral_w = vessel->leak_w + vessel->pump_w;
    vessel->cooling_limit_w = 2.5 * (vessel->leak_w + vessel->pump_w);
    if (described->condenser >= 0 && plant->condenser[described->condenser].rated_duty_w > 0)
        vessel->cooling_limit_w = plant->condenser[described->condenser].rated_duty_w;
    trace_model_init(&simulator->trace[index], circulation, vessel->liquid_kg,
                     described->fluid);
    return 0;
}

static int make_all(struct simulator *simulator, const struct simulator_options *options,
                    struct error *err)
{
    const struct plant *plant = simulator->plant;
    for (int i = 0; i < plant->vessel_count; i++) {
        int code = make_vessel(simulator, i, options->heat_leak_w, err);
        if (code != 0)
            return code;
    }
    for (int i = 0; i < plant->condenser_count; i++) {
        const struct vessel_model *vessel = &simulator->vessel[plant->condenser[i].vessel];
        int code = coolant_model_init(&simulator->coolant[i], &plant->condenser[i],
                                      vessel->line.temperature_k, err);
        if (code != 0)
            return error_context(err, "condenser %s", plant->condenser[i].name);
    }
    for (int i = 0; i < plant->hall_count; i++) {
        hall_model_init(&simulator->hall[i], &plant->hall[i]);
        hall_model_place(&simulator->hall[i], plant);
    }
    for (int i = 0; i < plant->shaft_count; i++)
        riser_model_init(&simulator->riser[i], &plant->shaft[i]);
    return readings_init(simulator, err);
}

int simulator_create(const struct plant *plant, const struct simulator_options *options,
                     struct simulator **out, struct error *err)
{
    struct simulator *simulator = calloc(1, sizeof(*simulator));
    if (simulator == NULL)
        return error_set(err, ERR_MEMORY, "no memory for the simulated plant");
    struct arena *arena = arena_create();
    simulator->plant = plant;
    simulator->arena = arena;
    simulator->upset = options->upset;
    simulator->upset_start_s = options->upset_start_s;
    random_seed(&simulator->random, options->seed);
    simulator->barometer_pa = weather_pa(plant->site.elevation_m, 0);
    if (plant->site.barometer.kind == REF_CONSTANT)
        simulator->barometer_pa = plant->site.barometer.value;
    int code = ERR_MEMORY;
    if (arena != NULL) {
        simulator->vessel =
            arena_take(arena, (size_t)plant->vessel_count + 1, sizeof(*simulator->vessel));
        simulator->trace =
            arena_take(arena, (size_t)plant->vessel_count + 1, sizeof(*simulator->trace));
        simulator->leak_w = arena_take(arena, (size_t)plant->vessel_count + 1, sizeof(double));
        simulator->coolant =
            arena_take(arena, (size_t)plant->condenser_count + 1, sizeof(*simulator->coolant));
        simulator->hall =
            arena_take(arena, (size_t)plant->hall_count + 1, sizeof(*simulator->hall));
        simulator->riser =
            arena_take(arena, (size_t)plant->shaft_count + 1, sizeof(*simulator->riser));
        if (simulator->vessel != NULL && simulator->trace != NULL &&
            simulator->leak_w != NULL && simulator->coolant != NULL &&
            simulator->hall != NULL && simulator->riser != NULL)
            code = 0;
    }
    if (code != 0)
        error_set(err, code, "no memory for the simulated plant");
    else
        code = make_all(simulator, options, err);
    if (code == 0)
        readings_take(simulator);
    if (code != 0) {
        simulator_free(simulator);
        return code;
    }
    *out = simulator;
    return 0;
}

void simulator_free(struct simulator *simulator)
{
    if (simulator == NULL)
        return;
    readings_done(simulator);
    arena_free(simulator->arena);
    free(simulator);
}

double simulator_time_s(const struct simulator *simulator)
{
    return simulator->time_s;
}

/* What the upset does to vessels, before their step. */
static void upset_vessels(struct simulator *simulator)
{
    bool first = true;
    for (int i = 0; i < simulator->plant->vessel_count; i++, first = false) {
        struct vessel_model *vessel = &simulator->vessel[i];
        struct trace_model *trace = &simulator->trace[i];
        double limit = 2.5 * (simulator->leak_w[i] + vessel->pump_w);
        int condenser = vessel->described->condenser;
        if (condenser >= 0 && simulator->plant->condenser[condenser].rated_duty_w > 0)
            limit = simulator->plant->condenser[condenser].rated_duty_w;
        vessel->leak_w = simulator->leak_w[i];
        vessel->released_kg_s = 0;
        vessel->cooling_limit_w = limit;
        if (!first)
            continue;
        if (upset_active(simulator, UPSET_HALL_RELEASE))
            vessel->released_kg_s = RELEASE_KG_S;
        if (upset_active(simulator, UPSET_SLOW_LEAK))
            vessel->released_kg_s = LEAK_KG_S;
        if (upset_active(simulator, UPSET_HEAT_STEP))
            vessel->leak_w *= HEAT_STEP;
        if (upset_active(simulator, UPSET_COOLING_LOST))
            vessel->cooling_limit_w = 0;
        if (upset_active(simulator, UPSET_AIR_INGRESS)) {
            /* 1 g of air a day: 0.21 and 0.78 of it by mole, 28.96 g/mol */
            double air_mol_s = 1.0 / 28.9644 / 86400;
            trace->nitrogen_in_mol_s = 0.78084 * air_mol_s;
            trace->oxygen_in_mol_s += 0.209476 * air_mol_s * (upset_age_s(simulator) <= STEP_S);
        }
        if (upset_active(simulator, UPSET_PURIFIER_SPENT))
            trace->removed = 0.98 * exp(-upset_age_s(simulator) / 7200);
    }
}

static void upset_halls(struct simulator *simulator)
{
    for (int i = 0; i < simulator->plant->hall_count; i++) {
        struct hall_model *hall = &simulator->hall[i];
        double molar = fluid_limits(hall->described->gas)->molar_mass_kg_mol;
        double density = simulator->barometer_pa * molar / (8.314462618 * hall->temperature_k);
        bool released = i == 0 && upset_active(simulator, UPSET_HALL_RELEASE);
        hall->fan = !(i == 0 && upset_active(simulator, UPSET_FAN_FAILED));
        hall->release_kg_s = released ? RELEASE_KG_S : 0;
        hall->release_m3_s = hall->release_kg_s / density;
    }
}

static int step(struct simulator *simulator, double span_s, struct error *err)
{
    const struct plant *plant = simulator->plant;
    simulator->time_s += span_s;
    if (plant->site.barometer.kind != REF_CONSTANT)
        simulator->barometer_pa = weather_pa(plant->site.elevation_m, simulator->time_s);
    upset_vessels(simulator);
    upset_halls(simulator);
    for (int i = 0; i < plant->vessel_count; i++) {
        struct vessel_model *vessel = &simulator->vessel[i];
        int code = vessel_model_step(vessel, span_s, simulator->barometer_pa,
                                     vessel->described->condenser >= 0, err);
        if (code != 0)
            return code;
        trace_model_step(&simulator->trace[i], span_s, vessel->liquid_kg,
                         vessel->described->fluid);
    }
    for (int i = 0; i < plant->condenser_count; i++)
        simulator->coolant[i].flow_kg_s = simulator->vessel[plant->condenser[i].vessel].duty_w /
                                          simulator->coolant[i].rise_j_kg;
    for (int i = 0; i < plant->hall_count; i++)
        hall_model_step(&simulator->hall[i], span_s);
    return 0;
}

int simulator_step(struct simulator *simulator, double span_s, struct error *err)
{
    if (!(span_s > 0 && span_s <= 3600))
        return error_set(err, ERR_ARGUMENT, "a step is above 0 and at most 3600 s");
    int steps = (int)ceil(span_s / STEP_S - 1e-9);
    for (int i = 0; i < steps; i++) {
        int code = step(simulator, span_s / steps, err);
        if (code != 0)
            return code;
    }
    readings_take(simulator);
    return 0;
}

/* ---- truth
 * --------------------------------------------------------------------------------------- */

static int true_vessel(const struct simulator *simulator, const struct derived *derived,
                       double *out)
{
    const struct vessel_model *vessel = &simulator->vessel[derived->thing];
    switch ((int)derived->id) {
    case DERIVED_VESSEL_LIQUID_MASS:
        *out = vessel->liquid_kg;
        return 0;
    case DERIVED_VESSEL_VAPOUR_MASS:
        *out = vessel->vapour_kg;
        return 0;
    case DERIVED_VESSEL_FILL:
        *out = vessel->liquid_kg / vessel->line.liquid.density_kg_m3 / vessel->volume_m3;
        return 0;
    case DERIVED_VESSEL_SATURATION_TEMPERATURE:
        *out = vessel->line.temperature_k;
        return 0;
    case DERIVED_VESSEL_SUBCOOLING:
        *out = 0;
        return 0;
    case DERIVED_VESSEL_HEAT_LOAD:
        *out = vessel->leak_w;
        return 0;
    case DERIVED_VESSEL_HEAT_EXCESS:
        *out = vessel->leak_w - vessel->described->heat_budget_w;
        return vessel->described->has_heat_budget ? 0 : ERR_UNSUPPORTED;
    case DERIVED_VESSEL_BOIL_OFF:
        *out = vessel->evaporation_kg_s;
        return 0;
    case DERIVED_VESSEL_BOIL_OFF_DAILY:
        *out = vessel->evaporation_kg_s / vessel->liquid_kg;
        return 0;
    case DERIVED_VESSEL_MASS_CHANGE:
        *out = vessel->mass_change_kg_s;
        return 0;
    case DERIVED_VESSEL_MASS_UNEXPLAINED:
        *out = vessel->released_kg_s;
        return 0;
    case DERIVED_VESSEL_PRESSURE_RATE:
        *out = vessel->pressure_rate_pa_s;
        return 0;
    default:
        return ERR_UNSUPPORTED;
    }
}

static int true_hall(const struct simulator *simulator, const struct derived *derived,
                     double *out)
{
    const struct hall_model *hall = &simulator->hall[derived->thing];
    double low = 1, high = 0;
    for (int i = 0; i < hall->described->oxygen.count; i++) {
        low = hall->monitor[i] < low ? hall->monitor[i] : low;
        high = hall->monitor[i] > high ? hall->monitor[i] : high;
    }
    switch ((int)derived->id) {
    case DERIVED_HALL_OXYGEN_LOWEST:
        *out = low;
        return 0;
    case DERIVED_HALL_OXYGEN_PRESSURE:
        *out = low * simulator->barometer_pa;
        return 0;
    case DERIVED_HALL_SPREAD:
        *out = high - low;
        return 0;
    case DERIVED_HALL_RELEASE:
        *out = hall->release_kg_s;
        return 0;
    case DERIVED_HALL_RELEASE_TOTAL:
        *out = hall->released_kg;
        return 0;
    default:
        return ERR_UNSUPPORTED;
    }
}

int simulator_true_value(const struct simulator *simulator, int tag, double *out)
{
    const struct plant *plant = simulator->plant;
    if (tag < 0 || tag >= plant_tag_count(plant))
        return ERR_ARGUMENT;
    if (plant_tag_is_point(plant, tag)) {
        *out = simulator->truth[tag];
        return 0;
    }
    const struct derived *derived = &plant->derived[tag - plant->point_count];
    if (derived->kind == THING_VESSEL)
        return true_vessel(simulator, derived, out);
    if (derived->kind == THING_HALL)
        return true_hall(simulator, derived, out);
    if (derived->id == DERIVED_CONDENSER_DUTY || derived->id == DERIVED_CONDENSER_MARGIN) {
        const struct condenser *condenser = &plant->condenser[derived->thing];
        double duty = simulator->vessel[condenser->vessel].duty_w;
        *out = derived->id == DERIVED_CONDENSER_DUTY ? duty : condenser->rated_duty_w - duty;
        return 0;
    }
    if (derived->id == DERIVED_PURIFIER_EFFICIENCY) {
        *out = simulator->trace[plant->purifier[derived->thing].vessel].removed;
        return 0;
    }
    return ERR_UNSUPPORTED;
}

void simulator_truth_header(const struct simulator *simulator, FILE *out)
{
    const struct plant *plant = simulator->plant;
    double ignored;
    fputs("time", out);
    for (int tag = plant->point_count; tag < plant_tag_count(plant); tag++)
        if (simulator_true_value(simulator, tag, &ignored) == 0)
            fprintf(out, ",%s [%s]", plant_tag_name(plant, tag),
                    unit_si(plant_tag_unit(plant, tag)->dimension).symbol);
    fputc('\n', out);
    fflush(out);
}

void simulator_truth(const struct simulator *simulator, int64_t utc_ns, FILE *out)
{
    const struct plant *plant = simulator->plant;
    char time[40];
    double value;
    time_format(time, sizeof(time), utc_ns, 3);
    fputs(time, out);
    for (int tag = plant->point_count; tag < plant_tag_count(plant); tag++)
        if (simulator_true_value(simulator, tag, &value) == 0)
            fprintf(out, ",%.12g", value);
    fputc('\n', out);
    fflush(out);
}
