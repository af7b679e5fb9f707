/* What every pass shares: options of the run, budgets, counters, and stopping. */
#ifndef FW_PASSES_PASS_H
#define FW_PASSES_PASS_H

#include "check/judge.h"
#include "fault/memory.h"
#include "stack/layers.h"

#include <signal.h>

typedef struct fw_pass_options {
    int threads;                       /* 0 = as many as the machine has */
    int32_t batch;                     /* layers taken at a time; 0 = FW_BATCH */
    size_t memo_MiB;                   /* for peel solutions; 0 turns the memo off */
    size_t store_MiB;                  /* for packed layers; beyond it they go to a nameless file */
    const volatile sig_atomic_t *stop; /* NULL, or set from outside to end the run */
    void (*progress)(void *context, const char *phase, int32_t done, int32_t total); /* or NULL */
    void *progress_context;
} fw_pass_options;

typedef struct fw_pass {
    fw_pass_options options;
    fw_budget files, runs, memo_budget, store_budget;
    fw_film_memo *memo;
    fw_times *times; /* owned; where the time goes */
    int64_t decodes; /* PNG files decoded so far, in all passes */
} fw_pass;

/* Options that suit a machine with 512 MiB to spare. */
fw_pass_options fw_pass_defaults(void);

fw_status fw_pass_open(const fw_pass_options *options, fw_pass *out, fw_fault *fault);
void fw_pass_close(fw_pass *pass);

/* Tells the progress, and FW_STOPPED when the run was asked to end. */
fw_status fw_pass_tick(const fw_pass *pass, const char *phase, int32_t done, int32_t total,
                       fw_fault *fault);

/* The first fault of a parallel loop, in order. */
fw_status fw_pass_first_fault(const fw_fault *faults, int32_t count, fw_fault *fault);

#endif
