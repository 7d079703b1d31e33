/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * base: what every room may use and no plant word may enter: errors, text, time, units and
 * quantities, statistics, memory, the log. All functions are thread-safe unless a comment says
 * otherwise. None reads the locale's decimal sign: the program sets LC_CTYPE only.
 */
#ifndef ULLAGE_BASE_H
#define ULLAGE_BASE_H

#include <stdarg.h>
#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>

#define PRINTF_LIKE(fmt, args) __attribute__((format(printf, fmt, args)))
#define MUST_CHECK __attribute__((warn_unused_result))
#define ARRAY_LENGTH(a) (sizeof(a) / sizeof((a)[0]))

/* ---- errors --------------------------------------------------------------------------------
 */

/* What kind of thing went wrong; the sentence in struct error says what, where and the mend. */
enum err {
    ERR_ARGUMENT = -1,    /* the caller asked for something that makes no sense */
    ERR_CONFIG = -2,      /* the plant file is wrong */
    ERR_RANGE = -3,       /* outside the validity of a method; outputs untouched */
    ERR_CONVERGE = -4,    /* an iteration did not arrive within its fixed limit */
    ERR_IO = -5,          /* a file or descriptor failed */
    ERR_NETWORK = -6,     /* a connection failed */
    ERR_DEVICE = -7,      /* a device answered, but not with what was asked */
    ERR_MEMORY = -8,      /* no memory */
    ERR_FORMAT = -9,      /* text or bytes do not have the form they must have */
    ERR_UNSUPPORTED = -10 /* no published model or no such feature here */
};

struct error {
    int code;       /* 0 or an enum err */
    char text[480]; /* one sentence, no newline */
};

/* Sets code and sentence, returns code. err may be NULL. */
int error_set(struct error *err, int code, const char *fmt, ...) PRINTF_LIKE(3, 4);
/* Puts "context: " before the sentence; returns the code that err holds. err may be NULL
 * (returns ERR_ARGUMENT then). */
int error_context(struct error *err, const char *fmt, ...) PRINTF_LIKE(2, 3);

/* ---- text ----------------------------------------------------------------------------------
 */

/* Copies with a terminating zero; false if it had to cut. size > 0. */
bool text_copy(char *dst, size_t size, const char *src);
/* printf to a buffer; false if cut. */
bool text_format(char *dst, size_t size, const char *fmt, ...) PRINTF_LIKE(3, 4);
/* Copies src with every control character and every byte that is not part of well-formed UTF-8
 * (and C1 controls, bidirectional overrides) replaced by '?'. For all text that comes from
 * config, devices or clients before it meets a terminal or log. */
void text_printable(char *dst, size_t size, const char *src);
/* The rune at the start of text and its length in bytes; 0 if the bytes are not well-formed
 * UTF-8 (rune untouched). */
size_t text_rune(const char *text, uint32_t *rune);
/* Cuts white space at both ends, in place; returns the first kept character. */
char *text_trim(char *text);
/* A whole text as a finite double, '.' as the decimal sign, optional exponent; nothing left
 * over. 0 or ERR_FORMAT / ERR_RANGE. */
int text_to_double(const char *text, double *out) MUST_CHECK;
/* A whole text as an integer, decimal or 0x, within low..high. 0, ERR_FORMAT or ERR_RANGE. */
int text_to_long(const char *text, long low, long high, long *out) MUST_CHECK;
/* Edit distance (insert, delete, replace, swap of neighbours = 1 each), case-insensitive ASCII.
 */
size_t text_distance(const char *a, const char *b);
/* The candidate nearest to text, or NULL if none is near enough to be a likely slip. candidates
 * is an array of count strings; NULL entries are skipped. */
const char *text_nearest(const char *text, const char *const *candidates, size_t count);

/* ---- time ----------------------------------------------------------------------------------
 */

#define NS_PER_S INT64_C(1000000000)

/* Nanoseconds since 1970-01-01T00:00:00Z, and of the monotonic clock. Never mixed. */
int64_t time_utc_ns(void);
int64_t time_mono_ns(void);
double time_ns_to_s(int64_t ns);
int64_t time_s_to_ns(double s);
/* "2026-11-30T23:59:59.000Z"; decimals 0..9. size >= 31. */
void time_format(char *dst, size_t size, int64_t utc_ns, int decimals);
/* ISO 8601 / RFC 3339 date-time with 'Z' or an offset; date alone is midnight UTC. A leap
 * second
 * (:60) is taken as the second after :59. 0 or ERR_FORMAT with the sentence. */
int time_parse(const char *text, int64_t *utc_ns, struct error *err) MUST_CHECK;
/* "20s", "10min", "4h", "90d", "400 ms": a positive span in seconds. 0 or ERR_FORMAT. */
int time_parse_span(const char *text, double *span_s, struct error *err) MUST_CHECK;
/* A span for people, at most two parts: "31 h", "2 d 4 h", "4 min 10 s", "850 ms". */
void time_format_span(char *dst, size_t size, double span_s);

/* ---- units ---------------------------------------------------------------------------------
 */

enum dimension {
    DIMENSION_NUMBER, /* pure number: 1, %, ppm, ppb, ppt */
    DIMENSION_PRESSURE,
    DIMENSION_TEMPERATURE,
    DIMENSION_LENGTH,
    DIMENSION_VOLUME,
    DIMENSION_MASS,
    DIMENSION_TIME,
    DIMENSION_MASS_FLOW,
    DIMENSION_VOLUME_FLOW,
    DIMENSION_NORMAL_FLOW, /* Nm3/h: volume flow at 0 degC, 101.325 kPa; inside: normal m3/s */
    DIMENSION_POWER,
    DIMENSION_ENERGY,
    DIMENSION_FIELD, /* V/m */
    DIMENSION_FREQUENCY,
    DIMENSION_CURRENT,
    DIMENSION_VOLTAGE,
    DIMENSION_SPEED,
    DIMENSION_PRESSURE_RATE, /* Pa/s */
    DIMENSION_RATE,          /* 1/s, 1/d */
    DIMENSION_BIT,           /* on or off: no unit */
    DIMENSION_COUNT
};

/* value_si = value * scale + offset. A gauge pressure keeps its own zero: value_si is then the
 * difference to the barometer, and whoever needs the absolute pressure adds it. */
struct unit {
    char symbol[16];
    enum dimension dimension;
    double scale;
    double offset;
    bool gauge;
};

/* Plain name of a dimension for sentences: "a pressure", "a temperature", "a pure number". */
const char *dimension_says(enum dimension dimension);
/* Reads a unit symbol with SI prefixes (f p n u m c k M G where they make sense), "" and "1"
 * are the pure number. 0 or ERR_FORMAT with nearest known symbol. */
int unit_parse(const char *symbol, struct unit *out, struct error *err) MUST_CHECK;
/* The SI unit of a dimension (bit: empty symbol). */
struct unit unit_si(enum dimension dimension);
double unit_to_si(const struct unit *unit, double value);
double unit_from_si(const struct unit *unit, double value_si);
/* Differences (and uncertainties): scale without offset. */
double unit_span_to_si(const struct unit *unit, double span);
double unit_span_from_si(const struct unit *unit, double span_si);
/* "12.5 kPa(g)", "-186 degC", "3 ppb", "0.5 1/d": number, space optional, unit. A text without
 * a unit is a pure number. 0 or ERR_FORMAT. unit and value_si are outputs; value_si by
 * unit_to_si. */
int unit_parse_value(const char *text, struct unit *unit, double *value_si,
                     struct error *err) MUST_CHECK;

/* ---- quantities ----------------------------------------------------------------------------
 */

#define QUALITY_LIST(X)                                                                        \
    X(GOOD, "good", ' ')                                                                       \
    X(UNCERTAIN, "uncertain", '?')                                                             \
    X(STALE, "stale", '~')                                                                     \
    X(BAD, "bad", '!')                                                                         \
    X(MISSING, "missing", '-')

#define X(id, word, mark) QUALITY_##id,
enum quality { QUALITY_LIST(X) QUALITY_COUNT };
#undef X
_Static_assert(QUALITY_COUNT <= 8, "a record block keeps quality in three bits");

const char *quality_word(enum quality quality);
char quality_mark(enum quality quality);
/* The less trustworthy of two. */
enum quality quality_worse(enum quality a, enum quality b);

/* A value in SI, its standard uncertainty (JCGM 100:2008), and whether to believe it. With a
 * quality of bad or missing value and u are 0 and mean nothing; no NaN ever carries meaning. */
struct quantity {
    double value;
    double u;
    enum quality quality;
};

struct quantity quantity_good(double value, double u);
struct quantity quantity_none(enum quality quality);
/* Good or uncertain: may be computed with. */
bool quantity_usable(struct quantity q);
/* Number of decimals at which value in its display unit shows no digit that u makes
 * meaningless: u keeps two significant digits at most. 0..9. u <= 0 gives fallback. */
int quantity_decimals(double u, int fallback);

/* ---- statistics ----------------------------------------------------------------------------
 */

/* Cumulative normal distribution; its inverse for 0 < p < 1. */
double statistics_normal_cdf(double z);
double statistics_normal_quantile(double p);
/* Ordinary least squares line y = mean_y + slope (t - mean_t) over n >= 3 points; u from the
 * scatter of the residuals. 0 or ERR_RANGE (too few points, no spread in t). */
struct line_fit {
    double slope, u_slope;
    double mean_t, mean_y, u_mean_y;
    double residual_sd;
    size_t n;
};
int statistics_line(const double *t, const double *y, size_t n,
                    struct line_fit *out) MUST_CHECK;

/* ---- memory --------------------------------------------------------------------------------
 */

/* Memory that is taken once at start-up and given back as a whole. arena_take returns zeroed,
 * aligned memory or NULL. Not thread-safe. */
struct arena;
struct arena *arena_create(void);
void *arena_take(struct arena *arena, size_t count, size_t size);
char *arena_text(struct arena *arena, const char *text);
void arena_free(struct arena *arena);

/* ---- log -----------------------------------------------------------------------------------
 */

enum log_level { LOG_LEVEL_ERROR, LOG_LEVEL_WARNING, LOG_LEVEL_NOTICE, LOG_LEVEL_DEBUG };

/* One line per event, subject first ("link north: no answer in 500 ms, retry in 8 s"). Text is
 * made printable; errno is kept. To stderr unless a sink is set. */
void log_error(const char *fmt, ...) PRINTF_LIKE(1, 2);
void log_warning(const char *fmt, ...) PRINTF_LIKE(1, 2);
void log_notice(const char *fmt, ...) PRINTF_LIKE(1, 2);
void log_debug(const char *fmt, ...) PRINTF_LIKE(1, 2);
void log_set_level(enum log_level level);
/* While curses owns the terminal, lines go here instead of stderr. Called under the log's lock,
 * from any thread. NULL restores stderr. */
typedef void log_sink(enum log_level level, const char *line, void *context);
void log_set_sink(log_sink *sink, void *context);

/* ---- CSV -----------------------------------------------------------------------------------
 *
 * RFC 4180, read tolerantly: any line ending, a byte order mark, white space around fields;
 * empty lines and lines that begin with '#' are skipped. A row holds at most CSV_ROW_MAX bytes
 * and CSV_FIELDS_MAX fields.
 */

enum { CSV_ROW_MAX = 1 << 20, CSV_FIELDS_MAX = 1 << 14 };

struct csv;
/* Reads from file, which stays the caller's. NULL: no memory. */
struct csv *csv_create(FILE *file);
void csv_free(struct csv *csv);
/* The next row: 1; 0 at the end; ERR_FORMAT with the line and what is wrong with it (the next
 * call goes on after that line); ERR_IO, ERR_MEMORY. */
int csv_read(struct csv *csv, struct error *err) MUST_CHECK;
int csv_count(const struct csv *csv); /* fields of the row */
/* A field of the row until the next csv_read; "" beyond its end. Not made printable. */
const char *csv_field(const struct csv *csv, int index);
long csv_line(const struct csv *csv); /* at which the row begins, from 1 */
/* The field of the row with this text, upper or lower case; -1: none. */
int csv_find(const struct csv *csv, const char *name);
/* Writes a field, quoted where it must be. */
void csv_write(FILE *file, const char *text);
/* The shortest decimal text that reads back as the same double. size >= 25. */
void csv_number(char *dst, size_t size, double value);

#endif
