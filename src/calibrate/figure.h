/* Masks drawn for the checks, pixel by pixel, and their films solved at full resolution. */
#ifndef FW_CALIBRATE_FIGURE_H
#define FW_CALIBRATE_FIGURE_H

#include "physics/film.h"

enum { FW_FIGURE_OPEN, FW_FIGURE_FILM, FW_FIGURE_CAVITY };

typedef struct fw_figure {
    int32_t width, height;
    uint8_t *pixel; /* [height][width] */
} fw_figure;

/* All open. Free with fw_figure_free. */
fw_status fw_figure_new(int32_t width, int32_t height, fw_figure *out, fw_fault *fault);
void fw_figure_free(fw_figure *figure);

/* From text: '#' film, 'o' cavity, '.' open, '/' between rows of equal length. */
fw_status fw_figure_rows(const char *rows, fw_figure *out, fw_fault *fault);

/* [x0, x1) x [y0, y1), within the figure. */
void fw_figure_box(fw_figure *figure, int32_t x0, int32_t y0, int32_t x1, int32_t y1, uint8_t what);

/* Pixels whose centre lies within r px of (x, y). */
void fw_figure_disc(fw_figure *figure, double x, double y, double r, uint8_t what);

/* A disc of film of r px in the middle of a square, two pixels free around. */
fw_status fw_figure_round(double r, fw_figure *out, fw_fault *fault);

/* A figure as a cluster; its cavity pixels are one cavity. Free with fw_figure_shape_free. */
fw_status fw_figure_shape(const fw_figure *figure, double px_mm, double py_mm, fw_film_shape *out,
                          fw_fault *fault);
void fw_figure_shape_free(fw_film_shape *shape);

typedef struct fw_figure_pull {
    double px_mm, py_mm;
    fw_film_plane faster, wider;
    double obstacle_mm2; /* 0 = no cap */
    double tolerance;    /* work_tolerance of the solve */
} fw_figure_pull;

/* The film on cells of one pixel. Free with fw_film_solution_free. */
fw_status fw_figure_solve(const fw_figure *figure, const fw_figure_pull *pull,
                          fw_film_solution *out, fw_fault *fault);

/* The integral of u in mm4 alone, square pixels, no cap, to 1e-13; frees the figure in any case. */
fw_status fw_figure_integral(fw_figure *figure, double px_mm, double *integral_mm4,
                             fw_fault *fault);

#endif
