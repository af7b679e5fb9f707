/* What the masks ask for and the light does not cure: intended pixels that are not solid.
 *
 * Rims in grey always have some (a pixel next to solid is no finding). Beyond the rims, a region of
 * a layer fails where it comes apart or vanishes, where more than 1 % of its area is missing, or
 * where a post is touched; less is a warning, and so is any region in which no smallest tip fits:
 * specks of grey that the next layer covers. */
#ifndef FW_CHECK_UNDERCURE_H
#define FW_CHECK_UNDERCURE_H

#include "check/sheet.h"
#include "findings/findings.h"

fw_status fw_undercure_step(const fw_setup *setup, const fw_sheet *sheet, fw_findings *findings,
                            fw_fault *fault);

#endif
