/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * A vessel's ledgers and windowed quantities at a frame: the last evaluation, under the verdict
 * of this frame's readings. An input that is lost makes them uncertain for half a minute and
 * bad then; nothing that rests on a lost reading looks good.
 */
#include "internal.h"

#include <math.h>

enum ledger_word ledger_word_of(const struct verdict *verdict, bool filling,
                                const struct estimate *unexplained)
{
    if (!verdict_usable(verdict))
        return verdict->quality == QUALITY_BAD ? LEDGER_BLIND
               : filling                       ? LEDGER_FILLING
                                               : LEDGER_ABSENT;
    double u = estimate_u(unexplained), size = fabs(unexplained->value);
    return size > 5 * u ? LEDGER_FINDING : size > 2 * u ? LEDGER_WATCH : LEDGER_QUIET;
}

/* Verdict of a loss now, by how long it lasts. */
static void join_loss(struct verdict *verdict, const struct verdict *loss, int64_t since_ns,
                      int64_t now_ns)
{
    if (loss->quality == QUALITY_BAD && now_ns - since_ns <= 30 * NS_PER_S)
        verdict_doubt(verdict, QUALITY_UNCERTAIN, "for %.0f s: %.90s",
                      time_ns_to_s(now_ns - since_ns), loss->reason);
    else
        verdict_join(verdict, loss);
}

/* A loss that lasts rules over a window that still fills. */
static struct verdict under_loss(const struct verdict *balance, const struct verdict *loss)
{
    struct verdict verdict = *balance;
    if (!verdict_usable(loss))
        return *loss;
    verdict_join(&verdict, loss);
    return verdict;
}

static void set_ledger(struct ledger *ledger, const struct balance_result *balance,
                       const struct verdict *verdict)
{
    const struct estimate *parts[] = {&balance->in, &balance->out, &balance->stored,
                                      &balance->unexplained};
    struct quantity *out[] = {&ledger->in, &ledger->out, &ledger->stored, &ledger->unexplained};
    for (size_t i = 0; i < ARRAY_LENGTH(parts); i++) {
        *out[i] = quantity_none(verdict->quality);
        if (verdict_usable(verdict))
            *out[i] = (struct quantity){.value = parts[i]->value,
                                        .u = estimate_u(parts[i]),
                                        .quality = verdict->quality};
    }
    ledger->word = ledger_word_of(verdict, balance->filling, &balance->unexplained);
    ledger->window_s = balance->span_s;
    text_copy(ledger->reason, sizeof(ledger->reason), verdict->reason);
}

static void publish_heat(struct engine *engine, struct vessel_state *state,
                         const struct verdict *verdict)
{
    const struct balance_result *heat = &state->balance[TRACK_HEAT];
    struct ledger *ledger = engine_ledger(engine, LEDGER_HEAT, state->index);
    set_ledger(ledger, heat, verdict);
    struct verdict excess = *verdict;
    if (!state->vessel->has_heat_budget) {
        excess = (struct verdict){0};
        verdict_doubt(&excess, QUALITY_MISSING, "the plant file gives no heat_budget");
        if (verdict_usable(verdict)) {
            ledger->word = LEDGER_ABSENT;
            text_copy(ledger->reason, sizeof(ledger->reason),
                      "no heat_budget in the plant file: unexplained is the whole load");
        }
    }
    struct estimate over;
    estimate_exact(&over, 0);
    if (verdict_usable(verdict))
        estimate_add(&over, -1, &heat->unexplained);
    engine_derive(engine, DERIVED_VESSEL_HEAT_LOAD, state->index, &state->heat_load, verdict);
    engine_derive(engine, DERIVED_VESSEL_HEAT_EXCESS, state->index, &over, &excess);
    struct verdict hold = *verdict;
    verdict_join(&hold, &state->hold_time_verdict);
    engine_derive(engine, DERIVED_VESSEL_HOLD_TIME, state->index, &state->hold_time, &hold);
}

static void publish_mass(struct engine *engine, struct vessel_state *state,
                         const struct verdict *verdict)
{
    const struct balance_result *mass = &state->balance[TRACK_MASS];
    set_ledger(engine_ledger(engine, LEDGER_MASS, state->index), mass, verdict);
    engine_derive(engine, DERIVED_VESSEL_MASS_UNEXPLAINED, state->index, &mass->unexplained,
                  verdict);
    engine_derive(engine, DERIVED_VESSEL_MASS_CHANGE, state->index, &mass->stored, verdict);
}

static void publish_boil_off(struct engine *engine, struct vessel_state *state,
                             const struct verdict *loss)
{
    const struct estimate *boil = &state->balance[TRACK_VAPOUR].unexplained;
    struct verdict verdict = under_loss(&state->balance[TRACK_VAPOUR].verdict, loss);
    if (!state->vapour_leaves) {
        verdict = (struct verdict){0};
        verdict_doubt(&verdict, QUALITY_MISSING, "the plant file gives no stream of vapour");
    }
    engine_derive(engine, DERIVED_VESSEL_BOIL_OFF, state->index, boil, &verdict);
    struct verdict daily = verdict;
    struct estimate ratio;
    estimate_exact(&ratio, 0);
    verdict_join(&daily, &state->contents_verdict);
    if (verdict_usable(&daily) && !(state->liquid_mass.value > 0))
        verdict_doubt(&daily, QUALITY_MISSING, "no liquid");
    if (verdict_usable(&daily)) {
        const double per = 1 / state->liquid_mass.value; /* 1/s; the unit 1/d is the reader's */
        const struct estimate *const of[] = {boil, &state->liquid_mass};
        const double by[] = {per, -boil->value * per / state->liquid_mass.value};
        estimate_combine(&ratio, boil->value * per, 2, of, by);
    }
    engine_derive(engine, DERIVED_VESSEL_BOIL_OFF_DAILY, state->index, &ratio, &daily);
}

void vessel_publish(struct engine *engine, struct vessel_state *state)
{
    struct verdict loss = {0}, heat_loss = {0};
    int64_t now = engine->utc_ns;
    join_loss(&loss, &state->contents_verdict, state->pushed_utc_ns, now);
    join_loss(&loss, &state->flows_verdict, state->pushed_utc_ns, now);
    if (state->pushed_utc_ns != now)
        join_loss(&loss, &state->lost, state->pushed_utc_ns, now);
    join_loss(&heat_loss, &state->heat_verdict, state->heat_utc_ns, now);
    if (!verdict_usable(&loss))
        heat_loss = loss;
    else
        verdict_join(&heat_loss, &loss);
    struct verdict heat = under_loss(&state->balance[TRACK_HEAT].verdict, &heat_loss);
    struct verdict mass = under_loss(&state->balance[TRACK_MASS].verdict, &loss);
    struct verdict rate = under_loss(&state->pressure_rate_verdict, &loss);
    publish_heat(engine, state, &heat);
    publish_mass(engine, state, &mass);
    /* Vapour condensed inside is known by the duty only. */
    publish_boil_off(engine, state, state->cooling_count > 0 ? &heat_loss : &loss);
    engine_derive(engine, DERIVED_VESSEL_PRESSURE_RATE, state->index, &state->pressure_rate,
                  &rate);
}
