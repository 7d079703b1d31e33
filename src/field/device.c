/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * One device behind libmodbus (3.1.6 and later). What must stay true:
 * - function codes 1 to 4 and no other: a device is read, never written;
 * - the whole answer must arrive within the timeout (the library's timeout per byte is off, or
 *   a device that drips would hold a thread for minutes);
 * - the library's own recovery and debug output are off: it would sleep and print;
 * - after any answer that is not exactly what was asked the caller closes the connection.
 * The library checks transaction, function and length of an answer. It does not check the unit
 * it names: devices that answer with a unit of their own are common enough.
 */
#include "internal.h"

#include <errno.h>
#include <math.h>
#include <string.h>

#include <modbus.h>

int device_init(struct device *device, const char *host, int port, int unit_id,
                double timeout_s, struct error *err)
{
    char service[8];
    text_format(service, sizeof(service), "%d", port);
    *device = (struct device){.host = host, .port = port, .timeout_s = timeout_s};
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

static int read_bits(modbus_t *context, const struct block *block, uint16_t *words)
{
    uint8_t bits[DEVICE_READ_MAX];
    int got = block->table == TABLE_COIL
                  ? modbus_read_bits(context, block->address, block->count, bits)
                  : modbus_read_input_bits(context, block->address, block->count, bits);
    for (int i = 0; i < got; i++)
        words[i] = bits[i] != 0;
    return got;
}

static int read_registers(modbus_t *context, const struct block *block, uint16_t *words)
{
    return block->table == TABLE_INPUT
               ? modbus_read_input_registers(context, block->address, block->count, words)
               : modbus_read_registers(context, block->address, block->count, words);
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
    bool bits = block->table == TABLE_COIL || block->table == TABLE_DISCRETE;
    errno = 0;
    int got = bits ? read_bits(device->context, block, words)
                   : read_registers(device->context, block, words);
    int code = errno;
    if (got == block->count)
        return 0;
    if (got < 0 && code > MODBUS_ENOBASE && code < MODBUS_ENOBASE + MODBUS_EXCEPTION_MAX)
        return code - MODBUS_ENOBASE;
    return trouble(device, got < 0 ? code : EMBBADDATA, failure, err);
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
