/* The carried distance from its definition, dense and slow, for tests of mask/carried.h.
 *
 *     A_n(x) = min over y in M_n and M_(n-1) of max(0, A_(n-1)(y) - c_n) + |x - y|
 *
 * |x - y|: shortest path over straight lines between pixel centres, relaxed over the whole image
 * until nothing changes (Bellman-Ford). Two sets of lines:
 *   fine = false  the 24 directions of the fast kernel on square pixels, each length rounded up to
 *                 its unit: must then agree exactly;
 *   fine = true   all lines up to FINE_RADIUS pixels, exact lengths: against the true distance high
 *                 by at most 1 / cos(gamma / 2) - 1, gamma = atan(1 / 8) the widest gap between
 *                 directions on square pixels: 0.2 %. On 2:1 pixels gamma = atan(2 / 8): 0.8 %.
 * A line is in sight where every pixel whose inside it crosses is in the medium and, at a corner of
 * four pixels on the line, at least one of the two pixels beside it. Saturated values are carried
 * as they are (they say "at least"). */
#ifndef CARRIED_REFERENCE_H
#define CARRIED_REFERENCE_H

#include <math.h>
#include <stdbool.h>
#include <stdint.h>
#include <stdlib.h>

enum { FINE_RADIUS = 8 };

typedef struct reference {
    int width, height;
    double px_mm, py_mm, unit_mm, saturation_mm;
    bool fine;
    double *a;       /* [height * width] mm, INFINITY outside the medium and where not held */
    uint8_t *medium; /* [height * width] newest layer */
} reference;

static inline reference reference_new(int width, int height, double px_mm, double py_mm,
                                      double unit_mm, double saturation_mm, bool fine)
{
    const size_t pixels = (size_t)(width * height);
    reference r = {width, height, px_mm, py_mm, unit_mm, saturation_mm, fine, NULL, NULL};
    r.a = calloc(pixels, sizeof *r.a);
    r.medium = calloc(pixels, 1);
    for (size_t i = 0; i < pixels; i++)
        r.a[i] = INFINITY;
    return r;
}

static inline void reference_free(reference *r)
{
    free(r->a);
    free(r->medium);
}

static inline bool reference_in(const reference *r, int x, int y)
{
    return x >= 0 && y >= 0 && x < r->width && y < r->height && r->medium[y * r->width + x] != 0;
}

/* Length of the part of the line (0, 0) .. (dx, dy) that lies in the pixel with centre (i, j), as a
 * share of the line. */
static inline double reference_share(int dx, int dy, int i, int j)
{
    double from = 0, until = 1;
    const double delta[2] = {dx, dy}, low[2] = {i - 0.5, j - 0.5};
    for (int k = 0; k < 2; k++) {
        if (delta[k] == 0) {
            if (0 < low[k] || 0 > low[k] + 1)
                return 0;
            continue;
        }
        const double a = low[k] / delta[k], b = (low[k] + 1) / delta[k];
        from = fmax(from, fmin(a, b));
        until = fmin(until, fmax(a, b));
    }
    return fmax(0, until - from);
}

static inline bool reference_sight(const reference *r, int x, int y, int dx, int dy)
{
    const int x0 = dx < 0 ? dx : 0, x1 = dx < 0 ? 0 : dx, y0 = dy < 0 ? dy : 0,
              y1 = dy < 0 ? 0 : dy;
    for (int j = y0; j <= y1; j++) {
        for (int i = x0; i <= x1; i++) {
            if (reference_share(dx, dy, i, j) > 1e-9 && !reference_in(r, x + i, y + j))
                return false;
            /* The corner (i + 1/2, j + 1/2), in halves, on the line? */
            const int cx = 2 * i + 1, cy = 2 * j + 1;
            if (i == x1 || j == y1 || cx * dy != cy * dx)
                continue;
            const bool falling = (dx > 0) == (dy > 0);
            const bool one =
                falling ? reference_in(r, x + i + 1, y + j) : reference_in(r, x + i, y + j);
            const bool other =
                falling ? reference_in(r, x + i, y + j + 1) : reference_in(r, x + i + 1, y + j + 1);
            if (!one && !other)
                return false;
        }
    }
    return true;
}

static inline bool reference_uses(const reference *r, int dx, int dy)
{
    const int a = abs(dx), b = abs(dy), radius = r->fine ? FINE_RADIUS : 3;
    if ((a == 0 && b == 0) || a > radius || b > radius)
        return false;
    return r->fine || a <= 1 || b <= 1;
}

static inline double reference_length(const reference *r, int dx, int dy)
{
    const double length = hypot(dx * r->px_mm, dy * r->py_mm);
    return r->fine ? length : ceil(length / r->unit_mm - 1e-9) * r->unit_mm;
}

/* One line from every pixel; true when something was shortened. */
static inline bool reference_relax(reference *r, int dx, int dy)
{
    const double length = reference_length(r, dx, dy);
    bool changed = false;
    for (int y = 0; y < r->height; y++) {
        for (int x = 0; x < r->width; x++) {
            if (!reference_in(r, x, y) || !reference_in(r, x + dx, y + dy))
                continue;
            double *to = &r->a[(y + dy) * r->width + x + dx];
            const double offer = r->a[y * r->width + x] + length;
            if (offer < *to - 1e-9 && reference_sight(r, x, y, dx, dy)) {
                *to = offer;
                changed = true;
            }
        }
    }
    return changed;
}

/* now, open, source: [height * width]; open = 0 keeps a pixel infinite (its body is not held). */
static inline void reference_step(reference *r, const uint8_t *now, const uint8_t *open,
                                  const uint8_t *source, double credit_mm)
{
    for (int i = 0; i < r->width * r->height; i++) {
        const bool carried = r->medium[i] != 0 && now[i] != 0 && open[i] != 0;
        if (!carried)
            r->a[i] = INFINITY;
        else if (r->a[i] < r->saturation_mm)
            r->a[i] = fmax(0, r->a[i] - credit_mm);
        r->medium[i] = now[i] != 0 && open[i] != 0;
        if (source != NULL && source[i] != 0 && now[i] != 0)
            r->a[i] = 0;
    }
    const int radius = r->fine ? FINE_RADIUS : 3;
    for (bool changed = true; changed;) {
        changed = false;
        for (int dy = -radius; dy <= radius; dy++) {
            for (int dx = -radius; dx <= radius; dx++) {
                if (reference_uses(r, dx, dy))
                    changed |= reference_relax(r, dx, dy);
            }
        }
    }
    for (int i = 0; i < r->width * r->height; i++) {
        if (r->a[i] < INFINITY)
            r->a[i] = fmin(r->a[i], r->saturation_mm);
    }
}

#endif
