/* sigaction, isatty and clock_gettime are POSIX, not C17. */
#define _POSIX_C_SOURCE 200809L

#include "cli/say.h"

#include <stdarg.h>
#include <stdio.h>
#include <string.h>
#include <time.h>
#include <unistd.h>

static volatile sig_atomic_t stop_signal;
static bool progress_shown;

static void clear_progress(void)
{
    if (progress_shown)
        (void)fputs("\r\033[K", stderr);
    progress_shown = false;
}

void fw_say(const char *format, ...)
{
    va_list arguments;
    clear_progress();
    (void)fputs("falsework: ", stderr);
    va_start(arguments, format);
    (void)vfprintf(stderr, format, arguments);
    va_end(arguments);
    (void)fputc('\n', stderr);
}

int fw_say_fault(const falsework_fault *fault)
{
    fw_say("%s", fault->text);
    return fault->status == FALSEWORK_STOPPED && stop_signal != 0 ? FW_EXIT_SIGNAL + stop_signal
                                                                  : (int)fault->status;
}

falsework_status fw_say_out(void *unused, const char *bytes, size_t count)
{
    (void)unused;
    return fwrite(bytes, 1, count, stdout) == count ? FALSEWORK_OK : FALSEWORK_MACHINE;
}

int fw_say_done(int status)
{
    clear_progress();
    if ((fflush(stdout) == 0 && ferror(stdout) == 0) || status == FALSEWORK_MACHINE)
        return status; /* whatever failed the machine has been said */
    fw_say("could not write the result, stdout, is it closed or full?");
    return FALSEWORK_MACHINE;
}

static double seconds(void)
{
    struct timespec now;
    (void)clock_gettime(CLOCK_MONOTONIC, &now);
    return (double)now.tv_sec + (double)now.tv_nsec * 1e-9;
}

/* When the phase at hand began, and when it was last shown. */
typedef struct progress_clock {
    const char *phase;
    double began, shown;
} progress_clock;

static void show_progress(void *context, const char *phase, int32_t done, int32_t total)
{
    progress_clock *clock = context;
    const double now = seconds();
    if (clock->phase == NULL || strcmp(clock->phase, phase) != 0)
        *clock = (progress_clock){phase, now, 0};
    if (now - clock->shown < 0.2 && done < total)
        return;
    clock->shown = now;
    const double rate = now > clock->began ? done / (now - clock->began) : 0;
    const double left = rate > 0 ? (total - done) / rate : 0;
    (void)fprintf(stderr, "\r\033[K%s: %d of %d, %.0f/s, %.0f s left", phase, done, total, rate,
                  left);
    progress_shown = true;
}

static void show_time(void *unused, const char *work, double time)
{
    (void)unused;
    clear_progress();
    (void)fprintf(stderr, "time %s %.3f\n", work, time);
}

falsework_options fw_say_options(const fw_arguments *arguments, int64_t *decodes)
{
    static progress_clock clock;
    falsework_options options = falsework_options_default();
    if (arguments->threads >= 0)
        options.threads = arguments->threads;
    if (arguments->batch >= 0)
        options.batch = arguments->batch;
    if (arguments->memo_MiB >= 0)
        options.memo_MiB = (size_t)arguments->memo_MiB;
    if (arguments->store_MiB >= 0)
        options.store_MiB = (size_t)arguments->store_MiB;
    options.stop = &stop_signal;
    options.decodes = decodes;
    if (arguments->verbose)
        options.timing = show_time;
    if (isatty(STDERR_FILENO)) {
        options.progress = show_progress;
        options.progress_context = &clock;
    }
    return options;
}

static void on_signal(int number)
{
    stop_signal = number;
}

void fw_say_catch_signals(void)
{
    struct sigaction action;
    memset(&action, 0, sizeof action);
    action.sa_handler = on_signal;
    (void)sigemptyset(&action.sa_mask);
    (void)sigaction(SIGINT, &action, NULL);
    (void)sigaction(SIGTERM, &action, NULL);
    action.sa_handler = SIG_IGN; /* a closed stdout is an error that we can say */
    (void)sigaction(SIGPIPE, &action, NULL);
}
