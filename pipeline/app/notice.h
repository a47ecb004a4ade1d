/* Being told that something happened in a folder, where the system can (inotify); elsewhere nothing is ever noticed. Only a hint:
 * whoever waits looks for himself, and looks again without one. */
#ifndef SWARD_APP_NOTICE_H
#define SWARD_APP_NOTICE_H
#include "app/settle.h"

typedef struct {
    int fd; /* -1: none */
} notice;
#define NOTICE_NONE ((notice){ -1 })

void notice_open(notice *n);
/* Minds the root and every folder that holds one of the files; to be called after each look. */
void notice_folders(const notice *n, const settle *s);
/* 1: something happened; 0: nothing within the time. */
int notice_wait(const notice *n, int ms);
void notice_close(notice *n);

#endif
