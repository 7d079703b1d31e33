/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Any key, any size, any numbers, seeded: nothing crashes, nothing is lost at an edge, a
 * picture is a function of the screen and the view alone, and drawing takes no memory.
 */
#include "fixture.h"

#include <math.h>
#include <unistd.h>

#include "../../src/screen/canvas.h"

/* ---- memory: every request of this program is counted
 * --------------------------------------------- */

#if defined(__SANITIZE_ADDRESS__)
#define COUNTED 0
#elif defined(__has_feature)
#if __has_feature(address_sanitizer)
#define COUNTED 0
#endif
#endif
#if !defined(COUNTED) && defined(__GLIBC__)
#define COUNTED 1
#endif

#if COUNTED
static unsigned long requests;
extern void *__libc_malloc(size_t size);
extern void *__libc_calloc(size_t count, size_t size);
extern void *__libc_realloc(void *old, size_t size);
void *malloc(size_t size)
{
    requests++;
    return __libc_malloc(size);
}
void *calloc(size_t count, size_t size)
{
    requests++;
    return __libc_calloc(count, size);
}
void *realloc(void *old, size_t size)
{
    requests++;
    return __libc_realloc(old, size);
}
#endif

/* ---- a large plant
 * ------------------------------------------------------------------------------- */

static void write_vessel(FILE *out, int i)
{
    fprintf(
        out,
        "[point PT-%d]\nlink = cold-end\nread = input %d f32\nunit = kPa(g)\nu = 0.05 kPa\n"
        "says = Vessel %d, vapour pressure of which there is more to say than fits\n"
        "[point LT-%d]\nlink = cold-end\nread = input %d f32\nunit = %%\nu = 0.05 %%\n"
        "[point TT-%d]\nlink = cold-end\nread = input %d f32\nunit = K\nu = 0.03 K\n"
        "[vessel store-with-a-rather-long-name-%d]\nfluid = argon\nshape = sphere 5 m\n"
        "pressure = PT-%d\nlevel = LT-%d\nliquid_temperature = TT-%d\nheat_budget = 1 kW\n"
        "relief = 25 kPa(g)\n"
        "[alarm pressure-high-%d]\nwatch = PT-%d\nabove = 14 kPa(g)\npriority = %d\n"
        "consequence = The relief valve lifts, and more words follow to fill a second line\n",
        i, i * 6, i, i, i * 6 + 2, i, i * 6 + 4, i, i, i, i, i, i, i % 4 + 1);
}

static void write_hall(FILE *out, int i)
{
    fprintf(out,
            "[point AT-%d]\nlink = hall\nread = input %d f32\nunit = %%\nu = 0.1 %%\n"
            "says = Pit of hall %d\n"
            "[hall hall-%d]\nvolume = 3200 m3\nventilation = 2.4 m3/s\noxygen = AT-%d\n"
            "gas = argon\naction_levels = 19.5 %%, 18 %%\n",
            i, i * 2, i, i, i);
}

static struct fixture *large_plant(int vessels, int halls)
{
    char path[] = "/tmp/ullage-screen-XXXXXX";
    int fd = mkstemp(path);
    assert_true(fd >= 0);
    FILE *out = fdopen(fd, "w");
    assert_non_null(out);
    fprintf(out, "[site]\nname = A site with many vessels and a name of some length\n"
                 "barometer = 101.3 kPa\n[link cold-end]\nhost = 192.0.2.1\n"
                 "[link hall]\nhost = a-host-name-that-is-long.of-a-domain-too.example\n");
    for (int i = 1; i <= vessels; i++)
        write_vessel(out, i);
    for (int i = 1; i <= halls; i++)
        write_hall(out, i);
    assert_int_equal(fclose(out), 0);
    struct fixture *fixture = fixture_open(path);
    unlink(path);
    return fixture;
}

/* ---- any numbers
 * --------------------------------------------------------------------------------- */

static double any_number(void)
{
    double magnitude = pow(10, rand() % 24 - 12) * (1 + rand() % 1000 / 100.0);
    return rand() % 8 == 0 ? 0 : rand() % 3 == 0 ? -magnitude : magnitude;
}

static struct quantity any_quantity(void)
{
    struct quantity q = {.value = any_number(),
                         .u = fabs(any_number()),
                         .quality = (enum quality)(rand() % QUALITY_COUNT)};
    if (rand() % 2 == 0)
        q.u = fabs(q.value) * 0.01;
    if (q.quality == QUALITY_BAD || q.quality == QUALITY_MISSING)
        q = quantity_none(q.quality);
    return q;
}

static void any_text(char *dst, size_t size)
{
    static const char *const words[] = {"PT-101", "is", "stale:", "an",     "unheard-of",
                                        "reason", "±",  "液",     "0.2 kPa"};
    *dst = '\0';
    for (int i = rand() % 30; i > 0; i--)
        text_format(dst + strlen(dst), size - strlen(dst), "%s%s", *dst != '\0' ? " " : "",
                    words[(size_t)rand() % ARRAY_LENGTH(words)]);
    char printable[400];
    text_printable(printable, sizeof(printable), dst);
    text_copy(dst, size, printable);
}

static void any_state(struct fixture *fixture)
{
    const struct plant *plant = fixture->plant;
    struct results *results = &fixture->results;
    for (int i = 0; i < plant->point_count; i++) {
        struct quantity q = any_quantity();
        fixture->frame.sample[i] = (struct sample){
            .value = q.value,
            .u = q.u,
            .quality = q.quality,
            .cause = (enum cause)(rand() % CAUSE_COUNT),
            .read_utc_ns = rand() % 4 == 0
                               ? 0
                               : fixture->frame.utc_ns - rand() % 1000000 * (NS_PER_S / 10)};
    }
    for (int i = 0; i < results->derived_count; i++) {
        results->derived[i].quantity = any_quantity();
        any_text(results->derived[i].reason, sizeof(results->derived[i].reason));
    }
    for (int i = 0; i < results->ledger_count; i++) {
        struct ledger *ledger = &results->ledger[i];
        ledger->in = any_quantity();
        ledger->out = any_quantity();
        ledger->stored = any_quantity();
        ledger->unexplained = any_quantity();
        ledger->word = (enum ledger_word)(rand() % (LEDGER_ABSENT + 1));
        any_text(ledger->reason, sizeof(ledger->reason));
    }
    results->banners.count = rand() % 6;
    results->banners.more = rand() % 3 == 0;
    for (int i = 0; i < results->banners.count; i++) {
        results->banners.at[i].level = (enum banner_level)(rand() % 3);
        any_text(results->banners.at[i].text, sizeof(results->banners.at[i].text));
    }
    for (int i = 0; i < plant->link_count; i++) {
        struct link_state *link = &fixture->link[i];
        link->phase = (enum link_phase)(rand() % 3);
        link->requests = link->bytes_sent = (uint64_t)fabs(any_number());
        link->latency_worst_s = fabs(any_number());
        any_text(link->trouble, sizeof(link->trouble));
    }
    fixture->view.journal_count = rand() % 5;
    for (int i = 0; i < fixture->view.journal_count; i++)
        any_text(fixture->journal[i].text, sizeof(fixture->journal[i].text));
    fixture->view.stale = rand() % 8 == 0;
    fixture->view.stale_s = fixture->view.stale ? fabs(any_number()) : 0;
    fixture->view.ready = rand() % 16 != 0;
    fixture->view.mode = (enum view_mode)(rand() % 3);
}

static uint32_t any_key(void)
{
    static const char keys[] = "1234578b?wqaA \t\f";
    if (rand() % 2 == 0)
        return SCREEN_KEY_UP + (uint32_t)rand() % (SCREEN_KEY_RESIZE - SCREEN_KEY_UP + 1);
    return rand() % 10 == 0 ? (uint32_t)rand() % 0x110000
                            : (uint32_t)keys[(size_t)rand() % (sizeof(keys) - 1)];
}

/* ---- tests
 * --------------------------------------------------------------------------------------- */

static void expect_same(const struct canvas *one, const struct canvas *two)
{
    for (int row = 0; row < canvas_rows(one); row++)
        for (int column = 0; column < canvas_columns(one); column++) {
            const struct cell *a = canvas_cell(one, row, column);
            const struct cell *b = canvas_cell(two, row, column);
            if (a->rune != b->rune || a->style != b->style)
                fail_msg("row %d, column %d differs in a fresh drawing", row, column);
        }
}

static void expect_nothing_lost(const struct canvas *canvas, int turn)
{
    if (canvas_columns(canvas) < SCREEN_COLUMNS_MIN || canvas_rows(canvas) < SCREEN_ROWS_MIN ||
        canvas_lost(canvas) == 0)
        return;
    canvas_write(canvas, stderr);
    fail_msg("turn %d: %d runes are lost at %dx%d", turn, canvas_lost(canvas),
             canvas_columns(canvas), canvas_rows(canvas));
}

static void play(struct fixture *fixture, int turns)
{
    struct screen *screen = NULL;
    assert_int_equal(screen_create(&screen, NULL), 0);
    for (int turn = 0; turn < turns; turn++) {
        struct canvas *canvas = NULL, *fresh = NULL;
        bool large = rand() % 60 == 0, ascii = rand() % 2 == 0;
        int columns = large ? 1 + rand() % SCREEN_COLUMNS_MAX : 76 + rand() % 50;
        int rows = large ? 1 + rand() % SCREEN_ROWS_MAX : 22 + rand() % 20;
        struct command command = {.kind = COMMAND_NOTE};
        if (turn % 10 == 0)
            any_state(fixture);
        enum screen_request request = screen_key(screen, &fixture->view, any_key(), &command);
        if (request == SCREEN_COMMAND && command.kind == COMMAND_ACKNOWLEDGE)
            assert_true(command.alarm >= 0 && command.alarm < fixture->plant->alarm_count);
        assert_int_equal(canvas_create(columns, rows, ascii, &canvas, NULL), 0);
        assert_int_equal(canvas_create(columns, rows, ascii, &fresh, NULL), 0);
        screen_draw(screen, &fixture->view, canvas);
        if (turn % 2 == 0) {
            screen_draw(screen, &fixture->view, fresh);
            expect_same(canvas, fresh);
        }
        expect_nothing_lost(canvas, turn);
        canvas_free(canvas);
        canvas_free(fresh);
    }
    screen_free(screen);
}

static void test_any_keys_and_sizes_on_one_vessel(void **unused)
{
    (void)unused;
    srand(10000);
    struct fixture *fixture = fixture_open("tests/data/screen/store.ini");
    fixture_hall_danger(fixture);
    play(fixture, 6000);
    fixture_close(fixture);
}

static void test_any_keys_and_sizes_on_ten_vessels_and_three_halls(void **unused)
{
    (void)unused;
    srand(10001);
    struct fixture *fixture = large_plant(10, 3);
    play(fixture, 4000);
    fixture_close(fixture);
}

static void test_every_ledger_of_a_large_plant_can_be_scrolled_to(void **unused)
{
    (void)unused;
    static const int sizes[][2] = {
        {3,  2},
        {10, 1}
    };
    for (size_t i = 0; i < ARRAY_LENGTH(sizes); i++) {
        struct fixture *fixture = large_plant(sizes[i][0], sizes[i][1]);
        struct screen *screen = NULL;
        struct canvas *canvas = NULL;
        struct command command;
        assert_int_equal(screen_create(&screen, NULL), 0);
        assert_int_equal(canvas_create(80, 24, false, &canvas, NULL), 0);
        for (int row = 0; row < fixture->results.ledger_count; row++) {
            int chosen = 0;
            screen_draw(screen, &fixture->view, canvas);
            for (int line = 0; line < 24; line++)
                chosen += canvas_cell(canvas, line, 0)->rune == 0x25B8;
            assert_int_equal(chosen, 1);
            screen_key(screen, &fixture->view, SCREEN_KEY_DOWN, &command);
        }
        canvas_free(canvas);
        screen_free(screen);
        fixture_close(fixture);
    }
}

static void test_drawing_takes_no_memory(void **unused)
{
    (void)unused;
#if COUNTED
    srand(10002);
    struct fixture *fixture = fixture_open("tests/data/screen/store.ini");
    fixture_hall_danger(fixture);
    struct screen *screen = NULL;
    struct canvas *canvas = NULL;
    struct command command;
    assert_int_equal(screen_create(&screen, NULL), 0);
    assert_int_equal(canvas_create(120, 40, false, &canvas, NULL), 0);
    unsigned long before = requests;
    assert_true(before > 0);
    for (int turn = 0; turn < 500; turn++) {
        screen_key(screen, &fixture->view, any_key(), &command);
        screen_draw(screen, &fixture->view, canvas);
    }
    assert_int_equal(requests, before);
    canvas_free(canvas);
    screen_free(screen);
    fixture_close(fixture);
#else
    skip(); /* the sanitizer has its own malloc */
#endif
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_any_keys_and_sizes_on_one_vessel),
        cmocka_unit_test(test_any_keys_and_sizes_on_ten_vessels_and_three_halls),
        cmocka_unit_test(test_every_ledger_of_a_large_plant_can_be_scrolled_to),
        cmocka_unit_test(test_drawing_takes_no_memory),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
