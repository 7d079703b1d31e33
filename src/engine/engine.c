/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The engine: memory at creation, one deterministic step per frame, and what others may ask of
 * the last step. What must stay true: a step reads nothing but the frame, the commands and its
 * own memory, and takes no memory.
 */
#include "internal.h"

#include <stdlib.h>
#include <string.h>

#define X(id, word) [LEDGER_##id] = word,
const char *ledger_kind_word(enum ledger_kind kind)
{
    static const char *const words[] = {X(HEAT, "HEAT") X(MASS, "MASS") X(PURITY, "PURITY")
                                            X(AIR, "AIR")};
    return words[kind];
}

const char *ledger_word_text(enum ledger_word word)
{
    static const char *const words[] = {X(QUIET, "quiet") X(WATCH, "watch") X(
        FINDING, "finding") X(FILLING, "filling") X(BLIND, "blind") X(ABSENT, "absent")};
    return words[word];
}
#undef X

/* ---- creation
 * --------------------------------------------------------------------------------- */

static int things_of_kind(const struct plant *plant, enum thing_kind kind)
{
    const int counts[THING_KIND_COUNT] = {
        [THING_VESSEL] = plant->vessel_count, [THING_CONDENSER] = plant->condenser_count,
        [THING_PUMP] = plant->pump_count,     [THING_PURIFIER] = plant->purifier_count,
        [THING_DRIFT] = plant->drift_count,   [THING_HALL] = plant->hall_count,
        [THING_SHAFT] = plant->shaft_count,   [THING_DELIVERY] = plant->delivery_count,
        [THING_STREAM] = plant->stream_count,
    };
    return counts[kind];
}

static int create_derived(struct engine *engine)
{
    static const enum thing_kind kinds[] = {
#define X(kind, id, word, unit, says) THING_##kind,
        DERIVED_LIST(X)
#undef X
    };
    const struct plant *plant = engine->plant;
    struct arena *arena = engine->arena;
    size_t count = (size_t)plant->derived_count + 1;
    engine->estimate = arena_take(arena, count, sizeof(*engine->estimate));
    engine->results.derived = arena_take(arena, count, sizeof(*engine->results.derived));
    engine->results.derived_count = plant->derived_count;
    if (engine->estimate == NULL || engine->results.derived == NULL)
        return ERR_MEMORY;
    for (int id = 0; id < DERIVED_ID_COUNT; id++) {
        int things = things_of_kind(plant, kinds[id]);
        engine->derived_index[id] = arena_take(arena, (size_t)things + 1, sizeof(int));
        if (engine->derived_index[id] == NULL)
            return ERR_MEMORY;
        for (int i = 0; i < things; i++)
            engine->derived_index[id][i] = -1;
    }
    for (int i = 0; i < plant->derived_count; i++) {
        const struct derived *derived = &plant->derived[i];
        engine->derived_index[derived->id][derived->thing] = i;
        engine->results.derived[i].quantity = quantity_none(QUALITY_MISSING);
        text_copy(engine->results.derived[i].reason, sizeof(engine->results.derived[i].reason),
                  "not computed by this version");
    }
    return 0;
}

static void create_ledgers(struct engine *engine)
{
    static const enum ledger_kind kinds[] = {LEDGER_HEAT, LEDGER_MASS, LEDGER_PURITY};
    const struct plant *plant = engine->plant;
    struct results *results = &engine->results;
    for (int v = 0; v < plant->vessel_count; v++)
        for (size_t k = 0; k < ARRAY_LENGTH(kinds); k++)
            results->ledger[results->ledger_count++] =
                (struct ledger){.kind = kinds[k], .thing_kind = THING_VESSEL, .thing = v};
    for (int h = 0; h < plant->hall_count; h++)
        results->ledger[results->ledger_count++] =
            (struct ledger){.kind = LEDGER_AIR, .thing_kind = THING_HALL, .thing = h};
    for (int i = 0; i < results->ledger_count; i++) {
        struct ledger *ledger = &results->ledger[i];
        ledger->word = LEDGER_ABSENT;
        ledger->in = ledger->out = ledger->stored = ledger->unexplained =
            quantity_none(QUALITY_MISSING);
        text_copy(ledger->reason, sizeof(ledger->reason),
                  ledger->kind != LEDGER_PURITY ? "not computed yet"
                  : plant->vessel[ledger->thing].purifier >= 0
                      ? "not computed by this version"
                      : "no purifier in the plant file");
    }
}

static int create_memory(struct engine *engine)
{
    const struct plant *plant = engine->plant;
    struct arena *arena = engine->arena;
    size_t blocks = 2 * (WINDOW_BLOCKS + 8);
    engine->scatter =
        arena_take(arena, (size_t)plant->point_count + 1, sizeof(*engine->scatter));
    engine->vessel =
        arena_take(arena, (size_t)plant->vessel_count + 1, sizeof(*engine->vessel));
    engine->purity =
        arena_take(arena, (size_t)plant->vessel_count + 1, sizeof(*engine->purity));
    engine->duty = arena_take(arena, (size_t)plant->condenser_count + 1, sizeof(*engine->duty));
    engine->duty_verdict =
        arena_take(arena, (size_t)plant->condenser_count + 1, sizeof(*engine->duty_verdict));
    engine->coolant_line = arena_take(arena, 2 * (size_t)plant->condenser_count + 1,
                                      sizeof(*engine->coolant_line));
    engine->hall = arena_take(arena, (size_t)plant->hall_count + 1, sizeof(*engine->hall));
    engine->hall_safety =
        arena_take(arena, (size_t)plant->hall_count + 1, sizeof(*engine->hall_safety));
    engine->finding = arena_take(arena, LEDGER_MAX, sizeof(*engine->finding));
    engine->alarm_input =
        arena_take(arena, (size_t)plant->alarm_count + 1, sizeof(*engine->alarm_input));
    engine->weights.slope = arena_take(arena, blocks, sizeof(double));
    engine->weights.rate = arena_take(arena, blocks, sizeof(double));
    engine->balance = arena_take(arena, blocks, sizeof(double));
    if (engine->scatter == NULL || engine->vessel == NULL || engine->purity == NULL ||
        engine->duty == NULL || engine->duty_verdict == NULL || engine->coolant_line == NULL ||
        engine->hall == NULL || engine->hall_safety == NULL || engine->alarm_input == NULL ||
        engine->finding == NULL || engine->weights.slope == NULL ||
        engine->weights.rate == NULL || engine->balance == NULL ||
        frame_init(&engine->frame, plant, arena) != 0 || trend_create(engine) != 0)
        return ERR_MEMORY;
    for (int i = 0; i < plant->vessel_count; i++)
        if (vessel_create(engine, i) != 0 || purity_create(engine, i) != 0)
            return ERR_MEMORY;
    for (int i = 0; i < plant->hall_count; i++)
        if (hall_create(engine, i) != 0)
            return ERR_MEMORY;
    return 0;
}

int engine_create(const struct plant *plant, struct engine **out, struct error *err)
{
    if (3 * plant->vessel_count + plant->hall_count > LEDGER_MAX)
        return error_set(err, ERR_CONFIG,
                         "%d vessels and %d halls need more than %d ledgers; split the plant "
                         "file",
                         plant->vessel_count, plant->hall_count, LEDGER_MAX);
    struct engine *engine = calloc(1, sizeof(*engine));
    if (engine == NULL)
        return error_set(err, ERR_MEMORY, "no memory for the engine");
    engine->plant = plant;
    engine->arena = arena_create();
    if (engine->arena == NULL || create_derived(engine) != 0 || create_memory(engine) != 0) {
        engine_free(engine);
        return error_set(err, ERR_MEMORY, "no memory for the engine");
    }
    create_ledgers(engine);
    int code = alarm_set_create(plant, &engine->alarms, err);
    if (code != 0) {
        engine_free(engine);
        return code;
    }
    *out = engine;
    return 0;
}

void engine_free(struct engine *engine)
{
    if (engine == NULL)
        return;
    alarm_set_free(engine->alarms);
    arena_free(engine->arena);
    free(engine);
}

/* ---- results
 * ---------------------------------------------------------------------------------- */

void engine_derive(struct engine *engine, enum derived_id id, int thing,
                   const struct estimate *estimate, const struct verdict *verdict)
{
    int index = engine->derived_index[id][thing];
    if (index < 0)
        return;
    struct derived_value *value = &engine->results.derived[index];
    struct verdict senseless = {0};
    if (verdict_usable(verdict) && !verdict_finite(estimate, &senseless))
        verdict = &senseless;
    if (verdict_usable(verdict)) {
        engine->estimate[index] = *estimate;
        value->quantity = (struct quantity){
            .value = estimate->value, .u = estimate_u(estimate), .quality = verdict->quality};
    } else {
        value->quantity = quantity_none(verdict->quality);
        engine->estimate[index].count = 0;
    }
    memcpy(value->reason, verdict->reason, sizeof(value->reason));
}
_Static_assert(sizeof(((struct derived_value *)0)->reason) ==
                   sizeof(((struct verdict *)0)->reason),
               "a reason is copied whole");

struct ledger *engine_ledger(struct engine *engine, enum ledger_kind kind, int thing)
{
    int index =
        kind == LEDGER_AIR ? 3 * engine->plant->vessel_count + thing : 3 * thing + (int)kind;
    return &engine->results.ledger[index];
}

const struct results *engine_results(const struct engine *engine)
{
    return &engine->results;
}

const struct alarm_set *engine_alarms(const struct engine *engine)
{
    return engine->alarms;
}

struct quantity engine_tag(const struct engine *engine, int tag, const char **reason)
{
    const struct plant *plant = engine->plant;
    if (reason != NULL)
        *reason = "";
    if (tag < 0 || tag >= plant_tag_count(plant))
        return quantity_none(QUALITY_MISSING);
    if (plant_tag_is_point(plant, tag)) {
        const struct sample *sample = &engine->frame.sample[tag];
        if (reason != NULL && sample->quality != QUALITY_GOOD)
            *reason = cause_says(sample->cause);
        if (sample->quality == QUALITY_BAD || sample->quality == QUALITY_MISSING)
            return quantity_none(sample->quality);
        return (struct quantity){
            .value = sample->value, .u = sample->u, .quality = sample->quality};
    }
    const struct derived_value *value = &engine->results.derived[tag - plant->point_count];
    if (reason != NULL)
        *reason = value->reason;
    return value->quantity;
}

struct quantity engine_pressure(const struct engine *engine, const struct ref *ref)
{
    struct input input = input_pressure(engine, ref);
    if (!input.described)
        return quantity_none(QUALITY_MISSING);
    if (!input_usable(&input))
        return quantity_none(input.quality);
    struct estimate estimate;
    input_estimate(&estimate, &input);
    return (struct quantity){
        .value = estimate.value, .u = estimate_u(&estimate), .quality = input.quality};
}

/* ---- the step
 * --------------------------------------------------------------------------------- */

static void take_frame(struct engine *engine, const struct frame *frame)
{
    int count = frame->count < engine->frame.count ? frame->count : engine->frame.count;
    memcpy(engine->frame.sample, frame->sample, (size_t)count * sizeof(*frame->sample));
    engine->frame.utc_ns = frame->utc_ns;
}

static void restart_windows(struct engine *engine)
{
    for (int i = 0; i < engine->plant->vessel_count; i++)
        window_restart(&engine->vessel[i].window);
    for (int i = 0; i < engine->plant->vessel_count; i++)
        window_restart(&engine->purity[i].window);
    for (int i = 0; i < engine->plant->hall_count; i++)
        window_restart(&engine->hall[i].window);
}

/* Span since the last frame, s; 0 with the first and after a step of the clock. */
static double take_time(struct engine *engine, int64_t utc_ns)
{
    bool stepped_back = engine->stepped && utc_ns <= engine->utc_ns;
    double elapsed = engine->stepped ? time_ns_to_s(utc_ns - engine->utc_ns) : 0;
    if (stepped_back) {
        char text[120];
        engine->clock_steps++;
        text_format(text, sizeof(text), "clock went back by %.3f s; windows start anew",
                    -elapsed);
        journal_add(&engine->results.journal, utc_ns, JOURNAL_CLOCK, 0, "clock", "stepped", "",
                    text);
        restart_windows(engine);
        elapsed = 0;
    }
    engine->utc_ns = utc_ns;
    engine->stepped = true;
    return elapsed;
}

static void acknowledge_all(struct engine *engine, int above_priority, const char *user)
{
    struct journal_step *journal = &engine->results.journal;
    for (int i = 0; i < engine->plant->alarm_count; i++) {
        const struct alarm_state *state = alarm_state(engine->alarms, i);
        bool waits = state->phase == ALARM_ACTIVE || state->phase == ALARM_RETURNED;
        if (waits && engine->plant->alarm[i].priority > above_priority)
            (void)alarm_acknowledge(engine->alarms, i, engine->utc_ns, user, journal, NULL);
    }
}

/* What an operator did is judged by what stood on the screen: before this frame's alarms. */
static void obey(struct engine *engine, const struct command *command, int count)
{
    struct journal_step *journal = &engine->results.journal;
    for (int i = 0; i < count; i++) {
        const struct command *c = &command[i];
        switch (c->kind) {
        case COMMAND_ACKNOWLEDGE:
            (void)alarm_acknowledge(engine->alarms, c->alarm, engine->utc_ns, c->user, journal,
                                    NULL);
            break;
        case COMMAND_ACKNOWLEDGE_ALL:
            acknowledge_all(engine, c->alarm, c->user);
            break;
        case COMMAND_NOTE:
            journal_add(journal, engine->utc_ns, JOURNAL_NOTE, 0, "", "", c->user, c->text);
            break;
        }
    }
}

/* A watched pressure in the basis of its alarm's limits. */
static struct quantity watched(const struct engine *engine, const struct alarm *alarm)
{
    struct quantity q = engine_tag(engine, alarm->watch, NULL);
    const struct unit *unit = plant_tag_unit(engine->plant, alarm->watch);
    bool limits = alarm->condition == ALARM_ABOVE || alarm->condition == ALARM_BELOW ||
                  alarm->condition == ALARM_OUTSIDE;
    if (!limits || unit->dimension != DIMENSION_PRESSURE || unit->gauge == alarm->limit_gauge ||
        !quantity_usable(q))
        return q;
    struct input barometer = input_of(engine, &engine->plant->site.barometer);
    if (!input_usable(&barometer))
        return quantity_none(QUALITY_BAD);
    q.value += alarm->limit_gauge ? -barometer.value : barometer.value;
    q.quality = quality_worse(q.quality, barometer.quality);
    return q;
}

const struct results *engine_step(struct engine *engine, const struct frame *frame,
                                  const struct command *command, int command_count)
{
    const struct plant *plant = engine->plant;
    struct results *results = &engine->results;
    results->journal.count = results->journal.dropped = 0;
    double elapsed_s = take_time(engine, frame->utc_ns);
    results->utc_ns = frame->utc_ns;
    take_frame(engine, frame);
    scatter_step(engine, &engine->frame);
    for (int i = 0; i < plant->condenser_count; i++)
        condenser_step(engine, i);
    for (int i = 0; i < plant->vessel_count; i++)
        vessel_step(engine, &engine->vessel[i]);
    for (int i = 0; i < plant->vessel_count; i++)
        purity_step(engine, i);
    for (int i = 0; i < plant->hall_count; i++)
        hall_step(engine, i, elapsed_s);
    things_step(engine);
    findings_step(engine);
    obey(engine, command, command_count);
    for (int i = 0; i < plant->alarm_count; i++)
        engine->alarm_input[i].quantity = watched(engine, &plant->alarm[i]);
    alarm_step(engine->alarms, engine->utc_ns, engine->alarm_input, &results->journal);
    results->unacknowledged = alarm_unacknowledged(engine->alarms);
    banner_step(&results->banners, plant, engine->alarms, engine->hall_safety, engine->utc_ns,
                &results->journal);
    trend_step(engine);
    return results;
}
