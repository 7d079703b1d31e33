/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The ncurses back end: the only file that knows curses. It shows a canvas (curses writes only
 * what changed) and hands keys on. Looks follow ISA-101 in spirit: no colour in the normal
 * state, and each colour goes with a word and a shape, for some terminals and some eyes have
 * none.
 */
#include <curses.h>
#include <errno.h>
#include <langinfo.h>
#include <locale.h>
#include <stdlib.h>
#include <string.h>
#include <termios.h>
#include <unistd.h>
#include <wchar.h>

#include "canvas.h"
#include "terminal_type.h"

struct terminal {
    SCREEN *curses;
    bool ascii, colour;
    attr_t attribute[STYLE_COUNT];
    short pair[STYLE_COUNT];
};

static void choose_looks(struct terminal *terminal)
{
    static const struct {
        enum style style;
        attr_t plain; /* where there is no colour */
        attr_t coloured;
        short text, ground; /* -1: the terminal's own */
    } looks[] = {
        {STYLE_NORMAL,   A_NORMAL,           A_NORMAL,    -1,           -1          },
        {STYLE_STRONG,   A_BOLD,             A_BOLD,      -1,           -1          },
        {STYLE_FAINT,    A_NORMAL,           A_DIM,       -1,           -1          },
        {STYLE_TITLE,    A_REVERSE,          A_REVERSE,   -1,           -1          },
        {STYLE_ADVISORY, A_UNDERLINE,        A_UNDERLINE, -1,           -1          },
        {STYLE_STALE,    A_DIM,              A_DIM,       -1,           -1          },
        {STYLE_BAD,      A_DIM,              A_DIM,       -1,           -1          },
        {STYLE_CAUTION,  A_BOLD,             A_NORMAL,    COLOR_YELLOW, -1          },
        {STYLE_ALARM,    A_REVERSE,          A_NORMAL,    COLOR_BLACK,  COLOR_YELLOW},
        {STYLE_DANGER,   A_REVERSE | A_BOLD, A_BOLD,      COLOR_WHITE,  COLOR_RED   },
        {STYLE_SELECTED, A_REVERSE,          A_REVERSE,   -1,           -1          },
    };
    for (size_t i = 0; i < ARRAY_LENGTH(looks); i++) {
        enum style style = looks[i].style;
        bool paired = terminal->colour && (looks[i].text >= 0 || looks[i].ground >= 0);
        terminal->attribute[style] = terminal->colour ? looks[i].coloured : looks[i].plain;
        if (paired && init_pair((short)(i + 1), looks[i].text, looks[i].ground) != ERR)
            terminal->pair[style] = (short)(i + 1);
        else if (paired)
            terminal->attribute[style] = looks[i].plain;
    }
}

/* A stray Ctrl-S must not freeze a picture that looks live. */
static void no_flow_control(void)
{
    struct termios modes;
    if (tcgetattr(STDIN_FILENO, &modes) != 0)
        return;
    modes.c_iflag &= ~(tcflag_t)(IXON | IXOFF);
    if (tcsetattr(STDIN_FILENO, TCSANOW, &modes) == 0)
        def_prog_mode();
}

int terminal_open(const struct terminal_options *options, struct terminal **out,
                  struct error *err)
{
    const char *term = getenv("TERM");
    if (!isatty(STDIN_FILENO) || !isatty(STDOUT_FILENO))
        return error_set(err, ERR_IO,
                         "there is no terminal; use --print for one picture as text");
    enum terminal_type type = terminal_type_check();
    if (type == TERMINAL_TYPE_UNKNOWN)
        return error_set(err, ERR_IO, "the terminal type '%s' is not known here; set TERM",
                         term != NULL ? term : "");
    if (type == TERMINAL_TYPE_DUMB)
        return error_set(err, ERR_IO,
                         "a terminal of type '%s' cannot place text; set TERM, or use --print",
                         term);
    struct terminal *terminal = calloc(1, sizeof(*terminal));
    if (terminal == NULL)
        return error_set(err, ERR_MEMORY, "no memory for the terminal");
    /* The kernel's console takes UTF-8, but its font has few of our drawing characters. */
    terminal->ascii = options->ascii || strcmp(nl_langinfo(CODESET), "UTF-8") != 0 ||
                      strcmp(term, "linux") == 0;
    terminal->curses = newterm(NULL, stdout, stdin);
    if (terminal->curses == NULL) {
        free(terminal);
        return error_set(err, ERR_IO, "the terminal of type '%s' cannot be used", term);
    }
    cbreak();
    no_flow_control();
    noecho();
    nonl();
    keypad(stdscr, TRUE);
    nodelay(stdscr, TRUE);
    set_escdelay(50);
    curs_set(0);
    if (!options->mono && has_colors() && start_color() != ERR) {
        use_default_colors();
        terminal->colour = true;
    }
    choose_looks(terminal);
    *out = terminal;
    return 0;
}

void terminal_close(struct terminal *terminal)
{
    if (terminal == NULL)
        return;
    endwin();
    delscreen(terminal->curses);
    free(terminal);
}

void terminal_size(const struct terminal *terminal, int *columns, int *rows)
{
    (void)terminal;
    getmaxyx(stdscr, *rows, *columns);
}

bool terminal_ascii(const struct terminal *terminal)
{
    return terminal->ascii;
}

int64_t terminal_key(struct terminal *terminal)
{
    static const struct {
        wint_t curses;
        enum screen_key key;
    } keys[] = {
        {KEY_UP,     SCREEN_KEY_UP       },
        {KEY_DOWN,   SCREEN_KEY_DOWN     },
        {KEY_PPAGE,  SCREEN_KEY_PAGE_UP  },
        {KEY_NPAGE,  SCREEN_KEY_PAGE_DOWN},
        {KEY_HOME,   SCREEN_KEY_HOME     },
        {KEY_END,    SCREEN_KEY_END      },
        {KEY_LEFT,   SCREEN_KEY_LEFT     },
        {KEY_RIGHT,  SCREEN_KEY_RIGHT    },
        {KEY_ENTER,  SCREEN_KEY_ENTER    },
        {KEY_RESIZE, SCREEN_KEY_RESIZE   },
    };
    wint_t key;
    (void)terminal;
    int kind = get_wch(&key);
    if (kind == ERR)
        return -1;
    if (kind == KEY_CODE_YES) {
        for (size_t i = 0; i < ARRAY_LENGTH(keys); i++)
            if (keys[i].curses == key)
                return keys[i].key;
        return 0; /* a key without a meaning here */
    }
    if (key == 0x1B)
        return SCREEN_KEY_ESCAPE;
    if (key == '\t')
        return SCREEN_KEY_TAB;
    if (key == '\r' || key == '\n')
        return SCREEN_KEY_ENTER;
    if (key == 0x0C)
        clearok(curscr, TRUE);
    return (int64_t)key;
}

/* What the C library takes for another width would move the rest of the line: it is shown as
 * '?', and a blank where its right half would be. */
static wchar_t shown_rune(const struct canvas *canvas, int row, int column)
{
    const struct cell *cell = canvas_cell(canvas, row, column);
    if (cell == NULL)
        return L' ';
    if (cell->rune == 0)
        return shown_rune(canvas, row, column - 1) == L'?' ? L' ' : L'\0';
    bool agreed = wcwidth((wchar_t)cell->rune) == rune_width(cell->rune);
    return agreed ? (wchar_t)cell->rune : L'?';
}

void terminal_show(struct terminal *terminal, const struct canvas *canvas)
{
    int columns, rows;
    terminal_size(terminal, &columns, &rows);
    for (int row = 0; row < rows; row++)
        for (int column = 0; column < columns; column++) {
            const struct cell *cell = canvas_cell(canvas, row, column);
            wchar_t text[2] = {shown_rune(canvas, row, column), L'\0'};
            enum style style = cell != NULL ? cell->style : STYLE_NORMAL;
            cchar_t shown;
            if (text[0] != L'\0' && setcchar(&shown, text, terminal->attribute[style],
                                             terminal->pair[style], NULL) == OK)
                mvadd_wch(row, column, &shown);
        }
    refresh();
}
