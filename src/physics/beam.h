/* A post as a chain of round tapered beams from its tip to the plate, where it is clamped: how
 * stiff it is at the tip, and what its sections carry under a load at the tip.
 *
 * Nodes run from the tip [0] to the plate [count - 1]; between two nodes the axis is straight and
 * the diameter linear (a frustum). Two nodes at one place make a step in diameter. Euler-Bernoulli:
 * sections stay plane and square to the axis, small displacements, linear elastic. Shear is left
 * out: in a uniform cantilever (nu = 0.4, shear coefficient 0.9) it would add 0.58 (d / L)^2 of the
 * bending deflection (derived here), so below 1 % from L = 8 d on; a shorter post is softer in
 * truth than said here. Steps and corners concentrate stress; that is not in it either.
 *
 * Lengths mm, E and G MPa, forces N, moments N mm. "Tip load" is the wrench (six.h) that the part
 * exerts on the post at node 0; a force from plate to tip along the axis is tension. Pure, nothing
 * is allocated or kept.
 */
#ifndef FW_BEAM_H
#define FW_BEAM_H

#include "fault/fault.h"
#include "physics/six.h"

#include <stddef.h>

typedef struct fw_beam_node {
    double at[3]; /* mm */
    double d_mm;  /* diameter, > 0 */
} fw_beam_node;

typedef struct fw_beam_material {
    double e_MPa, g_MPa; /* both > 0 */
} fw_beam_material;

/* Isotropic: G = E / (2 (1 + nu)). */
fw_beam_material fw_beam_isotropic(double e_MPa, double nu);

/* Flexibility of one frustum at its end a, end b clamped. Closed form, no quadrature: with J_k the
 * integral of s^k / d(s)^4, s = 0 .. 1 from a to b (Beta integrals; all terms positive, so exact to
 * rounding for any d_a, d_b),
 *
 *     J0 = (1/(d_a d_b^3) + 1/(d_a^2 d_b^2) + 1/(d_a^3 d_b)) / 3
 *     J1 = 1/(6 d_a^2 d_b^2) + 1/(3 d_a d_b^3),  J2 = 1/(3 d_a d_b^3)
 *     axial 4 L/(pi E d_a d_b), bending 64/(pi E) (L J0, L^2 J1, L^3 J2), torsion 32 L J0/(pi G)
 *
 * Derived here; J2 is the handbook's tapered cantilever, delta = 64 F L^3 / (3 pi E d_a d_b^3).
 * All zero where a and b are at one place. Nothing is checked. */
void fw_beam_frustum(const fw_beam_node *a, const fw_beam_node *b, fw_beam_material material,
                     fw_six *flexibility);

/* Flexibility of the chain at node 0: the sum of its frusta, each moved to the tip. FW_INPUT when
 * there are fewer than two nodes, the chain has no length, or a number is not finite or not above 0
 * where it must be; then the result is not set. */
fw_status fw_beam_flexibility(const fw_beam_node *node, size_t count, fw_beam_material material,
                              fw_six *flexibility, fw_fault *fault);

/* Its inverse, the stiffness at node 0. FW_INPUT also when the chain is too slender to invert
 * (about L > 40000 d). */
fw_status fw_beam_stiffness(const fw_beam_node *node, size_t count, fw_beam_material material,
                            fw_six *stiffness, fw_fault *fault);

/* What a section carries: of the side of the plate, from the side of the tip. */
typedef struct fw_beam_section {
    double n_N;      /* along the axis, tension > 0 */
    double v_N;      /* across it, >= 0 */
    double m_Nmm;    /* bending moment, >= 0 */
    double t_Nmm;    /* torque about the axis toward the tip */
    double d_mm;     /* diameter */
    double at[3];    /* centre, mm */
    double peak_MPa; /* largest tension, N / A + M / W = 4 N / (pi d^2) + 32 M / (pi d^3) */
    size_t piece;    /* between nodes piece and piece + 1 */
    double share;    /* 0 .. 1 of the way from the one to the other */
} fw_beam_section;

/* The section at a share of the way from node[piece] to the next. piece + 1 < count, and the piece
 * has a length; not checked. */
fw_beam_section fw_beam_section_at(const fw_beam_node *node, size_t piece, double share,
                                   const double tip_load[6]);

/* The section of the largest tension stress in the chain. It may lie inside a piece: a cone under a
 * side force breaks where d = 1.5 times that of its tip. Exact: the stationary points of the stress
 * are roots of a polynomial of degree 4 in the share, all of which are found. Below 0 when every
 * fibre is in compression. The first of equal ones. Errors as fw_beam_flexibility, and FW_INPUT
 * when the load is not finite. */
fw_status fw_beam_peak(const fw_beam_node *node, size_t count, const double tip_load[6],
                       fw_beam_section *peak, fw_fault *fault);

#endif
