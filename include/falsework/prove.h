/* The table of handbook checks: published and hand-worked values against what the kernels of this
 * library compute on this machine. */
#ifndef FALSEWORK_PROVE_H
#define FALSEWORK_PROVE_H

#include "falsework/survey.h"

#ifdef __cplusplus
extern "C" {
#endif

/* How a check measures its error, and what it allows. */
typedef enum falsework_proof_kind {
    FALSEWORK_PROOF_RELATIVE,    /* |computed - expected| / |expected| <= tolerance */
    FALSEWORK_PROOF_ABSOLUTE,    /* |computed - expected| <= tolerance */
    FALSEWORK_PROOF_AT_MOST,     /* (computed - expected) / |expected| <= tolerance */
    FALSEWORK_PROOF_NOT_COMPUTED /* no kernel computes it: source says why, there are no values */
} falsework_proof_kind;

/* One check: a case with one value or several, which all must hold. Texts are constants of the
 * library; the arrays are valid during the call that hands them out. */
typedef struct falsework_proof {
    const char *id, *what; /* "S1.3"; the case and its units, one line of at most 54 characters */
    const char *source;    /* who says so: author and year, "derived here", "from memory" */
    falsework_proof_kind kind;
    int count;                         /* of values */
    const double *expected, *computed; /* [count]; computed is NAN where a kernel refused */
    int worst;                         /* the value that is furthest from what is allowed */
    double error;                      /* of that value; NAN where it was not computed */
    double tolerance;
    int passed; /* 1 or 0; 0 for what is not computed */
} falsework_proof;

typedef struct falsework_proved {
    int passed, failed, not_computed; /* checks */
} falsework_proved;

/* Takes a check; anything but FALSEWORK_OK ends the giving and is handed back. */
typedef falsework_status (*falsework_proof_taker)(void *context, const falsework_proof *proof);

/* Computes all checks, then gives them to `take` (from the calling thread) in the order of the
 * table, and counts them. Takes seconds, and some 30 MiB a thread at most. FALSEWORK_OK also when
 * checks fail: see proved->failed. Of options (may be NULL) threads and stop are read; numbers do
 * not depend on threads. */
FALSEWORK_API falsework_status falsework_prove(const falsework_options *options,
                                               falsework_proof_taker take, void *context,
                                               falsework_proved *proved, falsework_fault *fault);

#ifdef __cplusplus
}
#endif
#endif
