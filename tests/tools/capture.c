/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Preloaded into a program by a test: keeps every byte that it sends over a TCP connection that
 * it made itself (so, what it says as a client), in a file of its own for each connection,
 * below the folder that ULLAGE_CAPTURE names.
 */
#define _GNU_SOURCE
#include <arpa/inet.h>
#include <dlfcn.h>
#include <fcntl.h>
#include <stdatomic.h>
#include <stdio.h>
#include <stdlib.h>
#include <sys/socket.h>
#include <sys/uio.h>
#include <unistd.h>

enum { DESCRIPTORS = 4096 };

static atomic_int file_of[DESCRIPTORS]; /* descriptor of the capture + 1; 0: no client's */
static atomic_int number;

static void *next(const char *name)
{
    return dlsym(RTLD_NEXT, name);
}

static void keep(int fd, const void *bytes, ssize_t sent)
{
    int file = fd >= 0 && fd < DESCRIPTORS ? atomic_load(&file_of[fd]) - 1 : -1;
    ssize_t (*write_next)(int, const void *, size_t) =
        (ssize_t(*)(int, const void *, size_t))next("write");
    if (file >= 0 && sent > 0 && write_next(file, bytes, (size_t)sent) != sent)
        abort(); /* a capture with a hole would prove nothing */
}

int connect(int fd, const struct sockaddr *address, socklen_t length)
{
    int (*connect_next)(int, const struct sockaddr *, socklen_t) =
        (int (*)(int, const struct sockaddr *, socklen_t))next("connect");
    const char *folder = getenv("ULLAGE_CAPTURE");
    if (folder != NULL && fd >= 0 && fd < DESCRIPTORS && atomic_load(&file_of[fd]) == 0 &&
        (address->sa_family == AF_INET || address->sa_family == AF_INET6)) {
        char path[512];
        snprintf(path, sizeof(path), "%s/%d-%d.bin", folder, (int)getpid(),
                 atomic_fetch_add(&number, 1));
        int file = open(path, O_WRONLY | O_CREAT | O_EXCL | O_CLOEXEC, 0600);
        if (file < 0)
            abort();
        atomic_store(&file_of[fd], file + 1);
    }
    return connect_next(fd, address, length);
}

int close(int fd)
{
    int (*close_next)(int) = (int (*)(int))next("close");
    if (fd >= 0 && fd < DESCRIPTORS) {
        int file = atomic_exchange(&file_of[fd], 0) - 1;
        if (file >= 0)
            close_next(file);
    }
    return close_next(fd);
}

ssize_t send(int fd, const void *bytes, size_t length, int flags)
{
    ssize_t (*send_next)(int, const void *, size_t, int) =
        (ssize_t(*)(int, const void *, size_t, int))next("send");
    ssize_t sent = send_next(fd, bytes, length, flags);
    keep(fd, bytes, sent);
    return sent;
}

ssize_t write(int fd, const void *bytes, size_t length)
{
    ssize_t (*write_next)(int, const void *, size_t) =
        (ssize_t(*)(int, const void *, size_t))next("write");
    ssize_t sent = write_next(fd, bytes, length);
    keep(fd, bytes, sent);
    return sent;
}
