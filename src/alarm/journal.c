/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Journal entries: their words, and the queue in which an alarm's events wait for room. No
 * event is lost in a flood; it is told late, with its own time.
 */
#include "internal.h"

#include <stdio.h>

/* Places that alarm_step leaves to the banners of the same frame: all shown, all cleared. */
enum { JOURNAL_RESERVE = 2 * BANNER_MAX };

const char *journal_kind_word(enum journal_kind kind)
{
    static const char *const words[] = {
        [JOURNAL_ALARM] = "alarm",     [JOURNAL_FINDING] = "finding",
        [JOURNAL_BANNER] = "banner",   [JOURNAL_NOTE] = "note",
        [JOURNAL_LINK] = "link",       [JOURNAL_CONFIG] = "config",
        [JOURNAL_PROGRAM] = "program", [JOURNAL_CLOCK] = "clock",
    };
    return words[kind];
}

void journal_add(struct journal_step *step, int64_t utc_ns, enum journal_kind kind,
                 int priority, const char *subject, const char *state, const char *user,
                 const char *text)
{
    if (step->count >= JOURNAL_STEP_MAX) {
        step->dropped++;
        return;
    }
    struct journal_entry *entry = &step->at[step->count++];
    *entry = (struct journal_entry){.utc_ns = utc_ns, .kind = kind, .priority = priority};
    text_printable(entry->subject, sizeof(entry->subject), subject != NULL ? subject : "");
    text_printable(entry->state, sizeof(entry->state), state != NULL ? state : "");
    text_printable(entry->user, sizeof(entry->user), user != NULL ? user : "");
    text_printable(entry->text, sizeof(entry->text), text != NULL ? text : "");
}

bool queue_push(struct alarm_queue *queue, const struct alarm_event *event)
{
    if (queue->count == queue->room)
        return false;
    queue->at[(queue->first + queue->count) % queue->room] = *event;
    queue->count++;
    return true;
}

static const char *event_state(const struct alarm_event *event)
{
    switch (event->kind) {
    case EVENT_ACTIVE:
        return "active";
    case EVENT_ACKNOWLEDGED:
        return "acknowledged";
    case EVENT_RETURNED:
        return "returned";
    case EVENT_NORMAL:
    case EVENT_NORMAL_BY_USER:
        return "normal";
    case EVENT_UNKNOWN:
        return "unknown";
    case EVENT_KNOWN:
        break;
    }
    return alarm_phase_word(event->phase);
}

static void event_text(char *dst, size_t size, const struct plant *plant,
                       const struct alarm_event *event)
{
    const struct alarm *alarm = &plant->alarm[event->alarm];
    const char *tag = plant_tag_name(plant, alarm->watch);
    bool usable = event->quality == QUALITY_GOOD || event->quality == QUALITY_UNCERTAIN;
    char limit[80], value[80] = "";
    alarm_limit_text(limit, sizeof(limit), plant, alarm);
    if (!usable || alarm->condition == ALARM_IS_BAD)
        text_copy(value, sizeof(value), quality_word(event->quality));
    else
        describe_value(value, sizeof(value), plant, alarm, event->value, event->u);
    const char *doubt = event->quality == QUALITY_UNCERTAIN ? " (uncertain)" : "";

    switch (event->kind) {
    case EVENT_ACTIVE:
        text_format(dst, size, "%s %s%s, alarm when %s, priority %d%s%s", tag, value, doubt,
                    limit, alarm->priority, alarm->consequence != NULL ? ": " : "",
                    alarm->consequence != NULL ? alarm->consequence : "");
        break;
    case EVENT_ACKNOWLEDGED:
        text_format(dst, size, "%s, alarm when %s, priority %d", tag, limit, alarm->priority);
        break;
    case EVENT_RETURNED:
    case EVENT_NORMAL:
        text_format(dst, size, "%s %s, alarm when %s", tag, value, limit);
        break;
    case EVENT_NORMAL_BY_USER:
        text_format(dst, size, "%s had returned before it was acknowledged", tag);
        break;
    case EVENT_UNKNOWN:
        if (event->quality == QUALITY_GOOD)
            text_format(dst, size, "%s: its rate is not known yet", tag);
        else
            text_format(dst, size, "%s is %s: that it is not %s cannot be told", tag,
                        quality_word(event->quality), limit);
        break;
    case EVENT_KNOWN:
        text_format(dst, size, "known again: %s %s, alarm when %s", tag, value, limit);
        break;
    }
}

void queue_drain(struct alarm_queue *queue, const struct plant *plant,
                 struct journal_step *journal)
{
    while (queue->count > 0 && journal->count < JOURNAL_STEP_MAX - JOURNAL_RESERVE) {
        const struct alarm_event *event = &queue->at[queue->first];
        const struct alarm *alarm = &plant->alarm[event->alarm];
        char text[400];
        event_text(text, sizeof(text), plant, event);
        journal_add(journal, event->utc_ns, JOURNAL_ALARM, alarm->priority, alarm->name,
                    event_state(event), event->user, text);
        queue->first = (queue->first + 1) % queue->room;
        queue->count--;
    }
}
