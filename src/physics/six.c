#include "physics/six.h"

#include <math.h>
#include <string.h>

static const double least_of_diagonal = 1e-10;
static const double least_of_kind = 1e-12;

/* out = a x b + c; out may be c. */
static void add_cross(const double a[3], const double b[3], const double c[3], double out[3])
{
    double x = a[1] * b[2] - a[2] * b[1], y = a[2] * b[0] - a[0] * b[2];
    double z = a[0] * b[1] - a[1] * b[0];
    out[0] = c[0] + x;
    out[1] = c[1] + y;
    out[2] = c[2] + z;
}

static void arm(const double from[3], const double to[3], double out[3])
{
    for (int i = 0; i < 3; i++)
        out[i] = from[i] - to[i];
}

void fw_six_move_wrench(const double from[3], const double to[3], const double in[6], double out[6])
{
    double r[3];
    arm(from, to, r);
    memmove(out, in, 6 * sizeof *out);
    add_cross(r, out, out + 3, out + 3);
}

void fw_six_move_motion(const double from[3], const double to[3], const double in[6], double out[6])
{
    double r[3];
    arm(from, to, r);
    memmove(out, in, 6 * sizeof *out);
    add_cross(r, out + 3, out, out);
}

typedef void mover(const double from[3], const double to[3], const double in[6], double out[6]);

/* Moves the columns, then the rows: T A T^T with T the matrix of the mover. */
static void move_matrix(mover *move, const double from[3], const double to[3], const fw_six *in,
                        fw_six *out)
{
    double turned[6][6];
    for (int j = 0; j < 6; j++) {
        double column[6];
        for (int i = 0; i < 6; i++)
            column[i] = in->m[i][j];
        move(from, to, column, turned[j]);
    }
    for (int i = 0; i < 6; i++) {
        double row[6];
        for (int j = 0; j < 6; j++)
            row[j] = turned[j][i];
        move(from, to, row, out->m[i]);
    }
}

void fw_six_move_stiffness(const double from[3], const double to[3], const fw_six *in, fw_six *out)
{
    move_matrix(fw_six_move_wrench, from, to, in, out);
}

void fw_six_move_flexibility(const double from[3], const double to[3], const fw_six *in,
                             fw_six *out)
{
    move_matrix(fw_six_move_motion, from, to, in, out);
}

void fw_six_apply(const fw_six *a, const double in[6], double out[6])
{
    for (int i = 0; i < 6; i++) {
        out[i] = 0.0;
        for (int j = 0; j < 6; j++)
            out[i] += a->m[i][j] * in[j];
    }
}

/* The largest diagonal entry among the rows of the same kind as row. */
static double largest_of_kind(const fw_six *a, int row)
{
    int first = row < 3 ? 0 : 3;
    return fmax(fmax(a->m[first][first], a->m[first + 1][first + 1]), a->m[first + 2][first + 2]);
}

/* Written so that what is not a number fails; nor is infinity above itself times anything. */
static bool is_held(const fw_six *a, int row, double pivot)
{
    return pivot > least_of_diagonal * a->m[row][row] &&
           pivot > least_of_kind * largest_of_kind(a, row);
}

bool fw_six_factor(const fw_six *a, fw_six_factors *out, int *row)
{
    memset(out, 0, sizeof *out);
    for (int i = 0; i < 6; i++) {
        double pivot = a->m[i][i];
        for (int j = 0; j < i; j++) {
            double left = a->m[i][j];
            for (int k = 0; k < j; k++)
                left -= out->ld[i][k] * out->ld[k][k] * out->ld[j][k];
            out->ld[i][j] = left / out->ld[j][j];
            pivot -= out->ld[i][j] * left;
        }
        out->ld[i][i] = pivot;
        if (!is_held(a, i, pivot)) {
            *row = i;
            return false;
        }
    }
    return true;
}

void fw_six_solve(const fw_six_factors *factors, const double b[6], double x[6])
{
    memmove(x, b, 6 * sizeof *x);
    for (int i = 0; i < 6; i++)
        for (int j = 0; j < i; j++)
            x[i] -= factors->ld[i][j] * x[j];
    for (int i = 0; i < 6; i++)
        x[i] /= factors->ld[i][i];
    for (int i = 5; i >= 0; i--)
        for (int j = i + 1; j < 6; j++)
            x[i] -= factors->ld[j][i] * x[j];
}

bool fw_six_invert(const fw_six *a, fw_six *out)
{
    fw_six_factors factors;
    int row;
    if (!fw_six_factor(a, &factors, &row))
        return false;
    for (int i = 0; i < 6; i++) {
        double unit[6] = {0};
        unit[i] = 1.0;
        fw_six_solve(&factors, unit, out->m[i]);
    }
    for (int i = 0; i < 6; i++)
        for (int j = 0; j < i; j++)
            out->m[i][j] = out->m[j][i] = 0.5 * (out->m[i][j] + out->m[j][i]);
    return true;
}
