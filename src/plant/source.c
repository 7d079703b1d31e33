/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * A plant file as sections and keys. inih (the system's, as packaged) splits the lines; what it
 * would cut or misread silently is found here first, line by line, told, and kept from it:
 *
 * - its lines end at LINE_MAX_BYTES and its section and key names at INIH_NAME_BYTES;
 * - it does not tell line numbers, so they are counted where lines are handed to it;
 * - a line that begins with white space continues the value above, whatever it looks like.
 */
#include "reader.h"

#include <errno.h>
#include <ini.h>
#include <limits.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>

enum {
    LINE_MAX_BYTES = 198, /* inih reads 199 with the newline */
    INIH_NAME_BYTES = 49,
    FILE_BYTES_MAX = 16 << 20,
    INCLUDE_DEPTH_MAX = 8,
    INCLUDE_COUNT_MAX = 64,
    SECTIONS_MAX = 100000
};

struct reading {
    struct source *source;
    struct problems *problems;
    const char *file; /* as it is named in messages; lives in the arena */
    char *text;       /* the whole file */
    size_t length, at;
    int line;
    bool continues, has_key, memory_short;
    struct source_section *section;
    int depth;
    int *included; /* count over all files */
    struct {
        dev_t device;
        ino_t inode;
    } chain[INCLUDE_DEPTH_MAX + 1];
};

static int read_file(struct reading *reading, const char *path);

static struct place here(const struct reading *reading)
{
    return (struct place){.file = reading->file, .line = reading->line};
}

static void complain(struct reading *reading, const char *text)
{
    problem_add(reading->problems, PROBLEM_ERROR, here(reading), "%s", text);
}

/* ---- lines
 * ----------------------------------------------------------------------------------- */

static bool line_clean(const char *line, size_t length)
{
    for (size_t i = 0; i < length;) {
        uint32_t rune;
        unsigned char c = (unsigned char)line[i];
        size_t bytes = text_rune(line + i, &rune);
        if (bytes == 0 || (c < 0x20 && c != '\t' && c != '\r') || c == 0x7F)
            return false;
        i += bytes;
    }
    return true;
}

static void begin_section(struct reading *reading, char *header)
{
    struct source *source = reading->source;
    char *end = strchr(header, ']');
    if (end == NULL) {
        complain(reading, "a section's header ends with ']'; write [kind name]");
        return;
    }
    *end = '\0';
    if (source->count == source->room) {
        int room = source->room > 0 ? 2 * source->room : 64;
        void *grown =
            room > SECTIONS_MAX
                ? NULL
                : realloc(source->section, (size_t)room * sizeof(struct source_section *));
        if (grown == NULL) {
            reading->memory_short = true;
            return;
        }
        source->section = grown;
        source->room = room;
    }
    struct source_section *section = arena_take(source->arena, 1, sizeof(*section));
    char *words = arena_text(source->arena, text_trim(header + 1));
    if (section == NULL || words == NULL) {
        reading->memory_short = true;
        return;
    }
    section->place = here(reading);
    section->kind = words;
    char *space = words + strcspn(words, " \t");
    if (*space != '\0') {
        *space = '\0';
        section->name = text_trim(space + 1);
    }
    source->section[source->count++] = section;
    reading->section = section;
    reading->has_key = false;
}

/* What a line is, by its own looks; false if inih must not see it. */
static bool accept(struct reading *reading, const char *line, size_t length)
{
    if (length > LINE_MAX_BYTES) {
        complain(reading,
                 "the line is longer than 198 characters; go on in the next line, which "
                 "then begins with white space");
        return false;
    }
    if (!line_clean(line, length)) {
        complain(reading, "the line holds a control character or is not UTF-8; take it out");
        return false;
    }
    char copy[LINE_MAX_BYTES + 1];
    memcpy(copy, line, length);
    copy[length] = '\0';
    bool indented = copy[0] == ' ' || copy[0] == '\t';
    char *text = text_trim(copy);
    if (*text == '\0' || *text == ';' || *text == '#')
        return true;
    if (indented) {
        if (*text == '[') {
            complain(reading,
                     "a section's header begins at the start of its line; take out the "
                     "white space before it");
            return false;
        }
        if (!reading->has_key) {
            complain(reading,
                     "the line begins with white space, so it continues a value, but there "
                     "is none above; begin it at the start of the line");
            return false;
        }
        reading->continues = true;
        return true;
    }
    if (*text == '[') {
        if (strcspn(text + 1, "]") > INIH_NAME_BYTES) {
            complain(reading,
                     "the section's header is longer than 49 characters; shorten the name");
            reading->section = NULL;
            return false;
        }
        begin_section(reading, text);
        return true;
    }
    size_t name = strcspn(text, "=:");
    if (text[name] == '\0') {
        complain(reading, "the line is neither [kind name] nor key = value");
        return false;
    }
    if (name > INIH_NAME_BYTES) {
        complain(reading, "the key is longer than 49 characters");
        return false;
    }
    reading->has_key = true;
    return true;
}

/* The reader that inih calls: one line a call, or an empty one in place of what it must not
 * see. */
static char *next_line(char *buffer, int size, void *context)
{
    struct reading *reading = context;
    if (reading->at >= reading->length || reading->memory_short)
        return NULL;
    const char *line = reading->text + reading->at;
    const char *newline = memchr(line, '\n', reading->length - reading->at);
    size_t length = newline != NULL ? (size_t)(newline - line) : reading->length - reading->at;
    reading->at += length + (newline != NULL);
    reading->line++;
    reading->continues = false;
    if (length > 0 && line[length - 1] == '\r')
        length--;
    if (memchr(line, '\0', length) != NULL) {
        complain(reading, "the line holds a NUL byte; take it out");
        length = 0;
    } else if (!accept(reading, line, length) || length + 2 > (size_t)size) {
        length = 0;
    }
    memcpy(buffer, line, length);
    buffer[length] = '\n';
    buffer[length + 1] = '\0';
    return buffer;
}

/* ---- keys
 * ------------------------------------------------------------------------------------ */

/* Cuts an inline comment (';' behind white space) off a continuation line, as inih does for the
 * first line of a value but, in this version, not for the others. */
static void cut_comment(char *text)
{
    for (char *at = text; *at != '\0'; at++)
        if (*at == ';' && (at == text || at[-1] == ' ' || at[-1] == '\t')) {
            *at = '\0';
            break;
        }
}

static bool continue_value(struct reading *reading, const char *line)
{
    char value[LINE_MAX_BYTES + 2];
    text_copy(value, sizeof(value), line);
    cut_comment(value);
    text_trim(value);
    if (*value == '\0')
        return true;
    if (reading->section == NULL || reading->section->key_count == 0)
        return true;
    struct source_key *key = &reading->section->key[reading->section->key_count - 1];
    size_t length = strlen(key->value) + strlen(value) + 2;
    char *joined = arena_take(reading->source->arena, length, 1);
    if (joined == NULL)
        return false;
    text_format(joined, length, "%s%s%s", key->value, *key->value != '\0' ? " " : "", value);
    key->value = joined;
    return true;
}

static void include_files(struct reading *reading, const char *value)
{
    char list[1024], *items[INCLUDE_DEPTH_MAX];
    int count =
        text_copy(list, sizeof(list), value) ? split_list(list, items, INCLUDE_DEPTH_MAX) : -1;
    if (count < 0) {
        complain(reading, "include names at most 8 files, separated by commas");
        return;
    }
    for (int i = 0; i < count; i++) {
        char path[PATH_MAX];
        const char *slash = strrchr(reading->file, '/');
        int folder = items[i][0] != '/' && slash != NULL ? (int)(slash - reading->file) + 1 : 0;
        if (++*reading->included > INCLUDE_COUNT_MAX || reading->depth == INCLUDE_DEPTH_MAX) {
            complain(reading,
                     "too many files are included, or one within another too deep (at most "
                     "64, 8 deep)");
            return;
        }
        if (!text_format(path, sizeof(path), "%.*s%s", folder, reading->file, items[i])) {
            complain(reading, "the path of the included file is too long");
            continue;
        }
        struct reading inner = {
            .source = reading->source,
            .problems = reading->problems,
            .depth = reading->depth + 1,
            .included = reading->included,
        };
        memcpy(inner.chain, reading->chain, sizeof(inner.chain));
        inner.file = reading->file; /* for the message, should it not open */
        inner.line = reading->line;
        read_file(&inner, path);
        reading->memory_short |= inner.memory_short;
    }
}

static int take_key(void *context, const char *section, const char *name, const char *value)
{
    struct reading *reading = context;
    (void)section; /* cut by inih at its own length; the header was read by begin_section */
    if (reading->continues) {
        reading->memory_short |= !continue_value(reading, value);
        return 1;
    }
    struct source_section *here_section = reading->section;
    if (here_section == NULL) {
        if (reading->source->count == 0)
            complain(reading, "a key before the first section; begin with [site]");
        return 1;
    }
    for (int i = 0; i < here_section->key_count; i++)
        if (strcmp(here_section->key[i].name, name) == 0) {
            problem_add(reading->problems, PROBLEM_ERROR, here(reading),
                        "'%s' stands twice in this section (first in line %d); keep one", name,
                        here_section->key[i].place.line);
            return 1;
        }
    if (here_section->key_count == KEYS_IN_SECTION_MAX) {
        complain(reading, "the section has more keys than any kind knows");
        return 1;
    }
    struct source_key *key = &here_section->key[here_section->key_count];
    key->name = arena_text(reading->source->arena, name);
    key->value = arena_text(reading->source->arena, value);
    key->place = here(reading);
    if (key->name == NULL || key->value == NULL) {
        reading->memory_short = true;
        return 1;
    }
    here_section->key_count++;
    return 1;
}

/* ---- files
 * ----------------------------------------------------------------------------------- */

static int slurp(struct reading *reading, const char *path, FILE *file)
{
    struct stat stat;
    struct place place = here(reading);
    if (fstat(fileno(file), &stat) != 0 || S_ISDIR(stat.st_mode)) {
        problem_add(reading->problems, PROBLEM_ERROR, place, "'%s' is no file", path);
        return ERR_IO;
    }
    for (int i = 0; i < reading->depth; i++)
        if (reading->chain[i].device == stat.st_dev && reading->chain[i].inode == stat.st_ino) {
            problem_add(reading->problems, PROBLEM_ERROR, place,
                        "'%s' includes itself; take the include out", path);
            return ERR_CONFIG;
        }
    reading->chain[reading->depth].device = stat.st_dev;
    reading->chain[reading->depth].inode = stat.st_ino;
    size_t room = 1 << 16;
    reading->text = malloc(room);
    while (reading->text != NULL) {
        reading->length +=
            fread(reading->text + reading->length, 1, room - reading->length, file);
        if (reading->length < room)
            break;
        if (room >= FILE_BYTES_MAX) {
            problem_add(reading->problems, PROBLEM_ERROR, place,
                        "'%s' is larger than 16 MiB; no plant file is", path);
            return ERR_CONFIG;
        }
        room *= 2;
        char *grown = realloc(reading->text, room);
        if (grown == NULL)
            free(reading->text);
        reading->text = grown;
    }
    if (reading->text == NULL) {
        reading->memory_short = true;
        return ERR_MEMORY;
    }
    if (ferror(file)) {
        problem_add(reading->problems, PROBLEM_ERROR, place, "'%s' cannot be read: %s", path,
                    strerror(errno));
        return ERR_IO;
    }
    return 0;
}

/* Sections of an included file stand where its include does; an include is followed after its
 * own file has been read, so that [site] is whole. */
static void follow_includes(struct reading *reading, int first)
{
    for (int i = first; i < reading->source->count; i++) {
        const struct source_section *section = reading->source->section[i];
        if (section->place.file != reading->file || strcmp(section->kind, "site") != 0)
            continue;
        for (int k = 0; k < section->key_count; k++)
            if (strcmp(section->key[k].name, "include") == 0) {
                reading->line = section->key[k].place.line;
                include_files(reading, section->key[k].value);
            }
    }
}

static int read_file(struct reading *reading, const char *path)
{
    int code;
    FILE *file = fopen(path, "re");
    if (file == NULL) {
        problem_add(reading->problems, PROBLEM_ERROR, here(reading),
                    "'%s' cannot be opened: %s", path, strerror(errno));
        return ERR_IO;
    }
    code = slurp(reading, path, file);
    fclose(file);
    if (code == 0) {
        int first = reading->source->count;
        reading->file = arena_text(reading->source->arena, path);
        reading->line = 0;
        if (reading->length >= 3 && memcmp(reading->text, "\xEF\xBB\xBF", 3) == 0)
            reading->at = 3;
        if (reading->file == NULL)
            reading->memory_short = true;
        else
            ini_parse_stream(next_line, reading, take_key, reading);
        if (!reading->memory_short)
            follow_includes(reading, first);
    }
    free(reading->text);
    reading->text = NULL;
    return reading->memory_short ? ERR_MEMORY : code;
}

int source_read(const char *path, struct arena *arena, struct source *out,
                struct problems *problems)
{
    int included = 0;
    *out = (struct source){.arena = arena};
    struct reading reading = {
        .source = out,
        .problems = problems,
        .file = arena_text(arena, path),
        .included = &included,
    };
    if (reading.file == NULL)
        return ERR_MEMORY;
    return read_file(&reading, path);
}

void source_done(struct source *source)
{
    free(source->section);
    source->section = NULL;
    source->count = 0;
}
