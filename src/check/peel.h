/* Peel load of one layer: its clusters, solved or bounded.
 *
 * A cluster is a set of solid regions that share sealed cavities, since one pressure rules in each
 * cavity; most clusters are one region. Clusters add up, they do not see each other (the film
 * between them is vented).
 */
#ifndef FW_CHECK_PEEL_H
#define FW_CHECK_PEEL_H

#include "check/report.h"
#include "check/setup.h"
#include "mask/slice.h"
#include "physics/film_memo.h"

/* Voids of a layer by region, and the sealed body that each belongs to. Pixels that are neither
 * solid nor in `runs` are open to the vat. Borrowed. */
typedef struct fw_openings {
    const fw_runs *runs;
    const fw_regions *regions; /* of runs */
    const uint32_t *sealed;    /* [regions] body; UINT32_MAX = open */
    uint32_t poor_from;        /* bodies from this id on are sealed by poor vents alone; 0: none */
} fw_openings;

typedef struct fw_cluster {
    int32_t x0, y0, x1, y1;           /* px, box */
    double area_mm2;                  /* of its solid pixels, sealed voids not counted */
    double bound_mm4;                 /* upper bound of the integral, from row runs, holes open */
    bool posts_only;                  /* no pixel of it belongs to the part */
    uint32_t first_region;            /* smallest of its solid regions */
    uint32_t region_count;            /* solid regions in it */
    bool sealed;                      /* a sealed void lies in it, solved or filled */
    uint32_t cavity_count;            /* sealed bodies in it that are large enough to be solved */
    fw_film_shape shape;              /* empty where the bound was used */
    const fw_film_solution *solution; /* NULL where the bound was used; the memo's */
    double q;                         /* 12 eta v / h^3 at which u of the solution is meant */
    double force_N, range_N[2];       /* at the card's gap, and at both ends of its range */
    fw_limit limited_by;
} fw_cluster;

/* A zeroed struct is valid and empty. */
typedef struct fw_peel {
    fw_cluster *cluster; /* [count] in order of their smallest region */
    uint32_t count;
    size_t capacity;
    uint32_t *of_region; /* [solid regions] cluster */
    uint32_t *of_void;   /* [regions of the openings] cluster, or UINT32_MAX where it is open */
    uint32_t *cavity_of; /* [regions of the openings] number of its cavity within its cluster;
                            UINT32_MAX: filled */
    size_t of_region_capacity, of_void_capacity, cavity_of_capacity;
    double q;       /* of all its clusters when the layer comes off */
    double rigid_N; /* what a rigid machine would pull */
    double push_N;  /* of the way back to the window; 0 where the card says nothing of it */
    double force_N, range_N[2];
    fw_limit limited_by;
    int32_t coarse_px; /* cells of the coarsest film solved on coarser ones than asked; 0: none */
} fw_peel;

/* Finds the clusters of a layer, solves them through the memo at the card's gap, and sums their
 * forces. range_N is not filled: see fw_peel_range. posts_only [solid regions]: regions without
 * part pixels. The solutions stay valid until the memo is trimmed. Thread-safe for different
 * out. */
fw_status fw_peel_solve(const fw_setup *setup, const fw_slice *slice, const uint8_t *posts_only,
                        const fw_openings *openings, fw_film_memo *memo, fw_peel *out,
                        fw_fault *fault);

/* The most that the layer can pull at both ends of the gap range, without another solve. */
void fw_peel_range_bound(const fw_setup *setup, const fw_peel *peel, double bound_N[2]);

/* Replaces range_N of every cluster, and of the layer, by what the load curves say. */
fw_status fw_peel_range(const fw_setup *setup, fw_film_memo *memo, fw_peel *peel, fw_fault *fault);

void fw_peel_free(fw_peel *peel);

#endif
