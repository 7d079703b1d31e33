/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The rate of change behind rising_faster and falling_faster: ordinary weighted least squares,
 * updated in place. Exact on a straight line at any spacing of the frames. With n readings
 * within the fading time the noise of a single reading is reduced to about sigma / (time
 * sqrt(n)).
 */
#include "internal.h"

#include <math.h>

void slope_reset(struct slope *slope)
{
    *slope = (struct slope){0};
}

void slope_add(struct slope *slope, double step_s, double y, double time_s)
{
    if (slope->count > 0) {
        double keep = exp(-step_s / time_s);
        slope->weight *= keep;
        slope->tt *= keep;
        slope->ty *= keep;
        slope->mean_t_s -= step_s;
        slope->span_s += step_s;
    }
    slope->weight += 1;
    double t_from_mean = 0 - slope->mean_t_s;
    slope->mean_t_s += t_from_mean / slope->weight;
    slope->mean_y += (y - slope->mean_y) / slope->weight;
    slope->tt += t_from_mean * (0 - slope->mean_t_s);
    slope->ty += t_from_mean * (y - slope->mean_y);
    if (slope->count < 3)
        slope->count++;
}

bool slope_get(const struct slope *slope, double time_s, double *per_s)
{
    if (slope->count < 3 || slope->span_s < time_s / 2 || !(slope->tt > 0))
        return false;
    *per_s = slope->ty / slope->tt;
    return true;
}
