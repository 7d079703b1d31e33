/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Registers as numbers and back. A register is big-endian on the wire (MODBUS Application
 * Protocol V1.1b3, 4.2); the order of the registers of a longer value is not standardised, so
 * the plant file names it. Floats are IEEE 754 binary32 and binary64. Everything here is pure.
 */
#include "ullage/field.h"

#include <float.h>
#include <math.h>
#include <string.h>

_Static_assert(sizeof(float) == 4 && FLT_MANT_DIG == 24, "float is IEEE 754 binary32");
_Static_assert(sizeof(double) == 8 && DBL_MANT_DIG == 53, "double is IEEE 754 binary64");

/* Brings words from wire order to most significant first, or back: both steps are their own
 * inverse and do not touch each other. */
static void reorder(enum byte_order order, uint16_t *words, int count)
{
    if (order == ORDER_CDAB || order == ORDER_DCBA)
        for (int i = 0; i < count / 2; i++) {
            uint16_t kept = words[i];
            words[i] = words[count - 1 - i];
            words[count - 1 - i] = kept;
        }
    if (order == ORDER_BADC || order == ORDER_DCBA)
        for (int i = 0; i < count; i++)
            words[i] = (uint16_t)(words[i] << 8 | words[i] >> 8);
}

int register_decode(const struct register_ref *ref, const uint16_t *words, double *raw)
{
    bool single = ref->table == TABLE_COIL || ref->table == TABLE_DISCRETE;
    if (single) {
        *raw = words[0] != 0;
        return 0;
    }
    uint16_t copy[4] = {0};
    int count = register_words(ref);
    memcpy(copy, words, (size_t)count * sizeof(*copy));
    reorder(ref->order, copy, count);
    uint64_t bits = 0;
    for (int i = 0; i < count; i++)
        bits = bits << 16 | copy[i];

    double value = 0;
    switch (ref->type) {
    case REGISTER_BIT:
        value = (double)(bits >> (ref->bit & 15) & 1);
        break;
    case REGISTER_U16:
    case REGISTER_U32:
    case REGISTER_U64:
        value = (double)bits;
        break;
    case REGISTER_I16:
        value = (int16_t)bits;
        break;
    case REGISTER_I32:
        value = (int32_t)bits;
        break;
    case REGISTER_I64:
        value = (double)(int64_t)bits;
        break;
    case REGISTER_F32: {
        uint32_t half = (uint32_t)bits;
        float number;
        memcpy(&number, &half, sizeof(number));
        value = (double)number;
        break;
    }
    case REGISTER_F64:
        memcpy(&value, &bits, sizeof(value));
        break;
    case REGISTER_TYPE_COUNT:
        return ERR_FORMAT;
    }
    if (!isfinite(value))
        return ERR_FORMAT;
    *raw = value;
    return 0;
}

/* The nearest count within low..high, both of which a double holds exactly. No number is 0. */
static double held(double raw, double low, double high)
{
    if (isnan(raw))
        return 0;
    return fmin(fmax(round(raw), low), high);
}

/* 2^64 and 2^63 are no counts of their types, but the next double below them would lose the
 * last ones. */
static uint64_t encode_u64(double raw)
{
    double value = held(raw, 0, 18446744073709551616.0);
    return value >= 18446744073709551616.0 ? UINT64_MAX : (uint64_t)value;
}

static uint64_t encode_i64(double raw)
{
    double value = held(raw, -9223372036854775808.0, 9223372036854775808.0);
    return (uint64_t)(value >= 9223372036854775808.0 ? INT64_MAX : (int64_t)value);
}

static uint64_t encode_f32(double raw)
{
    float number =
        isfinite(raw) ? (float)fmin(fmax(raw, (double)-FLT_MAX), (double)FLT_MAX) : (float)raw;
    uint32_t bits;
    memcpy(&bits, &number, sizeof(bits));
    return bits;
}

void register_encode(const struct register_ref *ref, double raw, uint16_t *words)
{
    if (ref->table == TABLE_COIL || ref->table == TABLE_DISCRETE) {
        words[0] = held(raw, 0, 1) > 0;
        return;
    }
    uint64_t bits = 0;
    switch (ref->type) {
    case REGISTER_BIT: {
        uint16_t mask = (uint16_t)(1U << (ref->bit & 15));
        reorder(ref->order, words, 1);
        bits = held(raw, 0, 1) > 0 ? words[0] | mask : words[0] & ~mask & 0xFFFFU;
        break;
    }
    case REGISTER_U16:
        bits = (uint64_t)held(raw, 0, UINT16_MAX);
        break;
    case REGISTER_I16:
        bits = (uint64_t)(int64_t)held(raw, INT16_MIN, INT16_MAX);
        break;
    case REGISTER_U32:
        bits = (uint64_t)held(raw, 0, UINT32_MAX);
        break;
    case REGISTER_I32:
        bits = (uint64_t)(int64_t)held(raw, INT32_MIN, INT32_MAX);
        break;
    case REGISTER_U64:
        bits = encode_u64(raw);
        break;
    case REGISTER_I64:
        bits = encode_i64(raw);
        break;
    case REGISTER_F32:
        bits = encode_f32(raw);
        break;
    case REGISTER_F64:
        memcpy(&bits, &raw, sizeof(bits));
        break;
    case REGISTER_TYPE_COUNT:
        return;
    }
    int count = register_words(ref);
    for (int i = count - 1; i >= 0; i--) {
        words[i] = (uint16_t)(bits & 0xFFFF);
        bits >>= 16;
    }
    reorder(ref->order, words, count);
}

double point_from_raw(const struct point *point, double raw)
{
    if (!point->scaled)
        return raw * point->unit.scale + point->unit.offset;
    /* Exact at both ends, so that a full-scale reading is the span's own end. */
    double part = (raw - point->raw_low) / (point->raw_high - point->raw_low);
    return point->span_low * (1 - part) + point->span_high * part;
}

double point_to_raw(const struct point *point, double value_si)
{
    if (!point->scaled)
        return (value_si - point->unit.offset) / point->unit.scale;
    double part = (value_si - point->span_low) / (point->span_high - point->span_low);
    return point->raw_low * (1 - part) + point->raw_high * part;
}

static struct sample bad_sample(enum cause cause, int64_t read_utc_ns)
{
    return (struct sample){.quality = QUALITY_BAD, .cause = cause, .read_utc_ns = read_utc_ns};
}

struct sample point_sample(const struct point *point, const uint16_t *words, int fault,
                           int64_t read_utc_ns)
{
    double raw;
    if (point->has_fault && fault > 0)
        return bad_sample(CAUSE_FAULT_BIT, read_utc_ns);
    if (register_decode(&point->read, words, &raw) != 0)
        return bad_sample(CAUSE_NOT_A_NUMBER, read_utc_ns);
    double value = point_round(point, point_from_raw(point, raw));
    double u = point_uncertainty(point, value);
    if (!isfinite(value) || !isfinite(u))
        return bad_sample(CAUSE_NOT_A_NUMBER, read_utc_ns);
    if (point->has_valid && (value < point->valid_low || value > point->valid_high))
        return bad_sample(CAUSE_OUT_OF_RANGE, read_utc_ns);
    bool doubt = point->has_fault && fault < 0;
    return (struct sample){
        .value = value,
        .u = u,
        .quality = doubt ? QUALITY_UNCERTAIN : QUALITY_GOOD,
        .cause = doubt ? CAUSE_FAULT_UNKNOWN : CAUSE_NONE,
        .read_utc_ns = read_utc_ns,
    };
}
