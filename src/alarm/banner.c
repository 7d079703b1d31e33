/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The standing safety statements. What must stay true: a reading below an action level shows at
 * once, whatever its uncertainty; a lost monitor never makes a hall look better than it was; a
 * banner goes only with its cause. Words are the site's own where it gave them.
 */
#include "internal.h"

#include <ctype.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

/* Oxygen counts as back this far above a level (mole fraction; common practice, no source). */
static const double oxygen_hysteresis = 0.001;

/* Most serious first; an alarm adds 2 (priority - 1), and 1 if it is only unknown. */
enum rank {
    RANK_OXYGEN_LOW,
    RANK_OXYGEN_UNKNOWN,
    RANK_ALARM_DANGER,
    RANK_MONITOR_LOST = RANK_ALARM_DANGER + 2,
    RANK_ALARM_CAUTION,
    RANK_NOTE = RANK_ALARM_CAUTION + 6
};

/* A statement before it has words. */
struct statement {
    int rank;
    double weight; /* within a rank, lower is more serious */
    enum banner_level level;
    enum banner_cause cause;
    int index, action_level;
};
struct statement_list {
    int count, more;
    struct statement at[BANNER_MAX];
};

const char *banner_level_word(enum banner_level level)
{
    static const char *const words[] = {
        [BANNER_DANGER] = "danger",
        [BANNER_CAUTION] = "caution",
        [BANNER_NOTE] = "note",
    };
    return words[level];
}

static bool less_serious(const struct statement *a, const struct statement *b)
{
    return a->rank != b->rank ? a->rank > b->rank : a->weight > b->weight;
}

/* Keeps the most serious; equals stay in the order in which they came. */
static void statement_add(struct statement_list *list, const struct statement *statement)
{
    if (list->count == BANNER_MAX) {
        list->more++;
        if (!less_serious(&list->at[BANNER_MAX - 1], statement))
            return;
        list->count--;
    }
    int place = list->count++;
    for (; place > 0 && less_serious(&list->at[place - 1], statement); place--)
        list->at[place] = list->at[place - 1];
    list->at[place] = *statement;
}

/* ---- what stands
 * ----------------------------------------------------------------------------- */

/* Causes that follow one another for one hall are one statement: it keeps its since. */
static bool about_oxygen(enum banner_cause cause)
{
    return cause == BANNER_OXYGEN_LOW || cause == BANNER_OXYGEN_DOUBT ||
           cause == BANNER_OXYGEN_UNKNOWN;
}

static bool same_statement(enum banner_cause one, enum banner_cause two)
{
    return one == two || (about_oxygen(one) && about_oxygen(two));
}

static const struct banner *banner_find(const struct banner_list *list, enum banner_cause cause,
                                        int index)
{
    for (int i = 0; i < list->count; i++)
        if (same_statement(list->at[i].cause, cause) && list->at[i].index == index)
            return &list->at[i];
    return NULL;
}

/* Index of the lowest action level that oxygen is below, or -1; least leaves out lower ones. */
static int level_passed(const struct hall *hall, double oxygen, double least)
{
    int passed = -1;
    for (int i = 0; i < hall->action_count; i++) {
        double level = hall->action_level[i];
        if (oxygen < level && level >= least &&
            (passed < 0 || level < hall->action_level[passed]))
            passed = i;
    }
    return passed;
}

static bool reading_usable(const struct hall_safety *safety)
{
    return safety->any_usable && isfinite(safety->oxygen_lowest);
}

/* The one statement about a hall's oxygen, if any. before: action level that stood, or -1. */
static bool oxygen_statement(const struct hall *hall, const struct hall_safety *safety,
                             int before, struct statement *out)
{
    out->level = BANNER_DANGER;
    if (!reading_usable(safety)) {
        out->rank = RANK_OXYGEN_UNKNOWN;
        out->cause = BANNER_OXYGEN_UNKNOWN;
        out->action_level = before;
        return true;
    }
    double oxygen = safety->oxygen_lowest;
    int now = level_passed(hall, oxygen, 0);
    out->rank = RANK_OXYGEN_LOW;
    out->cause = BANNER_OXYGEN_LOW;
    out->action_level = now;
    double least = before >= 0 ? hall->action_level[before] : 0;
    if (before >= 0 && (now < 0 || hall->action_level[now] > least)) {
        /* Better than it was: believed only from all monitors, and only by the hysteresis. */
        if (!safety->known) {
            out->cause = BANNER_OXYGEN_DOUBT;
            out->action_level = before;
        } else {
            out->action_level = level_passed(hall, oxygen - oxygen_hysteresis, least);
        }
    }
    if (out->action_level < 0)
        return false;
    out->weight = hall->action_level[out->action_level];
    return true;
}

static void hall_statements(struct statement_list *list, const struct plant *plant, int index,
                            const struct hall_safety *safety, const struct banner_list *before)
{
    const struct hall *hall = &plant->hall[index];
    struct statement statement = {.index = index, .action_level = -1};
    if (hall->oxygen.count == 0) {
        statement.rank = RANK_NOTE;
        statement.level = BANNER_NOTE;
        statement.cause = BANNER_NO_MONITOR;
        statement_add(list, &statement);
        return;
    }
    const struct banner *stood = banner_find(before, BANNER_OXYGEN_LOW, index);
    if (oxygen_statement(hall, safety, stood != NULL ? stood->action_level : -1, &statement))
        statement_add(list, &statement);
    if (reading_usable(safety) && !safety->known) {
        statement = (struct statement){.rank = RANK_MONITOR_LOST,
                                       .level = BANNER_CAUTION,
                                       .cause = BANNER_MONITOR_LOST,
                                       .index = index,
                                       .action_level = -1};
        statement_add(list, &statement);
    }
}

static bool alarm_stands(const struct alarm_state *state)
{
    return state->phase == ALARM_ACTIVE || state->phase == ALARM_ACKNOWLEDGED;
}

/* Whether a hall's own statement about its monitors tells already that this tag is not good. */
static bool hall_speaks_of(const struct plant *plant, const struct hall_safety *safety, int tag)
{
    const struct derived *derived =
        plant_tag_is_point(plant, tag) ? NULL : &plant->derived[tag - plant->point_count];
    for (int h = 0; h < plant->hall_count; h++) {
        const struct hall *hall = &plant->hall[h];
        if (safety[h].known || hall->oxygen.count == 0)
            continue;
        if (derived != NULL && derived->id == DERIVED_HALL_OXYGEN_LOWEST && derived->thing == h)
            return true;
        for (int i = 0; i < hall->oxygen.count; i++)
            if (hall->oxygen.at[i].kind == REF_TAG && hall->oxygen.at[i].tag == tag)
                return true;
    }
    return false;
}

static void alarm_statement(struct statement_list *list, const struct plant *plant, int index,
                            const struct alarm_state *state, const struct hall_safety *hall)
{
    const struct alarm *alarm = &plant->alarm[index];
    if (!alarm->banner || (!alarm_stands(state) && !state->unknown))
        return;
    if (!alarm_stands(state) && hall_speaks_of(plant, hall, alarm->watch))
        return;
    bool danger = alarm->priority == 1;
    struct statement statement = {
        .rank = (danger ? RANK_ALARM_DANGER : RANK_ALARM_CAUTION + 2 * (alarm->priority - 2)) +
                !alarm_stands(state),
        .level = danger ? BANNER_DANGER : BANNER_CAUTION,
        .cause = BANNER_ALARM,
        .index = index,
        .action_level = -1,
    };
    statement_add(list, &statement);
}

/* ---- in words
 * ------------------------------------------------------------------------------- */

/* Site words as one sentence that fits: printable, ended, cut between characters with "...". */
static void site_sentence(char *dst, size_t size, const char *words)
{
    char whole[1024];
    text_printable(whole, sizeof(whole) - 1, words);
    char *text = text_trim(whole);
    size_t length = strlen(text);
    if (length > 0 && strchr(".!?", text[length - 1]) == NULL) {
        text[length++] = '.';
        text[length] = '\0';
    }
    if (length < size) {
        text_copy(dst, size, text);
        return;
    }
    if (size <= sizeof("...")) {
        dst[0] = '\0';
        return;
    }
    text_printable(dst, size - 3, text);
    strcat(dst, "...");
}

/* "head words rules tail" in which head and tail always stand whole and the words give way. */
static void compose(char *dst, size_t size, const char *head, const char *first,
                    const char *second, const char *tail)
{
    size_t room = size - 1 - strlen(head) - strlen(tail) - 3;
    char one[400] = "", two[400] = "";
    if (first != NULL)
        site_sentence(one, room + 1 < sizeof(one) ? room + 1 : sizeof(one), first);
    room -= strlen(one);
    if (second != NULL)
        site_sentence(two, room + 1 < sizeof(two) ? room + 1 : sizeof(two), second);
    text_format(dst, size, "%s%s%s%s%s%s%s", head, one[0] != '\0' ? " " : "", one,
                two[0] != '\0' ? " " : "", two, tail[0] != '\0' ? " " : "", tail);
}

static const char *rules_words(const struct plant *plant)
{
    return plant->site.rules != NULL
               ? plant->site.rules
               : "Site rules, local codes, fixed hall alarms and licensed practice prevail";
}

static const char *emergency_words(const struct plant *plant)
{
    return plant->site.emergency != NULL
               ? plant->site.emergency
               : "Leave and keep others out as the site's emergency rules say";
}

/* "AT-402 17.6 %", with more decimals only where one would round up to a limit it is below. */
static void oxygen_reading(char *dst, size_t size, const struct plant *plant,
                           const struct hall_safety *safety, double limit)
{
    double percent = safety->oxygen_lowest * 100;
    char number[40] = "";
    for (int decimals = 1; decimals <= 6; decimals++) {
        text_format(number, sizeof(number), "%.*f", decimals, percent);
        double read_back = 0;
        if (safety->oxygen_lowest >= limit || text_to_double(number, &read_back) != 0 ||
            read_back < limit * 100)
            break;
    }
    bool named = safety->lowest_point >= 0 && safety->lowest_point < plant_tag_count(plant);
    text_format(dst, size, "%s %s %%",
                named ? plant_tag_name(plant, safety->lowest_point) : "lowest", number);
}

/* "AT-401, AT-403"; "a monitor" if which one is not told. */
static void lost_monitors(char *dst, size_t size, const struct plant *plant,
                          const struct hall *hall, const struct hall_safety *safety)
{
    size_t used = 0;
    dst[0] = '\0';
    for (int i = 0; i < hall->oxygen.count && used + 1 < size; i++) {
        if ((safety->lost >> i & 1u) == 0 || hall->oxygen.at[i].kind != REF_TAG)
            continue;
        text_format(dst + used, size - used, "%s%s", used > 0 ? ", " : "",
                    plant_tag_name(plant, hall->oxygen.at[i].tag));
        used = strlen(dst);
    }
    if (used == 0)
        text_copy(dst, size, "a monitor");
}

static void oxygen_text(struct banner *banner, const struct plant *plant,
                        const struct hall_safety *safety)
{
    const struct hall *hall = &plant->hall[banner->index];
    char head[200], reading[80] = "", lost[80], tail[90] = "";
    int passed = banner->action_level;
    double level = passed >= 0 ? hall->action_level[passed] : 0;
    const char *emergency = emergency_words(plant);
    lost_monitors(lost, sizeof(lost), plant, hall, safety);
    if (reading_usable(safety))
        oxygen_reading(reading, sizeof(reading), plant, safety, level);

    if (banner->cause == BANNER_OXYGEN_LOW) {
        text_format(head, sizeof(head), "OXYGEN BELOW %.4g %% IN %s.", level * 100,
                    banner->subject);
        text_format(tail, sizeof(tail), "(%s)", reading);
    } else if (banner->cause == BANNER_OXYGEN_DOUBT) {
        text_format(head, sizeof(head), "OXYGEN WAS BELOW %.4g %% IN %s, NOW IN DOUBT.",
                    level * 100, banner->subject);
        text_format(tail, sizeof(tail), "(not good: %.40s; others: %.30s)", lost, reading);
    } else {
        char was[40] = "";
        if (passed >= 0)
            text_format(was, sizeof(was), " (was below %.4g %%)", level * 100);
        else
            emergency = NULL;
        text_format(head, sizeof(head),
                    "OXYGEN UNKNOWN IN %s%s: treat the hall as deficient until site rules say "
                    "otherwise.",
                    banner->subject, was);
    }
    compose(banner->text, sizeof(banner->text), head, emergency, rules_words(plant), tail);
}

static void alarm_text(struct banner *banner, const struct plant *plant,
                       const struct alarm_state *state)
{
    const struct alarm *alarm = &plant->alarm[banner->index];
    char head[200], limit[80];
    alarm_limit_text(limit, sizeof(limit), plant, alarm);
    const char *tag = plant_tag_name(plant, alarm->watch);
    if (!alarm_stands(state))
        text_format(head, sizeof(head), "%s CANNOT BE TOLD: %s%.60s is not %s.",
                    banner->subject, alarm_is_rate(alarm) ? "the rate of " : "", tag,
                    alarm_is_rate(alarm) ? "known" : "good");
    else
        text_format(head, sizeof(head), "%s: %.60s %s%s.", banner->subject, tag, limit,
                    state->unknown ? ", and no longer good" : "");
    compose(banner->text, sizeof(banner->text), head, alarm->consequence, alarm->response, "");
}

static void banner_words(struct banner *banner, const struct plant *plant,
                         const struct alarm_set *set, const struct hall_safety *hall)
{
    const char *name = banner->cause == BANNER_ALARM ? plant->alarm[banner->index].name
                                                     : plant->hall[banner->index].name;
    text_printable(banner->subject, sizeof(banner->subject), name);
    char raw[sizeof(banner->text)], lost[120], reading[80];
    switch (banner->cause) {
    case BANNER_OXYGEN_LOW:
    case BANNER_OXYGEN_DOUBT:
    case BANNER_OXYGEN_UNKNOWN:
        oxygen_text(banner, plant, &hall[banner->index]);
        break;
    case BANNER_MONITOR_LOST:
        lost_monitors(lost, sizeof(lost), plant, &plant->hall[banner->index],
                      &hall[banner->index]);
        oxygen_reading(reading, sizeof(reading), plant, &hall[banner->index], 0);
        text_format(
            banner->text, sizeof(banner->text),
            "OXYGEN MONITOR NOT GOOD IN %s: %s. The oxygen there is unknown. (lowest of "
            "the usable: %.60s)",
            banner->subject, lost, reading);
        break;
    case BANNER_NO_MONITOR:
        text_format(banner->text, sizeof(banner->text),
                    "No oxygen monitor is read in %s: its air is not watched here.",
                    banner->subject);
        break;
    case BANNER_ALARM:
        alarm_text(banner, plant, alarm_state(set, banner->index));
        break;
    }
    text_copy(raw, sizeof(raw), banner->text);
    text_printable(banner->text, sizeof(banner->text), raw);
}

/* ---- the step
 * ------------------------------------------------------------------------------- */

/* A statement that was pushed out of a full list has not been cleared. */
static bool pushed_out(const struct banner *banner, const struct banner_list *now,
                       const struct alarm_set *set)
{
    if (now->more == 0)
        return false;
    if (banner->cause != BANNER_ALARM)
        return true;
    const struct alarm_state *state = alarm_state(set, banner->index);
    return alarm_stands(state) || state->unknown;
}

static void tell_changes(const struct banner_list *before, const struct banner_list *now,
                         const struct alarm_set *set, int64_t utc_ns,
                         struct journal_step *journal)
{
    for (int i = 0; i < before->count; i++) {
        const struct banner *old = &before->at[i];
        if (banner_find(now, old->cause, old->index) == NULL && !pushed_out(old, now, set))
            journal_add(journal, utc_ns, JOURNAL_BANNER, 0, old->subject, "cleared", "",
                        old->text);
    }
    for (int i = 0; i < now->count; i++) {
        const struct banner *new = &now->at[i];
        const struct banner *old = banner_find(before, new->cause, new->index);
        if (old == NULL || old->cause != new->cause || old->action_level != new->action_level)
            journal_add(journal, utc_ns, JOURNAL_BANNER, 0, new->subject, "shown", "",
                        new->text);
    }
}

void banner_step(struct banner_list *list, const struct plant *plant,
                 const struct alarm_set *set, const struct hall_safety *hall, int64_t utc_ns,
                 struct journal_step *journal)
{
    struct statement_list found = {0};
    struct banner_list before = *list;
    for (int i = 0; i < plant->hall_count; i++)
        hall_statements(&found, plant, i, &hall[i], &before);
    for (int i = 0; i < plant->alarm_count; i++)
        alarm_statement(&found, plant, i, alarm_state(set, i), hall);

    list->count = found.count;
    list->more = found.more;
    for (int i = 0; i < found.count; i++) {
        const struct statement *statement = &found.at[i];
        struct banner *banner = &list->at[i];
        const struct banner *old = banner_find(&before, statement->cause, statement->index);
        *banner = (struct banner){
            .level = statement->level,
            .since_utc_ns =
                old != NULL && old->since_utc_ns < utc_ns ? old->since_utc_ns : utc_ns,
            .cause = statement->cause,
            .index = statement->index,
            .action_level = statement->action_level,
        };
        banner_words(banner, plant, set, hall);
    }
    tell_changes(&before, list, set, utc_ns, journal);
}

/* Length of words without a closing "prevail[s] over this display", which the line says itself.
 */
static size_t without_prevail(const char *words)
{
    static const char *const endings[] = {
        " prevail over this display", " prevails over this display", " prevail", " prevails"};
    size_t length = strlen(words);
    while (length > 0 &&
           (words[length - 1] == '.' || isspace((unsigned char)words[length - 1])))
        length--;
    for (size_t i = 0; i < ARRAY_LENGTH(endings); i++) {
        size_t ending = strlen(endings[i]);
        if (length > ending && strncmp(words + length - ending, endings[i], ending) == 0)
            return length - ending;
    }
    return length;
}

void banner_advisory(char *dst, size_t size, const struct plant *plant)
{
    char words[200];
    text_printable(words, sizeof(words),
                   plant->site.rules != NULL ? plant->site.rules
                                             : "Site rules, local codes, licensed practice");
    words[without_prevail(words)] = '\0';
    text_format(dst, size, "ADVISORY ONLY. %s and fixed hall alarms prevail.", words);
}
