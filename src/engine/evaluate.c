/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The balances of a vessel's window (docs/methods.md, 4). Storage is the least-squares slope of
 * the contents, flows are averaged with the weights that belong to that slope, so both sides of
 * a balance mean the same stretch of time. Enthalpies count from saturated liquid at the
 * present pressure, so that an error of mass carries next to no heat.
 */
#include "internal.h"

#include <math.h>

/* A regime ends when newer and older slope differ by this many standard uncertainties. */
static const double CHANGE_Z = 5;
/* Without thermometers: part of the saturation temperature's change that the liquid may not
 * follow, and what it may change by itself, K/s (common practice, no source). */
static const double U_FOLLOW = 0.3, U_ALONE_K_S = 0.001 / 3600;

/* What one evaluation works on. */
struct work {
    struct engine *engine;
    struct vessel_state *state;
    const struct window_weights *weights;
    double shift_j_kg; /* reference of enthalpy less the window's base */
};

static const double *series(const struct work *work, int index)
{
    return window_series(&work->state->window, index);
}

static double slope_of(const struct work *work, int index)
{
    const struct window_weights *w = work->weights;
    return window_sum(w->slope, series(work, index), w->from, w->to);
}

static double rate_of(const struct work *work, int index)
{
    const struct window_weights *w = work->weights;
    return window_sum(w->rate, series(work, index), w->from, w->to);
}

/* ---- the quantity whose slope is the unexplained part, block by block
 * ------------------------- */

static void balance_line(const struct work *work, enum track track, int from)
{
    static const int storage[] = {SERIES_ENERGY, SERIES_MASS, SERIES_VAPOUR};
    static const int net[] = {SERIES_NET_HEAT, SERIES_NET_MASS, SERIES_NET_VAPOUR};
    const struct window *window = &work->state->window;
    double *y = work->engine->balance;
    const double *stored = series(work, storage[track]);
    for (int k = from; k < window->count; k++)
        y[k] = stored[k];
    window_integrate(window, from, series(work, net[track]), 1, y);
    if (track != TRACK_HEAT)
        return;
    const double *mass = series(work, SERIES_MASS);
    for (int k = from; k < window->count; k++)
        y[k] -= work->shift_j_kg * mass[k];
    window_integrate(window, from, series(work, SERIES_NET_MASS), -work->shift_j_kg, y);
}

/* ---- errors of storage: constant ones by what their effect has changed, drift by its effect
 * --- */

/* Derivative of the stored quantity at block k. */
static double stored_by(const struct work *work, enum track track,
                        enum contents_variable variable, int k)
{
    double mass = series(work, SERIES_MASS_BY + (int)variable)[k];
    if (track == TRACK_MASS)
        return mass;
    return series(work, SERIES_ENERGY_BY + (int)variable)[k] - work->shift_j_kg * mass;
}

static void add_instrument(const struct work *work, enum track track,
                           enum contents_variable variable, const struct input *input,
                           double share, struct estimate *out)
{
    const struct window_weights *w = work->weights;
    double now = stored_by(work, track, variable, w->to - 1);
    double change = (now - stored_by(work, track, variable, w->from)) / w->span_s;
    for (int i = 0; i < input->parts; i++) {
        const struct input_part *part = &input->part[i];
        estimate_add_term(out, source_of(SOURCE_POINT, part->tag),
                          share * change * part->systematic);
        estimate_add_term(out, source_of(SOURCE_DRIFT, part->tag),
                          share * now * part->u * input_drift_per_s);
    }
}

/* A gauge's error of reading grows with the level: it enters the slope with the level's own. */
static void add_level_gain(const struct work *work, enum track track, struct estimate *out)
{
    const struct plant *plant = work->engine->plant;
    const struct input *level = &work->state->level;
    int last = work->weights->to - 1;
    double mass_by = stored_by(work, TRACK_MASS, CONTENTS_LEVEL, last);
    if (level->parts == 0 || level->part[0].tag >= plant->point_count || !(mass_by > 0))
        return;
    double level_rate = slope_of(work, SERIES_MASS) / mass_by;
    estimate_add_term(out, source_of(SOURCE_POINT, level->part[0].tag),
                      plant->point[level->part[0].tag].u.of_reading * level_rate *
                          stored_by(work, track, CONTENTS_LEVEL, last));
}

static void add_storage_errors(const struct work *work, enum track track, struct estimate *out)
{
    const struct vessel_state *state = work->state;
    const struct ref_list *list = &state->vessel->liquid_temperature;
    add_instrument(work, track, CONTENTS_PRESSURE, &state->pressure, 1, out);
    add_instrument(work, track, CONTENTS_LEVEL, &state->level, 1, out);
    add_level_gain(work, track, out);
    int used = __builtin_popcount(state->thermometers_used);
    for (int i = 0; i < list->count && used > 0; i++)
        if (state->thermometers_used >> i & 1)
            add_instrument(work, track, CONTENTS_LIQUID_TEMPERATURE, &state->thermometer[i],
                           1.0 / used, out);
    if (!state->contents_input.vapour_saturated)
        add_instrument(work, track, CONTENTS_VAPOUR_TEMPERATURE, &state->vapour_temperature, 1,
                       out);
    if (state->contents_input.liquid_saturated) {
        double by_pa = stored_by(work, track, CONTENTS_PRESSURE, work->weights->to - 1);
        double follow = by_pa * slope_of(work, SERIES_PRESSURE);
        double alone = by_pa * state->contents.line.dp_dt_pa_k;
        estimate_add_term(out, source_of(SOURCE_LIQUID_SATURATED, state->index),
                          hypot(U_FOLLOW * follow, U_ALONE_K_S * alone));
    }
}

/* ---- flows
 * ------------------------------------------------------------------------------------ */

struct mean_flow {
    struct estimate mass, heat;
};

/* Readings of a point in the window: a slow link fills several frames with one. */
static double readings_of(const struct work *work, int tag)
{
    const struct plant *plant = work->engine->plant;
    double period = plant->link[plant->point[tag].link].period_s;
    double frame = plant->site.frame_s;
    return work->weights->frames * (period > frame ? frame / period : 1);
}

static void mean_of_flow(const struct work *work, int index, struct mean_flow *out)
{
    const struct engine *engine = work->engine;
    const struct vessel_stream *flow = &work->state->stream[index];
    double shift = flow->loop ? 0 : work->shift_j_kg;
    double mean = rate_of(work, SERIES_STREAMS + 2 * index);
    double heat = rate_of(work, SERIES_STREAMS + 2 * index + 1) - shift * mean;
    double present = flow->enthalpy_j_kg - (flow->loop ? 0 : work->state->base_j_kg + shift);
    double relative = fabs(mean) > 1e-12 ? heat / mean : present;
    estimate_exact(&out->mass, mean);
    estimate_exact(&out->heat, heat);
    for (int i = 0; i < flow->flow.parts; i++) {
        int tag = flow->flow.part[i].tag;
        double u = flow->flow.part[i].u, noise = 0;
        if (tag < engine->plant->point_count && flow->per_reading > 0) {
            u = point_uncertainty(&engine->plant->point[tag], mean / flow->per_reading);
            /* 1.2: the slope's weights on flows are a parabola */
            noise = input_scatter(engine, tag) * sqrt(1.2 / readings_of(work, tag));
        }
        double systematic = input_systematic(engine, tag, u) * flow->per_reading;
        noise *= flow->per_reading;
        estimate_add_term(&out->mass, source_of(SOURCE_POINT, tag), systematic);
        estimate_add_term(&out->mass, source_of(SOURCE_FLOW_NOISE, flow->stream), noise);
        estimate_add_term(&out->heat, source_of(SOURCE_POINT, tag), relative * systematic);
        estimate_add_term(&out->heat, source_of(SOURCE_FLOW_NOISE, flow->stream),
                          relative * noise);
    }
    input_add_systematic(&out->heat, mean * flow->by_temperature, &flow->temperature);
    input_add_systematic(&out->heat, mean * flow->by_pressure, &flow->pressure);
    estimate_add_term(
        &out->heat,
        source_of(flow->loop ? SOURCE_CONDENSATE : SOURCE_STREAM_STATE, flow->stream),
        mean * flow->u_model_j_kg);
}

static void add_pumps(const struct work *work, struct estimate *in)
{
    const struct vessel_state *state = work->state;
    in->value += rate_of(work, SERIES_PUMP);
    for (int i = 0; i < state->pump_count; i++)
        input_add_systematic(in, 1, &state->pump_power[i]);
}

static void add_cooling(const struct work *work, double factor, struct estimate *out)
{
    const struct vessel_state *state = work->state;
    struct estimate cooling;
    estimate_exact(&cooling, 0);
    for (int i = 0; i < state->cooling_count; i++)
        estimate_add(&cooling, 1, &work->engine->duty[state->cooling[i]]);
    if (cooling.value != 0) /* the errors are of the duty now, the value of the window */
        estimate_scale(&cooling, rate_of(work, SERIES_COOLING) / cooling.value);
    estimate_add(out, factor, &cooling);
}

/* ---- the three balances
 * ----------------------------------------------------------------------- */

static void close_balance(struct balance_result *balance)
{
    estimate_exact(&balance->unexplained, 0);
    estimate_add(&balance->unexplained, 1, &balance->in);
    estimate_add(&balance->unexplained, -1, &balance->out);
    estimate_add(&balance->unexplained, -1, &balance->stored);
    /* The very numbers that are shown must add up. */
    balance->unexplained.value = balance->in.value - balance->out.value - balance->stored.value;
}

static void balance_heat(const struct work *work, const struct window_line *line,
                         struct balance_result *balance)
{
    struct vessel_state *state = work->state;
    estimate_exact(&balance->in,
                   state->vessel->has_heat_budget ? state->vessel->heat_budget_w : 0);
    estimate_exact(&balance->out, 0);
    add_pumps(work, &balance->in);
    add_cooling(work, 1, &balance->out);
    for (int i = 0; i < state->stream_count; i++) {
        struct mean_flow flow;
        mean_of_flow(work, i, &flow);
        if (state->stream[i].sign > 0)
            estimate_add(&balance->out, 1, &flow.heat);
        else if (state->stream[i].loop)
            estimate_add(&balance->out, -1, &flow.heat);
        else
            estimate_add(&balance->in, 1, &flow.heat);
    }
    estimate_exact(&balance->stored, slope_of(work, SERIES_ENERGY) -
                                         work->shift_j_kg * slope_of(work, SERIES_MASS));
    add_storage_errors(work, TRACK_HEAT, &balance->stored);
    estimate_add_term(&balance->stored, source_of(SOURCE_HEAT_NOISE, state->index),
                      line->u_slope);
    close_balance(balance);
    estimate_exact(&state->heat_load, 0);
    estimate_add(&state->heat_load, -1, &balance->unexplained);
    if (state->vessel->has_heat_budget)
        state->heat_load.value += state->vessel->heat_budget_w;
}

static void balance_mass(const struct work *work, const struct window_line *line,
                         struct balance_result *balance)
{
    struct vessel_state *state = work->state;
    estimate_exact(&balance->in, 0);
    estimate_exact(&balance->out, 0);
    for (int i = 0; i < state->stream_count; i++) {
        struct mean_flow flow;
        mean_of_flow(work, i, &flow);
        if (!state->stream[i].loop)
            estimate_add(state->stream[i].sign > 0 ? &balance->out : &balance->in, 1,
                         &flow.mass);
    }
    estimate_exact(&balance->stored, slope_of(work, SERIES_MASS));
    add_storage_errors(work, TRACK_MASS, &balance->stored);
    estimate_add_term(&balance->stored, source_of(SOURCE_MASS_NOISE, state->index),
                      line->u_slope);
    close_balance(balance);
}

/* boil-off = vapour out - vapour in + vapour stored; kept in "unexplained". */
static void balance_vapour(const struct work *work, const struct window_line *line,
                           struct balance_result *balance)
{
    struct vessel_state *state = work->state;
    struct estimate *boil = &balance->unexplained;
    estimate_exact(boil, slope_of(work, SERIES_VAPOUR));
    estimate_add_term(boil, source_of(SOURCE_VAPOUR_NOISE, state->index), line->u_slope);
    for (int i = 0; i < state->stream_count; i++) {
        const struct vessel_stream *flow = &state->stream[i];
        struct mean_flow mean;
        if (!flow->loop && work->engine->plant->stream[flow->stream].phase != STREAM_VAPOUR)
            continue;
        mean_of_flow(work, i, &mean);
        estimate_add(boil, flow->loop ? 1 : flow->sign, &mean.mass);
    }
    const struct contents *c = &state->contents;
    double latent = c->vapour.enthalpy_j_kg - c->line.liquid.enthalpy_j_kg;
    add_cooling(work, 1 / latent, boil);
    if (state->cooling_count > 0) /* what returns is a little colder than saturated */
        estimate_add_term(boil, source_of(SOURCE_CONDENSER, state->index),
                          0.02 * rate_of(work, SERIES_COOLING) / latent);
}

/* Times without readings: what flowed then may differ from its neighbours as the flows differ
 * over the window (rectangular distribution, JCGM 100:2008, 4.3.7). */
static void judge_gaps(const struct work *work, enum track track,
                       struct balance_result *balance)
{
    static const int net[] = {SERIES_NET_HEAT, SERIES_NET_MASS, SERIES_NET_VAPOUR};
    const struct window_weights *w = work->weights;
    double lost = window_sum(window_frames(&work->state->window), series(work, SERIES_LOST),
                             w->from + 1, w->to) /
                  w->span_s;
    if (lost < 0.02)
        return;
    const double *rate = series(work, net[track]);
    double low = rate[w->from], high = low;
    for (int k = w->from; k < w->to; k++) {
        low = rate[k] < low ? rate[k] : low;
        high = rate[k] > high ? rate[k] : high;
    }
    double u = lost * (high - low) / sqrt(12);
    estimate_add_term(&balance->unexplained, source_of(SOURCE_GAPS, work->state->index), u);
    if (track == TRACK_HEAT)
        estimate_add_term(&work->state->heat_load, source_of(SOURCE_GAPS, work->state->index),
                          -u);
    if (lost > 0.5)
        verdict_doubt(&balance->verdict, lost > 0.9 ? QUALITY_BAD : QUALITY_UNCERTAIN,
                      "%.0f %% of the window lost%s%.70s", 100 * lost,
                      work->state->lost.reason[0] != '\0' ? ": " : "",
                      work->state->lost.reason);
}

/* The stretch of the window that a balance may use; false while it is too short. */
static bool choose_range(struct work *work, enum track track, struct window_line *line)
{
    struct vessel_state *state = work->state;
    struct engine *engine = work->engine;
    const struct window *window = &state->window;
    struct balance_result *balance = &state->balance[track];
    double least = vessel_least_s(state);
    double block = time_ns_to_s(window->block_ns);
    int from =
        window_from(window, fmax(state->vessel->window_s, 8 * block), state->start_s[track]);
    const double *t = window_time_s(window);
    double span = window->count > 0 ? t[window->count - 1] - t[from] : 0;
    balance->span_s = span;
    if (span + block < least || window_weigh(window, from, &engine->weights) != 0) {
        balance->filling = true;
        verdict_filling(&balance->verdict, least - span);
        return false;
    }
    balance_line(work, track, from);
    struct estimate drift;
    estimate_exact(&drift, 0);
    if (track != TRACK_VAPOUR)
        add_storage_errors(work, track, &drift);
    int changed =
        window_change(window, from, engine->balance, least, estimate_u(&drift), CHANGE_Z);
    if (changed != from && window_weigh(window, changed, &engine->weights) == 0) {
        state->start_s[track] = t[changed];
        balance->span_s = engine->weights.span_s;
        from = changed;
    }
    if (window_line(window, from, window->count, engine->balance, line) != 0) {
        balance->filling = true;
        verdict_filling(&balance->verdict, least - balance->span_s);
        return false;
    }
    return true;
}

/* ---- pressure
 * --------------------------------------------------------------------------------- */

static void evaluate_pressure_rate(struct engine *engine, struct vessel_state *state)
{
    const struct window *window = &state->window;
    double least = vessel_least_s(state);
    int from = window_from(window, least, 0);
    const double *t = window_time_s(window);
    struct window_line line;
    state->pressure_rate_verdict = (struct verdict){0};
    double span = t[window->count - 1] - t[from];
    if (span < 0.5 * least || window_line(window, from, window->count,
                                          window_series(window, SERIES_PRESSURE), &line) != 0) {
        verdict_filling(&state->pressure_rate_verdict, 0.5 * least - span);
        return;
    }
    estimate_exact(&state->pressure_rate, line.slope);
    estimate_add_term(&state->pressure_rate, source_of(SOURCE_PRESSURE_NOISE, state->index),
                      line.u_slope);
    for (int i = 0; i < state->pressure.parts; i++)
        estimate_add_term(&state->pressure_rate,
                          source_of(SOURCE_DRIFT, state->pressure.part[i].tag),
                          state->pressure.part[i].u * input_drift_per_s);
    (void)engine;
}

static void evaluate_hold_time(struct engine *engine, struct vessel_state *state)
{
    const struct vessel *vessel = state->vessel;
    struct verdict *verdict = &state->hold_time_verdict;
    *verdict = state->balance[TRACK_HEAT].verdict;
    if (!vessel->relief.set) {
        *verdict = (struct verdict){0};
        verdict_doubt(verdict, QUALITY_MISSING, "the plant file gives no relief");
    }
    if (!verdict_usable(verdict))
        return;
    struct input barometer = input_of(engine, &engine->plant->site.barometer);
    double now = state->pressure.value;
    double relief = vessel->relief.value;
    if (vessel->relief.gauge) {
        input_judge(engine, &barometer, "barometer", verdict);
        relief += barometer.value;
    }
    double mass = state->contents.mass_kg.value, volume = state->contents.volume_m3, energy = 0;
    double by_now, by_relief;
    struct error err;
    struct estimate heat = state->heat_load;
    add_pumps(&(struct work){.engine = engine, .state = state, .weights = &engine->weights},
              &heat);
    if (verdict_usable(verdict) && now < relief &&
        (heat_closed_energy_j(vessel->fluid, mass, volume, now, relief, &energy, &err) != 0 ||
         fluid_du_dp(vessel->fluid, mass / volume, now, &by_now, &err) != 0 ||
         fluid_du_dp(vessel->fluid, mass / volume, relief, &by_relief, &err) != 0))
        verdict_doubt(verdict, QUALITY_BAD, "%.110s", err.text);
    if (!(heat.value > 2 * estimate_u(&heat)))
        verdict_doubt(verdict, QUALITY_MISSING, "the heat load is not above its uncertainty");
    if (!verdict_usable(verdict))
        return;
    estimate_exact(&state->hold_time, 0);
    if (now >= relief)
        return;
    state->hold_time.value = energy / heat.value;
    estimate_add(&state->hold_time, -energy / (heat.value * heat.value), &heat);
    state->hold_time.value = energy / heat.value;
    input_add_u(&state->hold_time, -mass * by_now / heat.value, &state->pressure);
    if (vessel->relief.gauge)
        input_add_u(&state->hold_time, mass * by_relief / heat.value, &barometer);
}

static void judge_sense(enum track track, struct balance_result *balance)
{
    (void)verdict_finite(&balance->unexplained, &balance->verdict);
    if (track == TRACK_VAPOUR)
        return;
    (void)verdict_finite(&balance->in, &balance->verdict);
    (void)verdict_finite(&balance->out, &balance->verdict);
    (void)verdict_finite(&balance->stored, &balance->verdict);
}

void vessel_evaluate(struct engine *engine, struct vessel_state *state)
{
    struct work work = {
        .engine = engine,
        .state = state,
        .weights = &engine->weights,
        .shift_j_kg = state->contents.line.liquid.enthalpy_j_kg - state->base_j_kg,
    };
    for (int i = TRACK_COUNT - 1; i >= 0; i--) { /* heat last: hold_time uses its weights */
        enum track track = (enum track)i;
        struct balance_result *balance = &state->balance[track];
        struct window_line line;
        balance->verdict = (struct verdict){0};
        balance->filling = false;
        if (!choose_range(&work, track, &line))
            continue;
        if (track == TRACK_HEAT)
            balance_heat(&work, &line, balance);
        else if (track == TRACK_MASS)
            balance_mass(&work, &line, balance);
        else
            balance_vapour(&work, &line, balance);
        judge_gaps(&work, track, balance);
        judge_sense(track, balance);
    }
    evaluate_pressure_rate(engine, state);
    evaluate_hold_time(engine, state);
}
