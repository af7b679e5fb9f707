/* Six-vectors of statics, the 6x6 matrices between them, and moving both from point to point.
 *
 * A wrench is (Fx, Fy, Fz, Mx, My, Mz) at a point: N and N mm. A motion is (ux, uy, uz, rx, ry, rz)
 * at a point: mm and rad, small. A stiffness gives the wrench that makes a motion, a flexibility
 * the motion that a wrench makes; both are symmetric. The same rigid body seen from another point,
 * r = from - to:
 *
 *     wrench  F' = F, M' = M + r x F        motion  u' = u - w x r, w' = w
 *
 * so wrench . motion (work) stays what it is. Right-handed; in a left-handed frame (y down, z up)
 * everything holds as well, if moments are the cross products there too.
 *
 * Pure; in and out may be the same object unless said.
 */
#ifndef FW_SIX_H
#define FW_SIX_H

#include <stdbool.h>

/* Row, column; both triangles set. */
typedef struct fw_six {
    double m[6][6];
} fw_six;

void fw_six_move_wrench(const double from[3], const double to[3], const double in[6],
                        double out[6]);
void fw_six_move_motion(const double from[3], const double to[3], const double in[6],
                        double out[6]);
void fw_six_move_stiffness(const double from[3], const double to[3], const fw_six *in, fw_six *out);
void fw_six_move_flexibility(const double from[3], const double to[3], const fw_six *in,
                             fw_six *out);

/* out = a in. Here in and out must differ. */
void fw_six_apply(const fw_six *a, const double in[6], double out[6]);

/* A = L D L^T: L below the diagonal (its own diagonal is 1), D on it. */
typedef struct fw_six_factors {
    double ld[6][6];
} fw_six_factors;

/* Factors a symmetric positive definite matrix (its lower triangle is read), without pivoting and
 * without scaling: LDL^T has the same relative errors whatever units the rows are in.
 *
 * False, with *row the first row that fails (out is then not to be used), when a pivot is below
 * 1e-10 of its diagonal entry (fewer than about six digits would be left of sixteen), or below
 * 1e-12 of the largest diagonal entry of its kind (rows 0..2 and 3..5): what is left there is
 * rounding, as where points lie on a line only nearly. Also for anything that is not finite. */
bool fw_six_factor(const fw_six *a, fw_six_factors *out, int *row);

/* x = A^-1 b; b and x may be the same array. */
void fw_six_solve(const fw_six_factors *factors, const double b[6], double x[6]);

/* out = A^-1, exactly symmetric. False, out unset, where fw_six_factor says no. */
bool fw_six_invert(const fw_six *a, fw_six *out);

#endif
