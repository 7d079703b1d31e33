/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * One vessel at one frame: its readings, its contents, what follows from these alone. The mean
 * liquid temperature keeps its own zero when a thermometer drops out: the others stand for it
 * with their known offsets, so that a lost thermometer does not look like heat.
 */
#include "internal.h"

#include <math.h>
#include <string.h>

/* Standard uncertainties of what few thermometers can tell of the whole: one thermometer for
 * all of the liquid; one for the vapour, which is layered (common practice, no source). */
static const double U_LIQUID_ALONE_K = 0.05, U_VAPOUR_MEAN_K = 3, U_LIQUID_SATURATED_K = 0.3;
enum { OFFSET_LEAST = 30, OFFSET_MEMORY = 600 };

int vessel_create(struct engine *engine, int index)
{
    const struct plant *plant = engine->plant;
    struct vessel_state *state = &engine->vessel[index];
    state->vessel = &plant->vessel[index];
    state->index = index;
    if (streams_create(engine, state) != 0)
        return ERR_MEMORY;
    for (int i = 0; i < plant->pump_count && state->pump_count < PLANT_LIST_MAX; i++)
        if (plant->pump[i].vessel == index && plant->pump[i].power.kind != REF_NONE)
            state->pump[state->pump_count++] = i;
    int series = SERIES_STREAMS + 2 * state->stream_count;
    double block_s = state->vessel->window_s / WINDOW_BLOCKS;
    if (block_s < plant->site.frame_s)
        block_s = plant->site.frame_s;
    int64_t block_ns = time_s_to_ns(block_s);
    /* Vessels close their blocks at different frames, so that the work is spread. */
    int64_t phase_ns = block_ns / (plant->vessel_count + 1) * index;
    state->values = arena_take(engine->arena, (size_t)series, sizeof(double));
    if (state->values == NULL)
        return ERR_MEMORY;
    for (int i = 0; i < TRACK_COUNT; i++)
        verdict_doubt(&state->balance[i].verdict, QUALITY_MISSING, "not computed yet");
    state->hold_time_verdict = state->pressure_rate_verdict = state->balance[0].verdict;
    return window_init(&state->window, series, WINDOW_BLOCKS + 8, block_ns, phase_ns,
                       engine->arena);
}

/* ---- readings
 * --------------------------------------------------------------------------------- */

static void judge_thermometers(const struct engine *engine, struct vessel_state *state,
                               unsigned usable, int count)
{
    for (int i = 0; i < state->vessel->liquid_temperature.count; i++)
        if ((usable >> i & 1) == 0 || state->thermometer[i].quality != QUALITY_GOOD) {
            struct verdict one = {0};
            input_judge(engine, &state->thermometer[i], "liquid temperature", &one);
            if (count == 0)
                verdict_join(&state->contents_verdict, &one);
            else
                verdict_doubt(&state->contents_verdict, QUALITY_UNCERTAIN,
                              "%.80s; mean of the other %d", one.reason, count);
        }
}

static void learn_offsets(struct vessel_state *state, double mean)
{
    if (state->offset_weight < OFFSET_MEMORY)
        state->offset_weight++;
    for (int i = 0; i < state->vessel->liquid_temperature.count; i++)
        if (state->thermometers_used >> i & 1)
            state->offset_k[i] += (state->thermometer[i].value - mean - state->offset_k[i]) /
                                  state->offset_weight;
}

static double scatter_of_places(const struct vessel_state *state, int count)
{
    if (count < 2 || state->offset_weight < OFFSET_LEAST)
        return U_LIQUID_ALONE_K;
    double squares = 0;
    for (int i = 0; i < state->vessel->liquid_temperature.count; i++)
        if (state->thermometers_used >> i & 1)
            squares += state->offset_k[i] * state->offset_k[i];
    return sqrt(squares / (count - 1) / count);
}

static void read_liquid_temperature(struct engine *engine, struct vessel_state *state)
{
    const struct ref_list *list = &state->vessel->liquid_temperature;
    unsigned usable = 0;
    int count = 0, used = 0;
    state->contents_input.liquid_saturated = list->count == 0;
    state->u_liquid_mean_k = list->count == 0 ? U_LIQUID_SATURATED_K : 0;
    if (list->count == 0)
        return;
    for (int i = 0; i < list->count; i++) {
        state->thermometer[i] = input_of(engine, &list->at[i]);
        usable |= (unsigned)input_usable(&state->thermometer[i]) << i;
    }
    if (state->thermometers_used == 0)
        state->thermometers_used = usable;
    bool lost = (usable & state->thermometers_used) != state->thermometers_used;
    if (lost && usable != 0 && state->offset_weight < OFFSET_LEAST) {
        /* Too early to know its offset: begin with the others. */
        state->thermometers_used = usable;
        state->offset_weight = 0;
        memset(state->offset_k, 0, sizeof(state->offset_k));
        window_restart(&state->window);
    }
    bool shifted = (usable & state->thermometers_used) != state->thermometers_used &&
                   state->offset_weight >= OFFSET_LEAST;
    double sum = 0;
    for (int i = 0; i < list->count; i++) {
        used += (int)(state->thermometers_used >> i & 1);
        if ((usable & state->thermometers_used) >> i & 1) {
            sum += state->thermometer[i].value - (shifted ? state->offset_k[i] : 0);
            count++;
        }
    }
    judge_thermometers(engine, state, usable, count);
    if (count == 0)
        return;
    double mean = sum / count;
    state->contents_input.liquid_temperature_k = mean;
    if (count == used)
        learn_offsets(state, mean);
    for (int i = 0; i < list->count;
         i++) /* one that comes later joins without moving the mean */
        if ((usable & ~state->thermometers_used) >> i & 1)
            state->offset_k[i] = state->thermometer[i].value - mean;
    if (count == used && usable != state->thermometers_used) {
        state->thermometers_used |= usable;
        window_restart(&state->window); /* the mean has a new zero */
        state->offset_weight = 0;
        memset(state->offset_k, 0, sizeof(state->offset_k));
    }
    state->u_liquid_mean_k = scatter_of_places(state, used);
}

static void read_level(struct engine *engine, struct vessel_state *state)
{
    state->level = input_of(engine, &state->vessel->level);
    double height = shape_height_m(&state->vessel->shape);
    if (state->vessel->level.unit.dimension == DIMENSION_NUMBER) {
        state->level.value *= height;
        for (int i = 0; i < state->level.parts; i++) {
            state->level.part[i].u *= height;
            state->level.part[i].systematic *= height;
        }
    }
    state->contents_input.level_m = state->level.value < 0        ? 0
                                    : state->level.value > height ? height
                                                                  : state->level.value;
    input_judge(engine, &state->level, "level", &state->contents_verdict);
}

static void read_vapour_temperature(struct engine *engine, struct vessel_state *state)
{
    state->vapour_temperature = input_of(engine, &state->vessel->vapour_temperature);
    state->contents_input.vapour_temperature_k = state->vapour_temperature.value;
    state->contents_input.vapour_saturated = !input_usable(&state->vapour_temperature);
    if (!state->vapour_temperature.described)
        return;
    struct verdict one = {0};
    input_judge(engine, &state->vapour_temperature, "vapour temperature", &one);
    if (one.quality != QUALITY_GOOD)
        verdict_doubt(&state->contents_verdict, QUALITY_UNCERTAIN,
                      "%.80s; vapour taken as saturated", one.reason);
}

static void read_pumps(struct engine *engine, struct vessel_state *state)
{
    state->pump_w = 0;
    for (int i = 0; i < state->pump_count; i++) {
        const struct pump *pump = &engine->plant->pump[state->pump[i]];
        struct input *power = &state->pump_power[i];
        double before_w = power->value;
        *power = input_of(engine, &pump->power);
        if (!input_usable(power))
            power->value = before_w;
        input_judge(engine, power, "pump power", &state->heat_verdict);
        struct input running = input_of(engine, &pump->running);
        if (running.described) {
            input_judge(engine, &running, "running bit", &state->heat_verdict);
            if (input_usable(&running) && running.value == 0 && power->parts == 0)
                power->value = 0; /* a constant holds while the pump runs */
        }
        state->pump_w += power->value;
    }
}

/* ---- what follows from the contents
 * ----------------------------------------------------------- */

/* Uncertainty of one reading of a property of the contents, by all that was measured. */
static void add_contents_u(const struct vessel_state *state, struct estimate *out,
                           const struct contents_property *q)
{
    const struct ref_list *list = &state->vessel->liquid_temperature;
    input_add_u(out, q->d[CONTENTS_PRESSURE], &state->pressure);
    input_add_u(out, q->d[CONTENTS_LEVEL], &state->level);
    if (list->count > 0) {
        int used = __builtin_popcount(state->thermometers_used);
        for (int i = 0; i < list->count && used > 0; i++)
            if (state->thermometers_used >> i & 1)
                input_add_u(out, q->d[CONTENTS_LIQUID_TEMPERATURE] / used,
                            &state->thermometer[i]);
        estimate_add_term(out, source_of(SOURCE_LIQUID_TEMPERATURE, state->index),
                          q->d[CONTENTS_LIQUID_TEMPERATURE] * state->u_liquid_mean_k);
    }
    if (!state->contents_input.vapour_saturated) {
        input_add_u(out, q->d[CONTENTS_VAPOUR_TEMPERATURE], &state->vapour_temperature);
        estimate_add_term(out, source_of(SOURCE_VAPOUR_TEMPERATURE, state->index),
                          q->d[CONTENTS_VAPOUR_TEMPERATURE] * U_VAPOUR_MEAN_K);
    }
}

/* Density as its authors state it (reference README): argon and nitrogen 0.02 %, oxygen 0.1 %,
 * the others up to 0.3 %. */
static double density_u(const struct fluid *fluid)
{
    const char *name = fluid_name(fluid);
    if (strcmp(name, "argon") == 0 || strcmp(name, "nitrogen") == 0)
        return 0.0002;
    return strcmp(name, "oxygen") == 0 ? 0.001 : 0.003;
}

static void derive_inventory(struct engine *engine, struct vessel_state *state)
{
    const struct contents *c = &state->contents;
    struct estimate *liquid = &state->liquid_mass, vapour, fill;
    double u_density = density_u(state->vessel->fluid);
    estimate_exact(liquid, c->liquid_mass_kg.value);
    add_contents_u(state, liquid, &c->liquid_mass_kg);
    estimate_add_term(liquid, source_of(SOURCE_FLUID, state->index), u_density * liquid->value);
    if (state->contents_input.liquid_saturated)
        estimate_add_term(liquid, source_of(SOURCE_LIQUID_SATURATED, state->index),
                          c->liquid_volume_m3.value * U_LIQUID_SATURATED_K *
                              c->liquid.dp_dt_pa_k / c->liquid.dp_drho_pa_m3_kg);
    estimate_exact(&vapour, c->vapour_mass_kg.value);
    add_contents_u(state, &vapour, &c->vapour_mass_kg);
    if (state->contents_input.vapour_saturated)
        estimate_add_term(&vapour, source_of(SOURCE_VAPOUR_TEMPERATURE, state->index),
                          vapour.value * U_VAPOUR_MEAN_K / c->vapour.temperature_k);
    const struct shape *shape = &state->vessel->shape; /* fill needs the level only */
    double level = state->contents_input.level_m, volume = shape_volume_m3(shape);
    estimate_exact(&fill, shape_volume_at_m3(shape, level) / volume);
    input_add_u(&fill, shape_surface_at_m2(shape, level) / volume, &state->level);
    engine_derive(engine, DERIVED_VESSEL_LIQUID_MASS, state->index, liquid,
                  &state->contents_verdict);
    engine_derive(engine, DERIVED_VESSEL_VAPOUR_MASS, state->index, &vapour,
                  &state->contents_verdict);
    struct verdict of_level = {0};
    input_judge(engine, &state->level, "level", &of_level);
    engine_derive(engine, DERIVED_VESSEL_FILL, state->index, &fill, &of_level);
}

/* Saturation needs the pressure only; subcooling the liquid's thermometers too. */
static void derive_saturation(struct engine *engine, struct vessel_state *state)
{
    struct verdict pressure = {0}, liquid = {0};
    struct estimate saturation = {.count = 0}, subcooling = {.count = 0};
    const struct fluid_saturation *line = &state->contents.line;
    input_judge(engine, &state->pressure, "pressure", &pressure);
    struct error err;
    /* The contents may have failed for want of a level. */
    if (verdict_usable(&pressure) && !verdict_usable(&state->contents_verdict) &&
        fluid_saturation_at_p(state->vessel->fluid, state->pressure.value,
                              &state->contents.line, &err) != 0)
        verdict_doubt(&pressure, QUALITY_BAD, "%.110s", err.text);
    if (verdict_usable(&pressure)) {
        estimate_exact(&saturation, line->temperature_k);
        input_add_u(&saturation, 1 / line->dp_dt_pa_k, &state->pressure);
    }
    engine_derive(engine, DERIVED_VESSEL_SATURATION_TEMPERATURE, state->index, &saturation,
                  &pressure);
    const struct ref_list *list = &state->vessel->liquid_temperature;
    int used = __builtin_popcount(state->thermometers_used), usable = 0;
    liquid = pressure;
    for (int i = 0; i < list->count; i++)
        usable += input_usable(&state->thermometer[i]);
    if (list->count == 0)
        verdict_doubt(&liquid, QUALITY_MISSING, "the plant file gives no liquid_temperature");
    for (int i = 0; i < list->count; i++) {
        struct verdict one = {0};
        input_judge(engine, &state->thermometer[i], "liquid temperature", &one);
        if (usable == 0)
            verdict_join(&liquid, &one);
        else if (one.quality != QUALITY_GOOD)
            verdict_doubt(&liquid, QUALITY_UNCERTAIN, "%.80s; mean of the other %d", one.reason,
                          usable);
    }
    if (verdict_usable(&state->contents_verdict) && state->contents_input.level_m <= 0)
        verdict_doubt(&liquid, QUALITY_MISSING, "no liquid");
    if (verdict_usable(&liquid)) {
        subcooling = saturation;
        subcooling.value -= state->contents_input.liquid_temperature_k;
        for (int i = 0; i < list->count && used > 0; i++)
            if (state->thermometers_used >> i & 1)
                input_add_u(&subcooling, -1.0 / used, &state->thermometer[i]);
        estimate_add_term(&subcooling, source_of(SOURCE_LIQUID_TEMPERATURE, state->index),
                          -state->u_liquid_mean_k);
    }
    engine_derive(engine, DERIVED_VESSEL_SUBCOOLING, state->index, &subcooling, &liquid);
}

static void compute_contents(struct vessel_state *state)
{
    const struct vessel *vessel = state->vessel;
    struct contents_input *input = &state->contents_input;
    struct error err;
    if (!verdict_usable(&state->contents_verdict))
        return;
    int code = contents_at(vessel->fluid, &vessel->shape, input, &state->contents, &err);
    double u_level = state->level.parts > 0 ? state->level.part[0].u : 0;
    if (code != 0 && input->level_m < 3 * u_level) {
        /* A warm vessel whose gauge reads nothing but its own error: empty. */
        input->level_m = 0;
        code = contents_at(vessel->fluid, &vessel->shape, input, &state->contents, &err);
    }
    if (code != 0)
        verdict_doubt(&state->contents_verdict, QUALITY_BAD, "%.110s", err.text);
    else if (state->contents.vapour_doubtful)
        verdict_doubt(&state->contents_verdict, QUALITY_UNCERTAIN,
                      "vapour at %.1f K cannot be vapour; taken as saturated",
                      state->vapour_temperature.value);
}

void vessel_step(struct engine *engine, struct vessel_state *state)
{
    state->contents_verdict = state->flows_verdict = state->heat_verdict = (struct verdict){0};
    state->pressure = input_pressure(engine, &state->vessel->pressure);
    state->contents_input.pressure_pa = state->pressure.value;
    input_judge(engine, &state->pressure,
                state->vessel->pressure.kind != REF_NONE ? "barometer" : "pressure",
                &state->contents_verdict);
    read_level(engine, state);
    read_liquid_temperature(engine, state);
    read_vapour_temperature(engine, state);
    compute_contents(state);
    derive_inventory(engine, state);
    derive_saturation(engine, state);
    streams_read(engine, state);
    read_pumps(engine, state);
    if (vessel_window_push(engine, state))
        vessel_evaluate(engine, state);
    vessel_publish(engine, state);
}
