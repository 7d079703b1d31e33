/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The simulated devices on the wire, asked by libmodbus as an independent client: values,
 * unknown units and registers, refused writes, several clients at once, a link that is lost.
 */
#include <errno.h>
#include <math.h>
#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdlib.h>

#include <cmocka.h>
#include <modbus.h>

#include "ullage/simulator.h"

static struct problems problems;
static struct plant *plant;
static struct simulator *simulator;
static struct simulator_server *server;

static int start(void **state)
{
    struct error err = {0};
    const struct simulator_options options = {.seed = 3};
    (void)state;
    if (plant_read("config/tarn-hollow.ini", &plant, &problems) != 0 ||
        simulator_create(plant, &options, &simulator, &err) != 0 ||
        simulator_serve(simulator, "127.0.0.1", 0, 1, NULL, &server, &err) != 0) {
        print_message("%s\n", err.text);
        return 1;
    }
    return 0;
}

static int stop(void **state)
{
    (void)state;
    simulator_server_stop(server);
    simulator_free(simulator);
    plant_free(plant);
    return 0;
}

static modbus_t *client(int unit)
{
    modbus_t *context = modbus_new_tcp("127.0.0.1", simulator_server_port(server));
    assert_non_null(context);
    modbus_set_slave(context, unit);
    modbus_set_response_timeout(context, 5, 0);
    assert_int_equal(modbus_connect(context), 0);
    return context;
}

static void done(modbus_t *context)
{
    modbus_close(context);
    modbus_free(context);
}

static void test_values_arrive_as_described(void **state)
{
    modbus_t *context = client(1);
    uint16_t words[4];
    (void)state;
    assert_int_equal(modbus_read_input_registers(context, 0, 4, words), 4);
    /* Decoded by libmodbus, not by us: big-endian words. Barometer near 105 kPa at -310 m. */
    assert_true(fabs((double)modbus_get_float_abcd(words) - 105) < 2);
    assert_true(fabs((double)modbus_get_float_abcd(words + 2) - 12.5) < 1);
    assert_int_equal(modbus_read_input_registers(context, 12, 2, words), 2);
    /* TT-110 comes with its words swapped. */
    assert_true(fabs((double)modbus_get_float_cdab(words) + 184.4) < 2);
    done(context);
}

static void test_strange_requests_get_the_protocols_exceptions(void **state)
{
    modbus_t *context = client(1);
    uint16_t words[4];
    uint8_t bits[4];
    (void)state;
    assert_int_equal(modbus_read_input_registers(context, 5000, 2, words), -1);
    assert_int_equal(errno, EMBXILADD);
    assert_int_equal(modbus_read_registers(context, 0, 1, words), -1);
    assert_int_equal(modbus_write_register(context, 0, 1), -1);
    assert_int_equal(errno, EMBXILFUN);
    assert_int_equal(modbus_write_bit(context, 0, 1), -1);
    assert_int_equal(errno, EMBXILFUN);
    assert_int_equal(modbus_read_input_bits(context, 0, 1, bits), 1);
    assert_int_equal(bits[0], 1); /* the pump runs */
    done(context);
    context = client(77);
    assert_int_equal(modbus_read_input_registers(context, 0, 1, words), -1);
    assert_int_equal(errno, EMBXGTAR);
    done(context);
}

static void test_many_clients_and_a_silent_one_are_served(void **state)
{
    enum { CLIENTS = 20 };
    modbus_t *contexts[CLIENTS];
    modbus_t *silent = client(1);
    uint16_t words[2];
    (void)state;
    for (int i = 0; i < CLIENTS; i++)
        contexts[i] = client(1 + i % 5);
    for (int round = 0; round < 5; round++)
        for (int i = 0; i < CLIENTS; i++)
            assert_int_equal(modbus_read_input_registers(contexts[i], 0, 2, words), 2);
    for (int i = 0; i < CLIENTS; i++)
        done(contexts[i]);
    done(silent);
}

static void test_lost_link_is_silent_and_others_answer(void **state)
{
    modbus_t *hall = client(4), *vessel = client(1);
    uint16_t words[2];
    (void)state;
    simulator_server_upset(server, upset_find("link-lost"));
    modbus_set_response_timeout(hall, 0, 200000);
    int64_t deadline = time_mono_ns() + 20 * NS_PER_S;
    while (modbus_read_input_registers(hall, 0, 2, words) == 2)
        assert_true(time_mono_ns() < deadline);
    assert_int_equal(errno, ETIMEDOUT);
    assert_int_equal(modbus_read_input_registers(vessel, 0, 2, words), 2);
    done(hall);
    done(vessel);
}

int main(void)
{
    const struct CMUnitTest tests[] = {
        cmocka_unit_test(test_values_arrive_as_described),
        cmocka_unit_test(test_strange_requests_get_the_protocols_exceptions),
        cmocka_unit_test(test_many_clients_and_a_silent_one_are_served),
        cmocka_unit_test(test_lost_link_is_silent_and_others_answer),
    };
    return cmocka_run_group_tests(tests, start, stop);
}
