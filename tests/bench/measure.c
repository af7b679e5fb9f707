/* bench_measure COMMAND...: runs it and prints "WALL_SECONDS CPU_SECONDS PEAK_MIB STATUS" to
 * stderr's file descriptor 3, so that the command keeps its own streams. */
#define _DEFAULT_SOURCE
#define _POSIX_C_SOURCE 200809L

#include <stdio.h>
#include <sys/resource.h>
#include <sys/wait.h>
#include <time.h>
#include <unistd.h>

int main(int argc, char **argv)
{
    struct timespec began, ended;
    struct rusage usage;
    int status = 0;
    if (argc < 2)
        return 2;
    (void)clock_gettime(CLOCK_MONOTONIC, &began);
    const pid_t child = fork();
    if (child == 0) {
        execvp(argv[1], argv + 1);
        _exit(127);
    }
    if (child < 0 || waitpid(child, &status, 0) < 0 || getrusage(RUSAGE_CHILDREN, &usage) != 0)
        return 3;
    (void)clock_gettime(CLOCK_MONOTONIC, &ended);
    const double wall =
        (double)(ended.tv_sec - began.tv_sec) + (double)(ended.tv_nsec - began.tv_nsec) * 1e-9;
    const double cpu = (double)(usage.ru_utime.tv_sec + usage.ru_stime.tv_sec) +
                       (double)(usage.ru_utime.tv_usec + usage.ru_stime.tv_usec) * 1e-6;
    (void)dprintf(3, "%.3f %.3f %.0f %d\n", wall, cpu, (double)usage.ru_maxrss / 1024,
                  WIFEXITED(status) ? WEXITSTATUS(status) : 128);
    return 0;
}
