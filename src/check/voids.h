/* Cavities: what sucks while it is peeled, what stays in the part, what the posts close off. */
#ifndef FW_CHECK_VOIDS_H
#define FW_CHECK_VOIDS_H

#include "check/ground.h"

/* The void's share of fw_ground_step: fills sheet->cavity and row->blind_cavity_mm2. */
fw_status fw_voids_step(fw_ground *ground, fw_sheet *sheet, const fw_sheet *before,
                        fw_layer_row *row, fw_findings *findings, fw_fault *fault);

/* The void's share of fw_ground_finish. */
fw_status fw_voids_finish(fw_ground *ground, fw_findings *findings, fw_fault *fault);

#endif
