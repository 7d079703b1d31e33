/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * What the files of the alarm room share: words for limits and values, the slope of a reading,
 * and the queue of events that have not found room in a journal yet.
 */
#ifndef ULLAGE_ALARM_INTERNAL_H
#define ULLAGE_ALARM_INTERNAL_H

#include "ullage/alarm.h"

/* A value judged by the alarm (a rate for the rate conditions), at the digits u supports. */
void describe_value(char *dst, size_t size, const struct plant *plant,
                    const struct alarm *alarm, double value, double u);
bool alarm_is_rate(const struct alarm *alarm);

/* A least-squares line through the readings so far, weights fading as exp(-age/time_s). Times
 * are kept relative to the newest reading, so that no digit is lost to the epoch. */
struct slope {
    double weight, mean_t_s, mean_y; /* of the readings */
    double tt, ty;                   /* central second moments, weighted */
    double span_s;                   /* how far the readings reach back */
    int count;
};
void slope_reset(struct slope *slope);
/* One reading, step_s >= 0 after the last. */
void slope_add(struct slope *slope, double step_s, double y, double time_s);
/* False while the readings do not reach back far enough. */
bool slope_get(const struct slope *slope, double time_s, double *per_s);

/* What happened to an alarm; it becomes a journal entry when there is room. */
enum alarm_event_kind {
    EVENT_ACTIVE,
    EVENT_ACKNOWLEDGED,
    EVENT_RETURNED,
    EVENT_NORMAL,
    EVENT_NORMAL_BY_USER, /* acknowledged when it had returned already */
    EVENT_UNKNOWN,
    EVENT_KNOWN
};
struct alarm_event {
    int64_t utc_ns;
    enum alarm_event_kind kind;
    int alarm;
    enum alarm_phase phase; /* after it */
    enum quality quality;   /* of the watched quantity */
    double value, u;        /* as judged */
    char user[32];
};
struct alarm_queue {
    int first, count, room;
    struct alarm_event *at;
};
/* False if there is no room left. */
bool queue_push(struct alarm_queue *queue, const struct alarm_event *event);
/* Writes what fits, oldest first, and keeps the rest. */
void queue_drain(struct alarm_queue *queue, const struct plant *plant,
                 struct journal_step *journal);

#endif
