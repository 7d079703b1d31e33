/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Connecting to a device by name or address, without ever waiting longer than told or past a
 * stop. A name is looked up in a thread of its own, because the resolver can neither be given a
 * deadline nor be stopped; if it is too slow it is left to finish alone.
 */
#include "internal.h"

#include <errno.h>
#include <fcntl.h>
#include <limits.h>
#include <netdb.h>
#include <netinet/in.h>
#include <netinet/tcp.h>
#include <poll.h>
#include <signal.h>
#include <stdlib.h>
#include <string.h>
#include <sys/eventfd.h>
#include <sys/select.h>
#include <sys/socket.h>
#include <unistd.h>

/* A resolver with two dead servers gives up after about 20 s; people would have looked at the
 * cable by then. Common practice, no source. */
static const double lookup_s = 10;
/* "localhost" has two addresses; a name with very many would hold a try up for too long. */
enum { ADDRESSES_MAX = 4 };

/* Shared by the asking thread and the resolving one; the last to leave frees it. */
struct lookup {
    atomic_int users;
    atomic_bool done;
    int done_fd;
    int code;
    struct addrinfo *list;
    char host[256], service[8];
};

static const char *errno_says(int code, char *text, size_t size)
{
    if (strerror_r(code, text, size) != 0)
        text_format(text, size, "error %d", code);
    return text;
}

int thread_start(pthread_t *thread, bool detached, void *(*run)(void *), void *context)
{
    sigset_t all, before;
    sigfillset(&all);
    pthread_attr_t attributes;
    int code = pthread_attr_init(&attributes);
    if (code != 0)
        return code;
    if (detached)
        pthread_attr_setdetachstate(&attributes, PTHREAD_CREATE_DETACHED);
    pthread_sigmask(SIG_SETMASK, &all, &before);
    code = pthread_create(thread, &attributes, run, context);
    pthread_sigmask(SIG_SETMASK, &before, NULL);
    pthread_attr_destroy(&attributes);
    return code;
}

/* Milliseconds for poll until a time, rounded up so that it is never early. */
static int poll_ms(int64_t until_mono_ns)
{
    int64_t left = until_mono_ns - time_mono_ns();
    if (left <= 0)
        return 0;
    int64_t ms = (left + 999999) / 1000000;
    return ms > INT_MAX ? INT_MAX : (int)ms;
}

bool wait_stopped(int stop_fd, int64_t until_mono_ns)
{
    struct pollfd wait = {.fd = stop_fd, .events = POLLIN};
    for (;;) {
        if (poll(&wait, 1, poll_ms(until_mono_ns)) > 0)
            return true;
        if (time_mono_ns() >= until_mono_ns)
            return false;
    }
}

/* Waits for fd; 1 ready, 0 too late, -1 stopped. */
static int wait_ready(int fd, short events, int stop_fd, int64_t until_mono_ns)
{
    struct pollfd wait[2] = {
        {.fd = fd,      .events = events},
        {.fd = stop_fd, .events = POLLIN}, /* a negative descriptor is passed over */
    };
    for (;;) {
        if (poll(wait, 2, poll_ms(until_mono_ns)) > 0) {
            if (wait[1].revents != 0)
                return -1;
            if (wait[0].revents != 0)
                return 1;
        }
        if (time_mono_ns() >= until_mono_ns)
            return 0;
    }
}

static void lookup_leave(struct lookup *lookup)
{
    if (atomic_fetch_sub(&lookup->users, 1) > 1)
        return;
    if (lookup->list != NULL)
        freeaddrinfo(lookup->list);
    close(lookup->done_fd);
    free(lookup);
}

static int resolve(const char *host, const char *service, int flags, struct addrinfo **list)
{
    const struct addrinfo hints = {
        .ai_family = AF_UNSPEC, .ai_socktype = SOCK_STREAM, .ai_flags = flags | AI_NUMERICSERV};
    return getaddrinfo(host, service, &hints, list);
}

static void *lookup_run(void *context)
{
    struct lookup *lookup = context;
    lookup->code = resolve(lookup->host, lookup->service, AI_ADDRCONFIG, &lookup->list);
    atomic_store(&lookup->done, true);
    eventfd_write(lookup->done_fd, 1);
    lookup_leave(lookup);
    return NULL;
}

/* Looks a name up in a thread of its own. On success *list is the caller's. */
static int lookup_name(const char *host, const char *service, int stop_fd,
                       struct addrinfo **list, struct error *err)
{
    struct lookup *lookup = calloc(1, sizeof(*lookup));
    if (lookup == NULL)
        return error_set(err, ERR_MEMORY, "no memory to look up %s", host);
    atomic_init(&lookup->users, 2);
    atomic_init(&lookup->done, false);
    lookup->done_fd = eventfd(0, EFD_CLOEXEC | EFD_NONBLOCK);
    pthread_t thread;
    if (!text_copy(lookup->host, sizeof(lookup->host), host) ||
        !text_copy(lookup->service, sizeof(lookup->service), service) || lookup->done_fd < 0 ||
        thread_start(&thread, true, lookup_run, lookup) != 0) {
        if (lookup->done_fd >= 0)
            close(lookup->done_fd);
        free(lookup);
        return error_set(err, ERR_NETWORK, "the name %.80s cannot be looked up here", host);
    }
    int code = 0;
    wait_ready(lookup->done_fd, POLLIN, stop_fd, time_mono_ns() + time_s_to_ns(lookup_s));
    if (!atomic_load(&lookup->done)) {
        code = error_set(err, ERR_NETWORK, "no answer to the look-up of the name %s in %g s",
                         host, lookup_s);
    } else if (lookup->code != 0) {
        code = error_set(err, ERR_NETWORK, "the name %s has no address: %s", host,
                         gai_strerror(lookup->code));
    } else {
        *list = lookup->list;
        lookup->list = NULL;
    }
    lookup_leave(lookup);
    return code;
}

/* A socket connected to one address, or a negative code. */
static int connect_address(const struct addrinfo *address, double timeout_s, int stop_fd,
                           struct error *err)
{
    char reason[96];
    int fd = socket(address->ai_family, address->ai_socktype | SOCK_CLOEXEC | SOCK_NONBLOCK,
                    address->ai_protocol);
    if (fd < 0)
        return error_set(err, ERR_NETWORK, "no socket: %s",
                         errno_says(errno, reason, sizeof(reason)));
    int code = 0, failure = 0, one = 1;
    socklen_t size = sizeof(failure);
    /* libmodbus waits with select and does not look whether the descriptor fits its sets. */
    if (fd >= FD_SETSIZE) {
        code = error_set(err, ERR_NETWORK,
                         "too many open files: descriptor %d, and Modbus needs one below %d",
                         fd, FD_SETSIZE);
        goto out;
    }
    /* A request is 12 bytes: waiting to fill a packet would only cost time. */
    setsockopt(fd, IPPROTO_TCP, TCP_NODELAY, &one, sizeof(one));
    if (connect(fd, address->ai_addr, address->ai_addrlen) == 0)
        return fd;
    failure = errno;
    if (failure == EINPROGRESS) {
        int ready = wait_ready(fd, POLLOUT, stop_fd, time_mono_ns() + time_s_to_ns(timeout_s));
        if (ready > 0)
            getsockopt(fd, SOL_SOCKET, SO_ERROR, &failure, &size);
        else
            failure = ready == 0 ? ETIMEDOUT : ECANCELED;
    }
    if (failure == 0)
        return fd;
    if (failure == ETIMEDOUT)
        code = error_set(err, ERR_NETWORK, "no connection in %.4g ms", timeout_s * 1e3);
    else
        code = error_set(err, ERR_NETWORK, "no connection: %s",
                         errno_says(failure, reason, sizeof(reason)));
out:
    close(fd);
    return code;
}

int socket_connect(const char *host, int port, double timeout_s, int stop_fd, struct error *err)
{
    char service[8];
    text_format(service, sizeof(service), "%d", port);
    struct addrinfo *list = NULL;
    int code = resolve(host, service, AI_NUMERICHOST, &list);
    if (code != 0) {
        code = lookup_name(host, service, stop_fd, &list, err);
        if (code != 0)
            return code;
    }
    int fd = error_set(err, ERR_NETWORK, "%s has no address", host);
    int tries = 0;
    for (const struct addrinfo *at = list; at != NULL && tries < ADDRESSES_MAX;
         at = at->ai_next, tries++) {
        fd = connect_address(at, timeout_s, stop_fd, err);
        if (fd >= 0 || (stop_fd >= 0 && wait_stopped(stop_fd, 0)))
            break;
    }
    freeaddrinfo(list);
    return fd;
}

enum socket_rest socket_rest(int fd)
{
    char byte;
    ssize_t got = recv(fd, &byte, 1, MSG_PEEK | MSG_DONTWAIT);
    if (got > 0)
        return SOCKET_STRAY;
    if (got < 0 && (errno == EAGAIN || errno == EWOULDBLOCK || errno == EINTR))
        return SOCKET_QUIET;
    return SOCKET_CLOSED;
}
