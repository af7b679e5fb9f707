/* Rigid shares booked on the accounts of posts and plate contacts. */
#ifndef FW_CHECK_LEVER_SHARE_H
#define FW_CHECK_LEVER_SHARE_H

#include "check/share.h"

/* Hands out the layer's load to all anchors of each body (lever.h): raises lever_N of posts and
 * load_N of plate contacts, and gives rows the margins.
 *
 * A section under a pull N and a moment M breaks where N / A + M / W reaches the strength; for a
 * round one of diameter d that is the strength of A under the pull N + 8 M / d alone, which is what
 * is booked. Tip: the contact's measured area as a disc. Neck and shaft: the worst section of the
 * chain of beams, as drawn. Foot and plate contact: N / A + M / W on the plate, linear over the
 * area as if it could not gape; the foot as drawn, a plate contact by its second moments about x
 * and y. */
fw_status fw_lever_share(fw_share *share, const fw_sheet *sheet, fw_layer_row *row,
                         fw_fault *fault);

#endif
