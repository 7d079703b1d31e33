/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The record: what goes in comes out, bit for bit; a file that is no record is left alone; a
 * second writer is refused; a writer that dies loses nothing that was committed.
 */
#include <fcntl.h>
#include <setjmp.h>
#include <signal.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdlib.h>
#include <string.h>
#include <sys/wait.h>
#include <unistd.h>

#include <cmocka.h>

#include "ullage/history.h"
#include "ullage/simulator.h"

static struct problems problems;
static char folder[] = "/tmp/ullage-record-XXXXXX";
static char path[64];
static struct plant *plant;
static struct arena *arena;
static struct frame frame;
static struct engine *engine;
static struct simulator *simulator;
static int64_t now_ns;

static int make_plant(void **state)
{
    struct error err;
    (void)state;
    arena = arena_create();
    return mkdtemp(folder) == NULL || arena == NULL ||
           plant_read("config/tarn-hollow.ini", &plant, &problems) != 0 ||
           frame_init(&frame, plant, arena) != 0 || engine_create(plant, &engine, &err) != 0 ||
           simulator_create(plant, &(struct simulator_options){.seed = 5}, &simulator, &err) !=
               0;
}

static int free_plant(void **state)
{
    char command[96];
    (void)state;
    simulator_free(simulator);
    engine_free(engine);
    plant_free(plant);
    arena_free(arena);
    text_format(command, sizeof(command), "rm -rf '%s'", folder);
    return system(command) != 0;
}

static int new_path(void **state)
{
    static int number;
    (void)state;
    text_format(path, sizeof(path), "%s/%d.db", folder, number++);
    return 0;
}

static const struct results *next_frame(void)
{
    assert_int_equal(simulator_step(simulator, 1, NULL), 0);
    now_ns = now_ns == 0 ? INT64_C(1796083200) * NS_PER_S : now_ns + NS_PER_S;
    simulator_frame(simulator, now_ns, &frame);
    return engine_step(engine, &frame, NULL, 0);
}

static struct record_writer *open_writer(void)
{
    struct record_writer *writer = NULL;
    struct error err = {0};
    if (record_writer_open(path, plant, "config/tarn-hollow.ini", &writer, &err) != 0)
        fail_msg("%s", err.text);
    return writer;
}

static struct record_reader *open_reader(void)
{
    struct record_reader *reader = NULL;
    struct error err = {0};
    if (record_reader_open(path, &reader, &err) != 0)
        fail_msg("%s", err.text);
    return reader;
}

static int reader_tag(const struct record_reader *reader, const char *name)
{
    for (int i = 0; i < record_reader_tag_count(reader); i++)
        if (strcmp(record_reader_tag(reader, i)->name, name) == 0)
            return i;
    fail_msg("%s is not in the record", name);
    return -1;
}

static void test_frames_come_out_as_they_went_in_bit_for_bit(void **state)
{
    enum { FRAMES = 20 };
    struct record_writer *writer = open_writer();
    struct error err = {0};
    size_t tags = (size_t)plant_tag_count(plant);
    struct quantity *kept = calloc(FRAMES * tags, sizeof(*kept)),
                    *value = calloc(tags, sizeof(*value));
    int64_t first = now_ns + NS_PER_S, utc_ns;
    (void)state;
    assert_non_null(kept);
    assert_non_null(value);
    for (size_t k = 0; k < FRAMES; k++) {
        const struct results *results = next_frame();
        if (k == 0)
            first = now_ns;
        for (int i = 0; i < plant->point_count; i++)
            kept[k * tags + (size_t)i] = (struct quantity){
                frame.sample[i].value, frame.sample[i].u, frame.sample[i].quality};
        for (int i = 0; i < plant->derived_count; i++)
            kept[k * tags + (size_t)(plant->point_count + i)] = results->derived[i].quantity;
        assert_int_equal(record_writer_append(writer, &frame, results, NULL, 0, &err), 0);
    }
    struct record_reader *reader = open_reader(); /* while the writer has it open */
    assert_int_equal(record_reader_tag_count(reader), (int)tags);
    assert_int_equal(record_reader_seek(reader, INT64_MIN, INT64_MAX, &err), 0);
    for (size_t k = 0; k < FRAMES; k++) {
        assert_int_equal(record_reader_next(reader, &utc_ns, value, &err), 1);
        assert_true(utc_ns == first + (int64_t)k * NS_PER_S);
        for (int i = 0; i < (int)tags; i++) {
            const struct quantity *want = &kept[k * tags + (size_t)i];
            const struct quantity *got = &value[reader_tag(reader, plant_tag_name(plant, i))];
            assert_memory_equal(&got->value, &want->value, sizeof(double));
            assert_memory_equal(&got->u, &want->u, sizeof(double));
            assert_int_equal(got->quality, want->quality);
        }
    }
    assert_int_equal(record_reader_next(reader, &utc_ns, value, &err), 0);
    int64_t from, to;
    assert_int_equal(record_reader_span(reader, &from, &to, &err), 0);
    assert_true(from == first && to == now_ns);
    record_reader_close(reader);
    record_writer_close(writer);
    free(kept);
    free(value);
}

static int count_entry(const struct journal_entry *entry, void *context)
{
    struct journal_entry *last = context;
    *last = *entry;
    last->priority++;
    return 0;
}

static void test_journal_keeps_its_order_and_hostile_text(void **state)
{
    struct record_writer *writer = open_writer();
    struct error err = {0};
    const struct results *results = next_frame();
    struct journal_entry entries[2] = {
        {.utc_ns = now_ns,
         .kind = JOURNAL_ALARM,
         .priority = 2,
         .subject = "a",
         .state = "active"},
        {.utc_ns = now_ns,                .kind = JOURNAL_NOTE,    .subject = "b", .user = "o'brien"}
    };
    struct journal_entry last;
    (void)state;
    text_copy(entries[1].text, sizeof(entries[1].text), "x\",'); DROP TABLE journal; --");
    assert_int_equal(record_writer_append(writer, &frame, results, entries, 2, &err), 0);
    record_writer_close(writer);
    struct record_reader *reader = open_reader();
    assert_int_equal(
        record_reader_journal(reader, INT64_MIN, INT64_MAX, count_entry, &last, &err), 0);
    assert_int_equal(last.kind, JOURNAL_NOTE); /* the second came second */
    assert_string_equal(last.text, entries[1].text);
    assert_string_equal(last.user, "o'brien");
    FILE *out = tmpfile();
    char line[400];
    assert_non_null(out);
    assert_int_equal(export_journal(reader, INT64_MIN, INT64_MAX, out, &err), 0);
    rewind(out);
    assert_non_null(fgets(line, sizeof(line), out));
    assert_string_equal(line, "time,kind,subject,priority,state,user,text\r\n");
    assert_non_null(fgets(line, sizeof(line), out));
    assert_non_null(strstr(line, ",alarm,a,2,active,,"));
    assert_non_null(fgets(line, sizeof(line), out));
    /* RFC 4180: a quote within a quoted field is doubled. */
    assert_non_null(strstr(line, "\"x\"\",'); DROP TABLE journal; --\""));
    fclose(out);
    record_reader_close(reader);
}

static void test_exported_points_read_back_as_the_number_of_the_frame(void **state)
{
    struct record_writer *writer = open_writer();
    struct error err = {0};
    char line[8192];
    (void)state;
    assert_int_equal(record_writer_append(writer, &frame, next_frame(), NULL, 0, &err), 0);
    record_writer_close(writer);
    struct record_reader *reader = open_reader();
    bool *chosen = calloc((size_t)record_reader_tag_count(reader), sizeof(*chosen));
    assert_non_null(chosen);
    for (int i = 0; i < plant->point_count; i++)
        chosen[i] = true;
    const struct export_options options = {
        .from_utc_ns = INT64_MIN, .to_utc_ns = INT64_MAX, .tag = chosen};
    FILE *out = tmpfile();
    assert_non_null(out);
    assert_int_equal(export_frames(reader, &options, out, &err), 0);
    rewind(out);
    assert_non_null(fgets(line, sizeof(line), out));
    assert_true(strncmp(line, "time,PT-900 [kPa],PT-101 [kPa(g)],", 34) == 0);
    assert_non_null(fgets(line, sizeof(line), out));
    char *rest = NULL, *field = strtok_r(line, ",\r\n", &rest);
    for (int i = 0; i < plant->point_count; i++) {
        const struct point *point = &plant->point[i];
        field = strtok_r(NULL, ",\r\n", &rest);
        assert_non_null(field);
        double own = strtod(field, NULL);
        double again = point->read.type == REGISTER_BIT
                           ? own
                           : point_round(point, unit_to_si(&point->unit, own));
        if (memcmp(&again, &frame.sample[i].value, sizeof(double)) != 0)
            fail_msg("%s: %s reads back as %.17g, was %.17g", point->name, field, again,
                     frame.sample[i].value);
    }
    fclose(out);
    free(chosen);
    record_reader_close(reader);
}

static void test_what_is_no_record_is_refused_and_left_alone(void **state)
{
    static const char text[] =
        "this is no database, but somebody's letter, long enough to be read";
    struct record_writer *writer = NULL;
    struct record_reader *reader = NULL;
    struct error err = {0};
    char after[sizeof(text)] = "";
    (void)state;
    FILE *file = fopen(path, "w");
    assert_non_null(file);
    fputs(text, file);
    fclose(file);
    assert_int_not_equal(record_writer_open(path, plant, NULL, &writer, &err), 0);
    assert_true(err.text[0] != '\0');
    assert_int_not_equal(record_reader_open(path, &reader, &err), 0);
    file = fopen(path, "r");
    assert_non_null(file);
    assert_non_null(fgets(after, sizeof(after), file));
    fclose(file);
    assert_string_equal(after, text);
    assert_int_not_equal(record_reader_open("/nonexistent/x.db", &reader, &err), 0);
    assert_int_not_equal(record_writer_open("/nonexistent/x.db", plant, NULL, &writer, &err),
                         0);
}

static void test_a_second_writer_is_refused_while_the_first_lives(void **state)
{
    struct record_writer *first = open_writer(), *second = NULL;
    struct error err = {0};
    (void)state;
    assert_int_not_equal(record_writer_open(path, plant, NULL, &second, &err), 0);
    assert_non_null(strstr(err.text, "another process"));
    record_writer_close(first);
    second = open_writer();
    record_writer_close(second);
}

static void test_a_killed_writer_loses_nothing_that_was_committed(void **state)
{
    enum { FRAMES = 7 };
    struct error err = {0};
    int pipe_fd[2], status;
    char byte;
    (void)state;
    assert_int_equal(pipe(pipe_fd), 0);
    pid_t child = fork();
    assert_true(child >= 0);
    if (child == 0) {
        struct record_writer *writer = open_writer();
        for (int i = 0; i < FRAMES; i++)
            if (record_writer_append(writer, &frame, next_frame(), NULL, 0, &err) != 0)
                _exit(1);
        if (write(pipe_fd[1], "x", 1) != 1) /* all of them are committed now */
            _exit(1);
        for (;;) /* more of them, until it is killed in the midst */
            if (record_writer_append(writer, &frame, next_frame(), NULL, 0, &err) != 0)
                _exit(1);
    }
    assert_int_equal(read(pipe_fd[0], &byte, 1), 1);
    kill(child, SIGKILL);
    assert_int_equal(waitpid(child, &status, 0), child);
    assert_true(WIFSIGNALED(status));
    close(pipe_fd[0]);
    close(pipe_fd[1]);
    struct record_reader *reader = open_reader();
    struct quantity *value = calloc((size_t)record_reader_tag_count(reader), sizeof(*value));
    int64_t utc_ns;
    int frames = 0, code;
    assert_non_null(value);
    assert_int_equal(record_reader_seek(reader, INT64_MIN, INT64_MAX, &err), 0);
    while ((code = record_reader_next(reader, &utc_ns, value, &err)) == 1) {
        frames++;
        /* A frame is there whole or not at all. */
        for (int i = 0; i < plant->point_count; i++)
            assert_int_equal(value[i].quality, QUALITY_GOOD);
    }
    assert_int_equal(code, 0);
    assert_true(frames >= FRAMES);
    free(value);
    record_reader_close(reader);
    record_writer_close(open_writer()); /* and it can be gone on with */
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test_setup(test_frames_come_out_as_they_went_in_bit_for_bit, new_path),
        cmocka_unit_test_setup(test_journal_keeps_its_order_and_hostile_text, new_path),
        cmocka_unit_test_setup(test_exported_points_read_back_as_the_number_of_the_frame,
                               new_path),
        cmocka_unit_test_setup(test_what_is_no_record_is_refused_and_left_alone, new_path),
        cmocka_unit_test_setup(test_a_second_writer_is_refused_while_the_first_lives, new_path),
        cmocka_unit_test_setup(test_a_killed_writer_loses_nothing_that_was_committed, new_path),
    };
    return cmocka_run_group_tests(tests, make_plant, free_plant);
}
