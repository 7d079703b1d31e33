/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Statistics without a plant word: the normal distribution, the least-squares line.
 */
#include "ullage/base.h"

#include <math.h>

double statistics_normal_cdf(double z)
{
    return 0.5 * erfc(-z / 1.41421356237309504880);
}

double statistics_normal_quantile(double p)
{
    /* By bisection of the cdf: no table, no fit. 80 halvings of a span of 80 reach a double's
     * spacing. */
    double low = -40, high = 40;
    for (int i = 0; i < 80; i++) {
        double middle = 0.5 * (low + high);
        if (statistics_normal_cdf(middle) < p)
            low = middle;
        else
            high = middle;
    }
    return 0.5 * (low + high);
}

int statistics_line(const double *t, const double *y, size_t n, struct line_fit *out)
{
    if (n < 3)
        return ERR_RANGE;
    double count = (double)n, mean_t = 0, mean_y = 0;
    for (size_t i = 0; i < n; i++) {
        mean_t += t[i] / count;
        mean_y += y[i] / count;
    }
    double stt = 0, sty = 0;
    for (size_t i = 0; i < n; i++) {
        stt += (t[i] - mean_t) * (t[i] - mean_t);
        sty += (t[i] - mean_t) * (y[i] - mean_y);
    }
    if (!(stt > 0) || !isfinite(stt) || !isfinite(sty))
        return ERR_RANGE;
    double slope = sty / stt, squares = 0;
    for (size_t i = 0; i < n; i++) {
        double residual = y[i] - mean_y - slope * (t[i] - mean_t);
        squares += residual * residual;
    }
    double sd = sqrt(squares / (count - 2));
    *out = (struct line_fit){
        .slope = slope,
        .u_slope = sd / sqrt(stt),
        .mean_t = mean_t,
        .mean_y = mean_y,
        .u_mean_y = sd / sqrt(count),
        .residual_sd = sd,
        .n = n,
    };
    return 0;
}
