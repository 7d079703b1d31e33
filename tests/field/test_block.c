/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Read plans: as few requests as gap and block size allow, no value torn. Limits of one request
 * (125 registers, 2000 bits): MODBUS Application Protocol V1.1b3, 6.1 to 6.4.
 */
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>
#include <stdio.h>
#include <string.h>

#include <cmocka.h>

#include "ullage/field.h"

enum { POINTS = 1200, BLOCKS = 1200 };

struct fixture {
    struct link link[2];
    struct point point[POINTS];
    struct plant plant;
};

static void setup(struct fixture *f, int gap, int block)
{
    memset(f, 0, sizeof(*f));
    for (int i = 0; i < 2; i++)
        f->link[i] = (struct link){.name = "l", .gap = gap, .block = block};
    f->plant = (struct plant){.link_count = 2, .link = f->link, .point = f->point};
}

static struct point *add(struct fixture *f, enum register_table table, int address,
                         enum register_type type)
{
    struct point *point = &f->point[f->plant.point_count++];
    *point = (struct point){
        .name = "p", .read = {.table = table, .address = address, .type = type, .bit = -1}
    };
    return point;
}

/* Whether one of the blocks holds the whole value. */
static bool whole(const struct register_ref *ref, const struct block *blocks, int count)
{
    for (int i = 0; i < count; i++)
        if (blocks[i].table == ref->table && blocks[i].address <= ref->address &&
            ref->address + register_words(ref) <= blocks[i].address + blocks[i].count)
            return true;
    return false;
}

static struct fixture fixture;
static struct block blocks[BLOCKS];

static void test_a_thousand_registers_need_eight_reads_and_126_need_two(void **state)
{
    (void)state;
    setup(&fixture, 0, 125);
    for (int i = 0; i < 1000; i++)
        add(&fixture, TABLE_HOLDING, i, REGISTER_U16);
    assert_int_equal(block_plan(&fixture.plant, 0, blocks, BLOCKS), 8);
    setup(&fixture, 0, 125);
    for (int i = 0; i < 126; i++)
        add(&fixture, TABLE_HOLDING, i, REGISTER_U16);
    assert_int_equal(block_plan(&fixture.plant, 0, blocks, BLOCKS), 2);
    assert_int_equal(blocks[0].count, 125);
    assert_int_equal(blocks[1].count, 1);
}

static void test_bits_go_by_two_thousand(void **state)
{
    (void)state;
    setup(&fixture, 4000, 125);
    add(&fixture, TABLE_COIL, 0, REGISTER_BIT);
    add(&fixture, TABLE_COIL, 1999, REGISTER_BIT);
    assert_int_equal(block_plan(&fixture.plant, 0, blocks, BLOCKS), 1);
    assert_int_equal(blocks[0].count, 2000);
    add(&fixture, TABLE_COIL, 2000, REGISTER_BIT);
    assert_int_equal(block_plan(&fixture.plant, 0, blocks, BLOCKS), 2);
}

static void test_gap_joins_only_what_it_may_read_over(void **state)
{
    (void)state;
    setup(&fixture, 8, 60);
    add(&fixture, TABLE_INPUT, 0, REGISTER_F32);
    add(&fixture, TABLE_INPUT, 10, REGISTER_F32); /* 2..9 read over: 8 */
    assert_int_equal(block_plan(&fixture.plant, 0, blocks, BLOCKS), 1);
    assert_int_equal(blocks[0].address, 0);
    assert_int_equal(blocks[0].count, 12);
    fixture.point[1].read.address = 11; /* 9 */
    assert_int_equal(block_plan(&fixture.plant, 0, blocks, BLOCKS), 2);
    assert_int_equal(blocks[1].address, 11);
    assert_int_equal(blocks[1].count, 2);
}

static void test_a_value_across_the_block_limit_moves_whole_to_the_next(void **state)
{
    (void)state;
    setup(&fixture, 0, 5);
    for (int i = 0; i < 4; i++)
        add(&fixture, TABLE_INPUT, 2 * i, REGISTER_F32);
    assert_int_equal(block_plan(&fixture.plant, 0, blocks, BLOCKS), 2);
    assert_int_equal(blocks[0].count, 4);
    assert_int_equal(blocks[1].address, 4);
    assert_int_equal(blocks[1].count, 4);
}

static void test_tables_and_links_never_share_a_request(void **state)
{
    (void)state;
    setup(&fixture, 8, 60);
    add(&fixture, TABLE_INPUT, 0, REGISTER_U16);
    add(&fixture, TABLE_HOLDING, 1, REGISTER_U16);
    add(&fixture, TABLE_INPUT, 1, REGISTER_U16)->link = 1;
    assert_int_equal(block_plan(&fixture.plant, 0, blocks, BLOCKS), 2);
    assert_int_equal(block_plan(&fixture.plant, 1, blocks, BLOCKS), 1);
    assert_int_equal(blocks[0].address, 1);
    assert_int_equal(blocks[0].count, 1);
}

static void test_fault_bits_are_read_too_and_doubles_once(void **state)
{
    (void)state;
    setup(&fixture, 0, 60);
    for (int i = 0; i < 16; i++) {
        struct point *point = add(&fixture, TABLE_HOLDING, 7, REGISTER_BIT);
        point->read.bit = i;
        point->has_fault = true;
        point->fault = (struct register_ref){
            .table = TABLE_DISCRETE, .address = 12, .type = REGISTER_BIT, .bit = -1};
    }
    assert_int_equal(block_plan(&fixture.plant, 0, blocks, BLOCKS), 2);
    assert_int_equal(blocks[0].table, TABLE_DISCRETE);
    assert_int_equal(blocks[0].count, 1);
    assert_int_equal(blocks[1].count, 1);
}

static void test_plan_that_does_not_fit_or_is_empty(void **state)
{
    (void)state;
    setup(&fixture, 0, 60);
    assert_int_equal(block_plan(&fixture.plant, 0, blocks, 0), 0);
    add(&fixture, TABLE_INPUT, 0, REGISTER_U16);
    add(&fixture, TABLE_INPUT, 9, REGISTER_U16);
    assert_true(block_plan(&fixture.plant, 0, blocks, 1) < 0);
    assert_int_equal(block_plan(&fixture.plant, 0, blocks, 2), 2);
}

static unsigned next_random(unsigned *seed)
{
    *seed = *seed * 1664525U + 1013904223U;
    return *seed >> 8;
}

/* Fewest requests for sorted, distinct, disjoint values, by trying every way to cut: cost[i] is
 * the least for the first i values. Independent of the plan's greedy order. */
static int fewest(const struct point *point, int count, int gap, int block)
{
    int cost[64] = {0};
    for (int end = 1; end <= count; end++) {
        cost[end] = cost[end - 1] + 1;
        for (int from = end - 1; from >= 1; from--) {
            const struct register_ref *before = &point[from - 1].read, *at = &point[from].read;
            const struct register_ref *last = &point[end - 1].read;
            if (at->address - before->address - register_words(before) > gap ||
                last->address + register_words(last) - before->address > block)
                break;
            if (cost[from - 1] + 1 < cost[end])
                cost[end] = cost[from - 1] + 1;
        }
    }
    return cost[count];
}

static void test_any_plan_is_whole_within_limits_and_minimal(void **state)
{
    (void)state;
    unsigned seed = 20261201;
    print_message("seed %u\n", seed);
    static const enum register_type types[] = {REGISTER_U16, REGISTER_F32, REGISTER_F64};
    for (int run = 0; run < 3000; run++) {
        int gap = (int)(next_random(&seed) % 12), block = 4 + (int)(next_random(&seed) % 40);
        setup(&fixture, gap, block);
        int count = 1 + (int)(next_random(&seed) % 60), address = 0;
        for (int i = 0; i < count; i++) {
            address += (int)(next_random(&seed) % 7);
            struct point *p =
                add(&fixture, TABLE_INPUT, address, types[next_random(&seed) % 3]);
            address += register_words(&p->read);
        }
        int least = fewest(fixture.point, count, gap, block);
        /* the order in the file means nothing: turn it round */
        for (int i = 0; i < count / 2; i++) {
            struct point kept = fixture.point[i];
            fixture.point[i] = fixture.point[count - 1 - i];
            fixture.point[count - 1 - i] = kept;
        }
        int planned = block_plan(&fixture.plant, 0, blocks, BLOCKS);
        assert_int_equal(planned, least);
        for (int i = 0; i < planned; i++)
            assert_in_range(blocks[i].count, 1, block);
        for (int i = 0; i < count; i++)
            assert_true(whole(&fixture.point[i].read, blocks, planned));
    }
}

static void test_overlapping_values_stay_whole(void **state)
{
    (void)state;
    setup(&fixture, 0, 4);
    add(&fixture, TABLE_INPUT, 0, REGISTER_F64);
    add(&fixture, TABLE_INPUT, 1, REGISTER_U16);
    add(&fixture, TABLE_INPUT, 2, REGISTER_F64);
    add(&fixture, TABLE_INPUT, 3, REGISTER_F32);
    int count = block_plan(&fixture.plant, 0, blocks, BLOCKS);
    assert_int_equal(count, 2);
    for (int i = 0; i < 4; i++)
        assert_true(whole(&fixture.point[i].read, blocks, count));
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_a_thousand_registers_need_eight_reads_and_126_need_two),
        cmocka_unit_test(test_bits_go_by_two_thousand),
        cmocka_unit_test(test_gap_joins_only_what_it_may_read_over),
        cmocka_unit_test(test_a_value_across_the_block_limit_moves_whole_to_the_next),
        cmocka_unit_test(test_tables_and_links_never_share_a_request),
        cmocka_unit_test(test_fault_bits_are_read_too_and_doubles_once),
        cmocka_unit_test(test_plan_that_does_not_fit_or_is_empty),
        cmocka_unit_test(test_any_plan_is_whole_within_limits_and_minimal),
        cmocka_unit_test(test_overlapping_values_stay_whole),
    };
    return cmocka_run_group_tests(tests, NULL, NULL);
}
