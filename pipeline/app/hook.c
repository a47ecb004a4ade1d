#include "app/hook.h"

#include <errno.h>
#include <fcntl.h>
#include <poll.h>
#include <signal.h>
#include <spawn.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/wait.h>
#include <time.h>
#include <unistd.h>

#include "base/mem.h"
#include "base/text.h"

extern char **environ;

enum { TICK_MS = 20, VALUE_BYTES = 32768 };

static double now_s(void) {
    struct timespec t;
    clock_gettime(CLOCK_MONOTONIC, &t);
    return (double)t.tv_sec + 1e-9 * (double)t.tv_nsec;
}

static int is_variable(const char *entry, const hook_variable *v, size_t n) {
    for (size_t i = 0; i < n; i++) {
        size_t k = strlen(v[i].name);
        if (!strncmp(entry, v[i].name, k) && entry[k] == '=') return 1;
    }
    return 0;
}

/* Ours, with the variables in the place of their namesakes. The first `*own` entries are owned. */
static char **environment(const hook_variable *v, size_t n, size_t *own) {
    size_t there = 0;
    while (environ && environ[there]) there++;
    char **list = mem_array(there + n + 1, sizeof *list);
    *own = 0;
    for (size_t i = 0; list && i < n; i++) {
        textbuf t = { 0 };
        const char *value = v[i].value ? v[i].value : "";
        text_addf(&t, "%s=", v[i].name);
        text_add_n(&t, value, strlen(value) < VALUE_BYTES ? strlen(value) : VALUE_BYTES);
        if (!t.s || t.failed) {
            for (size_t k = 0; k < *own; k++) free(list[k]);
            text_free(&t);
            free(list);
            return NULL;
        }
        list[(*own)++] = t.s;
    }
    size_t at = *own;
    for (size_t i = 0; list && i < there; i++)
        if (!is_variable(environ[i], v, n)) list[at++] = environ[i];
    return list;
}

/* In a group of its own, so that all of it can be ended; signals as a program expects them; its words go to our stderr. */
static int start(const char *program, char **env, const int pipe_ends[2], pid_t *pid) {
    posix_spawn_file_actions_t files;
    posix_spawnattr_t how;
    sigset_t none, usual;
    char *name = mem_text(program);
    char *argv[] = { name, NULL };
    if (!name) return ENOMEM;
    sigemptyset(&none);
    sigemptyset(&usual);
    sigaddset(&usual, SIGPIPE);
    sigaddset(&usual, SIGINT);
    sigaddset(&usual, SIGTERM);
    int code = posix_spawn_file_actions_init(&files);
    if (code) goto done;
    code = posix_spawnattr_init(&how);
    if (!code) {
        code = posix_spawn_file_actions_adddup2(&files, pipe_ends[0], STDIN_FILENO);
        if (!code) code = posix_spawn_file_actions_adddup2(&files, STDERR_FILENO, STDOUT_FILENO);
        if (!code) code = posix_spawnattr_setsigmask(&how, &none);
        if (!code) code = posix_spawnattr_setsigdefault(&how, &usual);
        if (!code) code = posix_spawnattr_setpgroup(&how, 0);
        if (!code) code = posix_spawnattr_setflags(&how, POSIX_SPAWN_SETSIGMASK | POSIX_SPAWN_SETSIGDEF | POSIX_SPAWN_SETPGROUP);
        if (!code) code = posix_spawn(pid, program, &files, &how, argv, env);
        posix_spawnattr_destroy(&how);
    }
    posix_spawn_file_actions_destroy(&files);
done:
    free(name);
    return code;
}

/* Feeds what the program takes; -1 once it takes no more or has all. */
static int feed(int fd, const char *input, size_t n, size_t *given) {
    while (*given < n) {
        ssize_t k = write(fd, input + *given, n - *given);
        if (k < 0 && errno == EINTR) continue;
        if (k < 0 && errno == EAGAIN) return fd;
        if (k < 0) break;
        *given += (size_t)k;
    }
    close(fd);
    return -1;
}

static int wait_until(pid_t pid, double deadline, int *how) {
    while (waitpid(pid, how, WNOHANG) == 0) {
        if (now_s() >= deadline) return 0;
        (void)poll(NULL, 0, TICK_MS);
    }
    return 1;
}

static int attend(pid_t pid, int fd, const char *input, size_t n, double timeout_s, int (*stop)(void), int *how) {
    size_t given = 0;
    double deadline = now_s() + timeout_s;
    int ended = 0, hurried = 0;
    while (!ended && now_s() < deadline) {
        if (fd >= 0) fd = feed(fd, input, n, &given);
        ended = waitpid(pid, how, WNOHANG) != 0;
        if (ended) break;
        if (!hurried && stop && stop()) {
            hurried = 1;
            if (deadline > now_s() + 2.0) deadline = now_s() + 2.0;
        }
        struct pollfd p = { .fd = fd, .events = POLLOUT };
        (void)poll(fd >= 0 ? &p : NULL, fd >= 0 ? 1 : 0, TICK_MS);
    }
    if (fd >= 0) close(fd);
    if (ended) return 1;
    (void)kill(-pid, SIGTERM);
    if (!wait_until(pid, now_s() + 1.0, how)) {
        (void)kill(-pid, SIGKILL);
        (void)waitpid(pid, how, 0);
    }
    return 0;
}

status hook_run(const char *program, const hook_variable *variables, size_t n, const char *input, size_t n_input, double timeout_s,
                int (*stop)(void), error *e) {
    int ends[2], how = 0;
    size_t own = 0;
    pid_t pid = -1;
    char **env = environment(variables, n, &own);
    if (!env) return NO_MEMORY(e, "the environment of a program");
    status st = pipe(ends) ? fail(e, ST_IO, "%s: cannot be started: %s", program, strerror(errno)) : ST_OK;
    if (st == ST_OK) {
        (void)fcntl(ends[1], F_SETFD, FD_CLOEXEC);
        (void)fcntl(ends[0], F_SETFD, FD_CLOEXEC);
        (void)fcntl(ends[1], F_SETFL, O_NONBLOCK);
        int code = start(program, env, ends, &pid);
        close(ends[0]);
        if (code) {
            close(ends[1]);
            st = fail(e, ST_IO, "%s: cannot be started: %s", program, strerror(code));
        }
    }
    if (st == ST_OK) {
        int ended = attend(pid, ends[1], input, n_input, timeout_s, stop, &how);
        if (!ended) st = fail(e, ST_IO, "%s: was ended, it took longer than %.3g s", program, timeout_s);
        else if (WIFSIGNALED(how)) st = fail(e, ST_IO, "%s: died of signal %d", program, WTERMSIG(how));
        else if (WEXITSTATUS(how)) st = fail(e, ST_IO, "%s: ended with exit status %d", program, WEXITSTATUS(how));
    }
    for (size_t i = 0; i < own; i++) free(env[i]);
    free(env);
    return st;
}
