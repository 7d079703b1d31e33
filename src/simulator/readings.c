/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * From the model's truth to registers: a constant bias of each point and noise at each reading,
 * which share the point's stated variance equally, so that its u is true; then unit, raw
 * number, words.
 */
#include "model.h"

#include <errno.h>
#include <math.h>
#include <string.h>

/* Each share of u: 1/sqrt(2). */
static const double SHARE = 0.70710678118654752440;
static const double DRIFT_PER_S = 0.001 / 3600; /* of the upset gauge-drift, of the height */

/* ---- devices
 * --------------------------------------------------------------------------------- */

modbus_mapping_t *readings_image(const struct simulator *simulator, int unit_id)
{
    for (int i = 0; i < simulator->image_count; i++)
        if (simulator->image[i].unit_id == unit_id)
            return simulator->image[i].mapping;
    return NULL;
}

static void widen(int *sizes, const struct register_ref *ref)
{
    int end = ref->address + register_words(ref);
    if (end > sizes[ref->table])
        sizes[ref->table] = end;
}

static int make_image(struct simulator *simulator, int unit_id)
{
    const struct plant *plant = simulator->plant;
    int sizes[TABLE_COUNT] = {0};
    for (int i = 0; i < plant->point_count; i++) {
        if (plant->link[plant->point[i].link].unit_id != unit_id)
            continue;
        widen(sizes, &plant->point[i].read);
        if (plant->point[i].has_fault)
            widen(sizes, &plant->point[i].fault);
    }
    modbus_mapping_t *mapping = modbus_mapping_new(sizes[TABLE_COIL], sizes[TABLE_DISCRETE],
                                                   sizes[TABLE_HOLDING], sizes[TABLE_INPUT]);
    if (mapping == NULL)
        return ERR_MEMORY;
    simulator->image[simulator->image_count++] =
        (struct device_image){.unit_id = unit_id, .mapping = mapping};
    return 0;
}

int readings_init(struct simulator *simulator, struct error *err)
{
    const struct plant *plant = simulator->plant;
    size_t points = (size_t)plant->point_count + 1;
    simulator->truth = arena_take(simulator->arena, points, sizeof(double));
    simulator->bias = arena_take(simulator->arena, points, sizeof(double));
    simulator->stuck = arena_take(simulator->arena, points, sizeof(double));
    simulator->image = arena_take(simulator->arena, (size_t)plant->link_count + 1,
                                  sizeof(struct device_image));
    if (simulator->truth == NULL || simulator->bias == NULL || simulator->stuck == NULL ||
        simulator->image == NULL)
        return error_set(err, ERR_MEMORY, "no memory for the simulated readings");
    for (int i = 0; i < plant->link_count; i++)
        if (readings_image(simulator, plant->link[i].unit_id) == NULL &&
            make_image(simulator, plant->link[i].unit_id) != 0)
            return error_set(err, ERR_MEMORY, "no memory for the simulated devices");
    for (int i = 0; i < plant->point_count; i++) {
        const struct point *point = &plant->point[i];
        simulator->bias[i] = random_normal(&simulator->random);
        /* What no model drives stands in the middle of its range. */
        simulator->truth[i] = point->has_valid ? 0.5 * (point->valid_low + point->valid_high)
                              : point->scaled  ? 0.5 * (point->span_low + point->span_high)
                                               : 0;
    }
    return 0;
}

void readings_done(struct simulator *simulator)
{
    for (int i = 0; i < simulator->image_count; i++)
        modbus_mapping_free(simulator->image[i].mapping);
    simulator->image_count = 0;
}

/* ---- truth by role
 * ----------------------------------------------------------------------------- */

static void tell(struct simulator *simulator, const struct ref *ref, double value_si)
{
    if (ref->kind != REF_TAG || !plant_tag_is_point(simulator->plant, ref->tag))
        return;
    simulator->truth[ref->tag] = value_si - (ref->unit.gauge ? simulator->barometer_pa : 0);
}

/* A flow, in whichever kind its meter tells. */
static void tell_flow(struct simulator *simulator, const struct ref *ref, double flow_kg_s,
                      double density_kg_m3, const struct fluid *fluid)
{
    const struct fluid_limits *limits = fluid_limits(fluid);
    double value = flow_kg_s;
    if (ref->unit.dimension == DIMENSION_VOLUME_FLOW)
        value = density_kg_m3 > 0 ? flow_kg_s / density_kg_m3 : 0;
    else if (ref->unit.dimension == DIMENSION_NORMAL_FLOW) {
        struct fluid_state normal;
        if (fluid_at_tp(fluid, 273.15, 101325, FLUID_PHASE_ANY, &normal, NULL) != 0)
            normal.density_kg_m3 =
                101325 * limits->molar_mass_kg_mol / (limits->gas_constant_j_mol_k * 273.15);
        value = flow_kg_s / normal.density_kg_m3;
    }
    tell(simulator, ref, value);
}

static void tell_vessel(struct simulator *simulator, int index)
{
    const struct vessel_model *model = &simulator->vessel[index];
    const struct vessel *vessel = model->described;
    double level = model->level_m, height = shape_height_m(&vessel->shape);
    if (upset_active(simulator, UPSET_GAUGE_DRIFT) && index == 0)
        level -= DRIFT_PER_S * upset_age_s(simulator) * height;
    tell(simulator, &vessel->pressure, model->line.pressure_pa);
    tell(simulator, &vessel->level,
         vessel->level.unit.dimension == DIMENSION_NUMBER ? level / height : level);
    for (int i = 0; i < vessel->liquid_temperature.count; i++)
        tell(simulator, &vessel->liquid_temperature.at[i], model->line.temperature_k);
    tell(simulator, &vessel->vapour_temperature, model->line.temperature_k);
}

static void tell_stream(struct simulator *simulator, const struct stream *stream)
{
    const struct plant *plant = simulator->plant;
    bool out = stream->from.kind == THING_VESSEL, in = stream->to.kind == THING_VESSEL;
    if (!out && !in)
        return;
    const struct vessel_model *vessel =
        &simulator->vessel[out ? stream->from.index : stream->to.index];
    const struct thing_ref other = out ? stream->to : stream->from;
    bool condenser = other.kind == THING_CONDENSER &&
                     plant->condenser[other.index].vessel == (int)(vessel - simulator->vessel);
    bool purifier = other.kind == THING_PURIFIER;
    const struct fluid_state *state =
        stream->phase == STREAM_VAPOUR ? &vessel->line.vapour : &vessel->line.liquid;
    double flow = 0;
    if (condenser)
        flow = vessel->boil_off_kg_s;
    else if (purifier)
        flow = simulator->trace[vessel - simulator->vessel].circulation_kg_s;
    else if (out && stream->phase == STREAM_VAPOUR && other.kind == THING_OUTSIDE)
        flow = vessel->vent_kg_s;
    tell_flow(simulator, &stream->flow, flow, state->density_kg_m3, stream->fluid);
    tell(simulator, &stream->temperature, vessel->line.temperature_k);
    tell(simulator, &stream->pressure, vessel->line.pressure_pa);
}

static void tell_condenser(struct simulator *simulator, int index)
{
    const struct coolant_model *coolant = &simulator->coolant[index];
    const struct condenser *condenser = coolant->described;
    tell(simulator, &condenser->coolant_flow, coolant->flow_kg_s);
    tell(simulator, &condenser->coolant_in_pressure, coolant->in_pressure_pa);
    tell(simulator, &condenser->coolant_in_temperature, coolant->in_temperature_k);
    tell(simulator, &condenser->coolant_out_pressure, coolant->out_pressure_pa);
    tell(simulator, &condenser->coolant_out_temperature, coolant->out_temperature_k);
}

static void tell_hall(struct simulator *simulator, int index)
{
    const struct hall_model *hall = &simulator->hall[index];
    const struct hall *described = hall->described;
    for (int i = 0; i < described->oxygen.count; i++)
        tell(simulator, &described->oxygen.at[i], hall->monitor[i]);
    tell(simulator, &described->ventilation, hall->fan ? hall->ventilation_m3_s : 0);
    tell(simulator, &described->fan_running, hall->fan);
    tell(simulator, &described->occupied, hall->occupied);
    tell(simulator, &described->temperature, hall->temperature_k);
}

static void tell_circuit(struct simulator *simulator)
{
    const struct plant *plant = simulator->plant;
    for (int i = 0; i < plant->pump_count; i++) {
        const struct pump *pump = &plant->pump[i];
        const struct vessel_model *vessel = &simulator->vessel[pump->vessel];
        tell_flow(simulator, &pump->flow, simulator->trace[pump->vessel].circulation_kg_s,
                  vessel->line.liquid.density_kg_m3, vessel->described->fluid);
        tell(simulator, &pump->power, vessel->pump_w);
        tell(simulator, &pump->running, 1);
        tell(simulator, &pump->suction_temperature, vessel->line.temperature_k);
    }
    for (int i = 0; i < plant->purifier_count; i++) {
        const struct purifier *purifier = &plant->purifier[i];
        const struct trace_model *trace = &simulator->trace[purifier->vessel];
        const struct vessel_model *vessel = &simulator->vessel[purifier->vessel];
        tell_flow(simulator, &purifier->flow, trace->circulation_kg_s,
                  vessel->line.liquid.density_kg_m3, vessel->described->fluid);
        tell(simulator, &purifier->oxygen_in, trace->oxygen);
        tell(simulator, &purifier->oxygen_out, trace->oxygen * (1 - trace->removed));
    }
    for (int i = 0; i < plant->drift_count; i++) {
        const struct drift *drift = &plant->drift[i];
        tell(simulator, &drift->oxygen, simulator->trace[drift->vessel].oxygen);
        tell(simulator, &drift->nitrogen, simulator->trace[drift->vessel].nitrogen);
        tell(simulator, &drift->water, 1e-12);
    }
}

static void tell_edges(struct simulator *simulator)
{
    const struct plant *plant = simulator->plant;
    for (int i = 0; i < plant->shaft_count; i++) {
        const struct riser_model *riser = &simulator->riser[i];
        const struct shaft *shaft = riser->described;
        tell_flow(simulator, &shaft->flow, riser->flow_kg_s, 0, shaft->gas);
        tell(simulator, &shaft->top_pressure, riser->top_pa);
        tell(simulator, &shaft->bottom_pressure, riser->bottom_pa);
        tell(simulator, &shaft->temperature, riser->temperature_k);
    }
    for (int i = 0; i < plant->delivery_count; i++) {
        const struct delivery *delivery = &plant->delivery[i];
        bool bad = upset_active(simulator, UPSET_BAD_DELIVERY);
        tell(simulator, &delivery->oxygen, bad ? 2.5e-6 : 0.3e-6);
        tell(simulator, &delivery->nitrogen, 1e-6);
        tell(simulator, &delivery->water, 0.4e-6);
    }
}

static void tell_all(struct simulator *simulator)
{
    const struct plant *plant = simulator->plant;
    tell(simulator, &plant->site.barometer, simulator->barometer_pa);
    for (int i = 0; i < plant->vessel_count; i++)
        tell_vessel(simulator, i);
    for (int i = 0; i < plant->stream_count; i++)
        tell_stream(simulator, &plant->stream[i]);
    for (int i = 0; i < plant->condenser_count; i++)
        tell_condenser(simulator, i);
    for (int i = 0; i < plant->hall_count; i++)
        tell_hall(simulator, i);
    tell_circuit(simulator);
    tell_edges(simulator);
}

/* ---- registers
 * --------------------------------------------------------------------------------- */

static void write_words(modbus_mapping_t *mapping, const struct register_ref *ref,
                        const uint16_t *words)
{
    if (ref->table == TABLE_COIL)
        mapping->tab_bits[ref->address] = (uint8_t)(words[0] != 0);
    else if (ref->table == TABLE_DISCRETE)
        mapping->tab_input_bits[ref->address] = (uint8_t)(words[0] != 0);
    else {
        uint16_t *table =
            ref->table == TABLE_INPUT ? mapping->tab_input_registers : mapping->tab_registers;
        if (ref->type == REGISTER_BIT) {
            uint16_t mask = (uint16_t)(1u << ref->bit);
            uint16_t old = table[ref->address];
            table[ref->address] = (uint16_t)(words[0] != 0 ? old | mask : old & ~mask);
        } else {
            memcpy(table + ref->address, words, (size_t)register_words(ref) * sizeof(*words));
        }
    }
}

static void read_words(const modbus_mapping_t *mapping, const struct register_ref *ref,
                       uint16_t *words)
{
    if (ref->table == TABLE_COIL)
        words[0] = mapping->tab_bits[ref->address];
    else if (ref->table == TABLE_DISCRETE)
        words[0] = mapping->tab_input_bits[ref->address];
    else
        memcpy(words,
               (ref->table == TABLE_INPUT ? mapping->tab_input_registers
                                          : mapping->tab_registers) +
                   ref->address,
               (size_t)register_words(ref) * sizeof(*words));
}

/* The first monitor of the first hall keeps its last reading. */
static bool stuck(const struct simulator *simulator, int point)
{
    const struct plant *plant = simulator->plant;
    return upset_active(simulator, UPSET_MONITOR_STUCK) && plant->hall_count > 0 &&
           plant->hall[0].oxygen.at[0].kind == REF_TAG &&
           plant->hall[0].oxygen.at[0].tag == point;
}

void readings_take(struct simulator *simulator)
{
    const struct plant *plant = simulator->plant;
    tell_all(simulator);
    for (int i = 0; i < plant->point_count; i++) {
        const struct point *point = &plant->point[i];
        modbus_mapping_t *mapping = readings_image(simulator, plant->link[point->link].unit_id);
        uint16_t words[4] = {0};
        double noise = random_normal(&simulator->random);
        if (point->read.type == REGISTER_BIT) {
            words[0] = simulator->truth[i] != 0;
        } else {
            double u = SHARE * point_uncertainty(point, simulator->truth[i]);
            double value = simulator->truth[i] + u * (simulator->bias[i] + noise);
            if (stuck(simulator, i))
                value = simulator->stuck[i];
            simulator->stuck[i] = value;
            register_encode(&point->read, point_to_raw(point, value), words);
        }
        write_words(mapping, &point->read, words);
    }
}

int readings_lost_unit(const struct simulator *simulator)
{
    const struct plant *plant = simulator->plant;
    if (!upset_active(simulator, UPSET_LINK_LOST) || plant->link_count == 0)
        return -1;
    int link = plant->link_count - 1;
    if (plant->hall_count > 0 && plant->hall[0].oxygen.at[0].kind == REF_TAG &&
        plant_tag_is_point(plant, plant->hall[0].oxygen.at[0].tag))
        link = plant->point[plant->hall[0].oxygen.at[0].tag].link;
    return plant->link[link].unit_id;
}

void simulator_frame(const struct simulator *simulator, int64_t utc_ns, struct frame *frame)
{
    const struct plant *plant = simulator->plant;
    int lost = readings_lost_unit(simulator);
    frame->utc_ns = utc_ns;
    for (int i = 0; i < plant->point_count; i++) {
        const struct point *point = &plant->point[i];
        int unit_id = plant->link[point->link].unit_id;
        const modbus_mapping_t *mapping = readings_image(simulator, unit_id);
        uint16_t words[4] = {0}, fault[4] = {0};
        if (unit_id == lost) {
            frame->sample[i] =
                (struct sample){.quality = QUALITY_MISSING, .cause = CAUSE_NEVER_READ};
            continue;
        }
        read_words(mapping, &point->read, words);
        if (point->has_fault)
            read_words(mapping, &point->fault, fault);
        frame->sample[i] = point_sample(point, words, fault[0] != 0, utc_ns);
    }
}
