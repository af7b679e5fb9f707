/* Intersections of a line along x with each kind of solid. */
#include "solids.h"

#include <math.h>
#include <stdbool.h>

typedef struct span {
    double from, to;
} span;

static const span NOTHING = {1, 0};

/* Half width of a rounded rectangle at the distance |v| from its long axis. Within the straight
 * part it is a; beside the corner a - c + sqrt(c^2 - (v - (b - c))^2). */
static double rounded_half_width(double a, double b, double c, double v)
{
    double into_corner = fabs(v) - (b - c);
    if (fabs(v) > b)
        return -1;
    if (into_corner <= 0)
        return a;
    return a - c + sqrt(fmax(0, c * c - into_corner * into_corner));
}

/* An offset outline keeps its corner centres: half sizes and corner radius all grow by the same
 * amount, the radius not below zero. */
static span prism_span(const part_solid *s, double y, double z)
{
    double offset = s->grow * (z - s->from);
    double half =
        rounded_half_width(s->a + offset, s->b + offset, fmax(0, s->c + offset), y - s->y);
    if (z < s->from || z > s->to || half <= 0)
        return NOTHING;
    return (span){s->x - half, s->x + half};
}

/* Along x the radius is r(x) = a + k (x - from); the line is inside where r(x) >= d, with d the
 * distance of the line from the axis: a half line of x, cut to the rod's own range. */
static span rod_x_span(const part_solid *s, double y, double z)
{
    double d = hypot(y - s->x, z - s->y);
    double k = (s->b - s->a) / (s->to - s->from);
    if (d > fmax(s->a, s->b))
        return NOTHING;
    if (d <= fmin(s->a, s->b))
        return (span){s->from, s->to};
    double reaches = s->from + (d - s->a) / k;
    return k > 0 ? (span){reaches, s->to} : (span){s->from, reaches};
}

static span rod_y_span(const part_solid *s, double y, double z)
{
    double r = s->a + (s->b - s->a) * (y - s->from) / (s->to - s->from);
    double above = z - s->y;
    if (y < s->from || y > s->to || fabs(above) >= r)
        return NOTHING;
    double half = sqrt(r * r - above * above);
    return (span){s->x - half, s->x + half};
}

static span solid_span(const part_solid *s, double y, double z)
{
    switch (s->shape) {
    case PART_PRISM:
        return prism_span(s, y, z);
    case PART_ROD_X:
        return rod_x_span(s, y, z);
    case PART_ROD_Y:
        return rod_y_span(s, y, z);
    }
    return NOTHING;
}

void part_line(const part_model *model, double y, double z, part_spans *out)
{
    out->count = 0;
    for (int i = 0; i < model->count; ++i) {
        span hit = solid_span(&model->solid[i], y, z);
        if (model->solid[i].use == PART_ADD)
            part_spans_add(out, hit.from, hit.to);
        else
            part_spans_cut(out, hit.from, hit.to);
    }
}
