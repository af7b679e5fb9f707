/* A disc on a pixel grid: exact coverage of every pixel, and the grey that a stack shows for it.
 *
 * Pixel (x, y) is the rectangle [x px, (x + 1) px] by [y py, (y + 1) py] in mm; px and py may
 * differ.
 */
#ifndef FW_DISC_H
#define FW_DISC_H

#include "mask/runs.h"

/* The image that posts are drawn on. */
typedef struct fw_screen {
    int32_t width, height; /* px */
    double px_mm, py_mm;
    int32_t full;          /* grey of a fully lit pixel in the file's format */
    int32_t brightest;     /* the stack's own brightest grey, 1 .. full */
    bool two_level;        /* the stack knows only 0 and brightest */
    const int32_t *levels; /* [level_count] ascending greys that the format can hold (a palette),
                              borrowed; NULL = all of 0 .. full */
    size_t level_count;
} fw_screen;

/* The grey for a pixel of which `coverage` (0 .. 1) is covered: round(coverage * brightest),
 * rounded down to a level that the format can hold; two-level: brightest from 0.5 on, else 0. */
int32_t fw_screen_grey(const fw_screen *screen, double coverage);

typedef struct fw_disc {
    double x_mm, y_mm, diameter_mm;
} fw_disc;

/* Share (0 .. 1) of pixel (x, y) that lies in the disc: the exact area, to round-off. */
double fw_disc_coverage(const fw_screen *screen, const fw_disc *disc, int32_t x, int32_t y);

/* Rows [*y0, *y1) of the image that the disc touches; empty (0, 0) when it lies outside or its
 * diameter is not positive. Any finite or infinite coordinates are allowed; NAN is outside. */
void fw_disc_rows(const fw_screen *screen, const fw_disc *disc, int32_t *y0, int32_t *y1);

/* One row of a disc, cut to the image: pixels [x0, x1) are touched, of these [core0, core1) are
 * covered in full. An empty core has core0 == core1, somewhere in [x0, x1]. */
typedef struct fw_disc_row {
    int32_t x0, core0, core1, x1;
} fw_disc_row;
fw_disc_row fw_disc_row_at(const fw_screen *screen, const fw_disc *disc, int32_t y);

/* Pixels of a row whose grey is at least `least` (>= 1): one run, since coverage rises and then
 * falls along a row. Empty: x0 == x1. */
fw_run fw_disc_row_solid(const fw_screen *screen, const fw_disc *disc, int32_t y, int32_t least);

/* Pixels of a row that belong to the disc: coverage > 0; on a two-level stack coverage >= 0.5. */
fw_run fw_disc_row_footprint(const fw_screen *screen, const fw_disc *disc, int32_t y);

/* Number of pixels whose grey is at least `least` (>= 1), over all rows. */
int64_t fw_disc_count(const fw_screen *screen, const fw_disc *disc, int32_t least);

/* fw_disc_count >= need; the rim is looked at only where the pixels within it do not decide. */
bool fw_disc_holds(const fw_screen *screen, const fw_disc *disc, int32_t least, int64_t need);

/* out = fw_disc_row_footprint of all rows. */
fw_status fw_disc_footprint(const fw_screen *screen, const fw_disc *disc, fw_runs *out,
                            fw_fault *fault);

/* out = fw_disc_footprint of all discs together. */
fw_status fw_discs_footprint(const fw_screen *screen, const fw_disc *discs, size_t count,
                             fw_runs *out, fw_fault *fault);

#endif
