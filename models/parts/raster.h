/* From a part's table to grey masks. */
#ifndef PART_RASTER_H
#define PART_RASTER_H

#include "solids.h"

#include <stdint.h>

/* Fills grey [height_px][width_px] with the share of each pixel that is inside the part at the mid
 * height of `layer`, 255 = all of it: exact along x, four lines a pixel along y. */
void part_raster(const part_model *model, int layer, uint8_t *grey);

/* Writes grey [height][width] as an 8-bit grey PNG. 0 on success, else errno or EIO. */
int part_write_png(const char *path, const uint8_t *grey, int width, int height);

#endif
