#include "physics/group.h"

#include <math.h>

static const double residual_limit = 1e-6;

void fw_group_begin(fw_group *group, const double at[3])
{
    fw_group empty = {.at = {at[0], at[1], at[2]}};
    *group = empty;
}

void fw_group_add(fw_group *group, const fw_anchor_stiffness *anchor)
{
    fw_six moved;
    fw_six_move_stiffness(anchor->at, group->at, &anchor->k, &moved);
    for (int i = 0; i < 6; i++)
        for (int j = 0; j < 6; j++)
            group->k.m[i][j] += moved.m[i][j];
    group->count++;
    group->factored = false;
}

fw_status fw_group_factor(fw_group *group, fw_fault *fault)
{
    static const char *const free_to[6] = {
        "slide along x", "slide along y", "move along z",
        "turn about x",  "turn about y",  "turn about z",
    };
    int row;
    group->factored = fw_six_factor(&group->k, &group->factors, &row);
    if (!group->factored)
        return fw_fault_set(fault, FW_INPUT,
                            "a body that is free to %s, on %zu anchors, hold it there too",
                            free_to[row], group->count);
    return FW_OK;
}

fw_status fw_group_motion(const fw_group *group, const double load[6], double motion[6],
                          fw_fault *fault)
{
    if (!group->factored)
        return fw_fault_set(fault, FW_INPUT,
                            "a load on anchors that do not hold, %zu anchors, factor them first",
                            group->count);
    fw_six_solve(&group->factors, load, motion);
    return FW_OK;
}

void fw_group_force(const fw_group *group, const fw_anchor_stiffness *anchor,
                    const double motion[6], double force[6])
{
    double here[6];
    fw_six_move_motion(group->at, anchor->at, motion, here);
    fw_six_apply(&anchor->k, here, force);
}

static double size_of(const double v[3])
{
    return sqrt(v[0] * v[0] + v[1] * v[1] + v[2] * v[2]);
}

/* Forces summed at the point of the group, and the sum of their sizes: what rounding is judged by.
 */
typedef struct balance {
    double sum[6];
    double forces_N, moments_Nmm;
} balance;

static void add_force(balance *b, const fw_group *group, const double at[3], const double force[6])
{
    double moved[6];
    fw_six_move_wrench(at, group->at, force, moved);
    for (int i = 0; i < 6; i++)
        b->sum[i] += moved[i];
    const double r[3] = {at[0] - group->at[0], at[1] - group->at[1], at[2] - group->at[2]};
    b->forces_N += size_of(force);
    b->moments_Nmm += size_of(force + 3) + size_of(r) * size_of(force);
}

/* The length at which the group is as stiff against turning as against sliding: compares moments
 * with forces, so that rounding in a row that carries nothing is judged by what the others carry.
 */
static double length_of(const fw_group *group)
{
    double slide = 0.0, turn = 0.0;
    for (int i = 0; i < 3; i++) {
        slide += group->k.m[i][i];
        turn += group->k.m[i + 3][i + 3];
    }
    return sqrt(turn / slide);
}

/* Written so that anything that is not a number fails. */
static bool is_balanced(const balance *b, const fw_group *group, const double load[6])
{
    double left[6], length_mm = length_of(group);
    for (int i = 0; i < 6; i++)
        left[i] = b->sum[i] - load[i];
    double limit_N = residual_limit * (b->forces_N + b->moments_Nmm / length_mm);
    return size_of(left) <= limit_N && size_of(left + 3) <= limit_N * length_mm;
}

static fw_status share_out(const fw_group *group, const fw_anchor_stiffness *anchor, size_t count,
                           const double load[6], double (*force)[6], fw_fault *fault)
{
    double motion[6];
    FW_TRY(fw_group_motion(group, load, motion, fault));
    balance b = {0};
    for (size_t i = 0; i < count; i++) {
        fw_group_force(group, &anchor[i], motion, force[i]);
        add_force(&b, group, anchor[i].at, force[i]);
    }
    if (!is_balanced(&b, group, load))
        return fw_fault_set(fault, FW_INPUT,
                            "forces that do not add up to their load, %zu anchors, check that the "
                            "load is finite and that these anchors are the group's",
                            count);
    return FW_OK;
}

static void forget(double (*force)[6], size_t count)
{
    for (size_t i = 0; i < count; i++)
        for (int j = 0; j < 6; j++)
            force[i][j] = (double)NAN;
}

fw_status fw_group_solve(const fw_group *group, const fw_anchor_stiffness *anchor, size_t count,
                         const double load[6], double (*force)[6], fw_fault *fault)
{
    fw_status status = share_out(group, anchor, count, load, force, fault);
    if (status != FW_OK)
        forget(force, count);
    return status;
}

fw_status fw_group_share(const fw_anchor_stiffness *anchor, size_t count, const double at[3],
                         const double load[6], double (*force)[6], fw_fault *fault)
{
    fw_group group;
    fw_group_begin(&group, at);
    for (size_t i = 0; i < count; i++)
        fw_group_add(&group, &anchor[i]);
    fw_status status = fw_group_factor(&group, fault);
    if (status != FW_OK) {
        forget(force, count);
        return status;
    }
    return fw_group_solve(&group, anchor, count, load, force, fault);
}

static bool is_patch(const fw_patch *p)
{
    double determinant = p->ixx_mm4 * p->iyy_mm4 - p->ixy_mm4 * p->ixy_mm4;
    return p->area_mm2 > 0.0 && p->ixx_mm4 > 0.0 && p->iyy_mm4 > 0.0 && determinant > 0.0 &&
           isfinite(p->area_mm2) && isfinite(p->ixx_mm4 * p->iyy_mm4) && isfinite(p->at[0]) &&
           isfinite(p->at[1]) && isfinite(p->at[2]);
}

static bool is_modulus(double value)
{
    return value > 0.0 && isfinite(value);
}

fw_status fw_group_patch(const fw_patch *patch, double normal_MPa_mm, double shear_MPa_mm,
                         fw_anchor_stiffness *anchor, fw_fault *fault)
{
    if (!is_patch(patch) || !is_modulus(normal_MPa_mm) || !is_modulus(shear_MPa_mm))
        return fw_fault_set(fault, FW_INPUT,
                            "a contact that cannot be, area %g mm2, give an area with its second "
                            "moments and moduli above 0",
                            patch->area_mm2);
    fw_anchor_stiffness made = {.at = {patch->at[0], patch->at[1], patch->at[2]}};
    made.k.m[0][0] = made.k.m[1][1] = shear_MPa_mm * patch->area_mm2;
    made.k.m[2][2] = normal_MPa_mm * patch->area_mm2;
    made.k.m[3][3] = normal_MPa_mm * patch->ixx_mm4;
    made.k.m[4][4] = normal_MPa_mm * patch->iyy_mm4;
    made.k.m[3][4] = made.k.m[4][3] = -normal_MPa_mm * patch->ixy_mm4;
    made.k.m[5][5] = shear_MPa_mm * (patch->ixx_mm4 + patch->iyy_mm4);
    *anchor = made;
    return FW_OK;
}
