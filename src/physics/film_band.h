/* The pieces of film in one row of blocks: which cell holds which pixel. */
#ifndef FW_FILM_BAND_H
#define FW_FILM_BAND_H

#include "mask/runs.h"

/* Part of a run within one block that is not full. */
typedef struct fw_film_segment {
    int32_t x0, x1;
    uint32_t cell; /* while the band is built: index of another segment of the same piece */
} fw_film_segment;

typedef struct fw_film_band {
    int32_t block, columns; /* Q, number of blocks in the row */
    int32_t y0, y1;         /* pixel rows [y0, y1) */
    uint32_t *full;         /* [columns] cell of a block that is all film, else FW_FILM_NO_CELL */
    int32_t *skip;          /* [columns + 1] first block at or after this one that is not full */
    uint32_t *first;        /* [columns + 1] scratch */
    uint32_t end_cell;      /* one past the last cell */
    fw_film_segment *segment;
    uint32_t *row; /* [y1 - y0 + 1] segments of each row */
    size_t segment_capacity;
} fw_film_band;

#define FW_FILM_NO_CELL UINT32_MAX

fw_status fw_film_band_begin(fw_film_band *band, int32_t width, int32_t block, fw_fault *fault);
void fw_film_band_free(fw_film_band *band);

/* Finds the pieces of rows [y0, y0 + block) of film; cells are numbered from first_cell, block by
 * block. */
fw_status fw_film_band_fill(fw_film_band *band, const fw_runs *film, int32_t y0,
                            uint32_t first_cell, fw_fault *fault);

/* The cell of film pixel (x, y); y must lie in the band. */
uint32_t fw_film_band_cell(const fw_film_band *band, int32_t x, int32_t y);

#endif
