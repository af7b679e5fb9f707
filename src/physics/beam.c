/* Contents: frustum flexibility; chain; sections; the peak of the stress in a piece (stationary
 * points by polynomial roots); checks of the input. */
#include "physics/beam.h"

#include "physics/polynomial.h"

#include <math.h>
#include <stdbool.h>

static const double pi = 3.14159265358979323846;

fw_beam_material fw_beam_isotropic(double e_MPa, double nu)
{
    fw_beam_material material = {.e_MPa = e_MPa, .g_MPa = e_MPa / (2.0 * (1.0 + nu))};
    return material;
}

static double dot(const double a[3], const double b[3])
{
    return a[0] * b[0] + a[1] * b[1] + a[2] * b[2];
}

static void cross(const double a[3], const double b[3], double out[3])
{
    out[0] = a[1] * b[2] - a[2] * b[1];
    out[1] = a[2] * b[0] - a[0] * b[2];
    out[2] = a[0] * b[1] - a[1] * b[0];
}

/* Unit vector from a to b and the distance; 0 and no vector where they are at one place. */
static double axis_of(const fw_beam_node *a, const fw_beam_node *b, double axis[3])
{
    double along[3] = {b->at[0] - a->at[0], b->at[1] - a->at[1], b->at[2] - a->at[2]};
    double length_mm = hypot(hypot(along[0], along[1]), along[2]);
    for (int i = 0; i < 3; i++)
        axis[i] = length_mm > 0.0 ? along[i] / length_mm : 0.0;
    return length_mm;
}

/* Compliances of a frustum at its end a: mm/N, mm/(N mm) and 1/(N mm). */
typedef struct compliance {
    double axial, force, mixed, moment, twist;
} compliance;

static compliance compliance_of(double a, double b, double length_mm, fw_beam_material material)
{
    double j2 = 1.0 / (3.0 * a * (b * b * b));
    double half = 1.0 / (6.0 * (a * a) * (b * b)); /* integral of s (1 - s) / d^4 */
    double j0 = j2 + 2.0 * half + 1.0 / (3.0 * b * (a * a * a));
    double bending = 64.0 / (pi * material.e_MPa) * length_mm;
    compliance c = {
        .axial = 4.0 * length_mm / (pi * material.e_MPa * a * b),
        .force = bending * length_mm * length_mm * j2,
        .mixed = bending * length_mm * (half + j2),
        .moment = bending * j0,
        .twist = 32.0 / (pi * material.g_MPa) * length_mm * j0,
    };
    return c;
}

/* A round section is alike in all directions across the axis e, so no local frame is needed: the
 * blocks are along e e^T + across (I - e e^T); a moment m moves the tip by mixed e x m, a force f
 * turns it by mixed f x e. */
void fw_beam_frustum(const fw_beam_node *a, const fw_beam_node *b, fw_beam_material material,
                     fw_six *flexibility)
{
    double e[3];
    double length_mm = axis_of(a, b, e);
    compliance c = compliance_of(a->d_mm, b->d_mm, length_mm, material);
    double skew[3][3] = {{0.0, -e[2], e[1]}, {e[2], 0.0, -e[0]}, {-e[1], e[0], 0.0}};
    for (int i = 0; i < 3; i++) {
        for (int j = 0; j < 3; j++) {
            double along = e[i] * e[j], across = (i == j ? 1.0 : 0.0) - along;
            flexibility->m[i][j] = c.axial * along + c.force * across;
            flexibility->m[i + 3][j + 3] = c.twist * along + c.moment * across;
            flexibility->m[i][j + 3] = c.mixed * skew[i][j];
            flexibility->m[i + 3][j] = c.mixed * skew[j][i];
        }
    }
}

static bool is_positive(double value)
{
    return value > 0.0 && isfinite(value);
}

static bool is_node(const fw_beam_node *node)
{
    return is_positive(node->d_mm) && isfinite(node->at[0]) && isfinite(node->at[1]) &&
           isfinite(node->at[2]);
}

static fw_status check_chain(const fw_beam_node *node, size_t count, fw_fault *fault)
{
    double axis[3], length_mm = 0.0;
    for (size_t i = 0; i < count; i++) {
        if (!is_node(&node[i]))
            return fw_fault_set(fault, FW_INPUT,
                                "a beam with a place or diameter that cannot be, node %zu of %zu, "
                                "give finite places and diameters above 0",
                                i, count);
        length_mm += i > 0 ? axis_of(&node[i - 1], &node[i], axis) : 0.0;
    }
    if (!is_positive(length_mm))
        return fw_fault_set(fault, FW_INPUT,
                            "a beam without length, %zu nodes, give two at different places",
                            count);
    return FW_OK;
}

static fw_status check_material(fw_beam_material material, fw_fault *fault)
{
    if (is_positive(material.e_MPa) && is_positive(material.g_MPa))
        return FW_OK;
    return fw_fault_set(fault, FW_INPUT,
                        "a modulus that cannot be, E = %g MPa, G = %g MPa, give both above 0",
                        material.e_MPa, material.g_MPa);
}

fw_status fw_beam_flexibility(const fw_beam_node *node, size_t count, fw_beam_material material,
                              fw_six *flexibility, fw_fault *fault)
{
    FW_TRY(check_chain(node, count, fault));
    FW_TRY(check_material(material, fault));
    fw_six sum = {0};
    for (size_t piece = 0; piece + 1 < count; piece++) {
        fw_six part;
        fw_beam_frustum(&node[piece], &node[piece + 1], material, &part);
        fw_six_move_flexibility(node[piece].at, node[0].at, &part, &part);
        for (int i = 0; i < 6; i++)
            for (int j = 0; j < 6; j++)
                sum.m[i][j] += part.m[i][j];
    }
    *flexibility = sum;
    return FW_OK;
}

fw_status fw_beam_stiffness(const fw_beam_node *node, size_t count, fw_beam_material material,
                            fw_six *stiffness, fw_fault *fault)
{
    fw_six flexibility;
    FW_TRY(fw_beam_flexibility(node, count, material, &flexibility, fault));
    if (!fw_six_invert(&flexibility, stiffness))
        return fw_fault_set(fault, FW_INPUT,
                            "a beam too slender for its stiffness to be known, %zu nodes, make it "
                            "shorter or thicker",
                            count);
    return FW_OK;
}

/* The wrench of the tip at the start of a piece, split along and across its axis. */
typedef struct piece_load {
    double length_mm, d[2]; /* diameters at the start and the end */
    double n_N, t_Nmm;
    double bending[3]; /* moment across the axis at the start, N mm */
    double lever[3];   /* axis x force, N: the moment across falls by it with every mm */
} piece_load;

static piece_load load_of(const fw_beam_node *node, size_t piece, const double tip_load[6])
{
    double axis[3], here[6];
    const fw_beam_node *a = &node[piece], *b = &node[piece + 1];
    piece_load load = {.length_mm = axis_of(a, b, axis), .d = {a->d_mm, b->d_mm}};
    fw_six_move_wrench(node[0].at, a->at, tip_load, here);
    load.n_N = -dot(here, axis);
    load.t_Nmm = -dot(here + 3, axis);
    for (int i = 0; i < 3; i++)
        load.bending[i] = here[i + 3] + load.t_Nmm * axis[i];
    cross(axis, here, load.lever);
    return load;
}

static double diameter_at(const piece_load *load, double share)
{
    return (1.0 - share) * load->d[0] + share * load->d[1];
}

static double bending_at(const piece_load *load, double share)
{
    double left[3];
    for (int i = 0; i < 3; i++)
        left[i] = load->bending[i] - share * load->length_mm * load->lever[i];
    return sqrt(dot(left, left));
}

static double stress_of(double n_N, double m_Nmm, double d_mm)
{
    return (4.0 * n_N + 32.0 * m_Nmm / d_mm) / (pi * d_mm * d_mm);
}

static double stress_at(const piece_load *load, double share)
{
    return stress_of(load->n_N, bending_at(load, share), diameter_at(load, share));
}

fw_beam_section fw_beam_section_at(const fw_beam_node *node, size_t piece, double share,
                                   const double tip_load[6])
{
    piece_load load = load_of(node, piece, tip_load);
    fw_beam_section section = {
        .n_N = load.n_N,
        .v_N = sqrt(dot(load.lever, load.lever)),
        .m_Nmm = bending_at(&load, share),
        .t_Nmm = load.t_Nmm,
        .d_mm = diameter_at(&load, share),
        .peak_MPa = stress_at(&load, share),
        .piece = piece,
        .share = share,
    };
    for (int i = 0; i < 3; i++)
        section.at[i] = (1.0 - share) * node[piece].at[i] + share * node[piece + 1].at[i];
    return section;
}

/* The stress is nowhere larger in the piece: all the pull and the largest moment (|M| is convex
 * along the piece, so at an end) on the thinnest section. */
static double stress_bound(const piece_load *load)
{
    double moment = fmax(bending_at(load, 0.0), bending_at(load, 1.0));
    return stress_of(fmax(load->n_N, 0.0), moment, fmin(load->d[0], load->d[1]));
}

/* With the diameter d + c s, Q = M^2 a polynomial q in the share s, and primes for d/ds, the
 * derivative of 4 N / d^2 + 32 sqrt(Q) / d^3 vanishes where N c d sqrt(Q) = 2 Q' d - 12 c Q, so
 * among the roots of
 *
 *     w = (N c d)^2 Q - (2 Q' d - 12 c Q)^2,    of degree 4. */
static void turning_polynomial(double n, double d, double c, const double q[3], double w[5])
{
    const double square[3] = {d * d, 2.0 * d * c, c * c};
    const double side[3] = {2.0 * q[1] * d - 12.0 * c * q[0],
                            2.0 * (2.0 * q[2] * d + q[1] * c) - 12.0 * c * q[1],
                            4.0 * q[2] * c - 12.0 * c * q[2]};
    for (int i = 0; i < 5; i++)
        w[i] = 0.0;
    for (int i = 0; i < 3; i++)
        for (int j = 0; j < 3; j++)
            w[i + j] += n * n * c * c * square[i] * q[j] - side[i] * side[j];
}

/* The shares at which the stress may be largest inside a piece; forces and lengths are scaled, so
 * that squares stay in range. Squaring adds false roots, which do no harm: the stress is looked at
 * there and is not larger. */
static int stationary(const piece_load *load, double share[FW_POLYNOMIAL_POINTS])
{
    double m = fmax(bending_at(load, 0.0), bending_at(load, 1.0));
    double thick = fmax(load->d[0], load->d[1]);
    if (!(m > 0.0) || load->d[0] == load->d[1])
        return 0; /* the stress is convex or monotone: an end has the largest */
    double a[3], b[3], w[5];
    for (int i = 0; i < 3; i++) {
        a[i] = load->bending[i] / m;
        b[i] = -load->length_mm * load->lever[i] / m;
    }
    const double q[3] = {dot(a, a), 2.0 * dot(a, b), dot(b, b)};
    double rise = (load->d[1] - load->d[0]) / thick;
    turning_polynomial(load->n_N * thick / m, load->d[0] / thick, rise, q, w);
    return fw_polynomial_points(w, 4, 0.0, 1.0, share);
}

/* Keeps the larger: first the start and the end of a piece, then, where it could matter, inside. */
static void look_at_piece(const piece_load *load, size_t piece, fw_beam_section *best)
{
    double share[FW_POLYNOMIAL_POINTS + 2] = {0.0, 1.0};
    int points = 2;
    if (!(stress_bound(load) <= best->peak_MPa))
        points += stationary(load, share + 2);
    for (int i = 0; i < points; i++) {
        double stress_MPa = stress_at(load, share[i]);
        if (stress_MPa > best->peak_MPa) {
            best->peak_MPa = stress_MPa;
            best->piece = piece;
            best->share = share[i];
        }
    }
}

fw_status fw_beam_peak(const fw_beam_node *node, size_t count, const double tip_load[6],
                       fw_beam_section *peak, fw_fault *fault)
{
    FW_TRY(check_chain(node, count, fault));
    for (int i = 0; i < 6; i++)
        if (!isfinite(tip_load[i]))
            return fw_fault_set(fault, FW_INPUT,
                                "a load that cannot be, at the tip of a beam, give finite forces");
    fw_beam_section best = {.peak_MPa = -(double)INFINITY};
    for (size_t piece = 0; piece + 1 < count; piece++) {
        piece_load load = load_of(node, piece, tip_load);
        if (load.length_mm > 0.0)
            look_at_piece(&load, piece, &best);
    }
    *peak = fw_beam_section_at(node, best.piece, best.share, tip_load);
    return FW_OK;
}
