/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The ncurses back end on a pseudo terminal: which terminals it takes, that it gives them back,
 * and that an unchanged picture sends nothing. A child has the terminal; the parent reads what
 * it sends up to marks that the child writes, so nothing waits for a time.
 */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <cmocka.h>

#include <errno.h>
#include <locale.h>
#include <poll.h>
#include <pty.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/ioctl.h>
#include <sys/wait.h>
#include <termios.h>
#include <unistd.h>

#include "ullage/screen.h"

enum { SENT_MAX = 1 << 20, PATIENCE_MS = 20000 };

/* What the child had to say, by its exit status. */
enum { CHILD_WELL, CHILD_REFUSED, CHILD_WRONG };

struct session {
    pid_t pid;
    int fd;
    size_t count;
    char sent[SENT_MAX];
};
static struct session session;

static void start(const char *term, const char *locale, int (*child)(void))
{
    struct winsize size = {.ws_row = 24, .ws_col = 80};
    session = (struct session){.fd = -1};
    session.pid = forkpty(&session.fd, NULL, NULL, &size);
    assert_true(session.pid >= 0);
    if (session.pid == 0) {
        setenv("TERM", term, 1);
        unsetenv("LINES");
        unsetenv("COLUMNS");
        setlocale(LC_CTYPE, locale);
        _exit(child());
    }
}

/* Reads until the mark has come (it is left out), or to the end where mark is NULL; returns
 * what was sent since the last call. */
static const char *read_to(const char *mark, size_t *count)
{
    session.count = 0;
    for (;;) {
        session.sent[session.count] = '\0';
        size_t length = mark != NULL ? strlen(mark) : 0;
        if (mark != NULL && session.count >= length &&
            memcmp(session.sent + session.count - length, mark, length) == 0) {
            session.count -= length;
            break;
        }
        struct pollfd fds = {.fd = session.fd, .events = POLLIN};
        if (poll(&fds, 1, PATIENCE_MS) <= 0)
            fail_msg("nothing more came in %d s", PATIENCE_MS / 1000);
        /* One byte at a time: what stands behind the mark is the next call's. */
        if (session.count + 1 >= SENT_MAX ||
            read(session.fd, session.sent + session.count, 1) != 1) {
            if (mark != NULL)
                fail_msg("the child ended before '%s'; it sent\n%s", mark, session.sent);
            break;
        }
        session.count++;
    }
    session.sent[session.count] = '\0';
    *count = session.count;
    return session.sent;
}

static int finish(void)
{
    int status = 0;
    size_t count;
    read_to(NULL, &count);
    assert_int_equal(waitpid(session.pid, &status, 0), session.pid);
    close(session.fd);
    assert_true(WIFEXITED(status));
    return WEXITSTATUS(status);
}

/* ---- children: they run on the terminal
 * --------------------------------------------------------- */

static void mark(const char *text)
{
    if (write(STDOUT_FILENO, text, strlen(text)) != (ssize_t)strlen(text))
        _exit(CHILD_WRONG);
}

static int64_t wait_key(struct terminal *terminal)
{
    struct pollfd fds = {.fd = STDIN_FILENO, .events = POLLIN};
    int64_t key;
    while ((key = terminal_key(terminal)) < 0)
        if (poll(&fds, 1, PATIENCE_MS) == 0)
            _exit(CHILD_WRONG);
    return key;
}

static struct canvas *picture(bool ascii, const char *number)
{
    struct canvas *canvas = NULL;
    if (canvas_create(80, 24, ascii, &canvas, NULL) != 0)
        _exit(CHILD_WRONG);
    for (int style = 0; style < STYLE_COUNT; style++)
        canvas_text(canvas, style, 2, (enum style)style, "heat load 5.39 ± 0.13 kW ◆");
    canvas_text(canvas, 20, 5, STYLE_NORMAL, number);
    return canvas;
}

static int child_shows(void)
{
    const struct terminal_options options = {0};
    struct terminal *terminal = NULL;
    struct error err = {0};
    struct termios before, after;
    tcgetattr(STDIN_FILENO, &before);
    int code = terminal_open(&options, &terminal, &err);
    if (code != 0) {
        mark(err.text);
        return code == ERR_IO ? CHILD_REFUSED : CHILD_WRONG;
    }
    int columns = 0, rows = 0;
    terminal_size(terminal, &columns, &rows);
    struct canvas *canvas = picture(terminal_ascii(terminal), "11111");
    struct canvas *changed = picture(terminal_ascii(terminal), "11211");
    terminal_show(terminal, canvas);
    mark("<first>");
    terminal_show(terminal, canvas);
    mark("<same>");
    terminal_show(terminal, changed);
    mark("<changed>");
    /* A flow control that a stray Ctrl-S would use is off while the picture is up. */
    struct termios during;
    tcgetattr(STDIN_FILENO, &during);
    terminal_close(terminal);
    canvas_free(canvas);
    canvas_free(changed);
    mark("<closed>");
    tcgetattr(STDIN_FILENO, &after);
    bool well = columns == 80 && rows == 24 && (during.c_iflag & IXON) == 0 &&
                (before.c_iflag & IXON) == (after.c_iflag & IXON) &&
                before.c_lflag == after.c_lflag && before.c_oflag == after.c_oflag;
    return well ? CHILD_WELL : CHILD_WRONG;
}

/* Says which key came. */
static int child_keys(void)
{
    const struct terminal_options options = {.mono = true};
    struct terminal *terminal = NULL;
    if (terminal_open(&options, &terminal, NULL) != 0)
        return CHILD_REFUSED;
    mark("<ready>");
    int64_t key;
    do {
        char text[32];
        key = wait_key(terminal);
        if (key == 0)
            continue;
        snprintf(text, sizeof(text), "<%llx>", (unsigned long long)key);
        mark(text);
    } while (key != 'q');
    int columns = 0, rows = 0;
    terminal_size(terminal, &columns, &rows);
    terminal_close(terminal);
    return columns == 100 && rows == 30 ? CHILD_WELL : CHILD_WRONG;
}

/* ---- tests
 * --------------------------------------------------------------------------------------- */

static void test_common_terminals_show_the_picture_and_only_what_changes(void **unused)
{
    (void)unused;
    static const char *const terms[] = {"xterm-256color", "tmux-256color", "screen",
                                        "linux",          "vt220",         "xterm"};
    for (size_t i = 0; i < ARRAY_LENGTH(terms); i++) {
        size_t count;
        start(terms[i], "C.UTF-8", child_shows);
        const char *sent = read_to("<first>", &count);
        assert_non_null(strstr(sent, "5.39 "));
        assert_true(count > 200 && count < 4000);
        /* The kernel's console gets ASCII: its font has few of our characters. */
        bool ascii = strcmp(terms[i], "linux") == 0;
        if ((strstr(sent, ascii ? "+-" : "±") == NULL) || (strstr(sent, "±") == NULL) != ascii)
            fail_msg("%s: wrong characters in\n%s", terms[i], sent);
        read_to("<same>", &count);
        assert_int_equal(count, 0);
        read_to("<changed>", &count);
        assert_true(count > 0 && count < 40);
        read_to("<closed>", &count);
        assert_true(count > 0);
        assert_int_equal(finish(), CHILD_WELL);
    }
}

static void test_a_locale_without_utf8_gets_ascii(void **unused)
{
    (void)unused;
    size_t count;
    start("xterm-256color", "C", child_shows);
    const char *sent = read_to("<first>", &count);
    assert_non_null(strstr(sent, "+-"));
    for (size_t i = 0; i < count; i++)
        assert_true((unsigned char)sent[i] < 0x80);
    read_to("<closed>", &count);
    assert_int_equal(finish(), CHILD_WELL);
}

static void test_a_terminal_that_cannot_place_text_is_refused_with_the_mend(void **unused)
{
    (void)unused;
    static const char *const terms[] = {"dumb", "no-such-terminal-anywhere"};
    for (size_t i = 0; i < ARRAY_LENGTH(terms); i++) {
        size_t count;
        start(terms[i], "C.UTF-8", child_shows);
        const char *sent = read_to("set TERM", &count);
        assert_non_null(strstr(sent, terms[i]));
        assert_null(strchr(sent, '\033'));
        assert_int_equal(finish(), CHILD_REFUSED);
    }
}

static void test_without_a_terminal_it_says_print(void **unused)
{
    (void)unused;
    int pipe_fd[2];
    assert_int_equal(pipe(pipe_fd), 0);
    pid_t pid = fork();
    assert_true(pid >= 0);
    if (pid == 0) {
        dup2(pipe_fd[0], STDIN_FILENO);
        const struct terminal_options options = {0};
        struct terminal *terminal = NULL;
        struct error err = {0};
        int code = terminal_open(&options, &terminal, &err);
        _exit(code == ERR_IO && strstr(err.text, "--print") != NULL ? CHILD_REFUSED
                                                                    : CHILD_WRONG);
    }
    int status = 0;
    assert_int_equal(waitpid(pid, &status, 0), pid);
    assert_true(WIFEXITED(status));
    assert_int_equal(WEXITSTATUS(status), CHILD_REFUSED);
    close(pipe_fd[0]);
    close(pipe_fd[1]);
}

static void expect_key(const char *bytes, uint32_t key)
{
    char expected[32];
    size_t count;
    snprintf(expected, sizeof(expected), "<%x>", (unsigned)key);
    assert_int_equal(write(session.fd, bytes, strlen(bytes)), strlen(bytes));
    read_to(expected, &count);
}

static void test_keys_arrive_by_their_meaning_and_a_resize_is_one(void **unused)
{
    (void)unused;
    size_t count;
    start("xterm-256color", "C.UTF-8", child_keys);
    read_to("<ready>", &count);
    /* As terminfo's xterm-256color sends them in application mode (kcuu1, kpp, khome ...). */
    expect_key("\033OA", SCREEN_KEY_UP);
    expect_key("\033OB", SCREEN_KEY_DOWN);
    expect_key("\033[5~", SCREEN_KEY_PAGE_UP);
    expect_key("\033[6~", SCREEN_KEY_PAGE_DOWN);
    expect_key("\033OH", SCREEN_KEY_HOME);
    expect_key("\033OF", SCREEN_KEY_END);
    expect_key("\033", SCREEN_KEY_ESCAPE);
    expect_key("\t", SCREEN_KEY_TAB);
    expect_key("\r", SCREEN_KEY_ENTER);
    expect_key("\x0C", 0x0C);
    expect_key("\x13", 0x13); /* Ctrl-S arrives as a key: it stops nothing */
    expect_key("w", 'w');
    expect_key("é", 0xE9);
    struct winsize size = {.ws_row = 30, .ws_col = 100};
    assert_int_equal(ioctl(session.fd, TIOCSWINSZ, &size), 0);
    char expected[32];
    snprintf(expected, sizeof(expected), "<%x>", (unsigned)SCREEN_KEY_RESIZE);
    read_to(expected, &count);
    expect_key("q", 'q');
    assert_int_equal(finish(), CHILD_WELL);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_common_terminals_show_the_picture_and_only_what_changes),
        cmocka_unit_test(test_a_locale_without_utf8_gets_ascii),
        cmocka_unit_test(test_a_terminal_that_cannot_place_text_is_refused_with_the_mend),
        cmocka_unit_test(test_without_a_terminal_it_says_print),
        cmocka_unit_test(test_keys_arrive_by_their_meaning_and_a_resize_is_one),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
