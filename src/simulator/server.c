/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The simulated devices on Modbus/TCP: one listener, the unit id chooses the device. One thread
 * moves the model on by an absolute schedule and answers; requests are gathered without
 * blocking, so that a slow or dead client holds up nobody. Answers are libmodbus's; a request
 * to write gets exception 01.
 */
#include "model.h"

#include <errno.h>
#include <fcntl.h>
#include <netinet/in.h>
#include <netinet/tcp.h>
#include <poll.h>
#include <pthread.h>
#include <signal.h>
#include <stdatomic.h>
#include <stdlib.h>
#include <string.h>
#include <sys/eventfd.h>
#include <sys/socket.h>
#include <unistd.h>

enum {
    CLIENT_MAX = 256,
    ADU_MAX = MODBUS_TCP_MAX_ADU_LENGTH,
    HEADER = 7,
    FUNCTION_LAST_READ = 4
};

struct client {
    int fd;
    int length;
    uint8_t bytes[ADU_MAX];
};

struct simulator_server {
    struct simulator *simulator;
    modbus_t *context;
    int listen_fd, stop_fd, port;
    double pace;
    FILE *truth;
    pthread_t thread;
    _Atomic(const struct upset *) upset; /* asked for by another thread */
    int client_count;
    struct client client[CLIENT_MAX];
};

static void drop(struct simulator_server *server, int index)
{
    close(server->client[index].fd);
    server->client[index] = server->client[--server->client_count];
}

static void answer(struct simulator_server *server, struct client *client)
{
    int unit_id = client->bytes[6], function = client->bytes[7];
    if (unit_id == readings_lost_unit(server->simulator))
        return;
    modbus_mapping_t *mapping = readings_image(server->simulator, unit_id);
    modbus_set_socket(server->context, client->fd);
    if (mapping == NULL)
        modbus_reply_exception(server->context, client->bytes, MODBUS_EXCEPTION_GATEWAY_TARGET);
    else if (function < 1 || function > FUNCTION_LAST_READ)
        modbus_reply_exception(server->context, client->bytes,
                               MODBUS_EXCEPTION_ILLEGAL_FUNCTION);
    else
        modbus_reply(server->context, client->bytes, client->length, mapping);
}

/* Reads what is there; answers each whole request. False when the client is to be dropped. */
static bool serve(struct simulator_server *server, struct client *client)
{
    ssize_t got = recv(client->fd, client->bytes + client->length,
                       (size_t)(ADU_MAX - client->length), MSG_DONTWAIT);
    if (got < 0)
        return errno == EAGAIN || errno == EINTR;
    if (got == 0)
        return false;
    client->length += (int)got;
    while (client->length >= HEADER) {
        int whole = 6 + client->bytes[4] * 256 + client->bytes[5];
        bool modbus = client->bytes[2] == 0 && client->bytes[3] == 0;
        if (!modbus || whole < HEADER + 1 || whole > ADU_MAX)
            return false;
        if (client->length < whole)
            return true;
        int rest = client->length - whole;
        client->length = whole;
        /* A read request is exactly 12 bytes; libmodbus trusts its length. */
        if (client->bytes[7] <= FUNCTION_LAST_READ && whole != 12)
            return false;
        answer(server, client);
        memmove(client->bytes, client->bytes + whole, (size_t)rest);
        client->length = rest;
    }
    return true;
}

static void welcome(struct simulator_server *server)
{
    int fd = accept(server->listen_fd, NULL, NULL);
    if (fd < 0)
        return;
    if (server->client_count == CLIENT_MAX) {
        close(fd);
        return;
    }
    int yes = 1;
    /* An answer is short; a client that does not take it is dropped by its own timeout, not
     * ours. */
    struct timeval patience = {.tv_sec = 0, .tv_usec = 100000};
    setsockopt(fd, IPPROTO_TCP, TCP_NODELAY, &yes, sizeof(yes));
    setsockopt(fd, SOL_SOCKET, SO_SNDTIMEO, &patience, sizeof(patience));
    fcntl(fd, F_SETFD, FD_CLOEXEC);
    server->client[server->client_count++] = (struct client){.fd = fd};
}

static void move_on(struct simulator_server *server)
{
    struct simulator *simulator = server->simulator;
    struct error err = {0};
    const struct upset *upset = atomic_exchange(&server->upset, NULL);
    if (upset != NULL) {
        simulator->upset = upset;
        simulator->upset_start_s = simulator->time_s;
    }
    if (simulator_step(simulator, simulator->plant->site.frame_s * server->pace, &err) != 0)
        log_error("simulate: %s", err.text);
    if (server->truth != NULL)
        simulator_truth(simulator, time_utc_ns(), server->truth);
}

static void *run(void *context)
{
    struct simulator_server *server = context;
    int64_t period_ns = time_s_to_ns(server->simulator->plant->site.frame_s);
    int64_t next_ns = time_mono_ns() + period_ns;
    for (;;) {
        struct pollfd fds[CLIENT_MAX + 2] = {
            {.fd = server->stop_fd,   .events = POLLIN},
            {.fd = server->listen_fd, .events = POLLIN},
        };
        int count = server->client_count;
        for (int i = 0; i < count; i++)
            fds[2 + i] = (struct pollfd){.fd = server->client[i].fd, .events = POLLIN};
        int64_t left_ns = next_ns - time_mono_ns();
        int wait_ms = left_ns > 0 ? (int)((left_ns + 999999) / 1000000) : 0;
        int ready = poll(fds, (nfds_t)count + 2, wait_ms);
        if (ready < 0 && errno != EINTR)
            break;
        if (ready > 0 && fds[0].revents != 0)
            break;
        /* From the last to the first, so that dropping one (the last takes its place) skips
         * none. */
        for (int i = count - 1; ready > 0 && i >= 0; i--)
            if (fds[2 + i].revents != 0 && !serve(server, &server->client[i]))
                drop(server, i);
        if (ready > 0 && fds[1].revents != 0)
            welcome(server);
        int64_t now_ns = time_mono_ns();
        if (now_ns >= next_ns) {
            move_on(server);
            next_ns += period_ns;
            if (next_ns < now_ns) /* a suspended machine does not make up for lost hours */
                next_ns = now_ns + period_ns;
        }
    }
    return NULL;
}

static int listen_at(struct simulator_server *server, const char *host, int port,
                     struct error *err)
{
    server->context = modbus_new_tcp(host, port);
    if (server->context == NULL)
        return error_set(err, ERR_ARGUMENT,
                         "'%s' is no IPv4 address to listen on; write 127.0.0.1", host);
    server->listen_fd = modbus_tcp_listen(server->context, 64);
    if (server->listen_fd < 0)
        return error_set(err, ERR_NETWORK, "cannot listen on %s:%d: %s", host, port,
                         strerror(errno));
    struct sockaddr_in bound;
    socklen_t size = sizeof(bound);
    if (getsockname(server->listen_fd, (struct sockaddr *)&bound, &size) != 0)
        return error_set(err, ERR_NETWORK, "no port was given: %s", strerror(errno));
    server->port = ntohs(bound.sin_port);
    return 0;
}

int simulator_serve(struct simulator *simulator, const char *listen_host, int listen_port,
                    double pace, FILE *truth, struct simulator_server **out, struct error *err)
{
    double step_s = simulator->plant->site.frame_s * pace;
    if (!(pace > 0) || step_s > 3600)
        return error_set(err, ERR_ARGUMENT, "the pace is above 0, and at most an hour a frame");
    struct simulator_server *server = calloc(1, sizeof(*server));
    if (server == NULL)
        return error_set(err, ERR_MEMORY, "no memory for the server");
    server->simulator = simulator;
    server->pace = pace;
    server->truth = truth;
    server->listen_fd = -1;
    server->stop_fd = eventfd(0, EFD_CLOEXEC | EFD_NONBLOCK);
    int code = server->stop_fd < 0
                   ? error_set(err, ERR_IO, "no event descriptor: %s", strerror(errno))
                   : listen_at(server, listen_host, listen_port, err);
    if (code == 0) {
        if (truth != NULL)
            simulator_truth_header(simulator, truth);
        sigset_t all, before;
        sigfillset(&all);
        pthread_sigmask(SIG_SETMASK, &all, &before);
        int failed = pthread_create(&server->thread, NULL, run, server);
        pthread_sigmask(SIG_SETMASK, &before, NULL);
        if (failed != 0)
            code = error_set(err, ERR_IO, "no thread for the server: %s", strerror(failed));
    }
    if (code != 0) {
        if (server->listen_fd >= 0)
            close(server->listen_fd);
        if (server->stop_fd >= 0)
            close(server->stop_fd);
        if (server->context != NULL)
            modbus_free(server->context);
        free(server);
        return code;
    }
    *out = server;
    return 0;
}

int simulator_server_port(const struct simulator_server *server)
{
    return server->port;
}

void simulator_server_upset(struct simulator_server *server, const struct upset *upset)
{
    atomic_store(&server->upset, upset);
}

void simulator_server_stop(struct simulator_server *server)
{
    if (server == NULL)
        return;
    uint64_t one = 1;
    if (write(server->stop_fd, &one, sizeof(one)) == (ssize_t)sizeof(one))
        pthread_join(server->thread, NULL);
    for (int i = 0; i < server->client_count; i++)
        close(server->client[i].fd);
    close(server->listen_fd);
    close(server->stop_fd);
    modbus_free(server->context);
    free(server);
}
