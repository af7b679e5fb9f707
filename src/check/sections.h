/* What posts are made of, measured on the solid pixels of the stack. */
#ifndef FW_CHECK_SECTIONS_H
#define FW_CHECK_SECTIONS_H

#include "check/share.h"

/* Takes the next layer: smallest sections so far, feet that stand together (layer 0), and the
 * contact of every post whose first layer without bite this is; rows gets the margins that waited
 * for it. */
fw_status fw_sections_measure(fw_share *share, const fw_sheet *sheet, fw_layer_row *rows,
                              fw_fault *fault);

#endif
