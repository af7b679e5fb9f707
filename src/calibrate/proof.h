/* The table of handbook checks: what is published or can be worked out by hand, against what the
 * program's own kernels give on this machine.
 *
 * A row is one case with up to FW_PROOF_VALUES numbers that must all hold; the worst of them speaks
 * for it. Tolerances were set with the expected values, before the kernels were run. A row that no
 * kernel computes stays in the table and says why.
 */
#ifndef FW_CALIBRATE_PROOF_H
#define FW_CALIBRATE_PROOF_H

#include "fault/fault.h"

#include <signal.h>

typedef enum fw_proof_kind {
    FW_PROOF_RELATIVE,     /* |computed - expected| <= tolerance * |expected| */
    FW_PROOF_ABSOLUTE,     /* |computed - expected| <= tolerance */
    FW_PROOF_AT_MOST,      /* computed - expected <= tolerance * |expected| */
    FW_PROOF_NOT_COMPUTED, /* source holds the reason */
} fw_proof_kind;

enum { FW_PROOF_VALUES = 10, FW_PROOF_GIVEN = 4 };

typedef struct fw_proof fw_proof;
struct fw_proof {
    const char *id, *what;
    fw_proof_kind kind;
    int count; /* of expected; 0 where nothing is computed */
    double expected[FW_PROOF_VALUES];
    double tolerance;
    const char *source;
    /* Fills computed[0 .. count - 1] from what is given. FW_INPUT: a kernel refused the case, which
     * is a failed check. FW_MACHINE ends the run. */
    fw_status (*compute)(const fw_proof *proof, double *computed, fw_fault *fault);
    double with[FW_PROOF_GIVEN]; /* what that means is said at the function */
    const char *mask;            /* likewise */
};

typedef struct fw_proof_table {
    const fw_proof *row;
    size_t count;
} fw_proof_table;

/* All of them, by theme. */
enum { FW_PROOF_TABLES = 6 };
extern const fw_proof_table *const fw_proof_tables[FW_PROOF_TABLES];

size_t fw_proof_count(void);

/* index < fw_proof_count() */
const fw_proof *fw_proof_at(size_t index);

typedef struct fw_proof_result {
    double computed[FW_PROOF_VALUES]; /* NAN where the kernel gave none */
    int worst;                        /* the value that is furthest from what is allowed */
    double error;                     /* of that one, as the kind measures it; NAN with computed */
    bool passed;
} fw_proof_result;

/* Holds result->computed against the row and fills the rest. */
void fw_proof_judge(const fw_proof *proof, fw_proof_result *result);

/* Computes one row and judges it. Fails for want of memory or convergence alone. */
fw_status fw_proof_run(const fw_proof *proof, fw_proof_result *result, fw_fault *fault);

/* All rows, into result[fw_proof_count()], on `threads` threads (0: as many as there are
 * processors). FW_STOPPED when *stop (may be NULL) is set. */
fw_status fw_proof_run_all(int threads, const volatile sig_atomic_t *stop, fw_proof_result *result,
                           fw_fault *fault);

#endif
