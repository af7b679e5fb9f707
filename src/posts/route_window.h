/* Reachability on a window of the lattice, as bits: inner part of the router.
 *
 * Reachability is the carried distance of free space (sources = plate, credit = cell tan(lean) a
 * slab) written as moves between cell centres: a node (column, slab boundary) is reached when a
 * move leads to it from a reached node and crosses passable cells only. 64 columns are done at a
 * time. Unlike a carried number, a node that is reached always has a path that can be drawn.
 */
#ifndef FW_ROUTE_WINDOW_H
#define FW_ROUTE_WINDOW_H

#include "posts/route.h"

#define FW_ROUTE_TINY 1e-9 /* cells or mm: keeps places on a cell's edge in one cell */

enum { FW_ROUTE_MOVES = 40, FW_ROUTE_CROSSED = 192 };

typedef struct fw_route_query {
    const fw_lattice *lattice;
    fw_lattice_grid grid;
    const fw_lattice_shape *shape;
    const fw_post *post; /* diameters, neck, id */
    double face_mm;      /* INFINITY: shaft everywhere but in the foot */
    double tan_lean;
    double post_gap_mm; /* asked between posts */
    bool through_posts; /* other posts are not regarded */
} fw_route_query;

typedef struct fw_route_ask {
    int32_t level;    /* least stored room of a cell */
    double border_mm; /* least distance from the axis to the border of the image */
    double body_mm;   /* radius that other posts must not overlap: feet may */
    double gap_mm;    /* beyond that */
} fw_route_ask;

typedef struct fw_route_crossed {
    int32_t i, j, k; /* cells, from the lower node's column and the slab on it */
} fw_route_crossed;

typedef struct fw_route_move {
    int32_t dx, dy, rise; /* cells, cells, slabs; from the lower node to the upper */
    int32_t count;
    fw_route_crossed cell[FW_ROUTE_CROSSED];
} fw_route_move;

typedef struct fw_route_moves {
    int32_t count, tallest;
    fw_route_move item[FW_ROUTE_MOVES]; /* [0] is straight up */
} fw_route_moves;

typedef struct fw_route_window {
    int32_t i0, j0, ni, nj; /* cells */
    int32_t low, top;       /* slab boundaries; slabs are [low, top) */
    size_t stride;          /* words a row, one of padding at either end */
    uint64_t *pass;         /* [top - low][nj][stride] cells with enough room */
    uint64_t *reach;        /* [top - low + 1][nj][stride] nodes from which the plate is reached */
} fw_route_window;

/* What the query's post asks of slab k, the hardest place of it. */
fw_route_ask fw_route_ask_of(const fw_route_query *q, int32_t k);

/* First and last cell that [a, b] (either order, in cells) lies in. */
void fw_route_cell_range(double a, double b, int32_t *first, int32_t *last);

/* Pieces of a line within a slab, short enough that the box of each is at most 2 x 2 cells. */
int32_t fw_route_pieces(double dx, double dy);

/* All moves that lean at most tan_lean. */
void fw_route_moves_make(fw_route_moves *all, double tan_lean);

/* Row j of slab (or boundary) k, counted from the window's low one, in `plane` (pass or reach). */
uint64_t *fw_route_bit_row(const fw_route_window *w, uint64_t *plane, int32_t k, int32_t j);

/* Allocates pass and reach, all bits clear, for a window whose sizes are set. */
fw_status fw_route_window_open(fw_route_window *w, fw_fault *fault);

/* Frees both planes. */
void fw_route_window_close(fw_route_window *w);

/* Bit of window column i. */
bool fw_route_bit_at(const uint64_t *row, int32_t i);

/* Fills pass: which cells have the room that the query asks. */
void fw_route_pass_slabs(fw_route_window *w, const fw_route_query *q);

/* Fills reach for the slab boundaries above `known`, up to the window's top. */
void fw_route_climb(fw_route_window *w, const fw_route_moves *all, int32_t known);

/* Marks the boundary on the plate as reached wherever its first slab passes. */
void fw_route_reach_plate(fw_route_window *w);

/* A window of `half` cells to each side of the tip's column, cut to the lattice. */
fw_route_window fw_route_window_round(const fw_route_query *q, const fw_point *tip, int32_t half,
                                      int32_t low, int32_t top);

#endif
