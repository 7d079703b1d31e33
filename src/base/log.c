/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The log: one line per event, printable, to stderr or to a sink. Its level, sink and lock are
 * the only writable globals of the program.
 */
#include "ullage/base.h"

#include <errno.h>
#include <pthread.h>
#include <stdio.h>

static pthread_mutex_t lock = PTHREAD_MUTEX_INITIALIZER;
static enum log_level threshold = LOG_LEVEL_NOTICE;
static log_sink *current_sink;
static void *sink_context;

static void write_line(enum log_level level, const char *fmt, va_list args) PRINTF_LIKE(2, 0);

static void write_line(enum log_level level, const char *fmt, va_list args)
{
    static const char *const words[] = {"error: ", "warning: ", "", "debug: "};
    int saved = errno;
    char raw[600], line[600];
    vsnprintf(raw, sizeof(raw), fmt, args);
    text_printable(line, sizeof(line), raw);
    pthread_mutex_lock(&lock);
    if (level <= threshold) {
        if (current_sink != NULL)
            current_sink(level, line, sink_context);
        else
            fprintf(stderr, "ullage: %s%s\n", words[level], line);
    }
    pthread_mutex_unlock(&lock);
    errno = saved;
}

void log_error(const char *fmt, ...)
{
    va_list args;
    va_start(args, fmt);
    write_line(LOG_LEVEL_ERROR, fmt, args);
    va_end(args);
}

void log_warning(const char *fmt, ...)
{
    va_list args;
    va_start(args, fmt);
    write_line(LOG_LEVEL_WARNING, fmt, args);
    va_end(args);
}

void log_notice(const char *fmt, ...)
{
    va_list args;
    va_start(args, fmt);
    write_line(LOG_LEVEL_NOTICE, fmt, args);
    va_end(args);
}

void log_debug(const char *fmt, ...)
{
    va_list args;
    va_start(args, fmt);
    write_line(LOG_LEVEL_DEBUG, fmt, args);
    va_end(args);
}

void log_set_level(enum log_level level)
{
    pthread_mutex_lock(&lock);
    threshold = level;
    pthread_mutex_unlock(&lock);
}

void log_set_sink(log_sink *sink, void *context)
{
    pthread_mutex_lock(&lock);
    current_sink = sink;
    sink_context = context;
    pthread_mutex_unlock(&lock);
}
