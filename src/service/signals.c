/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Signals as events of the main loop, so that no handler runs and no global is needed. The only
 * file that knows signalfd.
 */
#include "ullage/service.h"

#include <errno.h>
#include <pthread.h>
#include <signal.h>
#include <string.h>
#include <sys/signalfd.h>
#include <unistd.h>

int signals_open(struct error *err)
{
    sigset_t set;
    sigemptyset(&set);
    sigaddset(&set, SIGINT);
    sigaddset(&set, SIGTERM);
    sigaddset(&set, SIGHUP);
    int code = pthread_sigmask(SIG_BLOCK, &set, NULL);
    if (code != 0)
        return error_set(err, ERR_IO, "signals cannot be blocked: %s", strerror(code));
    int fd = signalfd(-1, &set, SFD_CLOEXEC | SFD_NONBLOCK);
    if (fd < 0)
        return error_set(err, ERR_IO, "signals cannot be taken as events: %s", strerror(errno));
    return fd;
}

int signals_take(int fd)
{
    struct signalfd_siginfo info;
    if (fd < 0 || read(fd, &info, sizeof(info)) != (ssize_t)sizeof(info))
        return 0;
    return (int)info.ssi_signo;
}
