/* The rows, a file a theme. */
#ifndef FW_CALIBRATE_PROOFS_H
#define FW_CALIBRATE_PROOFS_H

#include "calibrate/proof.h"

extern const fw_proof_table fw_proofs_film;  /* S, U: the film without a cap */
extern const fw_proof_table fw_proofs_cap;   /* C: suction that the liquid cannot hold */
extern const fw_proof_table fw_proofs_frame; /* K, A, R: a machine that gives; other laws */
extern const fw_proof_table fw_proofs_tilt;  /* T: a plate that tilts */
extern const fw_proof_table fw_proofs_cure;  /* J: what light does */
extern const fw_proof_table fw_proofs_posts; /* B, P, N: columns, beams, groups, strength */

/* A row. values: what is expected, as one of the three kinds; by: what computes it, with its
 * numbers (0 where it takes none) or its mask. */
#define FW_CHECK(id_, what_, values, tolerance_, source_, by)                                      \
    {                                                                                              \
        .id = (id_), .what = (what_), values, .tolerance = (tolerance_), .source = (source_), by   \
    }
#define FW_EQUAL(...) .kind = FW_PROOF_RELATIVE, FW_VALUES(__VA_ARGS__)
#define FW_WITHIN(...) .kind = FW_PROOF_ABSOLUTE, FW_VALUES(__VA_ARGS__)
#define FW_AT_MOST(...) .kind = FW_PROOF_AT_MOST, FW_VALUES(__VA_ARGS__)
#define FW_VALUES(...)                                                                             \
    .count = (int)(sizeof((double[]){__VA_ARGS__}) / sizeof(double)), .expected = {__VA_ARGS__}
#define FW_BY(compute_, ...) .compute = (compute_), .with = {__VA_ARGS__}
#define FW_BY_MASK(compute_, mask_) .compute = (compute_), .mask = (mask_)

/* A row that no kernel computes, and why. */
#define FW_NOT_COMPUTED(id_, what_, why)                                                           \
    {                                                                                              \
        .id = (id_), .what = (what_), .kind = FW_PROOF_NOT_COMPUTED, .source = (why)               \
    }

#define FW_PROOF_ROWS(rows)                                                                        \
    {                                                                                              \
        rows, sizeof(rows) / sizeof *(rows)                                                        \
    }

#endif
