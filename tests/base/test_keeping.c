/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Errors, the arena and the log: what base.h promises of them. No outside source: the contract
 * is the project's own; alignment is ISO C17 6.2.8 (max_align_t).
 */
#include <errno.h>
#include <pthread.h>
#include <stdalign.h>
#include <unistd.h>

#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>
#include <string.h>

#include <cmocka.h>

#include "ullage/base.h"

static void test_error_keeps_code_and_one_printable_line(void **state)
{
    (void)state;
    struct error err = {0};
    assert_int_equal(error_set(&err, ERR_CONFIG, "%s:%d: bad\nthing \x1b[2J", "a.ini", 7),
                     ERR_CONFIG);
    assert_int_equal(err.code, ERR_CONFIG);
    assert_string_equal(err.text, "a.ini:7: bad?thing ?[2J");
    assert_int_equal(error_context(&err, "link %s", "north"), ERR_CONFIG);
    assert_string_equal(err.text, "link north: a.ini:7: bad?thing ?[2J");
    assert_int_equal(error_set(NULL, ERR_IO, "nobody listens"), ERR_IO);
    assert_int_equal(error_context(NULL, "nobody"), ERR_ARGUMENT);
}

static void test_error_bears_sentences_of_any_length(void **state)
{
    (void)state;
    char longer[4000];
    memset(longer, 'x', sizeof(longer) - 1);
    longer[sizeof(longer) - 1] = '\0';
    struct error err = {0};
    error_set(&err, ERR_IO, "%s", longer);
    assert_int_equal(strlen(err.text), sizeof(err.text) - 1);
    for (int i = 0; i < 5; i++)
        error_context(&err, "%s", longer);
    assert_int_equal(strlen(err.text), sizeof(err.text) - 1);
    assert_int_equal(err.code, ERR_IO);
    /* Its own text as an argument, as a caller does who adds to a sentence. */
    error_set(&err, ERR_IO, "no");
    error_set(&err, ERR_NETWORK, "why: %s", err.text);
    assert_string_equal(err.text, "why: no");
}

static void test_arena_gives_zeroed_aligned_memory_that_does_not_overlap(void **state)
{
    (void)state;
    struct arena *arena = arena_create();
    assert_non_null(arena);
    unsigned char *taken[300];
    for (size_t i = 0; i < ARRAY_LENGTH(taken); i++) {
        size_t size = 1 + i * 7;
        taken[i] = arena_take(arena, size, 1);
        assert_non_null(taken[i]);
        assert_int_equal((uintptr_t)taken[i] % alignof(max_align_t), 0);
        for (size_t k = 0; k < size; k++)
            assert_int_equal(taken[i][k], 0);
        memset(taken[i], (int)(i % 255) + 1, size);
    }
    for (size_t i = 0; i < ARRAY_LENGTH(taken); i++)
        for (size_t k = 0; k < 1 + i * 7; k++)
            assert_int_equal(taken[i][k], (i % 255) + 1);
    arena_free(arena);
    arena_free(NULL);
}

static void test_arena_takes_large_and_refuses_impossible_requests(void **state)
{
    (void)state;
    struct arena *arena = arena_create();
    assert_non_null(arena);
    unsigned char *large = arena_take(arena, 1000, 1000);
    assert_non_null(large);
    large[999999] = 1;
    assert_non_null(arena_take(arena, 0, 8));
    assert_non_null(arena_take(arena, 8, 0));
    assert_null(arena_take(arena, SIZE_MAX, 2));
    assert_null(arena_take(arena, SIZE_MAX / 8, 16));
    char *text = arena_text(arena, "Tarn Hollow");
    assert_string_equal(text, "Tarn Hollow");
    arena_free(arena);
}

struct heard {
    int lines;
    enum log_level level;
    char last[640];
};

static void hear(enum log_level level, const char *line, void *context)
{
    struct heard *heard = context;
    heard->lines++;
    heard->level = level;
    text_copy(heard->last, sizeof(heard->last), line);
}

static void test_log_passes_printable_lines_of_its_level_and_keeps_errno(void **state)
{
    (void)state;
    struct heard heard = {0};
    log_set_sink(hear, &heard);
    errno = ENOENT;
    log_warning("link %s: no answer\x1b[31m", "north");
    assert_int_equal(errno, ENOENT);
    assert_int_equal(heard.lines, 1);
    assert_int_equal(heard.level, LOG_LEVEL_WARNING);
    assert_string_equal(heard.last, "link north: no answer?[31m");
    log_debug("not asked for");
    assert_int_equal(heard.lines, 1);
    log_set_level(LOG_LEVEL_DEBUG);
    log_debug("asked for");
    assert_int_equal(heard.lines, 2);
    log_set_level(LOG_LEVEL_ERROR);
    log_warning("too quiet");
    log_notice("too quiet");
    assert_int_equal(heard.lines, 2);
    log_error("loud");
    assert_int_equal(heard.lines, 3);
    log_set_level(LOG_LEVEL_NOTICE);
    log_set_sink(NULL, NULL);
}

enum { THREADS = 4, LINES = 2000 };

static void *chatter(void *context)
{
    (void)context;
    for (int i = 0; i < LINES; i++)
        log_notice("line %d", i);
    return NULL;
}

static void test_log_loses_no_line_of_many_threads(void **state)
{
    (void)state;
    /* The sink counts without atomics: only the log's lock keeps the sum right. */
    struct heard heard = {0};
    log_set_sink(hear, &heard);
    pthread_t threads[THREADS];
    for (int i = 0; i < THREADS; i++)
        assert_int_equal(pthread_create(&threads[i], NULL, chatter, NULL), 0);
    for (int i = 0; i < THREADS; i++)
        assert_int_equal(pthread_join(threads[i], NULL), 0);
    log_set_sink(NULL, NULL);
    assert_int_equal(heard.lines, THREADS * LINES);
}

static void test_log_without_a_sink_writes_whole_lines_to_stderr(void **state)
{
    (void)state;
    FILE *file = tmpfile();
    assert_non_null(file);
    fflush(stderr);
    int saved = dup(STDERR_FILENO);
    assert_true(saved >= 0);
    assert_true(dup2(fileno(file), STDERR_FILENO) >= 0);
    log_error("disk full\nhalf");
    log_notice("ready");
    fflush(stderr);
    assert_true(dup2(saved, STDERR_FILENO) >= 0);
    close(saved);
    char text[200] = "";
    rewind(file);
    size_t length = fread(text, 1, sizeof(text) - 1, file);
    text[length] = '\0';
    fclose(file);
    assert_string_equal(text, "ullage: error: disk full?half\nullage: ready\n");
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_error_keeps_code_and_one_printable_line),
        cmocka_unit_test(test_error_bears_sentences_of_any_length),
        cmocka_unit_test(test_arena_gives_zeroed_aligned_memory_that_does_not_overlap),
        cmocka_unit_test(test_arena_takes_large_and_refuses_impossible_requests),
        cmocka_unit_test(test_log_passes_printable_lines_of_its_level_and_keeps_errno),
        cmocka_unit_test(test_log_loses_no_line_of_many_threads),
        cmocka_unit_test(test_log_without_a_sink_writes_whole_lines_to_stderr),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
