/* Whole rows of grey runs: the cheap step for masks whose rows repeat. */
#ifndef FW_GREY_ROWS_H
#define FW_GREY_ROWS_H

#include "mask/greys.h"

/* While building: closes the rows before y, so that row[0 .. y] may be read. */
void fw_greys_close_before(fw_greys *layer, int32_t y);

/* While building: row y becomes equal to row y - 1 (to an empty row when y == 0). Rows up to y - 1
 * may be open; none from y on has runs yet. */
fw_status fw_greys_repeat_row(fw_greys *layer, int32_t y, fw_fault *fault);

/* Makes copy (reused) equal to layer. */
fw_status fw_greys_copy(const fw_greys *layer, fw_greys *copy, fw_fault *fault);

/* True when rows y and y - 1 of a finished layer hold the same runs (y == 0: when it is empty). */
bool fw_greys_row_repeats(const fw_greys *layer, int32_t y);

/* Bytes that the layer's arrays take, for budgets. */
size_t fw_greys_size(const fw_greys *layer);

#endif
