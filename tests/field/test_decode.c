/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Registers to numbers. Patterns are worked by hand from IEEE 754-2019 (binary32: sign, 8 bits
 * of exponent with bias 127, 23 of fraction; binary64: 11 bits, bias 1023, 52), two's
 * complement, and the big-endian registers of the MODBUS Application Protocol V1.1b3, 4.2.
 */
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>
#include <string.h>

#include <cmocka.h>

#include "ullage/field.h"

static struct register_ref ref_of(enum register_type type, enum byte_order order)
{
    return (struct register_ref){.table = TABLE_INPUT, .type = type, .bit = -1, .order = order};
}

static double decoded(enum register_type type, enum byte_order order, const uint16_t *words)
{
    struct register_ref ref = ref_of(type, order);
    double raw = -12345;
    assert_int_equal(register_decode(&ref, words, &raw), 0);
    return raw;
}

struct pattern {
    enum register_type type;
    double value;
    uint16_t words[4]; /* ABCD */
};
static const struct pattern patterns[] = {
  /* 1.0: exponent 127, fraction 0: 0 01111111 000... */
    {REGISTER_F32, 1.0,                    {0x3F80, 0x0000}                },
 /* -2.5 = -1.25 * 2^1: 1 10000000 010... */
    {REGISTER_F32, -2.5,                   {0xC020, 0x0000}                },
 /* 12.41 = 1.55125 * 2^3; 0.55125 * 2^23 = 4624220.16 -> 0x468F5C: 0 10000010 ... */
    {REGISTER_F32, 13012828.0 / 1048576.0, {0x4146, 0x8F5C}                },
 /* smallest subnormal: 2^-149 */
    {REGISTER_F32, 0x1p-149,               {0x0000, 0x0001}                },
 /* 1.0: exponent 1023: 0 01111111111 0... */
    {REGISTER_F64, 1.0,                    {0x3FF0, 0x0000, 0x0000, 0x0000}},
 /* 12.41: 0.55125 * 2^52 = 2482609348168745.0 (rounded to even): 0x8D1EB851EB852 */
    {REGISTER_F64, 12.41,                  {0x4028, 0xD1EB, 0x851E, 0xB852}},
 /* -100 = -1.5625 * 2^6: exponent 1029 = 0x405, 0.5625 = 0x9/16 */
    {REGISTER_F64, -100.0,                 {0xC059, 0x0000, 0x0000, 0x0000}},
    {REGISTER_U16, 0x1234,                 {0x1234}                        },
    {REGISTER_U16, 65535,                  {0xFFFF}                        },
    {REGISTER_I16, -1,                     {0xFFFF}                        },
    {REGISTER_I16, -32768,                 {0x8000}                        },
    {REGISTER_I16, 4660,                   {0x1234}                        },
    {REGISTER_U32, 305419896,              {0x1234, 0x5678}                },
    {REGISTER_U32, 4294967295.0,           {0xFFFF, 0xFFFF}                },
    {REGISTER_I32, -2,                     {0xFFFF, 0xFFFE}                },
    {REGISTER_I32, -2147483648.0,          {0x8000, 0x0000}                },
    {REGISTER_U64, 0x1p63,                 {0x8000, 0x0000, 0x0000, 0x0000}},
    {REGISTER_U64, 283686952306183.0,      {0x0001, 0x0203, 0x0405, 0x0607}},
    {REGISTER_I64, -2,                     {0xFFFF, 0xFFFF, 0xFFFF, 0xFFFE}},
    {REGISTER_I64, -0x1p63,                {0x8000, 0x0000, 0x0000, 0x0000}},
};

static uint16_t swapped(uint16_t word)
{
    return (uint16_t)((word & 0xFF) * 256 + word / 256);
}

static void test_patterns_worked_by_hand_decode_in_all_four_orders(void **state)
{
    (void)state;
    for (size_t i = 0; i < ARRAY_LENGTH(patterns); i++) {
        const struct pattern *p = &patterns[i];
        struct register_ref ref = ref_of(p->type, ORDER_ABCD);
        int count = register_words(&ref);
        uint16_t cdab[4], badc[4], dcba[4];
        for (int k = 0; k < count; k++) {
            cdab[k] = p->words[count - 1 - k];
            badc[k] = swapped(p->words[k]);
            dcba[k] = swapped(p->words[count - 1 - k]);
        }
        assert_true(decoded(p->type, ORDER_ABCD, p->words) == p->value);
        assert_true(decoded(p->type, ORDER_CDAB, cdab) == p->value);
        assert_true(decoded(p->type, ORDER_BADC, badc) == p->value);
        assert_true(decoded(p->type, ORDER_DCBA, dcba) == p->value);
    }
}

static void test_patterns_encode_in_all_four_orders(void **state)
{
    (void)state;
    for (size_t i = 0; i < ARRAY_LENGTH(patterns); i++) {
        const struct pattern *p = &patterns[i];
        struct register_ref ref = ref_of(p->type, ORDER_ABCD);
        int count = register_words(&ref);
        uint16_t words[4];
        register_encode(&ref, p->value, words);
        assert_memory_equal(words, p->words, (size_t)count * 2);
        ref.order = ORDER_CDAB;
        register_encode(&ref, p->value, words);
        for (int k = 0; k < count; k++)
            assert_int_equal(words[k], p->words[count - 1 - k]);
        ref.order = ORDER_BADC;
        register_encode(&ref, p->value, words);
        for (int k = 0; k < count; k++)
            assert_int_equal(words[k], swapped(p->words[k]));
        ref.order = ORDER_DCBA;
        register_encode(&ref, p->value, words);
        for (int k = 0; k < count; k++)
            assert_int_equal(words[k], swapped(p->words[count - 1 - k]));
    }
}

/* The four orders written out, so that the loops above are not the only word on them: 1.0f is
 * bytes 3F 80 00 00 = A B C D. */
static void test_each_order_of_one_is_the_bytes_it_names(void **state)
{
    (void)state;
    assert_true(decoded(REGISTER_F32, ORDER_ABCD, (uint16_t[]){0x3F80, 0x0000}) == 1.0);
    assert_true(decoded(REGISTER_F32, ORDER_CDAB, (uint16_t[]){0x0000, 0x3F80}) == 1.0);
    assert_true(decoded(REGISTER_F32, ORDER_BADC, (uint16_t[]){0x803F, 0x0000}) == 1.0);
    assert_true(decoded(REGISTER_F32, ORDER_DCBA, (uint16_t[]){0x0000, 0x803F}) == 1.0);
}

/* MODBUS Application Protocol V1.1b3, 6.3: reading 0x006B..0x006D answers 02 2B 00 00 00 64. */
static void test_protocol_document_example_reads_555_0_100(void **state)
{
    (void)state;
    const uint8_t answer[] = {0x02, 0x2B, 0x00, 0x00, 0x00, 0x64};
    const double expected[] = {555, 0, 100};
    for (int i = 0; i < 3; i++) {
        uint16_t word = (uint16_t)(answer[2 * i] << 8 | answer[2 * i + 1]);
        assert_true(decoded(REGISTER_U16, ORDER_ABCD, &word) == expected[i]);
    }
}

static void test_bits_of_a_register_and_single_bits(void **state)
{
    (void)state;
    struct register_ref ref = {.table = TABLE_HOLDING, .type = REGISTER_BIT, .bit = 3};
    double raw;
    uint16_t word = 0x0008;
    assert_int_equal(register_decode(&ref, &word, &raw), 0);
    assert_true(raw == 1);
    word = 0xFFF7;
    assert_int_equal(register_decode(&ref, &word, &raw), 0);
    assert_true(raw == 0);
    ref.bit = 15;
    word = 0x8000;
    assert_int_equal(register_decode(&ref, &word, &raw), 0);
    assert_true(raw == 1);
    register_encode(&ref, 0, &word);
    assert_int_equal(word, 0);
    word = 0x1234;
    register_encode(&ref, 1, &word); /* the other bits of the register stay */
    assert_int_equal(word, 0x9234);

    ref = (struct register_ref){.table = TABLE_COIL, .type = REGISTER_BIT, .bit = -1};
    word = 1;
    assert_int_equal(register_decode(&ref, &word, &raw), 0);
    assert_true(raw == 1);
    register_encode(&ref, 0, &word);
    assert_int_equal(word, 0);
}

/* IEEE 754: exponent all ones is infinity (fraction 0) or not a number. */
static void test_nan_and_infinity_are_no_numbers(void **state)
{
    (void)state;
    const uint16_t bad32[][2] = {
        {0x7FC0, 0},
        {0xFFC0, 0},
        {0x7F80, 0},
        {0xFF80, 0},
        {0x7F80, 1}
    };
    const uint16_t bad64[][4] = {
        {0x7FF8, 0, 0, 0},
        {0x7FF0, 0, 0, 0},
        {0xFFF0, 0, 0, 1}
    };
    struct register_ref ref = ref_of(REGISTER_F32, ORDER_ABCD);
    double raw = 7;
    for (size_t i = 0; i < ARRAY_LENGTH(bad32); i++)
        assert_int_equal(register_decode(&ref, bad32[i], &raw), ERR_FORMAT);
    ref.type = REGISTER_F64;
    for (size_t i = 0; i < ARRAY_LENGTH(bad64); i++)
        assert_int_equal(register_decode(&ref, bad64[i], &raw), ERR_FORMAT);
    assert_true(raw == 7);
}

static void test_encoding_rounds_and_is_held_to_the_type(void **state)
{
    (void)state;
    const struct {
        enum register_type type;
        double raw, back;
    } cases[] = {
        {REGISTER_U16, 12.6,        13            },
        {REGISTER_U16, -5,          0             },
        {REGISTER_U16, 70000,       65535         },
        {REGISTER_I16, -40000,      -32768        },
        {REGISTER_I16, 40000,       32767         },
        {REGISTER_U32, 1e12,        4294967295.0  },
        {REGISTER_I32, -1e12,       -0x1p31       },
        {REGISTER_U64, -1,          0             },
        {REGISTER_U64, 1e30,        0x1p64        },
        {REGISTER_I64, 1e30,        0x1p63        },
        {REGISTER_I64, -1e30,       -0x1p63       },
        {REGISTER_U16, (double)NAN, 0             },
        {REGISTER_F32, 1e300,       0x1.fffffep127},
    };
    for (size_t i = 0; i < ARRAY_LENGTH(cases); i++) {
        struct register_ref ref = ref_of(cases[i].type, ORDER_ABCD);
        uint16_t words[4];
        register_encode(&ref, cases[i].raw, words);
        assert_true(decoded(cases[i].type, ORDER_ABCD, words) == cases[i].back);
    }
}

static uint64_t next_random(uint64_t *seed)
{
    *seed ^= *seed << 13;
    *seed ^= *seed >> 7;
    *seed ^= *seed << 17;
    return *seed;
}

static void test_any_words_that_are_a_number_come_back_the_same(void **state)
{
    (void)state;
    uint64_t seed = UINT64_C(0x9E3779B97F4A7C15);
    print_message("seed %llx\n", (unsigned long long)seed);
    int numbers = 0;
    for (int i = 0; i < 200000; i++) {
        struct register_ref ref =
            ref_of((enum register_type)(REGISTER_U16 + i % (REGISTER_TYPE_COUNT - 1)),
                   (enum byte_order)(i / 8 % ORDER_COUNT));
        uint64_t bits = next_random(&seed);
        uint16_t words[4], back[4] = {0};
        memcpy(words, &bits, sizeof(words));
        if (ref.type == REGISTER_U64 || ref.type == REGISTER_I64)
            /* a double holds integers up to 2^53 exactly */
            register_encode(&ref, (double)(bits >> 12), words);
        double raw;
        if (register_decode(&ref, words, &raw) != 0)
            continue;
        numbers++;
        register_encode(&ref, raw, back);
        assert_memory_equal(back, words, (size_t)register_words(&ref) * 2);
    }
    assert_true(numbers > 190000); /* one float in 256, one double in 2048 is no number */
}

/* ---- points --------------------------------------------------------------------------------
 */

static struct point f32_point(void)
{
    return (struct point){
        .name = "PT-1",
        .read = ref_of(REGISTER_F32, ORDER_ABCD),
        .unit = {.symbol = "kPa(g)",
                 .dimension = DIMENSION_PRESSURE,
                 .scale = 1000,
                 .gauge = true},
        .stale_s = 5,
    };
}

static struct sample sample_of(const struct point *point, double raw, int fault)
{
    uint16_t words[4];
    register_encode(&point->read, raw, words);
    return point_sample(point, words, fault, 42);
}

static void test_value_is_si_and_gauge_stays_gauge(void **state)
{
    (void)state;
    struct point point = f32_point();
    struct sample s = sample_of(&point, 12.5, 0);
    assert_true(s.value == 12500); /* no barometer enters */
    assert_int_equal(s.quality, QUALITY_GOOD);
    assert_int_equal(s.cause, CAUSE_NONE);
    assert_true(s.read_utc_ns == 42);

    /* -186 degC = 87.15 K (0 degC = 273.15 K, SI Brochure) */
    point.unit =
        (struct unit){.dimension = DIMENSION_TEMPERATURE, .scale = 1, .offset = 273.15};
    assert_true(fabs(sample_of(&point, -186, 0).value - 87.15) < 1e-9);
}

/* A 4..20 mA transmitter on 4000..20000 counts and 0..40 kPa: 12 mA is the middle, 20 kPa. */
static void test_raw_counts_map_onto_the_span(void **state)
{
    (void)state;
    struct point point = f32_point();
    point.read.type = REGISTER_U16;
    point.scaled = true;
    point.raw_low = 4000;
    point.raw_high = 20000;
    point.span_low = 0;
    point.span_high = 40000;
    assert_true(point_from_raw(&point, 4000) == 0);
    assert_true(point_from_raw(&point, 20000) == 40000);
    assert_true(fabs(point_from_raw(&point, 12000) - 20000) < 1e-9);
    assert_true(fabs(point_from_raw(&point, 3600) + 1000) < 1e-9);
    for (int raw = 0; raw <= 65535; raw += 17)
        assert_true(fabs(point_to_raw(&point, point_from_raw(&point, raw)) - raw) < 1e-8);
    /* a falling span */
    point.span_low = 300;
    point.span_high = 80;
    assert_true(fabs(point_from_raw(&point, 8000) - 245) < 1e-9);
    assert_true(fabs(point_to_raw(&point, 245) - 8000) < 1e-9);
}

static void test_out_of_range_no_number_and_fault_are_bad_with_their_reason(void **state)
{
    (void)state;
    struct point point = f32_point();
    point.has_valid = true;
    point.valid_low = -5000;
    point.valid_high = 60000;
    const struct {
        double raw;
        int fault;
        enum quality quality;
        enum cause cause;
    } cases[] = {
        {60,               0,  QUALITY_GOOD,      CAUSE_NONE         },
        {-5,               0,  QUALITY_GOOD,      CAUSE_NONE         },
        {60.01,            0,  QUALITY_BAD,       CAUSE_OUT_OF_RANGE },
        {-5.01,            0,  QUALITY_BAD,       CAUSE_OUT_OF_RANGE },
        {(double)NAN,      0,  QUALITY_BAD,       CAUSE_NOT_A_NUMBER },
        {(double)INFINITY, 0,  QUALITY_BAD,       CAUSE_NOT_A_NUMBER },
        {10,               1,  QUALITY_BAD,       CAUSE_FAULT_BIT    },
        {(double)NAN,      1,  QUALITY_BAD,       CAUSE_FAULT_BIT    },
        {10,               -1, QUALITY_UNCERTAIN, CAUSE_FAULT_UNKNOWN},
        {99,               -1, QUALITY_BAD,       CAUSE_OUT_OF_RANGE },
    };
    point.has_fault = true;
    for (size_t i = 0; i < ARRAY_LENGTH(cases); i++) {
        struct sample s = sample_of(&point, cases[i].raw, cases[i].fault);
        assert_int_equal(s.quality, cases[i].quality);
        assert_int_equal(s.cause, cases[i].cause);
        if (s.quality == QUALITY_BAD) {
            assert_true(s.value == 0);
            assert_true(s.u == 0);
        }
    }
    point.has_fault = false; /* without a fault bit its state means nothing */
    assert_int_equal(sample_of(&point, 10, 1).quality, QUALITY_GOOD);
    assert_int_equal(sample_of(&point, 10, -1).quality, QUALITY_GOOD);
}

static void test_reading_is_rounded_to_its_resolution_and_bears_its_uncertainty(void **state)
{
    (void)state;
    struct point point = f32_point();
    point.resolution = 0.01; /* kPa */
    point.u.absolute = 30;
    point.u.of_span = 40;
    struct sample s = sample_of(&point, 12.3456, 0);
    assert_true(fabs(s.value - 12350) < 1e-9);
    assert_true(fabs(s.u - 50) < 1e-9); /* JCGM 100, 5.1.2: in quadrature */
}

static void test_every_cause_has_its_words(void **state)
{
    (void)state;
    for (int i = 0; i < CAUSE_COUNT; i++)
        assert_true(strlen(cause_says((enum cause)i)) > 3);
}

static void test_new_frame_is_missing_and_has_no_age(void **state)
{
    (void)state;
    struct point points[3] = {f32_point(), f32_point(), f32_point()};
    struct plant plant = {.point_count = 3, .point = points};
    struct arena *arena = arena_create();
    struct frame frame;
    assert_int_equal(frame_init(&frame, &plant, arena), 0);
    assert_int_equal(frame.count, 3);
    for (int i = 0; i < 3; i++) {
        assert_int_equal(frame.sample[i].quality, QUALITY_MISSING);
        assert_int_equal(frame.sample[i].cause, CAUSE_NEVER_READ);
        assert_true(frame_age_s(&frame, i) == 0);
    }
    frame.utc_ns = 10 * NS_PER_S;
    frame.sample[1].read_utc_ns = 7 * NS_PER_S + NS_PER_S / 2;
    assert_true(frame_age_s(&frame, 0) == 0);
    assert_true(frame_age_s(&frame, 1) == 2.5);
    arena_free(arena);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_patterns_worked_by_hand_decode_in_all_four_orders),
        cmocka_unit_test(test_patterns_encode_in_all_four_orders),
        cmocka_unit_test(test_each_order_of_one_is_the_bytes_it_names),
        cmocka_unit_test(test_protocol_document_example_reads_555_0_100),
        cmocka_unit_test(test_bits_of_a_register_and_single_bits),
        cmocka_unit_test(test_nan_and_infinity_are_no_numbers),
        cmocka_unit_test(test_encoding_rounds_and_is_held_to_the_type),
        cmocka_unit_test(test_any_words_that_are_a_number_come_back_the_same),
        cmocka_unit_test(test_value_is_si_and_gauge_stays_gauge),
        cmocka_unit_test(test_raw_counts_map_onto_the_span),
        cmocka_unit_test(test_out_of_range_no_number_and_fault_are_bad_with_their_reason),
        cmocka_unit_test(test_reading_is_rounded_to_its_resolution_and_bears_its_uncertainty),
        cmocka_unit_test(test_every_cause_has_its_words),
        cmocka_unit_test(test_new_frame_is_missing_and_has_no_age),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
