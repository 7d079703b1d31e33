/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Writes src/fluid/lines.c: the saturation line of every fluid as Chebyshev expansions of the
 * full solution of its equation. Pieces are halved until the expansion meets the solution
 * between its nodes; what is reached is said on standard error. Run by 'make lines' after a
 * fluid is added (with .line = NULL at first) or its figures change.
 */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>

#include "../../src/fluid/equation.h"

enum { PIECES_MAX = 32, PROBES = 23 };
/* The table ends this near to the critical temperature (relative); what is asked of it. */
static const double END = 1e-4, END_MAX = 5e-3, ENOUGH = 2e-12, ENOUGH_INVERSE = 2e-13;

struct solution {
    double liquid, ln_vapour, ln_pressure;
};

/* p/(R T rho_r) and g/(R T) up to terms of temperature, with their density derivatives, in
 * extended precision straight from the published terms: near the critical point a double's
 * rounding would be seen in the densities. */
struct branch {
    long double pressure, gibbs, stiffness;
};

static struct branch branch_at(const struct fluid *fluid, long double tau, long double delta)
{
    long double a = 0, d1 = 0, d2 = 0;
    for (int i = 0; i < fluid->term_count; i++) {
        const struct residual_term *term = &fluid->term[i];
        long double v = term->n * powl(delta, term->d) * powl(tau, term->t), k1 = term->d,
                    dk = 0;
        if (term->gauss) {
            long double away = delta - term->epsilon, later = tau - term->gamma;
            v *= expl(-term->eta * away * away - term->beta * later * later);
            k1 -= 2 * term->eta * delta * away;
            dk = -2 * term->eta * delta * (delta + away);
        } else if (term->l > 0) {
            long double power = powl(delta, term->l);
            v *= expl(-power);
            k1 -= term->l * power;
            dk = -term->l * term->l * power;
        }
        a += v;
        d1 += v * k1;
        d2 += v * (k1 * k1 - k1 + dk);
    }
    return (struct branch){delta * (1 + d1), a + d1 + logl(delta), 1 + 2 * d1 + d2};
}

/* The scheme of saturation.c. */
static struct solution solve(const struct fluid *fluid, double temperature)
{
    long double tau = (long double)fluid->reduce_temperature_k / temperature;
    double reduce = fluid->reduce_density_mol_m3;
    long double liquid = ancillary_liquid_mol_m3(fluid, temperature) / reduce;
    long double vapour = ancillary_vapour_mol_m3(fluid, temperature) / reduce;
    long double moved = 1, last = 2;
    for (int i = 0; i < 60 && (moved > 1e-15L || moved < last); i++) {
        struct branch l = branch_at(fluid, tau, liquid), v = branch_at(fluid, tau, vapour);
        long double miss_p = v.pressure - l.pressure, miss_g = v.gibbs - l.gibbs;
        long double determinant = v.stiffness * l.stiffness * (1 / liquid - 1 / vapour);
        long double step_l = v.stiffness * (miss_g - miss_p / vapour) / determinant;
        long double step_v = l.stiffness * (miss_g - miss_p / liquid) / determinant, share = 1;
        while (share > 1e-6L && (liquid + share * step_l <= vapour + share * step_v ||
                                 vapour + share * step_v <= 0))
            share *= 0.5L;
        liquid += share * step_l;
        vapour += share * step_v;
        last = moved;
        moved = fabsl(step_l) / liquid + fabsl(step_v) / vapour;
    }
    if (!(moved < 1e-13L) || !(liquid > vapour))
        return (struct solution){HUGE_VAL, HUGE_VAL, HUGE_VAL};
    long double pressure = branch_at(fluid, tau, vapour).pressure * reduce *
                           fluid->limits.gas_constant_j_mol_k * temperature /
                           fluid->limits.critical_pressure_pa;
    return (struct solution){(double)liquid, (double)logl(vapour), (double)logl(pressure)};
}

/* Least slope of pressure over density about the critical density. */
static double least_slope(const struct fluid *fluid, double temperature)
{
    struct isotherm isotherm;
    double least = HUGE_VAL;
    isotherm_set(&isotherm, fluid, temperature);
    for (double d = 0.8; d < 1.25; d += 1e-5) {
        struct residual_density r;
        residual_density(&isotherm, d, &r);
        double slope = 1 + 2 * r.d + r.dd;
        if (slope < least)
            least = slope;
    }
    return least;
}

/* Where the equation's own loop vanishes: the published critical point is rounded, or fitted
 * apart. */
static double critical_temperature(const struct fluid *fluid)
{
    double low = fluid->limits.critical_temperature_k * 0.999,
           high = fluid->limits.critical_temperature_k * 1.001;
    for (int i = 0; i < 40; i++) {
        double middle = 0.5 * (low + high);
        if (least_slope(fluid, middle) < 0)
            low = middle;
        else
            high = middle;
    }
    return high;
}

static double node(int i)
{
    return cos(acos(-1.0) * (i + 0.5) / LINE_TERMS);
}

static void expand(const double value[LINE_TERMS], double c[LINE_TERMS])
{
    for (int k = 0; k < LINE_TERMS; k++) {
        c[k] = 0;
        for (int i = 0; i < LINE_TERMS; i++)
            c[k] += value[i] * cos(acos(-1.0) * k * (i + 0.5) / LINE_TERMS);
        c[k] *= (k == 0 ? 1.0 : 2.0) / LINE_TERMS;
    }
}

static double larger(double a, double b)
{
    return b <= a ? a : isnan(b) ? HUGE_VAL : b;
}

static double make_pieces(const struct fluid *fluid, struct saturation_line *line,
                          struct line_piece *piece)
{
    double width = (line->high - line->low) / line->count, worst = 0;
    for (int p = 0; p < line->count; p++) {
        double v[3][LINE_TERMS], middle = line->low + (p + 0.5) * width;
        for (int i = 0; i < LINE_TERMS; i++) {
            double s = middle + 0.5 * width * node(i);
            struct solution at = solve(fluid, line->critical_temperature_k * (1 - s * s));
            v[0][i] = at.liquid;
            v[1][i] = at.ln_vapour;
            v[2][i] = at.ln_pressure;
        }
        expand(v[0], piece[p].liquid);
        expand(v[1], piece[p].ln_vapour);
        expand(v[2], piece[p].ln_pressure);
    }
    struct fluid trial = *fluid;
    line->piece = piece;
    trial.line = line;
    for (int i = 0; i < line->count * PROBES; i++) {
        double s = line->low + (i + 0.5) * (line->high - line->low) / (line->count * PROBES);
        double temperature = line->critical_temperature_k * (1 - s * s);
        struct solution at = solve(fluid, temperature);
        struct line_point got;
        if (!line_at_temperature(&trial, temperature, &got))
            continue;
        worst = larger(worst, fabs(got.liquid / at.liquid - 1));
        worst = larger(worst, fabs(log(got.vapour) - at.ln_vapour));
        worst = larger(worst, fabs(log(got.pressure_pa / fluid->limits.critical_pressure_pa) -
                                   at.ln_pressure));
    }
    return worst;
}

/* Temperature of a pressure by the expansions just made: they carry more digits of pressure
 * than of density. */
static double temperature_at(const struct fluid *fluid, double ln_p)
{
    double low = fluid->limits.triple_temperature_k, high = fluid->line->end_temperature_k;
    double pressure = fluid->limits.critical_pressure_pa * exp(ln_p);
    for (int i = 0; i < 100 && high - low > 2e-16 * high; i++) {
        double middle = 0.5 * (low + high);
        struct line_point at;
        if (line_at_temperature(fluid, middle, &at) && at.pressure_pa < pressure)
            low = middle;
        else
            high = middle;
    }
    return 0.5 * (low + high);
}

/* sqrt(ln(p_c/p)) by the expansions. */
static double root_at(const struct fluid *fluid, const struct saturation_line *line,
                      double temperature)
{
    struct fluid trial = *fluid;
    struct line_point at = {0};
    trial.line = line;
    if (!line_at_temperature(&trial, temperature, &at))
        exit(1);
    return sqrt(-log(at.pressure_pa / fluid->limits.critical_pressure_pa));
}

static double make_inverse(const struct fluid *fluid, struct saturation_line *line,
                           double inverse[][LINE_TERMS])
{
    double width = (line->inverse_high - line->inverse_low) / line->inverse_count, worst = 0;
    struct fluid trial = *fluid;
    trial.line = line;
    for (int p = 0; p < line->inverse_count; p++) {
        double v[LINE_TERMS], middle = line->inverse_low + (p + 0.5) * width;
        for (int i = 0; i < LINE_TERMS; i++) {
            double q = middle + 0.5 * width * node(i);
            v[i] = temperature_at(&trial, -q * q) / line->critical_temperature_k;
        }
        expand(v, inverse[p]);
    }
    line->inverse = (const double(*)[LINE_TERMS])inverse;
    int probes = 7 * line->inverse_count;
    for (int i = 0; i < probes; i++) {
        double q =
            line->inverse_low + (i + 0.5) * (line->inverse_high - line->inverse_low) / probes;
        double want = temperature_at(&trial, -q * q), got;
        if (line_temperature(&trial, fluid->limits.critical_pressure_pa * exp(-q * q), &got))
            worst = larger(worst, fabs(got / want - 1));
    }
    return worst;
}

static void print_terms(const double c[LINE_TERMS])
{
    printf("{");
    for (int k = 0; k < LINE_TERMS; k++)
        printf("%s%.17g", k > 0 ? ", " : "", c[k]);
    printf("}");
}

static void make(const struct fluid *fluid)
{
    static struct line_piece piece[PIECES_MAX];
    static double inverse[PIECES_MAX][LINE_TERMS];
    struct saturation_line line = {.count = 2, .inverse_count = 2};
    double triple = fluid->limits.triple_temperature_k, worst, worst_inverse;
    line.critical_temperature_k = critical_temperature(fluid);
    double end = END;
    do {
        line.end_temperature_k = fluid->limits.critical_temperature_k * (1 - end);
        line.low = sqrt(1 - line.end_temperature_k / line.critical_temperature_k);
        line.high = sqrt(1 - triple / line.critical_temperature_k);
        line.count = 4;
        while ((worst = make_pieces(fluid, &line, piece)) > ENOUGH && line.count < PIECES_MAX)
            line.count *= 2;
        end *= 1.5;
    } while (worst > ENOUGH && end < END_MAX);
    line.inverse_low = root_at(fluid, &line, line.end_temperature_k);
    line.inverse_high = root_at(fluid, &line, triple);
    while ((worst_inverse = make_inverse(fluid, &line, inverse)) > ENOUGH_INVERSE &&
           line.inverse_count < PIECES_MAX)
        line.inverse_count *= 2;
    fprintf(stderr, "%s: up to %.8g of T_c, %d pieces to %.1e, inverse %d pieces to %.1e\n",
            fluid->name, line.end_temperature_k / line.critical_temperature_k, line.count,
            worst, line.inverse_count, worst_inverse);
    printf("\nstatic const struct line_piece piece_%s[] = {\n", fluid->name);
    for (int p = 0; p < line.count; p++) {
        printf("    {.liquid = ");
        print_terms(piece[p].liquid);
        printf(",\n     .ln_vapour = ");
        print_terms(piece[p].ln_vapour);
        printf(",\n     .ln_pressure = ");
        print_terms(piece[p].ln_pressure);
        printf("},\n");
    }
    printf("};\nstatic const double inverse_%s[][LINE_TERMS] = {\n", fluid->name);
    for (int p = 0; p < line.inverse_count; p++) {
        printf("    ");
        print_terms(inverse[p]);
        printf(",\n");
    }
    printf("};\nconst struct saturation_line line_%s = {\n"
           "    .critical_temperature_k = %.17g,\n"
           "    .end_temperature_k = %.17g,\n    .low = "
           "%.17g,\n    .high = %.17g,\n"
           "    .count = %d,\n    .piece = piece_%s,\n    .inverse_low = %.17g,\n"
           "    .inverse_high = %.17g,\n    .inverse_count = %d,\n    .inverse = "
           "inverse_%s,\n};\n",
           fluid->name, line.critical_temperature_k, line.end_temperature_k, line.low,
           line.high, line.count, fluid->name, line.inverse_low, line.inverse_high,
           line.inverse_count, fluid->name);
}

int main(void)
{
    printf("/* SPDX-License-Identifier: MIT */\n/* Copyright the ullage authors */\n\n"
           "/*\n * Saturation lines as Chebyshev expansions. Made by 'make lines' "
           "(tests/tools/make_lines.c)\n * from the equations beside; do not edit. "
           "tests/fluid/test_line.c holds them to the solution.\n */\n"
           "#include \"equation.h\"\n\n/* clang-format off */\n");
    for (size_t i = 0; i < fluid_count(); i++)
        make(fluid_at(i));
    printf("/* clang-format on */\n");
    return 0;
}
