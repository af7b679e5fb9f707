/* Where anchors touch the body in a layer: what the tributary shares start from. */
#ifndef FW_CHECK_CONTACTS_H
#define FW_CHECK_CONTACTS_H

#include "check/share.h"

/* Fills sheet->contacts: in layer 0 the part's own stands on the plate (an account each in
 * share->plate), later the posts that reach their tip layer here or stand beside the part. Where
 * posts have no pixels (share->plan == NULL) the placing hook has noted them. before is NULL for
 * layer 0. */
fw_status fw_contacts_find(fw_share *share, fw_sheet *sheet, const fw_sheet *before,
                           fw_fault *fault);

#endif
