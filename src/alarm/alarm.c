/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The life cycle of alarms (ANSI/ISA-18.2, IEC 62682): normal, active, acknowledged, returned.
 * What must stay true: a phase moves only for a cause in this frame or an acknowledgement;
 * doubt never clears an alarm; every move is one journal entry. Time is frame time, int64 ns;
 * nothing is allocated after create.
 */
#include "internal.h"

#include <math.h>
#include <stdlib.h>

/* One alarm's own life. */
struct watch {
    struct alarm_state state;
    double deadband; /* SI per second for rates */
    int64_t on_delay_ns, off_delay_ns;
    int64_t pending_utc_ns; /* with pending: since when what moves the phase has stood */
    bool pending;
    bool doubt_raises; /* an uncertain input may make it active */
    struct slope slope;
};

struct alarm_set {
    const struct plant *plant;
    struct watch *watch;
    struct alarm_queue queue;
    double rate_time_s;
    int64_t last_utc_ns;
    bool stepped;
};

/* What the input of this frame says about the condition. */
enum verdict {
    VERDICT_UNKNOWN,
    VERDICT_BEYOND,  /* the limit */
    VERDICT_BETWEEN, /* limit and deadband: moves nothing */
    VERDICT_BACK
};
struct judgement {
    enum verdict verdict;
    bool unknown;
    struct quantity quantity; /* as judged: the slope for rates */
};

const char *alarm_phase_word(enum alarm_phase phase)
{
    static const char *const words[] = {
        [ALARM_NORMAL] = "normal",
        [ALARM_ACTIVE] = "active",
        [ALARM_ACKNOWLEDGED] = "acknowledged",
        [ALARM_RETURNED] = "returned",
    };
    return words[phase];
}

/* ---- create
 * --------------------------------------------------------------------------------- */

static bool finite_and_not_negative(double value)
{
    return isfinite(value) && value >= 0;
}

static int alarm_check(const struct plant *plant, const struct alarm *alarm, struct error *err)
{
    const char *wrong = NULL;
    if (alarm->watch < 0 || alarm->watch >= plant_tag_count(plant))
        wrong = "watches nothing; name a point or a derived quantity";
    else if (!finite_and_not_negative(alarm->deadband))
        wrong = "needs a deadband of zero or more";
    else if (!finite_and_not_negative(alarm->on_delay_s) ||
             !finite_and_not_negative(alarm->off_delay_s))
        wrong = "needs delays of zero or more";
    else if (alarm->priority < 1 || alarm->priority > 4)
        wrong = "needs a priority of 1 to 4";
    else if (!isfinite(alarm->low) || !isfinite(alarm->high))
        wrong = "needs limits that are numbers";
    else if (alarm_is_rate(alarm) && !(alarm->high > 0))
        wrong = "needs a rate above zero";
    else if (alarm->condition == ALARM_OUTSIDE && !(alarm->low < alarm->high))
        wrong = "needs its lower limit first";
    else if (alarm->condition == ALARM_OUTSIDE &&
             2 * alarm->deadband >= alarm->high - alarm->low)
        wrong = "could never return: its deadband must be less than half of its range";
    if (wrong == NULL)
        return 0;
    return error_set(err, ERR_CONFIG, "%s:%d: alarm %s %s",
                     alarm->place.file != NULL ? alarm->place.file : "plant", alarm->place.line,
                     alarm->name, wrong);
}

/* A delay for ever is as good as 100 years, which int64 ns can hold. */
static int64_t delay_ns(double delay_s)
{
    const double longest_s = 100 * 365.25 * 86400;
    return time_s_to_ns(fmin(delay_s, longest_s));
}

/* The file gives a span; for a rate it counts over the time of the fit. A reading that stands
 * still must always count as back. */
static double deadband_of(const struct alarm *alarm, double rate_time_s)
{
    return alarm_is_rate(alarm) ? fmin(alarm->deadband / rate_time_s, alarm->high / 2)
                                : alarm->deadband;
}

static bool doubt_raises(const struct plant *plant, int tag)
{
    return plant_tag_is_point(plant, tag) ||
           plant->derived[tag - plant->point_count].kind == THING_HALL;
}

int alarm_set_create(const struct plant *plant, struct alarm_set **out, struct error *err)
{
    for (int i = 0; i < plant->alarm_count; i++) {
        int code = alarm_check(plant, &plant->alarm[i], err);
        if (code != 0)
            return code;
    }
    size_t count = (size_t)plant->alarm_count;
    size_t room = 2 * count + JOURNAL_STEP_MAX;
    struct alarm_set *set = calloc(1, sizeof(*set));
    if (set == NULL)
        return error_set(err, ERR_MEMORY, "no memory for %zu alarms", count);
    set->plant = plant;
    set->watch = calloc(count + 1, sizeof(*set->watch));
    set->queue.at = calloc(room, sizeof(*set->queue.at));
    set->queue.room = (int)room;
    if (set->watch == NULL || set->queue.at == NULL) {
        alarm_set_free(set);
        return error_set(err, ERR_MEMORY, "no memory for %zu alarms", count);
    }
    set->rate_time_s = fmax(ALARM_RATE_TIME_S, 5 * plant->site.frame_s);
    for (size_t i = 0; i < count; i++) {
        const struct alarm *alarm = &plant->alarm[i];
        struct watch *watch = &set->watch[i];
        watch->deadband = deadband_of(alarm, set->rate_time_s);
        watch->on_delay_ns = delay_ns(alarm->on_delay_s);
        watch->off_delay_ns = delay_ns(alarm->off_delay_s);
        watch->doubt_raises = doubt_raises(plant, alarm->watch);
    }
    *out = set;
    return 0;
}

void alarm_set_free(struct alarm_set *set)
{
    if (set == NULL)
        return;
    free(set->watch);
    free(set->queue.at);
    free(set);
}

/* ---- step
 * ----------------------------------------------------------------------------------- */

static enum verdict verdict_high(double value, double high, double deadband)
{
    if (value > high)
        return VERDICT_BEYOND;
    return value <= high - deadband ? VERDICT_BACK : VERDICT_BETWEEN;
}

static enum verdict verdict_low(double value, double low, double deadband)
{
    if (value < low)
        return VERDICT_BEYOND;
    return value >= low + deadband ? VERDICT_BACK : VERDICT_BETWEEN;
}

static enum verdict verdict_of(const struct alarm *alarm, double deadband, double value)
{
    switch (alarm->condition) {
    case ALARM_ABOVE:
    case ALARM_RISING_FASTER:
        return verdict_high(value, alarm->high, deadband);
    case ALARM_FALLING_FASTER:
        return verdict_high(-value, alarm->high, deadband);
    case ALARM_BELOW:
        return verdict_low(value, alarm->low, deadband);
    case ALARM_OUTSIDE: {
        enum verdict high = verdict_high(value, alarm->high, deadband);
        enum verdict low = verdict_low(value, alarm->low, deadband);
        if (high == VERDICT_BEYOND || low == VERDICT_BEYOND)
            return VERDICT_BEYOND;
        return high == VERDICT_BACK && low == VERDICT_BACK ? VERDICT_BACK : VERDICT_BETWEEN;
    }
    case ALARM_IS_ON:
        return value != 0 ? VERDICT_BEYOND : VERDICT_BACK;
    case ALARM_IS_OFF:
        return value == 0 ? VERDICT_BEYOND : VERDICT_BACK;
    case ALARM_IS_BAD:
        break;
    }
    return VERDICT_UNKNOWN;
}

static struct judgement judge(struct watch *watch, const struct alarm *alarm, struct quantity q,
                              double step_s, double rate_time_s)
{
    /* A number that is none must not pass as "not above". */
    if (quantity_usable(q) && !isfinite(q.value))
        q = quantity_none(QUALITY_BAD);
    struct judgement found = {.verdict = VERDICT_UNKNOWN, .quantity = q};
    if (alarm->condition == ALARM_IS_BAD) {
        found.verdict = quantity_usable(q) ? VERDICT_BACK : VERDICT_BEYOND;
        return found;
    }
    found.unknown = q.quality != QUALITY_GOOD;
    if (!quantity_usable(q)) {
        slope_reset(&watch->slope);
        return found;
    }
    if (alarm_is_rate(alarm)) {
        if (step_s > 3 * rate_time_s)
            slope_reset(&watch->slope);
        slope_add(&watch->slope, step_s, q.value, rate_time_s);
        found.quantity.u = 0;
        if (!slope_get(&watch->slope, rate_time_s, &found.quantity.value)) {
            found.unknown = true;
            return found;
        }
    }
    found.verdict = verdict_of(alarm, watch->deadband, found.quantity.value);
    bool raises = found.verdict == VERDICT_BEYOND && watch->doubt_raises;
    if (q.quality == QUALITY_UNCERTAIN && !raises)
        found.verdict = VERDICT_UNKNOWN;
    return found;
}

static void tell(struct alarm_set *set, struct journal_step *journal, int alarm, int64_t utc_ns,
                 enum alarm_event_kind kind, struct quantity judged, const char *user)
{
    struct alarm_event event = {
        .utc_ns = utc_ns,
        .kind = kind,
        .alarm = alarm,
        .phase = set->watch[alarm].state.phase,
        .quality = judged.quality,
        .value = judged.value,
        .u = judged.u,
    };
    text_printable(event.user, sizeof(event.user), user);
    if (!queue_push(&set->queue, &event))
        journal->dropped++;
}

static void enter(struct watch *watch, enum alarm_phase phase, int64_t utc_ns)
{
    watch->state.phase = phase;
    watch->state.since_utc_ns = utc_ns;
    watch->pending = false;
}

static bool stands(const struct alarm_state *state)
{
    return state->phase == ALARM_ACTIVE || state->phase == ALARM_ACKNOWLEDGED;
}

/* True once what moves the phase has stood for its delay. */
static bool due(struct watch *watch, enum verdict verdict, int64_t utc_ns)
{
    bool standing = stands(&watch->state);
    if (verdict != (standing ? VERDICT_BACK : VERDICT_BEYOND)) {
        watch->pending = false;
        return false;
    }
    if (!watch->pending) {
        watch->pending = true;
        watch->pending_utc_ns = utc_ns;
    }
    uint64_t stood_ns = (uint64_t)utc_ns - (uint64_t)watch->pending_utc_ns;
    return stood_ns >= (uint64_t)(standing ? watch->off_delay_ns : watch->on_delay_ns);
}

static void step_one(struct alarm_set *set, int index, int64_t utc_ns, double step_s,
                     struct quantity input, struct journal_step *journal)
{
    struct watch *watch = &set->watch[index];
    struct alarm_state *state = &watch->state;
    struct judgement found =
        judge(watch, &set->plant->alarm[index], input, step_s, set->rate_time_s);

    if (found.unknown != state->unknown) {
        state->unknown = found.unknown;
        tell(set, journal, index, utc_ns, found.unknown ? EVENT_UNKNOWN : EVENT_KNOWN,
             found.quantity, "");
    }
    if (!due(watch, found.verdict, utc_ns))
        return;
    if (!stands(state)) {
        enter(watch, ALARM_ACTIVE, utc_ns);
        state->active_utc_ns = utc_ns;
        state->value = quantity_usable(input) && isfinite(input.value) ? input.value : 0;
        state->user[0] = '\0';
        tell(set, journal, index, utc_ns, EVENT_ACTIVE, found.quantity, "");
    } else if (state->phase == ALARM_ACTIVE) {
        enter(watch, ALARM_RETURNED, utc_ns);
        tell(set, journal, index, utc_ns, EVENT_RETURNED, found.quantity, "");
    } else {
        enter(watch, ALARM_NORMAL, utc_ns);
        tell(set, journal, index, utc_ns, EVENT_NORMAL, found.quantity, "");
    }
}

/* The clock went back: no pending time or rate can be trusted, and nothing began later than
 * now.
 */
static void restart_times(struct alarm_set *set, int64_t utc_ns)
{
    for (int i = 0; i < set->plant->alarm_count; i++) {
        struct watch *watch = &set->watch[i];
        watch->pending = false;
        slope_reset(&watch->slope);
        if (watch->state.since_utc_ns > utc_ns)
            watch->state.since_utc_ns = utc_ns;
        if (watch->state.active_utc_ns > utc_ns)
            watch->state.active_utc_ns = utc_ns;
    }
}

void alarm_step(struct alarm_set *set, int64_t utc_ns, const struct alarm_input *input,
                struct journal_step *journal)
{
    double step_s = 0;
    if (!set->stepped) {
        for (int i = 0; i < set->plant->alarm_count; i++)
            set->watch[i].state.since_utc_ns = utc_ns;
    } else if (utc_ns < set->last_utc_ns) {
        restart_times(set, utc_ns);
    } else {
        step_s = (double)((uint64_t)utc_ns - (uint64_t)set->last_utc_ns) / (double)NS_PER_S;
    }
    set->stepped = true;
    set->last_utc_ns = utc_ns;
    for (int i = 0; i < set->plant->alarm_count; i++)
        step_one(set, i, utc_ns, step_s, input[i].quantity, journal);
    queue_drain(&set->queue, set->plant, journal);
}

/* ---- people and lists
 * ------------------------------------------------------------------------ */

int alarm_acknowledge(struct alarm_set *set, int alarm, int64_t utc_ns, const char *user,
                      struct journal_step *journal, struct error *err)
{
    if (alarm < 0 || alarm >= set->plant->alarm_count)
        return error_set(err, ERR_ARGUMENT, "there is no alarm %d; the plant has %d", alarm,
                         set->plant->alarm_count);
    const char *name = set->plant->alarm[alarm].name;
    if (user == NULL || *user == '\0')
        return error_set(err, ERR_ARGUMENT,
                         "an acknowledgement of alarm %s needs the name of its user", name);
    struct watch *watch = &set->watch[alarm];
    struct alarm_state *state = &watch->state;
    if (state->phase == ALARM_NORMAL)
        return error_set(err, ERR_ARGUMENT, "alarm %s is normal: nothing to acknowledge", name);
    if (state->phase == ALARM_ACKNOWLEDGED)
        return error_set(err, ERR_ARGUMENT, "alarm %s has been acknowledged by %s already",
                         name, state->user);

    bool returned = state->phase == ALARM_RETURNED;
    struct quantity none = quantity_none(QUALITY_MISSING);
    text_printable(state->user, sizeof(state->user), user);
    /* A pending return keeps its time: acknowledging is no reason to start it again. */
    state->phase = returned ? ALARM_NORMAL : ALARM_ACKNOWLEDGED;
    state->since_utc_ns = utc_ns;
    tell(set, journal, alarm, utc_ns, EVENT_ACKNOWLEDGED, none, user);
    if (returned)
        tell(set, journal, alarm, utc_ns, EVENT_NORMAL_BY_USER, none, user);
    queue_drain(&set->queue, set->plant, journal);
    return 0;
}

const struct alarm_state *alarm_state(const struct alarm_set *set, int alarm)
{
    if (alarm < 0 || alarm >= set->plant->alarm_count)
        return NULL;
    return &set->watch[alarm].state;
}

int alarm_unacknowledged(const struct alarm_set *set)
{
    int count = 0;
    for (int i = 0; i < set->plant->alarm_count; i++) {
        enum alarm_phase phase = set->watch[i].state.phase;
        count += phase == ALARM_ACTIVE || phase == ALARM_RETURNED;
    }
    return count;
}

static int list_class(const struct alarm_state *state)
{
    switch (state->phase) {
    case ALARM_ACTIVE:
    case ALARM_RETURNED:
        return 0;
    case ALARM_ACKNOWLEDGED:
        return 1;
    case ALARM_NORMAL:
        break;
    }
    return state->unknown ? 2 : 3;
}

/* A total order: the index decides last, so that any way of sorting is stable. */
static bool listed_before(const struct alarm_set *set, int a, int b)
{
    const struct alarm_state *one = &set->watch[a].state, *two = &set->watch[b].state;
    int class_one = list_class(one), class_two = list_class(two);
    if (class_one != class_two)
        return class_one < class_two;
    const struct alarm *alarm = set->plant->alarm;
    if (alarm[a].priority != alarm[b].priority)
        return alarm[a].priority < alarm[b].priority;
    if (one->since_utc_ns != two->since_utc_ns)
        return one->since_utc_ns > two->since_utc_ns;
    return a < b;
}

/* Sinks order[root] in the heap of the last-listed first. */
static void heap_sink(const struct alarm_set *set, int *order, int root, int count)
{
    int moved = order[root];
    for (int child = 2 * root + 1; child < count; child = 2 * root + 1) {
        if (child + 1 < count && listed_before(set, order[child], order[child + 1]))
            child++;
        if (!listed_before(set, moved, order[child]))
            break;
        order[root] = order[child];
        root = child;
    }
    order[root] = moved;
}

/* Heap sort, because the C library's qsort may allocate. */
void alarm_order(const struct alarm_set *set, int *order)
{
    int count = set->plant->alarm_count;
    for (int i = 0; i < count; i++)
        order[i] = i;
    for (int root = count / 2 - 1; root >= 0; root--)
        heap_sink(set, order, root, count);
    for (int last = count - 1; last > 0; last--) {
        int first = order[0];
        order[0] = order[last];
        order[last] = first;
        heap_sink(set, order, 0, last);
    }
}
