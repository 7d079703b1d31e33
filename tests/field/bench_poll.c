/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Polling beside a bare loop of the library on the same device; the processor time of a hundred
 * links; and the schedule of the living half when the other half is dead. The devices are a
 * process of their own, so that their time is not counted.
 */
#include <signal.h>
#include <stdio.h>
#include <stdlib.h>
#include <sys/resource.h>
#include <sys/wait.h>

#include <modbus.h>

#include "fake.h"

enum { LINKS = 100, POINTS = 100, ROUNDS = 11, BLOCK = 120, RATE_POINTS = 10000 };

static struct fake fake[LINKS];
static struct rig rig;

static void quiet(enum log_level level, const char *line, void *context)
{
    (void)level, (void)line, (void)context;
}

static void die(const char *what)
{
    fprintf(stderr, "bench_poll: %s\n", what);
    exit(1);
}

/* Starts the devices in a child; their ports come back by a pipe. Odd ones never answer if
 * half are to be dead. */
static pid_t start_devices(bool half_dead)
{
    int ends[2];
    if (pipe(ends) != 0)
        die("no pipe");
    pid_t child = fork();
    if (child < 0)
        die("no process");
    if (child == 0) {
        int ports[LINKS];
        for (int i = 0; i < LINKS; i++) {
            fake[i] = (struct fake){.keep_no_log = true};
            atomic_store(&fake[i].mode, half_dead && i % 2 == 1 ? FAKE_SILENT : FAKE_GOOD);
            if (!fake_start(&fake[i]))
                _exit(1);
            ports[i] = fake[i].port;
        }
        if (write(ends[1], ports, sizeof(ports)) != sizeof(ports))
            _exit(1);
        for (;;)
            pause();
    }
    int ports[LINKS];
    if (read(ends[0], ports, sizeof(ports)) != sizeof(ports))
        die("no devices");
    for (int i = 0; i < LINKS; i++)
        fake[i].port = ports[i];
    close(ends[0]);
    close(ends[1]);
    return child;
}

static void stop_devices(pid_t child)
{
    kill(child, SIGKILL);
    waitpid(child, NULL, 0);
}

/* Registers a second by a loop that does nothing but ask, for seconds. */
static double bare_rate(int port, double seconds)
{
    modbus_t *context = modbus_new_tcp("127.0.0.1", port);
    uint16_t words[BLOCK];
    if (context == NULL || modbus_connect(context) != 0)
        die("no connection");
    uint64_t registers = 0;
    int64_t start = time_mono_ns(), end = start + time_s_to_ns(seconds);
    while (time_mono_ns() < end)
        for (int at = 0; at < 2 * RATE_POINTS; at += BLOCK) {
            int count = 2 * RATE_POINTS - at < BLOCK ? 2 * RATE_POINTS - at : BLOCK;
            if (modbus_read_input_registers(context, at, count, words) != count)
                die("no answer");
            registers += (uint64_t)count;
        }
    double took_s = time_ns_to_s(time_mono_ns() - start);
    modbus_close(context);
    modbus_free(context);
    return (double)registers / took_s;
}

static void rig_reset(void)
{
    memset(&rig, 0, sizeof(rig));
}

static void open_rig(void)
{
    struct error err = {0};
    if (rig_open(&rig, &err) != 0)
        die(err.text);
}

/* The same with points, frames and all: f32 points over the same registers, polled as fast as
 * turns go. */
static double field_rate(int port, double seconds)
{
    rig_reset();
    struct link *link = rig_link(&rig, "127.0.0.1", port);
    link->period_s = 1e-6;
    link->timeout_s = 5;
    link->block = BLOCK;
    for (int i = 0; i < RATE_POINTS; i++)
        rig_point(&rig, 2 * i)->read.type = REGISTER_F32;
    open_rig();
    while (!field_settled(rig.field))
        poll(NULL, 0, 1);
    rig_fill(&rig);
    uint64_t before = rig.state[0].bytes_received, requests = rig.state[0].answers;
    int64_t start = time_mono_ns();
    poll(NULL, 0, (int)(seconds * 1e3));
    rig_fill(&rig);
    double took_s = time_ns_to_s(time_mono_ns() - start);
    uint64_t bytes = rig.state[0].bytes_received - before;
    requests = rig.state[0].answers - requests;
    field_close(rig.field);
    return (double)(bytes - 9 * requests) / 2 / took_s;
}

static int compare(const void *a, const void *b)
{
    double x = *(const double *)a, y = *(const double *)b;
    return (x > y) - (x < y);
}

static double processor_s(void)
{
    struct rusage usage;
    getrusage(RUSAGE_SELF, &usage);
    return (double)(usage.ru_utime.tv_sec + usage.ru_stime.tv_sec) +
           (double)(usage.ru_utime.tv_usec + usage.ru_stime.tv_usec) * 1e-6;
}

/* A hundred links of a hundred points at 1 Hz, and a frame a second, for some seconds. */
static void many_links(const char *what, bool half_dead)
{
    enum { SECONDS = 6 };
    pid_t child = start_devices(half_dead);
    rig_reset();
    for (int i = 0; i < LINKS; i++) {
        struct link *link = rig_link(&rig, "127.0.0.1", fake[i].port);
        link->period_s = 1;
        link->timeout_s = 0.4;
        link->block = 125;
        for (int k = 0; k < POINTS; k++)
            rig_point(&rig, k);
    }
    open_rig();
    while (!field_settled(rig.field))
        poll(NULL, 0, 10);
    rig_fill(&rig);
    uint64_t before = 0, after = 0, late = 0;
    double jitter_s = 0, start_s = processor_s();
    int alive = 0;
    for (int i = 0; i < LINKS; i++)
        before += rig.state[i].answers;
    for (int second = 0; second < SECONDS; second++) {
        poll(NULL, 0, 1000);
        rig_fill(&rig);
    }
    double used = (processor_s() - start_s) / SECONDS;
    for (int i = 0; i < LINKS; i++) {
        if (half_dead && i % 2 == 1)
            continue;
        alive++;
        after += rig.state[i].answers;
        late += rig.state[i].late;
        jitter_s += rig.state[i].jitter_s;
    }
    printf("%-34s %6.2f %% of a core (reach: under 10)\n", what, used * 100);
    printf("%-34s %6.3f polls/s a live link (reach: 1), %llu left out, %.2f ms late\n", "",
           (double)(after - before) / alive / SECONDS, (unsigned long long)late,
           jitter_s / alive * 1e3);
    field_close(rig.field);
    stop_devices(child);
}

int main(void)
{
    log_set_sink(quiet, NULL);
    pid_t child = start_devices(false);
    double ratio[ROUNDS], bare = 0, field = 0;
    bare_rate(fake[0].port, 0.3); /* warm up */
    for (int i = 0; i < ROUNDS; i++) {
        bare = bare_rate(fake[0].port, 0.5);
        field = field_rate(fake[0].port, 0.5);
        ratio[i] = field / bare;
    }
    stop_devices(child);
    qsort(ratio, ROUNDS, sizeof(*ratio), compare);
    printf("%-34s %6.3f of a bare loop (reach: 0.95), %.2f of %.2f million registers/s\n",
           "one link, as fast as it goes", ratio[ROUNDS / 2], field / 1e6, bare / 1e6);
    many_links("100 links x 100 points at 1 Hz", false);
    many_links("the same, half of the links dead", true);
    return 0;
}
