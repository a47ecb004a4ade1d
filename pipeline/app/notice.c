#include "app/notice.h"

#include <poll.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "base/mem.h"

#ifdef __linux__
#include <fcntl.h>
#include <sys/inotify.h>

static const uint32_t events = IN_CLOSE_WRITE | IN_MOVED_TO | IN_MOVED_FROM | IN_CREATE | IN_DELETE;

void notice_open(notice *n) { n->fd = inotify_init1(IN_NONBLOCK | IN_CLOEXEC); }

/* The same folder twice is one watch to the system. */
void notice_folders(const notice *n, const settle *s) {
    if (n->fd < 0) return;
    (void)inotify_add_watch(n->fd, s->root, events);
    for (size_t i = 0; i < s->n; i++) {
        const char *name = s->files[i].name, *slash = strrchr(name, '/');
        if (!slash || (i && !strncmp(name, s->files[i - 1].name, (size_t)(slash - name) + 1))) continue;
        char *below = mem_text_n(name, (size_t)(slash - name)), *path = below ? path_join(s->root, below) : NULL;
        if (path) (void)inotify_add_watch(n->fd, path, events);
        free(path);
        free(below);
    }
}

int notice_wait(const notice *n, int ms) {
    char heard[4096];
    struct pollfd p = { .fd = n->fd, .events = POLLIN };
    if (poll(n->fd >= 0 ? &p : NULL, n->fd >= 0 ? 1 : 0, ms) <= 0) return 0;
    while (read(n->fd, heard, sizeof heard) > 0) {} /* what it was, the look tells */
    return 1;
}
#else
void notice_open(notice *n) { n->fd = -1; }
void notice_folders(const notice *n, const settle *s) { (void)n, (void)s; }
int notice_wait(const notice *n, int ms) {
    (void)n;
    (void)poll(NULL, 0, ms);
    return 0;
}
#endif

void notice_close(notice *n) {
    if (n->fd >= 0) close(n->fd);
    n->fd = -1;
}
