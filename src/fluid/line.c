/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The saturation line read from Chebyshev expansions of the equation's own solution (the method
 * of Bell, Alpert, Int. J. Thermophys. 42 (2021) 75, from memory). The phases' densities are
 * smooth in s = sqrt(1 - T/T_c), temperature in q = sqrt(ln(p_c/p));
 * pieces of equal width. The
 * tables in lines.c are made by 'make lines' and hold to 1e-11 where they apply; beyond their
 * end near the critical point the full solution decides.
 */
#include "equation.h"

#include <math.h>

/* Piece and place within it, -1 to 1, of a variable between low and high. */
static int piece_of(double value, double low, double high, int count, double *x)
{
    double at = (value - low) / (high - low) * count;
    int piece = (int)at;
    piece = piece < 0 ? 0 : piece >= count ? count - 1 : piece;
    *x = 2 * (at - piece) - 1;
    return piece;
}

/* Clenshaw's sum (Math. Tables Aids Comput. 9 (1955) 118). */
static double chebyshev(const double c[LINE_TERMS], double x)
{
    double b1 = 0, b2 = 0, twice = 2 * x;
    for (int i = LINE_TERMS - 1; i > 0; i--) {
        double b0 = twice * b1 - b2 + c[i];
        b2 = b1;
        b1 = b0;
    }
    return x * b1 - b2 + c[0];
}

bool line_at_temperature(const struct fluid *fluid, double temperature_k,
                         struct line_point *out)
{
    const struct saturation_line *line = fluid->line;
    if (line == NULL || !(temperature_k <= line->end_temperature_k) ||
        !(temperature_k >= fluid->limits.triple_temperature_k))
        return false;
    double s = sqrt(1 - temperature_k / line->critical_temperature_k), x;
    const struct line_piece *piece =
        &line->piece[piece_of(s, line->low, line->high, line->count, &x)];
    out->liquid = chebyshev(piece->liquid, x);
    out->vapour = exp(chebyshev(piece->ln_vapour, x));
    out->pressure_pa =
        fluid->limits.critical_pressure_pa * exp(chebyshev(piece->ln_pressure, x));
    return true;
}

bool line_temperature(const struct fluid *fluid, double pressure_pa, double *temperature_k)
{
    const struct saturation_line *line = fluid->line;
    if (line == NULL)
        return false;
    double q = sqrt(-log(pressure_pa / fluid->limits.critical_pressure_pa)), x;
    if (!(q >= line->inverse_low && q <= line->inverse_high))
        return false;
    int piece = piece_of(q, line->inverse_low, line->inverse_high, line->inverse_count, &x);
    double t = line->critical_temperature_k * chebyshev(line->inverse[piece], x);
    *temperature_k =
        t > fluid->limits.triple_temperature_k ? t : fluid->limits.triple_temperature_k;
    return true;
}
