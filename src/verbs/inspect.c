/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * ullage inspect: registers of a device, read once, to commission a point. Each value is shown
 * in every byte order, because the wrong one is the commonest fault and is seen at a glance.
 */
#include "verbs.h"

#include <getopt.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "ullage/field.h"

/* 24 characters hold every double. */
enum { PORT_DEFAULT = 502, COLUMN = 24 };

struct request {
    char host[256];
    int port, unit_id, count;
    double timeout_s;
    struct register_ref ref;
};

static void print_help(void)
{
    printf(
        "usage: ullage inspect HOST[:PORT] --read \"TABLE ADDRESS TYPE [ORDER]\" [options]\n\n"
        "Reads registers of a Modbus/TCP device once and shows them raw and decoded in every\n"
        "byte order; the order asked for is marked with '*'. Nothing is ever written.\n\n"
        "  HOST[:PORT]          name or address; [::1]:502 for IPv6; port 502 if left out\n"
        "  --read \"input 0 f32\"  TABLE: coil discrete input holding; ADDRESS: the "
        "protocol's\n"
        "                       own, from 0; TYPE: bit u16 i16 u32 i32 u64 i64 f32 f64 u16.3;\n"
        "                       ORDER: ABCD CDAB BADC DCBA\n"
        "  --count N            so many values, one behind the other; 1 if left out\n"
        "  --unit N             unit behind the address, 0 to 247 or 255; 1 if left out\n"
        "  --timeout SPAN       wait so long for an answer; 1 s if left out\n\n"
        "Exit status: 0 read, 1 it could not be read, 2 bad usage.\n");
}

/* The shortest text that reads back as the same number of the type. */
static void format_number(char *text, size_t size, enum register_type type, double value)
{
    if (type != REGISTER_F32) {
        csv_number(text, size, value);
        return;
    }
    for (int digits = 6; digits <= 9; digits++) {
        double back;
        text_format(text, size, "%.*g", digits, value);
        if (text_to_double(text, &back) == 0 && (float)back == (float)value)
            return;
    }
}

/* The orders that differ for a value: one register has bytes to swap, but no words. */
static int orders_of(const struct register_ref *ref, enum byte_order *order)
{
    int count = 0;
    for (int i = 0; i < ORDER_COUNT; i++)
        if (register_words(ref) > 1 || i == ORDER_ABCD || i == ORDER_BADC)
            order[count++] = (enum byte_order)i;
    return count;
}

static bool same_order(const struct register_ref *ref, enum byte_order order)
{
    if (register_words(ref) > 1)
        return ref->order == order;
    bool swapped = ref->order == ORDER_BADC || ref->order == ORDER_DCBA;
    return swapped == (order == ORDER_BADC);
}

static void print_value(const struct register_ref *asked, int address, const uint16_t *words)
{
    struct register_ref ref = *asked;
    double value;
    printf("%7d", address);
    if (ref.table == TABLE_COIL || ref.table == TABLE_DISCRETE) {
        printf("  %d\n", words[0]);
        return;
    }
    for (int i = 0; i < register_words(&ref); i++)
        printf("%s%04X", i == 0 ? "  " : " ", words[i]);
    if (ref.type == REGISTER_BIT) {
        printf("  %d\n", words[0] >> ref.bit & 1);
        return;
    }
    enum byte_order order[ORDER_COUNT];
    int count = orders_of(&ref, order);
    for (int i = 0; i < count; i++) {
        char text[32] = "not-a-number";
        ref.order = order[i];
        if (register_decode(&ref, words, &value) == 0)
            format_number(text, sizeof(text), ref.type, value);
        printf("  %*s", COLUMN, text);
    }
    printf("\n");
}

static void print_values(const struct request *request, const uint16_t *words)
{
    const struct register_ref *ref = &request->ref;
    int length = register_words(ref);
    char what[48];
    register_format(what, sizeof(what), ref);
    printf("%s port %d unit %d: %s, %d %s\n", request->host, request->port, request->unit_id,
           what, request->count, request->count == 1 ? "value" : "values");
    printf("address");
    if (ref->type == REGISTER_BIT) {
        printf("%s  bit", ref->bit >= 0 ? "  word" : "");
    } else {
        enum byte_order order[ORDER_COUNT];
        int count = orders_of(ref, order);
        printf("  %-*s", length * 5 - 1, length > 1 ? "words" : "word");
        for (int i = 0; i < count; i++) {
            char head[8];
            text_format(head, sizeof(head), "%s%s", same_order(ref, order[i]) ? "*" : "",
                        byte_order_word(order[i]));
            printf("  %*s", COLUMN, head);
        }
    }
    printf("\n");
    for (int i = 0; i < request->count; i++)
        print_value(ref, ref->address + i * length, words + (size_t)(i * length));
}

/* HOST, HOST:PORT, [ADDRESS] or [ADDRESS]:PORT. */
static int parse_device(const char *text, struct request *request, struct error *err)
{
    char copy[300], *host = copy, *port = NULL;
    bool whole = text_copy(copy, sizeof(copy), text);
    if (copy[0] == '[') {
        char *end = strchr(copy, ']');
        if (end == NULL || (end[1] != '\0' && end[1] != ':'))
            return error_set(err, ERR_FORMAT, "'%s' is no device; write [ADDRESS]:PORT", text);
        host = copy + 1;
        *end = '\0';
        port = end[1] == ':' ? end + 2 : NULL;
    } else {
        port = strchr(copy, ':');
        if (port != NULL && strchr(port + 1, ':') != NULL)
            return error_set(err, ERR_FORMAT,
                             "'%s': an IPv6 address stands in brackets: [::1]:502", text);
        if (port != NULL)
            *port++ = '\0';
    }
    long number = PORT_DEFAULT;
    if (port != NULL && text_to_long(port, 1, 65535, &number) != 0)
        return error_set(err, ERR_FORMAT, "'%s' is no port; give 1 to 65535", port);
    request->port = (int)number;
    if (!whole || host[0] == '\0' || !text_copy(request->host, sizeof(request->host), host))
        return error_set(err, ERR_FORMAT, "'%.80s' is no device; write HOST:PORT", text);
    return 0;
}

static int run(const struct request *request)
{
    struct error err = {0};
    int total = request->count * register_words(&request->ref);
    uint16_t *words = calloc((size_t)total, sizeof(*words));
    if (words == NULL) {
        error_set(&err, ERR_MEMORY, "no memory for %d registers", total);
        return verb_failed("inspect", &err);
    }
    int code = field_inspect(request->host, request->port, request->unit_id, &request->ref,
                             total, request->timeout_s, words, &err);
    if (code == 0)
        print_values(request, words);
    free(words);
    if (code != 0)
        return verb_failed("inspect", &err);
    return verb_end("inspect", EXIT_DONE);
}

int verb_inspect(int argc, char **argv)
{
    enum { INSPECT_HELP = 1, INSPECT_READ, INSPECT_COUNT, INSPECT_UNIT, INSPECT_TIMEOUT };
    static const struct option table[] = {
        {"help",    no_argument,       NULL, INSPECT_HELP   },
        {"read",    required_argument, NULL, INSPECT_READ   },
        {"count",   required_argument, NULL, INSPECT_COUNT  },
        {"unit",    required_argument, NULL, INSPECT_UNIT   },
        {"timeout", required_argument, NULL, INSPECT_TIMEOUT},
        {NULL,      0,                 NULL, 0              },
    };
    struct request request = {.unit_id = 1, .count = 1, .timeout_s = 1};
    struct error err = {0};
    bool read = false;
    long number;
    int option;
    opterr = 0;
    while ((option = getopt_long(argc, argv, "h", table, NULL)) != -1) {
        switch (option) {
        case 'h':
        case INSPECT_HELP:
            print_help();
            return verb_end("inspect", EXIT_DONE);
        case INSPECT_READ:
            if (register_parse(optarg, &request.ref, &err) != 0)
                return verb_usage("inspect", "--read: %s", err.text);
            read = true;
            break;
        case INSPECT_COUNT:
            if (text_to_long(optarg, 1, 65536, &number) != 0)
                return verb_usage("inspect", "--count '%s': give 1 to 65536", optarg);
            request.count = (int)number;
            break;
        case INSPECT_UNIT:
            if (text_to_long(optarg, 0, 255, &number) != 0 || (number > 247 && number < 255))
                return verb_usage("inspect", "--unit '%s': give 0 to 247, or 255", optarg);
            request.unit_id = (int)number;
            break;
        case INSPECT_TIMEOUT:
            if (time_parse_span(optarg, &request.timeout_s, &err) != 0)
                return verb_usage("inspect", "--timeout: %s", err.text);
            if (request.timeout_s < 0.001 || request.timeout_s > 3600)
                return verb_usage("inspect", "--timeout '%s': give 1 ms to 1 h", optarg);
            break;
        default:
            return verb_usage("inspect", "'%s' is no option, or lacks its value",
                              argv[optind - 1]);
        }
    }
    if (optind >= argc)
        return verb_usage("inspect", "which device? give HOST:PORT");
    if (optind + 1 < argc)
        return verb_usage("inspect", "'%s' is a word too many", argv[optind + 1]);
    if (!read)
        return verb_usage("inspect", "which registers? give --read \"input 0 f32\"");
    if (parse_device(argv[optind], &request, &err) != 0)
        return verb_usage("inspect", "%s", err.text);
    if (request.ref.address + request.count * register_words(&request.ref) > 65536)
        return verb_usage("inspect", "%d values from address %d on reach beyond 65535",
                          request.count, request.ref.address);
    return run(&request);
}
