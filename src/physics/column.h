/* The load at which a straight slender column buckles: round, uniform or conical.
 *
 * Linear elastic buckling of a perfect column under an end load along its axis (Euler). Forces N,
 * lengths mm, E MPa. An upper bound for a real post: a crooked axis, an eccentric load and yield
 * are not in it. It says nothing about stocky columns: where P / (smallest section) comes near the
 * compressive strength, that governs.
 *
 * All functions give NAN where a length, diameter or modulus is not above 0.
 */
#ifndef FW_COLUMN_H
#define FW_COLUMN_H

/* How the two ends are held. "Sway": the tip may move sideways. The base is the end with d2, the
 * tip the end with d1; it matters for FREE (the base is fixed) and PINNED_SWAY (likewise) only. */
typedef enum fw_column_ends {
    FW_COLUMN_PINNED_PINNED,     /* K = 1 */
    FW_COLUMN_FIXED_FIXED,       /* K = 0.5 */
    FW_COLUMN_FIXED_PINNED,      /* K = pi / 4.493409 = 0.699156, from tan x = x */
    FW_COLUMN_FIXED_FREE,        /* K = 2 */
    FW_COLUMN_FIXED_FIXED_SWAY,  /* K = 1: a post under a part that may slide but not turn */
    FW_COLUMN_FIXED_PINNED_SWAY, /* K = 2: as FREE, since a pin that slides holds nothing */
} fw_column_ends;

/* K: the length of the equally strong pinned column over the column's own, for a uniform column. */
double fw_column_effective(fw_column_ends ends);

/* Uniform column of any section: P = pi^2 E I / (K L)^2 (Euler; Timoshenko & Gere 1961), I the
 * smallest second moment of the section in mm4. */
double fw_column_uniform_N(fw_column_ends ends, double e_MPa, double inertia_mm4, double length_mm);

/* Conical frustum, diameter linear from d1 (tip) to d2 (base):
 *
 *     P = t^2 E sqrt(I1 I2) / L^2,  I = pi d^4 / 64
 *
 * with t = pi / K as in a uniform column when the tip cannot sway: then the rule is exact. Base
 * fixed, tip free (or pinned with sway): tan t = -t d1 / (d2 - d1), 0 < t < pi. Fixed with sway: t
 * - atan(q t / (q + t^2)) = pi, q = (d2 - d1)^2 / (d1 d2). Derived here from the solution y = x (a
 * cos(k/x) + b sin(k/x)) of the cone, x from its apex (that for a free tip is in Timoshenko & Gere
 * 1961, art. 2.14, from memory). Any d1, d2 > 0, d1 > d2 too; t to the last digits by bisection. */
double fw_column_frustum_N(fw_column_ends ends, double e_MPa, double d1_mm, double d2_mm,
                           double length_mm);

#endif
