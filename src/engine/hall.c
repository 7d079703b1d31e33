/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * One hall at one frame: its monitors, and the air ledger from them and the ventilation, in gas
 * equivalents so that in - out - stored is the release. A lost monitor never leaves a hall
 * well.
 */
#include "internal.h"

#include <math.h>

/* With frames so slow that this is less than a few of them, eight and four blocks. */
static const double WINDOW_S = 300, WINDOW_LEAST_S = 60;
static const double EPISODE_END_S = 3600;
static const double GAS_CONSTANT = 8.314462618;

static double window_s(const struct window *window, double wanted_s, double blocks)
{
    double least = blocks * time_ns_to_s(window->block_ns);
    return wanted_s > least ? wanted_s : least;
}

int hall_create(struct engine *engine, int index)
{
    double block_s = WINDOW_S / HALL_BLOCKS;
    if (block_s < engine->plant->site.frame_s)
        block_s = engine->plant->site.frame_s;
    struct hall_state *state = &engine->hall[index];
    estimate_exact(&state->total, 0);
    return window_init(&state->window, HALL_SERIES_COUNT, HALL_BLOCKS + 8,
                       time_s_to_ns(block_s), 0, engine->arena);
}

/* ---- monitors
 * --------------------------------------------------------------------------------- */

struct monitors {
    struct input input[PLANT_LIST_MAX];
    int count, usable, lowest, highest; /* lowest and highest: index, or -1 */
    double mean;
    struct verdict verdict;
};

static void read_monitors(const struct engine *engine, const struct hall *hall,
                          struct monitors *out)
{
    *out = (struct monitors){.count = hall->oxygen.count, .lowest = -1, .highest = -1};
    struct verdict worst = {0};
    for (int i = 0; i < out->count; i++) {
        out->input[i] = input_of(engine, &hall->oxygen.at[i]);
        input_judge(engine, &out->input[i], "oxygen monitor", &worst);
        if (!input_usable(&out->input[i]))
            continue;
        double value = out->input[i].value;
        out->usable++;
        out->mean += value;
        if (out->lowest < 0 || value < out->input[out->lowest].value)
            out->lowest = i;
        if (out->highest < 0 || value > out->input[out->highest].value)
            out->highest = i;
    }
    if (out->usable > 0)
        out->mean /= out->usable;
    if (out->count == 0)
        verdict_doubt(&out->verdict, QUALITY_MISSING, "the plant file gives no oxygen monitor");
    else if (out->usable == 0)
        verdict_doubt(&out->verdict, QUALITY_BAD, "%s", worst.reason);
    else if (worst.quality != QUALITY_GOOD)
        verdict_doubt(&out->verdict, QUALITY_UNCERTAIN, "%.80s; %d of %d monitors left",
                      worst.reason, out->usable, out->count);
}

static void tell_safety(const struct monitors *monitors, struct hall_safety *safety)
{
    *safety = (struct hall_safety){.known = monitors->verdict.quality == QUALITY_GOOD,
                                   .any_usable = monitors->usable > 0,
                                   .lowest_point = -1};
    if (monitors->lowest < 0)
        return;
    const struct input *lowest = &monitors->input[monitors->lowest];
    safety->oxygen_lowest = lowest->value;
    if (lowest->parts > 0) {
        safety->u_oxygen_lowest = lowest->part[0].u;
        safety->lowest_point = lowest->part[0].tag;
    }
}

static int fatality(const void *context, const double *x, double *y)
{
    (void)context;
    *y = hall_fatality_factor(x[0]);
    return 0;
}

static void derive_oxygen(struct engine *engine, int index, const struct monitors *monitors)
{
    struct estimate lowest = {.count = 0}, spread = lowest, pressure = lowest, factor = lowest;
    struct input barometer = input_of(engine, &engine->plant->site.barometer);
    struct verdict absolute = monitors->verdict;
    input_judge(engine, &barometer, "barometer", &absolute);
    if (monitors->lowest >= 0) {
        input_estimate(&lowest, &monitors->input[monitors->lowest]);
        input_estimate(&spread, &monitors->input[monitors->highest]);
        estimate_add(&spread, -1, &lowest);
    }
    if (verdict_usable(&absolute)) {
        struct estimate zero;
        input_estimate(&zero, &barometer);
        const struct estimate *const of[] = {&lowest, &zero};
        const double by[] = {zero.value, lowest.value};
        estimate_combine(&pressure, lowest.value * zero.value, 2, of, by);
        const struct estimate *const x[] = {&pressure};
        if (estimate_apply(&factor, fatality, NULL, 1, x) != 0)
            verdict_doubt(&absolute, QUALITY_BAD, "fatality factor failed");
    }
    engine_derive(engine, DERIVED_HALL_OXYGEN_LOWEST, index, &lowest, &monitors->verdict);
    engine_derive(engine, DERIVED_HALL_SPREAD, index, &spread, &monitors->verdict);
    engine_derive(engine, DERIVED_HALL_OXYGEN_PRESSURE, index, &pressure, &absolute);
    engine_derive(engine, DERIVED_HALL_FATALITY_FACTOR, index, &factor, &absolute);
}

/* ---- release
 * ---------------------------------------------------------------------------------- */

struct release {
    struct verdict verdict;
    bool filling;
    double span_s;
    struct hall_air air;
    double density_kg_m3;
    struct estimate rate;      /* kg/s */
    struct window_line lowest; /* of the lowest monitor */
};

static struct input read_fan(const struct engine *engine, const struct hall *hall,
                             struct verdict *verdict)
{
    struct input fan = input_of(engine, &hall->ventilation);
    struct input running = input_of(engine, &hall->fan_running);
    input_judge(engine, &fan, "ventilation", verdict);
    if (running.described) {
        input_judge(engine, &running, "fan bit", verdict);
        if (input_usable(&running) && running.value == 0 && fan.parts == 0)
            fan.value = 0; /* a constant holds while the fan runs */
    }
    return fan;
}

static double gas_density(const struct engine *engine, const struct hall *hall,
                          struct verdict *verdict)
{
    struct input barometer = input_of(engine, &engine->plant->site.barometer);
    struct input temperature = input_of(engine, &hall->temperature);
    input_judge(engine, &barometer, "barometer", verdict);
    if (temperature.described)
        input_judge(engine, &temperature, "temperature of the hall", verdict);
    double kelvin = temperature.described ? temperature.value : 293.15;
    return barometer.value * fluid_limits(hall->gas)->molar_mass_kg_mol /
           (GAS_CONSTANT * kelvin);
}

static double variance_of_monitors(const struct monitors *monitors)
{
    double squares = 0;
    for (int i = 0; i < monitors->count; i++)
        squares += (monitors->input[i].value - monitors->mean) *
                   (monitors->input[i].value - monitors->mean);
    return monitors->count > 1 ? squares / (monitors->count - 1) : 0;
}

/* Standard error of the mean of the monitors (JCGM 100:2008, 4.2.3) by what they differ beyond
 * their own uncertainty: how far one mean may stand for a hall that is not mixed. */
static double mixing_u(const struct monitors *monitors, double variance)
{
    double own = 0;
    for (int i = 0; i < monitors->count; i++)
        if (monitors->input[i].parts > 0)
            own += monitors->input[i].part[0].u * monitors->input[i].part[0].u;
    double beyond = variance - own / monitors->count;
    return beyond > 0 ? sqrt(beyond / monitors->count) : 0;
}

static void add_release_errors(const struct monitors *monitors, const struct input *fan,
                               double by_oxygen, double by_fan, double by_rate,
                               struct estimate *out)
{
    int n = monitors->count;
    for (int i = 0; i < n; i++) {
        input_add_systematic(out, by_oxygen / n, &monitors->input[i]);
        for (int k = 0; k < monitors->input[i].parts; k++) {
            const struct input_part *part = &monitors->input[i].part[k];
            estimate_add_term(out, source_of(SOURCE_DRIFT, part->tag),
                              by_rate / n * part->u * input_drift_per_s);
        }
    }
    input_add_systematic(out, by_fan, fan);
}

static void evaluate_release(struct engine *engine, int index, const struct monitors *monitors,
                             const struct input *fan, struct release *out)
{
    const struct hall *hall = &engine->plant->hall[index];
    const struct window *window = &engine->hall[index].window;
    int from = window_from(window, window_s(window, WINDOW_S, 8), 0), to = window->count;
    double least = window_s(window, WINDOW_LEAST_S, 4);
    const double *t = window_time_s(window);
    out->span_s = to > 0 ? t[to - 1] - t[from] : 0;
    if (out->span_s < least || window_weigh(window, from, &engine->weights) != 0) {
        out->filling = true;
        verdict_filling(&out->verdict, least - out->span_s);
        return;
    }
    const double *mean = window_series(window, HALL_SERIES_MEAN);
    double oxygen = window_sum(engine->weights.rate, mean, from, to);
    double rate = window_sum(engine->weights.slope, mean, from, to);
    double flow =
        window_sum(engine->weights.rate, window_series(window, HALL_SERIES_FAN), from, to);
    struct window_line line;
    if (!(oxygen > 0.001) || window_line(window, from, to, mean, &line) != 0 ||
        window_line(window, from, to, window_series(window, HALL_SERIES_LOWEST),
                    &out->lowest) != 0) {
        verdict_doubt(&out->verdict, QUALITY_BAD, "monitors read no oxygen at all");
        return;
    }
    enum hall_ventilation ventilation =
        hall->mode == HALL_SUPPLY ? HALL_VENTILATION_SUPPLY : HALL_VENTILATION_EXHAUST;
    hall_release(ventilation, hall->volume_m3, flow, hall->fresh_air_oxygen, oxygen, rate,
                 &out->air);
    /* The same divisor as in hall_release: fresh air where the fan draws, else the room's. */
    bool drawn = ventilation == HALL_VENTILATION_EXHAUST && out->air.in_m3_s > 0;
    double per = drawn ? hall->fresh_air_oxygen : oxygen;
    double by_oxygen = -(flow + (drawn ? 0 : out->air.release_m3_s)) / per;
    double by_fan = (hall->fresh_air_oxygen - oxygen) / per;
    estimate_exact(&out->rate, out->air.release_m3_s);
    add_release_errors(monitors, fan, by_oxygen, by_fan, hall->volume_m3 / per, &out->rate);
    double variance =
        window_sum(engine->weights.rate, window_series(window, HALL_SERIES_VARIANCE), from, to);
    estimate_add_term(&out->rate, source_of(SOURCE_MIXING, index),
                      by_oxygen * mixing_u(monitors, variance));
    estimate_add_term(&out->rate, source_of(SOURCE_HALL_NOISE, index),
                      hall->volume_m3 / per * line.u_slope);
    estimate_scale(&out->rate, out->density_kg_m3);
    (void)verdict_finite(&out->rate, &out->verdict);
}

static void set_air_ledger(struct engine *engine, int index, const struct release *release)
{
    struct ledger *ledger = engine_ledger(engine, LEDGER_AIR, index);
    enum quality quality = release->verdict.quality;
    ledger->in = ledger->out = ledger->stored = ledger->unexplained = quantity_none(quality);
    ledger->word = ledger_word_of(&release->verdict, release->filling, &release->rate);
    ledger->window_s = release->span_s;
    text_copy(ledger->reason, sizeof(ledger->reason), release->verdict.reason);
    if (!verdict_usable(&release->verdict))
        return;
    double kg = release->density_kg_m3, u = estimate_u(&release->rate);
    ledger->in = (struct quantity){.value = release->air.in_m3_s * kg, .quality = quality};
    ledger->out = (struct quantity){.value = release->air.out_m3_s * kg, .quality = quality};
    ledger->stored =
        (struct quantity){.value = release->air.stored_m3_s * kg, .quality = quality};
    ledger->unexplained =
        (struct quantity){.value = ledger->in.value - ledger->out.value - ledger->stored.value,
                          .u = u,
                          .quality = quality};
}

/* Released since the episode began. Its errors are of one kind all along, so u adds up as the
 * value does. */
static void sum_release(struct engine *engine, int index, const struct release *release,
                        double elapsed_s)
{
    struct hall_state *state = &engine->hall[index];
    struct verdict verdict = release->verdict;
    if (verdict_usable(&release->verdict)) {
        /* Three u to begin, two to go on: at two alone one quiet hour in some would begin one.
         */
        double limit = (state->significant_utc_ns == 0 ? 3 : 2) * estimate_u(&release->rate);
        bool significant = release->rate.value > limit;
        if (significant && state->significant_utc_ns == 0)
            estimate_exact(&state->total, 0);
        if (significant)
            state->significant_utc_ns = engine->utc_ns;
        if (state->significant_utc_ns != 0 &&
            time_ns_to_s(engine->utc_ns - state->significant_utc_ns) > EPISODE_END_S) {
            state->significant_utc_ns = 0;
            estimate_exact(&state->total, 0);
        }
        if (state->significant_utc_ns != 0)
            estimate_add(&state->total, elapsed_s, &release->rate);
    }
    engine_derive(engine, DERIVED_HALL_RELEASE_TOTAL, index, &state->total, &verdict);
}

static void derive_time_to_action(struct engine *engine, int index,
                                  const struct monitors *monitors,
                                  const struct release *release)
{
    const struct hall *hall = &engine->plant->hall[index];
    struct verdict verdict = release->verdict;
    struct estimate time = {.count = 0};
    if (verdict_usable(&verdict)) {
        double lowest = monitors->input[monitors->lowest].value, level = -1;
        for (int i = 0; i < hall->action_count && level < 0; i++)
            if (hall->action_level[i] < lowest)
                level = hall->action_level[i];
        double fall = -release->lowest.slope;
        if (hall->action_count == 0)
            verdict_doubt(&verdict, QUALITY_MISSING, "the plant file gives no action_levels");
        else if (level < 0)
            verdict_doubt(&verdict, QUALITY_MISSING, "below the last action level");
        else if (!(fall > 2 * release->lowest.u_slope))
            verdict_doubt(&verdict, QUALITY_MISSING, "oxygen does not fall");
        else {
            estimate_exact(&time, (lowest - level) / fall);
            input_add_u(&time, 1 / fall, &monitors->input[monitors->lowest]);
            estimate_add_term(&time, source_of(SOURCE_HALL_NOISE, index),
                              -time.value / fall * release->lowest.u_slope);
        }
    }
    engine_derive(engine, DERIVED_HALL_TIME_TO_ACTION, index, &time, &verdict);
}

void hall_step(struct engine *engine, int index, double elapsed_s)
{
    const struct hall *hall = &engine->plant->hall[index];
    struct hall_state *state = &engine->hall[index];
    struct monitors monitors;
    read_monitors(engine, hall, &monitors);
    tell_safety(&monitors, &engine->hall_safety[index]);
    derive_oxygen(engine, index, &monitors);
    struct release release = {.verdict = {0}};
    if (monitors.usable < monitors.count || monitors.count == 0) {
        /* The mean of other monitors is another mean. */
        struct verdict all = {0};
        for (int i = 0; i < monitors.count; i++)
            input_judge(engine, &monitors.input[i], "oxygen monitor", &all);
        release.verdict = all;
        verdict_join(&release.verdict, &monitors.verdict);
    }
    struct input fan = read_fan(engine, hall, &release.verdict);
    release.density_kg_m3 = gas_density(engine, hall, &release.verdict);
    if (verdict_usable(&release.verdict)) {
        if (state->window.count > 0 && time_ns_to_s(engine->utc_ns - state->pushed_utc_ns) >
                                           window_s(&state->window, WINDOW_LEAST_S, 4))
            window_restart(&state->window);
        const double values[HALL_SERIES_COUNT] = {
            [HALL_SERIES_MEAN] = monitors.mean,
            [HALL_SERIES_LOWEST] = monitors.input[monitors.lowest].value,
            [HALL_SERIES_FAN] = fan.value,
            [HALL_SERIES_VARIANCE] = variance_of_monitors(&monitors),
        };
        window_push(&state->window, engine->utc_ns, values);
        state->pushed_utc_ns = engine->utc_ns;
        evaluate_release(engine, index, &monitors, &fan, &release);
    }
    engine_derive(engine, DERIVED_HALL_RELEASE, index, &release.rate, &release.verdict);
    set_air_ledger(engine, index, &release);
    sum_release(engine, index, &release, elapsed_s);
    derive_time_to_action(engine, index, &monitors, &release);
}
