/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * One look at a device's registers, to commission a point. A read that is longer than one
 * request may be is cut where no value is torn.
 */
#include "internal.h"

/* Below the largest request and a multiple of every value's length. */
enum { INSPECT_REGISTERS = 120 };

static int refused(const char *host, int port, const struct block *block, int exception,
                   struct error *err)
{
    const char *mend = exception == 10 || exception == 11
                           ? "check --unit and the line behind the gateway"
                       : exception == 5 || exception == 6
                           ? "try again later"
                           : "check table and address (addresses count from 0) and --unit";
    return error_set(err, ERR_DEVICE,
                     "%s port %d answers %s %d, %d long, with exception %s; %s", host, port,
                     register_table_word(block->table), block->address, block->count,
                     exception_says(exception), mend);
}

int field_inspect(const char *host, int port, int unit_id, const struct register_ref *ref,
                  int count, double timeout_s, uint16_t *words, struct error *err)
{
    bool bits = ref->table == TABLE_COIL || ref->table == TABLE_DISCRETE;
    int most = bits ? DEVICE_READ_MAX : INSPECT_REGISTERS;
    if (count < 1 || count > 65536 - ref->address)
        return error_set(err, ERR_ARGUMENT, "%d from address %d on reach beyond 65535", count,
                         ref->address);
    struct device device;
    int code = device_init(&device, host, port, unit_id, timeout_s, err);
    if (code == 0)
        code = device_connect(&device, -1, err);
    for (int done = 0; code == 0 && done < count; done += most) {
        struct block block = {.table = ref->table,
                              .address = ref->address + done,
                              .count = count - done < most ? count - done : most};
        enum device_failure failure;
        int answer = device_read(&device, &block, words + done, &failure, err);
        if (answer > 0) {
            code = refused(host, port, &block, answer, err);
            goto out;
        }
        code = answer;
    }
    if (code == ERR_NETWORK || code == ERR_DEVICE)
        error_context(err, "%s port %d", host, port);
out:
    device_done(&device);
    return code;
}
