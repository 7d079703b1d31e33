/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Sliding windows of block means. Blocks lie oldest first in memory of twice the length, so
 * that sums run over plain arrays and the oldest are dropped by moving rarely. What must stay
 * true: weights of storage (slope) and of flow (rate) belong together: for any rate r and its
 * own trapezoid integral Y, sum slope Y = sum rate r.
 */
#include "ullage/balance.h"

#include <math.h>
#include <string.h>

int window_init(struct window *window, int series_count, int capacity, int64_t block_ns,
                int64_t phase_ns, struct arena *arena)
{
    size_t room = 2 * (size_t)capacity;
    *window = (struct window){.series_count = series_count,
                              .capacity = capacity,
                              .block_ns = block_ns,
                              .phase_ns = phase_ns};
    window->time_s = arena_take(arena, room, sizeof(double));
    window->frames = arena_take(arena, room, sizeof(double));
    window->series = arena_take(arena, room * (size_t)series_count, sizeof(double));
    if (window->time_s == NULL || window->frames == NULL || window->series == NULL)
        return ERR_MEMORY;
    return 0;
}

void window_restart(struct window *window)
{
    window->first = 0;
    window->count = 0;
}

const double *window_series(const struct window *window, int series)
{
    return window->series + (size_t)series * 2 * (size_t)window->capacity + window->first;
}

const double *window_time_s(const struct window *window)
{
    return window->time_s + window->first;
}

const double *window_frames(const struct window *window)
{
    return window->frames + window->first;
}

static void move_down(double *row, int first, int count)
{
    memmove(row, row + first, (size_t)count * sizeof(*row));
}

static void open_next(struct window *window)
{
    if (window->count == window->capacity) {
        window->first++;
        window->count--;
    }
    if (window->first + window->count == 2 * window->capacity) {
        move_down(window->time_s, window->first, window->count);
        move_down(window->frames, window->first, window->count);
        for (int s = 0; s < window->series_count; s++)
            move_down(window->series + (size_t)s * 2 * (size_t)window->capacity, window->first,
                      window->count);
        window->first = 0;
    }
    int at = window->first + window->count++;
    window->time_s[at] = window->frames[at] = 0;
    for (int s = 0; s < window->series_count; s++)
        window->series[(size_t)s * 2 * (size_t)window->capacity + (size_t)at] = 0;
}

bool window_push(struct window *window, int64_t utc_ns, const double *value)
{
    int64_t block = (utc_ns + window->phase_ns) / window->block_ns;
    bool opened = window->count == 0 || block != window->open_block;
    if (window->count == 0)
        window->origin_ns = utc_ns;
    if (opened) {
        open_next(window);
        window->open_block = block;
    }
    int at = window->first + window->count - 1;
    double n = window->frames[at] += 1;
    double t = time_ns_to_s(utc_ns - window->origin_ns);
    window->time_s[at] += (t - window->time_s[at]) / n;
    for (int s = 0; s < window->series_count; s++) {
        double *mean = &window->series[(size_t)s * 2 * (size_t)window->capacity + (size_t)at];
        *mean += (value[s] - *mean) / n;
    }
    return opened;
}

int window_from(const struct window *window, double span_s, double not_before_s)
{
    const double *t = window_time_s(window);
    if (window->count == 0)
        return 0;
    double oldest = t[window->count - 1] - span_s;
    if (oldest < not_before_s)
        oldest = not_before_s;
    /* A tenth of a block of slack: block means jitter with the frames that fell in. */
    oldest -= 0.1 * time_ns_to_s(window->block_ns);
    int low = 0, high = window->count - 1;
    while (low < high) {
        int middle = low + (high - low) / 2;
        if (t[middle] < oldest)
            low = middle + 1;
        else
            high = middle;
    }
    return low;
}

int window_weigh(const struct window *window, int from, struct window_weights *out)
{
    const double *t = window_time_s(window), *n = window_frames(window);
    int to = window->count;
    if (to - from < 3)
        return ERR_RANGE;
    double total = 0, mean = 0, squares = 0;
    for (int k = from; k < to; k++) {
        total += n[k];
        mean += n[k] * (t[k] - t[from]);
    }
    mean = t[from] + mean / total;
    for (int k = from; k < to; k++)
        squares += n[k] * (t[k] - mean) * (t[k] - mean);
    if (!(squares > 0))
        return ERR_RANGE;
    for (int k = from; k < to; k++)
        out->slope[k] = n[k] * (t[k] - mean) / squares;
    /* An interval's rate moves the integral of all blocks after it. */
    double after = 0;
    out->rate[to - 1] = 0;
    for (int k = to - 2; k >= from; k--) {
        after += out->slope[k + 1];
        double weight = 0.5 * after * (t[k + 1] - t[k]);
        out->rate[k + 1] += weight;
        out->rate[k] = weight;
    }
    out->from = from;
    out->to = to;
    out->span_s = t[to - 1] - t[from];
    out->frames = total;
    out->mean_s = mean;
    out->squares = squares;
    return 0;
}

double window_sum(const double *weight, const double *series, int from, int to)
{
    double sum = 0;
    for (int k = from; k < to; k++)
        sum += weight[k] * series[k];
    return sum;
}

void window_integrate(const struct window *window, int from, const double *rate, double factor,
                      double *y)
{
    const double *t = window_time_s(window);
    double integral = 0;
    for (int k = from + 1; k < window->count; k++) {
        integral += 0.5 * (rate[k - 1] + rate[k]) * (t[k] - t[k - 1]);
        y[k] += factor * integral;
    }
}

int window_line(const struct window *window, int from, int to, const double *y,
                struct window_line *out)
{
    const double *t = window_time_s(window), *n = window_frames(window);
    int count = to - from;
    if (count < 4)
        return ERR_RANGE;
    double total = 0, mean_t = 0, mean_y = 0;
    for (int k = from; k < to; k++) {
        total += n[k];
        mean_t += n[k] * (t[k] - t[from]);
        mean_y += n[k] * (y[k] - y[from]);
    }
    mean_t = t[from] + mean_t / total;
    mean_y = y[from] + mean_y / total;
    double stt = 0, sty = 0;
    for (int k = from; k < to; k++) {
        stt += n[k] * (t[k] - mean_t) * (t[k] - mean_t);
        sty += n[k] * (t[k] - mean_t) * (y[k] - mean_y);
    }
    if (!(stt > 0))
        return ERR_RANGE;
    double slope = sty / stt, squares = 0, lagged = 0, before = 0;
    for (int k = from; k < to; k++) {
        double weight = sqrt(n[k]);
        double residual = weight * (y[k] - mean_y - slope * (t[k] - mean_t));
        squares += residual * residual;
        lagged += residual * before;
        before = residual;
    }
    /* Residuals that follow each other carry less than their number says: the number is cut by
     * (1 - r)/(1 + r) (first-order autoregression). A fit takes about 2/count out of r. */
    double r = squares > 0 ? lagged / squares + 2.0 / count : 0;
    r = r < 0 ? 0 : r > 0.98 ? 0.98 : r;
    double variance = squares / (count - 2) * (1 + r) / (1 - r);
    out->slope = slope;
    out->u_slope = sqrt(variance / stt);
    out->sd = sqrt(squares / total);
    return 0;
}

int window_change(const struct window *window, int from, const double *y, double least_s,
                  double u_drift_rate, double z)
{
    enum { BLOCKS_LEAST = 12 };
    const double *t = window_time_s(window);
    int to = window->count;
    double span = to > from ? t[to - 1] - t[from] : 0;
    for (double part = 0.5; part > 0.1; part *= 0.5) {
        if (part * span < least_s)
            break;
        int split = window_from(window, part * span, t[from]);
        if (to - split < BLOCKS_LEAST || split - from < BLOCKS_LEAST)
            break;
        struct window_line old, young;
        if (window_line(window, from, split, y, &old) != 0 ||
            window_line(window, split, to, y, &young) != 0)
            break;
        double u = sqrt(old.u_slope * old.u_slope + young.u_slope * young.u_slope +
                        u_drift_rate * u_drift_rate);
        if (fabs(young.slope - old.slope) > z * u && u > 0)
            return split;
    }
    return from;
}
