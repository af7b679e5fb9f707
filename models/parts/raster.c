/* Area coverage by exact lengths along x on a few lines per pixel. */
#include "raster.h"

#include <math.h>
#include <string.h>

enum { LINES = 4 };

/* Adds the length of [from, to] (in pixels) that lies in each pixel of the row. */
static void cover(double from, double to, int width, double *row)
{
    int first = (int)fmax(0, floor(from));
    int last = (int)fmin(width - 1, ceil(to) - 1);
    for (int x = first; x <= last; ++x)
        row[x] += fmax(0, fmin(to, x + 1) - fmax(from, x));
}

/* Columns [from, to) of a row that hold anything. */
typedef struct reach {
    int from, to;
} reach;

static void cover_line(const part_model *model, double y, double z, double *row, reach *touched)
{
    part_spans line;
    part_line(model, y, z, &line);
    for (int i = 0; i < line.count; ++i) {
        double from = (line.from[i] + model->origin_mm[0]) / model->pixel_mm;
        double to = (line.to[i] + model->origin_mm[0]) / model->pixel_mm;
        cover(from, to, model->width_px, row);
        touched->from = (int)fmax(0, fmin(touched->from, floor(from)));
        touched->to = (int)fmin(model->width_px, fmax(touched->to, ceil(to)));
    }
}

void part_raster(const part_model *model, int layer, uint8_t *grey)
{
    enum { WIDEST = 8192 };
    double row[WIDEST] = {0};
    double z = (layer + 0.5) * model->layer_mm;
    for (int y = 0; y < model->height_px; ++y) {
        uint8_t *out = grey + (size_t)y * (size_t)model->width_px;
        reach touched = {model->width_px, 0};
        for (int line = 0; line < LINES; ++line) {
            double at = (y + (line + 0.5) / LINES) * model->pixel_mm - model->origin_mm[1];
            cover_line(model, at, z, row, &touched);
        }
        memset(out, 0, (size_t)model->width_px);
        for (int x = touched.from; x < touched.to; ++x) {
            out[x] = (uint8_t)(255.0 * row[x] / LINES + 0.5);
            row[x] = 0;
        }
    }
}
