/* A wall clock that is wrong by the seconds in the file that FALSE_CLOCK names; to be preloaded. Other clocks are right. */
#define _GNU_SOURCE
#include <fcntl.h>
#include <stdint.h>
#include <stdlib.h>
#include <sys/mman.h>
#include <sys/syscall.h>
#include <sys/time.h>
#include <time.h>
#include <unistd.h>

static const volatile int64_t *wrong_by_s;

__attribute__((constructor)) static void begin(void) {
    int file = open(getenv("FALSE_CLOCK"), O_RDONLY | O_CLOEXEC);
    void *page = mmap(NULL, sizeof *wrong_by_s, PROT_READ, MAP_SHARED, file, 0);
    if (page == MAP_FAILED) abort();
    wrong_by_s = page;
    close(file);
}

int clock_gettime(clockid_t clock, struct timespec *now) {
    int failed = (int)syscall(SYS_clock_gettime, clock, now);
    if (!failed && wrong_by_s && (clock == CLOCK_REALTIME || clock == CLOCK_REALTIME_COARSE)) now->tv_sec += *wrong_by_s;
    return failed;
}

int gettimeofday(struct timeval *restrict now, void *restrict zone) {
    struct timespec exact;
    (void)zone;
    clock_gettime(CLOCK_REALTIME, &exact);
    now->tv_sec = exact.tv_sec;
    now->tv_usec = exact.tv_nsec / 1000;
    return 0;
}

time_t time(time_t *now) {
    struct timespec exact;
    clock_gettime(CLOCK_REALTIME, &exact);
    if (now) *now = exact.tv_sec;
    return exact.tv_sec;
}
