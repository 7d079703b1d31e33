/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Time: UTC in nanoseconds, the monotonic clock, ISO 8601 (RFC 3339) on every edge. POSIX time
 * has no leap seconds, so a second 60 is taken as the second after 59.
 */
#include "ullage/base.h"

#include <ctype.h>
#include <math.h>
#include <stdio.h>
#include <string.h>
#include <time.h>

static int64_t clock_ns(clockid_t id)
{
    struct timespec now;
    clock_gettime(id, &now);
    return (int64_t)now.tv_sec * NS_PER_S + now.tv_nsec;
}

int64_t time_utc_ns(void)
{
    return clock_ns(CLOCK_REALTIME);
}

int64_t time_mono_ns(void)
{
    return clock_ns(CLOCK_MONOTONIC);
}

double time_ns_to_s(int64_t ns)
{
    return (double)(ns / NS_PER_S) + (double)(ns % NS_PER_S) * 1e-9;
}

int64_t time_s_to_ns(double s)
{
    if (!(s > -9.2e9))
        return INT64_MIN;
    if (s > 9.2e9)
        return INT64_MAX;
    return (int64_t)llround(s * 1e9);
}

/* Days since 1970-01-01 of a date in the proleptic Gregorian calendar, and back: counted in
 * eras of 400 years (146097 days) that begin on 1 March, so that the leap day is the last of a
 * year. */
static int64_t days_of_date(int64_t year, int month, int day)
{
    if (month <= 2)
        year--;
    int64_t era = (year >= 0 ? year : year - 399) / 400;
    int64_t of_era = year - era * 400;
    int64_t of_year = (153 * (month + (month > 2 ? -3 : 9)) + 2) / 5 + day - 1;
    return era * 146097 + of_era * 365 + of_era / 4 - of_era / 100 + of_year - 719468;
}

static void date_of_days(int64_t days, int64_t *year, int *month, int *day)
{
    days += 719468;
    int64_t era = (days >= 0 ? days : days - 146096) / 146097;
    int64_t of_era = days - era * 146097;
    int64_t year_of_era = (of_era - of_era / 1460 + of_era / 36524 - of_era / 146096) / 365;
    int64_t of_year = of_era - (365 * year_of_era + year_of_era / 4 - year_of_era / 100);
    int64_t shifted = (5 * of_year + 2) / 153;
    *day = (int)(of_year - (153 * shifted + 2) / 5 + 1);
    *month = (int)(shifted < 10 ? shifted + 3 : shifted - 9);
    *year = era * 400 + year_of_era + (*month <= 2 ? 1 : 0);
}

void time_format(char *dst, size_t size, int64_t utc_ns, int decimals)
{
    int64_t seconds = utc_ns / NS_PER_S, rest = utc_ns % NS_PER_S;
    if (rest < 0) {
        rest += NS_PER_S;
        seconds--;
    }
    int64_t days = seconds / 86400, of_day = seconds % 86400;
    if (of_day < 0) {
        of_day += 86400;
        days--;
    }
    int64_t year;
    int month, day;
    date_of_days(days, &year, &month, &day);
    char fraction[16] = "";
    if (decimals > 0) {
        snprintf(fraction, sizeof(fraction), ".%09lld", (long long)rest);
        fraction[1 + (decimals < 9 ? decimals : 9)] = '\0';
    }
    snprintf(dst, size, "%04lld-%02d-%02dT%02d:%02d:%02d%sZ", (long long)year, month, day,
             (int)(of_day / 3600), (int)(of_day / 60 % 60), (int)(of_day % 60), fraction);
}

/* Exactly count digits; advances *s. */
static bool digits(const char **s, int count, int *out)
{
    int value = 0;
    for (int i = 0; i < count; i++, (*s)++) {
        if (!isdigit((unsigned char)**s))
            return false;
        value = value * 10 + (**s - '0');
    }
    *out = value;
    return true;
}

static bool one_of(const char **s, const char *set)
{
    if (**s == '\0' || strchr(set, **s) == NULL)
        return false;
    (*s)++;
    return true;
}

static bool parse_offset(const char **s, int *offset_s)
{
    int hours, minutes;
    *offset_s = 0;
    if (one_of(s, "Zz"))
        return true;
    int sign = **s == '-' ? -1 : 1;
    if (!one_of(s, "+-") || !digits(s, 2, &hours))
        return false;
    one_of(s, ":");
    if (!digits(s, 2, &minutes) || hours > 23 || minutes > 59)
        return false;
    *offset_s = sign * (hours * 3600 + minutes * 60);
    return true;
}

struct moment {
    int year, month, day, hour, minute, second, offset_s;
    int64_t fraction_ns;
};

static bool parse_date(const char **s, struct moment *m)
{
    return digits(s, 4, &m->year) && one_of(s, "-") && digits(s, 2, &m->month) &&
           one_of(s, "-") && digits(s, 2, &m->day);
}

static bool parse_clock(const char **s, struct moment *m)
{
    if (!one_of(s, "Tt ") || !digits(s, 2, &m->hour) || !one_of(s, ":") ||
        !digits(s, 2, &m->minute))
        return false;
    bool seconds = one_of(s, ":");
    if (seconds && !digits(s, 2, &m->second))
        return false;
    if (seconds && one_of(s, ".,")) {
        int64_t unit_ns = NS_PER_S / 10;
        if (!isdigit((unsigned char)**s))
            return false;
        for (; isdigit((unsigned char)**s); (*s)++, unit_ns /= 10)
            m->fraction_ns += (**s - '0') * unit_ns;
    }
    return parse_offset(s, &m->offset_s) && **s == '\0';
}

int time_parse(const char *text, int64_t *utc_ns, struct error *err)
{
    static const int month_days[] = {31, 29, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31};
    const char *s = text;
    struct moment m = {0};
    if (!parse_date(&s, &m) || (*s != '\0' && !parse_clock(&s, &m)))
        return error_set(err, ERR_FORMAT,
                         "'%s' is no time; write it as 2026-11-30T23:59:59Z, or with an offset "
                         "such as +01:00",
                         text);
    bool leap = (m.year % 4 == 0 && m.year % 100 != 0) || m.year % 400 == 0;
    if (m.month < 1 || m.month > 12 || m.day < 1 || m.day > month_days[m.month - 1] ||
        (m.month == 2 && m.day == 29 && !leap))
        return error_set(err, ERR_FORMAT, "'%s': there is no such day", text);
    if (m.hour > 23 || m.minute > 59 || m.second > 60)
        return error_set(err, ERR_FORMAT, "'%s': there is no such time of day", text);
    int64_t seconds = days_of_date(m.year, m.month, m.day) * 86400 + m.hour * 3600 +
                      m.minute * 60 + m.second - m.offset_s;
    if (seconds > INT64_MAX / NS_PER_S - 1 || seconds < INT64_MIN / NS_PER_S + 1)
        return error_set(err, ERR_FORMAT, "'%s' is beyond the years 1678 to 2262", text);
    *utc_ns = seconds * NS_PER_S + m.fraction_ns;
    return 0;
}

int time_parse_span(const char *text, double *span_s, struct error *err)
{
    struct unit unit;
    double value;
    if (unit_parse_value(text, &unit, &value, NULL) != 0 || unit.dimension != DIMENSION_TIME)
        return error_set(err, ERR_FORMAT,
                         "'%s' is no span of time; write 20s, 10min, 4h or 90d", text);
    if (!(value > 0) || value > 3.2e9)
        return error_set(err, ERR_FORMAT, "'%s': a span is above 0 and at most 100 years",
                         text);
    *span_s = value;
    return 0;
}

/* "4 h 10 min", or one part where the second is 0 or not worth its digits. */
static void two_parts(char *dst, size_t size, const char *sign, double count, double per,
                      bool fine, const char *large, const char *small)
{
    long long whole = llround(count), parts = (long long)per;
    if (!fine || whole % parts == 0)
        snprintf(dst, size, "%s%lld %s", sign, llround(count / per), large);
    else
        snprintf(dst, size, "%s%lld %s %lld %s", sign, whole / parts, large, whole % parts,
                 small);
}

void time_format_span(char *dst, size_t size, double span_s)
{
    const char *sign = span_s < 0 ? "-" : "";
    double s = fabs(span_s);
    if (!(s < 3.2e11))
        snprintf(dst, size, "%sover 10000 years", sign);
    else if (s < 0.9995)
        snprintf(dst, size, "%s%.0f ms", sign, s * 1e3);
    else if (s < 59.5)
        snprintf(dst, size, "%s%.0f s", sign, s);
    else if (s < 3600 - 30)
        two_parts(dst, size, sign, s, 60, s < 600, "min", "s");
    else if (s < 2 * 86400 - 30 * 60) /* 31 h says more than 1 d 7 h to who plans a shift */
        two_parts(dst, size, sign, s / 60, 60, s < 36000, "h", "min");
    else
        two_parts(dst, size, sign, s / 3600, 24, s < 864000, "d", "h");
}
