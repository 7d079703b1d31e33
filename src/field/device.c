/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * One device behind libmodbus (3.1.6 and later). What must stay true:
 * - function codes 1 to 4 and no other: a device is read, never written;
 * - the whole answer must arrive within the timeout (the library's timeout per byte is off, or
 *   a device that drips would hold a thread for minutes);
 * - the library's own recovery and debug output are off: it would sleep and print;
 * - after any answer that is not exactly what was asked the caller closes the connection.
 * An answer counts only if transaction, protocol, length, unit, function and byte count are
 * those of the request: a device or gateway that answers for another unit is not believed.
 */
#include "internal.h"

#include <errno.h>
#include <math.h>
#include <string.h>
#include <sys/socket.h>

#include <modbus.h>

int device_init(struct device *device, const char *host, int port, int unit_id,
                double timeout_s, struct error *err)
{
    char service[8];
    text_format(service, sizeof(service), "%d", port);
    *device =
        (struct device){.host = host, .port = port, .unit_id = unit_id, .timeout_s = timeout_s};
    if (!(timeout_s >= 0.001 && timeout_s <= 3600))
        return error_set(err, ERR_ARGUMENT, "a timeout of %g s; give 1 ms to 1 h", timeout_s);
    modbus_t *context = modbus_new_tcp_pi(host, service);
    if (context == NULL)
        return error_set(err, ERR_ARGUMENT, "'%.80s' port %d cannot be a Modbus device", host,
                         port);
    device->context = context;
    if (modbus_set_slave(context, unit_id) != 0)
        return error_set(err, ERR_ARGUMENT, "unit %d is none of Modbus; give 0 to 247, or 255",
                         unit_id);
    uint32_t seconds = (uint32_t)timeout_s;
    uint32_t micros = (uint32_t)lrint((timeout_s - seconds) * 1e6);
    if (micros > 999999)
        micros = 999999;
    modbus_set_response_timeout(context, seconds, micros);
    modbus_set_byte_timeout(context, 0, 0);
    modbus_set_error_recovery(context, MODBUS_ERROR_RECOVERY_NONE);
    modbus_set_debug(context, FALSE);
    return 0;
}

int device_connect(struct device *device, int stop_fd, struct error *err)
{
    int fd = socket_connect(device->host, device->port, device->timeout_s, stop_fd, err);
    if (fd < 0)
        return fd;
    modbus_set_socket(device->context, fd);
    return 0;
}

bool device_connected(const struct device *device)
{
    return modbus_get_socket(device->context) >= 0;
}

enum socket_rest device_rest(const struct device *device)
{
    return socket_rest(modbus_get_socket(device->context));
}

void device_close(struct device *device)
{
    modbus_close(device->context);
}

void device_done(struct device *device)
{
    if (device->context == NULL)
        return;
    modbus_close(device->context);
    modbus_free(device->context);
    device->context = NULL;
}

/* One request and its answer. The request is ours (MODBUS Messaging on TCP/IP V1.0b, 3.1.3),
 * the answer is gathered by the library, which also keeps the time; then header and counts are
 * checked here, because the library's own read functions do not look at the unit that an answer
 * names, and their raw request has no transaction number. 0; an exception; or -1 with errno. */
static int exchange(struct device *device, const struct block *block, uint16_t *words)
{
    enum { HEADER = 7, REQUEST = 12, FUNCTION = 7, COUNT = 8, DATA = 9 };
    static const uint8_t functions[] = {
        [TABLE_COIL] = MODBUS_FC_READ_COILS,
        [TABLE_DISCRETE] = MODBUS_FC_READ_DISCRETE_INPUTS,
        [TABLE_INPUT] = MODBUS_FC_READ_INPUT_REGISTERS,
        [TABLE_HOLDING] = MODBUS_FC_READ_HOLDING_REGISTERS,
    };
    bool bits = block->table == TABLE_COIL || block->table == TABLE_DISCRETE;
    uint16_t transaction = ++device->transaction;
    uint8_t function = functions[block->table], answer[MODBUS_TCP_MAX_ADU_LENGTH];
    const uint8_t request[REQUEST] = {
        (uint8_t)(transaction >> 8),
        (uint8_t)transaction,
        0,
        0,
        0,
        REQUEST - 6,
        (uint8_t)device->unit_id,
        function,
        (uint8_t)(block->address >> 8),
        (uint8_t)block->address,
        (uint8_t)(block->count >> 8),
        (uint8_t)block->count,
    };
    ssize_t sent = send(modbus_get_socket(device->context), request, REQUEST, MSG_NOSIGNAL);
    if (sent != REQUEST) {
        if (sent >= 0)
            errno = EPIPE;
        return -1;
    }
    int length = modbus_receive_confirmation(device->context, answer);
    if (length < 0)
        return -1;
    int bytes = bits ? (block->count + 7) / 8 : 2 * block->count;
    /* Transaction, protocol and unit come back as they were sent; the length is what arrived.
     */
    bool header = length > FUNCTION + 1 && memcmp(answer, request, 4) == 0 &&
                  answer[4] * 256 + answer[5] == length - 6 && answer[6] == request[6];
    errno = EMBBADDATA;
    if (header && answer[FUNCTION] == (function | 0x80) && length == HEADER + 2) {
        if (answer[COUNT] >= 1 && answer[COUNT] < MODBUS_EXCEPTION_MAX)
            return answer[COUNT];
        errno = EMBBADEXC;
        return -1;
    }
    if (!header || answer[FUNCTION] != function || answer[COUNT] != bytes ||
        length != DATA + bytes)
        return -1;
    const uint8_t *data = answer + DATA;
    for (int i = 0; i < block->count; i++) {
        if (bits)
            words[i] = (uint16_t)(data[i / 8] >> (i % 8) & 1);
        else
            words[i] = (uint16_t)(data[2 * i] << 8 | data[2 * i + 1]);
    }
    return 0;
}

static int trouble(const struct device *device, int code, enum device_failure *failure,
                   struct error *err)
{
    char reason[96];
    *failure = DEVICE_WRONG;
    switch (code) {
    case ETIMEDOUT:
        *failure = DEVICE_SILENT;
        return error_set(err, ERR_DEVICE, "no answer in %.4g ms", device->timeout_s * 1e3);
    case ECONNRESET:
    case EPIPE:
        *failure = DEVICE_CLOSED;
        return error_set(err, ERR_NETWORK, "the device closed the connection");
    case EMBBADDATA:
    case EMBMDATA:
        return error_set(err, ERR_DEVICE, "the answer does not match the request");
    case EMBBADEXC:
    case EMBUNKEXC:
        return error_set(err, ERR_DEVICE, "the answer is no valid exception");
    default:
        if (code >= MODBUS_ENOBASE || strerror_r(code, reason, sizeof(reason)) != 0)
            return error_set(err, ERR_DEVICE, "the answer is not valid");
        return error_set(err, ERR_NETWORK, "the connection failed: %s", reason);
    }
}

int device_read(struct device *device, const struct block *block, uint16_t *words,
                enum device_failure *failure, struct error *err)
{
    errno = 0;
    int answer = exchange(device, block, words);
    return answer >= 0 ? answer : trouble(device, errno, failure, err);
}

/* MODBUS Application Protocol V1.1b3, 7. */
const char *exception_says(int exception)
{
    static const char *const words[] = {
        [1] = "01, illegal function",
        [2] = "02, illegal address",
        [3] = "03, illegal value",
        [4] = "04, device failure",
        [5] = "05, acknowledge",
        [6] = "06, device busy",
        [7] = "07, not done",
        [8] = "08, memory parity error",
        [9] = "09",
        [10] = "0A, gateway has no path",
        [11] = "0B, gateway's target does not answer",
    };
    bool known = exception > 0 && exception < (int)ARRAY_LENGTH(words);
    return known ? words[exception] : "unknown";
}
